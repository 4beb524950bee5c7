"""What a number of trials says, as printed in tables of statistics."""

import pytest

from chainsim import closed_forms as cf


@pytest.mark.parametrize(
    ("count", "trials", "confidence", "side", "printed"),
    [
        (3, 20, 0.95, "low", 0.0321),
        (3, 20, 0.95, "high", 0.3789),
        (85, 120, 0.99, "low", 0.5904),
        (85, 120, 0.99, "high", 0.8092),
    ],
)
def test_share_interval(claim, count, trials, confidence, side, printed):
    claim(
        f"{side} bound of {count} in {trials} at {100 * confidence:g} %",
        "codingace.net, Clopper–Pearson table",
        printed,
        getattr(cf.share_interval(count, trials, confidence), side),
        5.1e-5,
        "",
        "printed with four decimals",
        absolute=True,
    )


def test_rule_of_three(claim):
    claim(
        "failure bound after 1500 trials without failure",
        "rule of three, Jovanovic and Levy 1997: 1 in 500",
        1.0 / 500.0,
        cf.failure_bound(1500),
        0.003,
        "",
        "3/n stands for 2.9957/n",
        cause="the rule rounds −ln 0.05 = 2.9957 up to 3",
    )
