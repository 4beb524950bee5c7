"""Counted losses beside the simulated ones: exact intervals of both shares."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any, NamedTuple

from chainsim.closed_forms.statistics import share_interval
from chainsim.errors import Problem, ScenarioError
from chainsim.study.fit_reading import Measurement

SEAT_FRICTION = "carriers.pocket.friction"

Counter = Callable[[Any], tuple[int, int]]
"""Runs a scenario; returns balls whose fate is known, and balls lost (dimensionless)."""


class Count(NamedTuple):
    """Losses at one speed.

    Attributes
    ----------
    file : str
        Where they were counted.
    speed : float
        Chain speed [m/s].
    fed, lost : int
        Balls on the bench (dimensionless).
    low, high : float
        Interval of the share lost on the bench (dimensionless).
    simulated_fed, simulated_lost : int
        Balls in the simulation (dimensionless).
    simulated_low, simulated_high : float
        Interval of the share lost there (dimensionless).
    """

    file: str
    speed: float
    fed: int
    lost: int
    low: float
    high: float
    simulated_fed: int
    simulated_lost: int
    simulated_low: float
    simulated_high: float

    @property
    def agrees(self) -> bool:
        """Whether the two intervals meet: the counts do not contradict each other."""
        return self.low <= self.simulated_high and self.simulated_low <= self.high


class Trial(NamedTuple):
    """What the counts say to one value of the pockets' friction.

    Attributes
    ----------
    value : float
        Coefficient of friction of a ball on its pocket (dimensionless).
    counts : tuple of Count
    """

    value: float
    counts: tuple[Count, ...]

    @property
    def agrees(self) -> bool:
        """Whether no count contradicts it."""
        return all(count.agrees for count in self.counts)


def count_balls(scenario: Any) -> tuple[int, int]:
    """Run a scenario and count its balls.

    Parameters
    ----------
    scenario : Scenario

    Returns
    -------
    tuple of int
        Balls whose fate is known, and those of them that were lost (dimensionless).
    """
    from chainsim.analysis.losses import is_lost
    from chainsim.run import run

    fates = [ball.fate for ball in run(scenario).balls if ball.fate != "aboard"]
    return len(fates), sum(is_lost(fate) for fate in fates)


def compared(
    scenario: Any, measurements: Sequence[Measurement], confidence: float, counter: Counter
) -> tuple[Count, ...]:
    """Simulate every speed at which losses were counted.

    Parameters
    ----------
    scenario : Scenario
    measurements : sequence of Measurement
        Of counted losses.
    confidence : float
        Of the intervals (dimensionless).
    counter : callable
        Runs one scenario.

    Raises
    ------
    ScenarioError
        If the scenario has no balls.
    """
    if scenario.balls is None or scenario.carriers is None:
        rule = "the scenario has no balls on carriers that could be lost"
        raise ScenarioError([Problem(measurements[0].file, None, "kind", "losses", rule)])
    found = []
    for measurement in measurements:
        columns = measurement.columns
        rows = zip(columns["speed"], columns["fed"], columns["lost"], strict=True)
        for speed, fed, lost in rows:
            simulated = counter(scenario.with_values({"drive.chain_speed": float(speed)}))
            bench = share_interval(int(lost), int(fed), confidence)
            model = share_interval(simulated[1], max(simulated[0], 1), confidence)
            found.append(
                Count(
                    measurement.file, float(speed), int(fed), int(lost), bench.low, bench.high,
                    *simulated, model.low, model.high,
                )
            )  # fmt: skip
    return tuple(found)


def friction_trials(
    scenario: Any, measurements: Sequence[Measurement], confidence: float, counter: Counter
) -> tuple[Trial, ...]:
    """Ask the counts about the low, typical and high value of the pockets' friction.

    Parameters
    ----------
    scenario : Scenario
    measurements : sequence of Measurement
        Of counted losses.
    confidence : float
        Of the intervals (dimensionless).
    counter : callable
        Runs one scenario.
    """
    origin = scenario.origin(SEAT_FRICTION)
    values = sorted({v for v in (origin.low, origin.typical, origin.high) if v is not None})
    return tuple(
        Trial(
            value,
            compared(
                scenario.with_values({SEAT_FRICTION: value}), measurements, confidence, counter
            ),
        )
        for value in values
    )
