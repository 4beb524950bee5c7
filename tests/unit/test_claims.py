"""The ledger of claims judges, refuses and prints as it says."""

import pytest

from tests.claims import BEGIN, END, Row, enter, rewritten


def row(got, expected=2.0, tolerance=0.1, absolute=False, sense="equal", name="a claim"):
    return Row(
        name, "a source", expected, got, tolerance, "N", "rounding", "a cause", absolute, sense
    )


@pytest.mark.parametrize(
    ("claimed", "holds"),
    [
        (row(2.19), True),
        (row(2.21), False),
        (row(1.79), False),
        (row(2.09, absolute=True), True),
        (row(2.11, absolute=True), False),
        (row(5.0, sense="at least"), True),
        (row(1.7, sense="at least"), False),
        (row(0.0, sense="at most"), True),
        (row(2.3, sense="at most"), False),
        (row(float("nan")), False),
        (row(float("nan"), sense="at most"), False),
    ],
)
def test_claim_is_judged_by_its_tolerance(claimed, holds):
    assert claimed.holds is holds


def test_readme_keeps_its_words_and_gets_the_rows():
    readme = f"words\n{BEGIN}\nold table\n{END}\nmore words\n"
    text = rewritten(readme, [row(2.1), row(2.0, name="another")])
    assert text.startswith("words\n") and text.endswith("more words\n")
    assert "old table" not in text
    assert "| a claim | a source | 2 N | 2.1 N | +5 % | 10 % | rounding |" in text
    assert "- **a claim** (off by 5 %): a cause" in text


def test_failing_claim_names_both_values():
    ledger = {}
    with pytest.raises(
        AssertionError, match=r"a claim: 3 N where a source has equal 2 N; off by \+50 %"
    ):
        enter(ledger, row(3.0))
    with pytest.raises(AssertionError, match="two claims are called 'a claim'"):
        enter(ledger, row(2.0))
