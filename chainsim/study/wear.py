"""What a lift does as its chain grows: travel used, ride on the teeth, what fails first.

The chain is run at growing pitch, all links alike. Growth is what a workshop can measure; how many
turns or hours it takes is told only where a rule for it was given, with where the rule is from.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any

from chainsim import closed_forms as cf
from chainsim.analysis import takeup_travel
from chainsim.errors import CallError, ChainsimError
from chainsim.model.lift import build_lift
from chainsim.study.wear_rule import GrowthRule

STEPS = 6
"""Growths that are run, the new chain included (dimensionless), where none are asked for."""

FAILS, CLOSE, HOLDS, NOT_COMPLETED = "fails", "close", "holds", "not completed"


@dataclass(frozen=True)
class WearStep:
    """The lift with its chain grown.

    Attributes
    ----------
    growth : float
        Growth of the pitch as a fraction (dimensionless).
    longer : float
        By how much the chain is longer than new [m].
    travel : dict of str to tuple of float
        Lowest and highest travel of each take-up in the run [m; rad for an arm].
    travel_used : dict of str to float
        How far the middle of that travel has moved from that of the first step [m; rad].
    ride_height : dict of str to float
        Largest height of an engaged pin above its seat in the run, by sprocket [m].
    ride_of_growth : dict of str to float
        What growth alone lifts it, all pins sharing, by the closed form [m].
    fails, close : tuple of str
        Findings that fail, and those inside their reserve.
    outcome : str
        ``"fails"``, ``"close"``, ``"holds"``, or ``"not completed"``.
    stop_reason : str
        Why the run ended, or why there was none.
    turns, hours : float or None
        Turns of the chain and hours of running that take it there, by the stated rule
        [dimensionless; h]; None without a rule.
    """

    growth: float
    longer: float
    travel: dict[str, tuple[float, float]]
    travel_used: dict[str, float]
    ride_height: dict[str, float]
    ride_of_growth: dict[str, float]
    fails: tuple[str, ...]
    close: tuple[str, ...]
    outcome: str
    stop_reason: str
    turns: float | None = None
    hours: float | None = None


@dataclass(frozen=True)
class WearStudy:
    """A lift over the life of its chain.

    Attributes
    ----------
    steps : tuple of WearStep
        In the order of growth.
    rule : str
        The rule of growth, in words.
    replaced_at : float
        Growth at which service guides replace a roller chain (dimensionless).
    """

    steps: tuple[WearStep, ...]
    rule: str
    replaced_at: float

    @property
    def first_failure(self) -> WearStep | None:
        """The first step at which a finding fails or the run cannot be completed."""
        return next((s for s in self.steps if s.outcome in (FAILS, NOT_COMPLETED)), None)

    @property
    def first_close(self) -> WearStep | None:
        """The first step at which a finding is inside its reserve."""
        return next((s for s in self.steps if s.outcome == CLOSE), None)

    @property
    def last_good(self) -> WearStep | None:
        """The last step before the first failure; None where the new chain fails."""
        failure = self.first_failure
        before = [s for s in self.steps if failure is None or s.growth < failure.growth]
        return before[-1] if before else None

    @property
    def sentence(self) -> str:
        """What the study found, in one sentence."""
        failure, good = self.first_failure, self.last_good
        if failure is None:
            return f"Nothing fails up to {_percent(self.steps[-1].growth)} growth of the chain."
        names = ", ".join(name.replace("_", " ") for name in failure.fails) or failure.stop_reason
        if good is None:
            return f"It fails with the chain at {_percent(failure.growth)} growth ({names})."
        return (
            f"Between {_percent(good.growth)} and {_percent(failure.growth)} growth of the chain "
            f"it begins to fail ({names})."
        )


def wear_over_time(
    scenario: Any,
    growths: Sequence[float] | None = None,
    rule: GrowthRule | None = None,
    run: Callable[[Any], Any] | None = None,
    halvings: int = 0,
) -> WearStudy:
    """Run a lift with its chain more and more worn.

    Parameters
    ----------
    scenario : Scenario
        The lift; its own `chain.growth` is where it starts.
    growths : sequence of float, optional
        Growths of the pitch to run, as fractions (dimensionless); by default from its own to where
        service guides replace a chain, or the wear that its limits ask for where that is more.
    rule : GrowthRule, optional
        How fast the chain grows; without one nothing is said of turns or hours.
    run : callable, optional
        Takes a scenario and gives a recording; `chainsim.run.run` by default.
    halvings : int
        How often the gap between the last growth that holds and the first that fails is halved
        (dimensionless).

    Returns
    -------
    WearStudy
        One step per growth.

    Raises
    ------
    CallError
        If a growth is negative or not a number, or none is given.
    """
    own = float(scenario.chain.growth)
    wanted = _checked(growths) if growths is not None else _growths(scenario, own)
    work = run or _run
    steps = [_step(scenario, growth, rule, work) for growth in wanted]
    for _ in range(halvings):
        study = _study(scenario, steps, rule)
        failure, good = study.first_failure, study.last_good
        if failure is None or good is None:
            break
        steps.append(_step(scenario, 0.5 * (good.growth + failure.growth), rule, work))
    return _study(scenario, steps, rule)


def replaced_at(scenario: Any) -> float:
    """Growth at which service guides replace a roller chain on these sprockets.

    Parameters
    ----------
    scenario : Scenario
        The lift.

    Returns
    -------
    float
        As a fraction (dimensionless).
    """
    teeth = max((sprocket.teeth for sprocket in scenario.sprocket), default=0)
    fixed = all(s.mount.kind in ("fixed", "screwed") for s in scenario.sprocket)
    return cf.wear_limit(max(teeth, 1), fixed)


def _study(scenario: Any, steps: list[WearStep], rule: GrowthRule | None) -> WearStudy:
    """Put steps in order, and say how far each has moved the take-ups from the first."""
    ordered = sorted(steps, key=lambda step: step.growth)
    words = rule.text if rule is not None else "all links grow alike; how fast is not known"
    first = next((step.travel for step in ordered if step.travel), {})
    told = tuple(replace(step, travel_used=_used(step.travel, first)) for step in ordered)
    return WearStudy(told, words, replaced_at(scenario))


def _used(
    travel: dict[str, tuple[float, float]], first: dict[str, tuple[float, float]]
) -> dict[str, float]:
    """How far the middle of each travel has moved from the first one [m; rad]."""
    return {name: _middle(ends) - _middle(first[name]) for name, ends in travel.items()}


def _middle(ends: tuple[float, float]) -> float:
    return 0.5 * (ends[0] + ends[1])


def _checked(growths: Sequence[float]) -> list[float]:
    """Refuse growths that cannot be run."""
    wanted = sorted({float(growth) for growth in growths})
    if not wanted:
        raise CallError("no growth of the chain was given")
    for growth in wanted:
        if not math.isfinite(growth) or growth < 0.0:
            raise CallError(f"growth of the chain: {growth:g}; a share of zero or more is wanted")
    return wanted


def _growths(scenario: Any, own: float) -> list[float]:
    """Even steps from the growth that a chain has to the largest one worth running."""
    last = max(replaced_at(scenario), scenario.limits.wear or 0.0)
    if last <= own:
        return [own]
    return [own + (last - own) * i / (STEPS - 1) for i in range(STEPS)]


def _step(
    scenario: Any, growth: float, rule: GrowthRule | None, run: Callable[[Any], Any]
) -> WearStep:
    """Run a lift at one growth of its chain."""
    try:
        grown = scenario.with_values({"chain.growth": growth})
        blank = _blank(scenario, growth, rule)
        recording = run(grown)
    except ChainsimError as error:
        return replace(_blank(scenario, growth, rule), stop_reason=str(error))
    found, extremes = list(recording.findings), dict(recording.extremes)
    travels = takeup_travel(recording) if "mounts/travel" in recording else []
    fails = tuple(f.name for f in found if f.outcome == FAILS)
    close = tuple(f.name for f in found if f.outcome == CLOSE)
    return replace(
        blank,
        travel={t.sprocket: (t.low, t.high) for t in travels},
        ride_height={
            name: float(extremes[f"ride_height.{name}"].value)
            for name in blank.ride_of_growth
            if f"ride_height.{name}" in extremes
        },
        fails=fails,
        close=close,
        outcome=FAILS if fails else (CLOSE if close else HOLDS),
        stop_reason=str(recording.stop_reason),
    )


def _blank(scenario: Any, growth: float, rule: GrowthRule | None) -> WearStep:
    """What is known of a growth before its run."""
    pitch, own = scenario.chain.pitch, float(scenario.chain.growth)
    length = build_lift(scenario).n_links * pitch
    turns = rule.turns(max(growth - own, 0.0)) if rule is not None else None
    hours = turns * length / scenario.drive.chain_speed / 3600.0 if turns is not None else None
    return WearStep(
        growth=growth,
        longer=length * growth,
        travel={},
        travel_used={},
        ride_height={},
        ride_of_growth={
            s.name: cf.ride_height(s.pitch or pitch, s.teeth, growth)
            for s in scenario.sprocket
            if s.teeth
        },
        fails=(),
        close=(),
        outcome=NOT_COMPLETED,
        stop_reason="",
        turns=turns,
        hours=hours,
    )


def _percent(share: float) -> str:
    return f"{100.0 * share:.2g} %"


def _run(scenario: Any) -> Any:
    """Run a lift and keep what is judged."""
    from chainsim.run import run

    return run(scenario, keep="summary")
