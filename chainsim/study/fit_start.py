"""Where a fit starts: rough values by closed forms, and a few tries where there are none."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from typing import Any

import numpy as np

from chainsim.study.fit_benches import AIR, FRICTION, MOMENT, Bench
from chainsim.study.fit_parameters import PARAMETERS, value_of

TRIED = {MOMENT: (0.3,), FRICTION: (0.3, 0.8, 1.8), AIR: (0.1, 1.0, 4.0)}
"""Values that are tried, in usual sizes [dimensionless]: a decay that is followed from too far away
catches on a wrong number of swings."""


def known_values(scenario: Any) -> dict[str, float]:
    """Return every value that a bench may ask for, as it stands in the scenario [SI].

    Parameters
    ----------
    scenario : Scenario
    """
    has_motor = scenario.drive.motor is not None
    keys = [key for key in PARAMETERS if has_motor or not key.startswith("drive.")]
    return {key: float(value_of(scenario, key)) for key in keys}


def started(
    scenario: Any, benches: Sequence[Bench], values: dict[str, float], keys: Sequence[str]
) -> dict[str, float]:
    """Return values to start from [SI]; those that are not to be found stay.

    Parameters
    ----------
    scenario : Scenario
    benches : sequence of Bench
    values : dict of str to float
        As they stand in the scenario [SI].
    keys : sequence of str
        What is to be found.
    """
    found = dict(values)
    # a stretch says more about stiffness than a frequency, so it has the last word
    for bench in sorted(benches, key=lambda bench: bench.measurement.kind == "stretch"):
        found |= {key: value for key, value in bench.guess().items() if key in keys}
    rubbing = [bench for bench in benches if FRICTION in bench.keys]
    sizes = {
        key: [share * PARAMETERS[key].usual(scenario) for share in shares]
        for key, shares in TRIED.items()
        if key in keys
    }
    if not rubbing or not sizes:
        return found
    tries = [
        found | dict(zip(sizes, choice, strict=True))
        for choice in itertools.product(*sizes.values())
    ]
    return min(tries, key=lambda values: sum(_misfit(bench, values) for bench in rubbing))


def _misfit(bench: Bench, values: dict[str, float]) -> float:
    """Mean absolute deviation over that of the readings themselves (dimensionless)."""
    own = np.array([item.start for item in bench.own])
    deviation = bench.predicted(values, own) - bench.observed
    spread = np.abs(bench.observed - np.median(bench.observed)).mean()
    return float(np.abs(deviation).mean() / max(spread, 1e-30))
