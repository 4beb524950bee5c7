"""Travel of a take-up: where it stands, how far it moves, what wear and warmth add, its stops."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import NamedTuple

import numpy as np

from chainsim import closed_forms as cf
from chainsim.analysis.axles import takeup_travel
from chainsim.report.build_case import Case
from chainsim.report.build_line import (
    CLOSED,
    DRAWN,
    PRACTICE,
    SIMULATED,
    STATED,
    UNKNOWN,
    Line,
    ran_or_reckoned,
)

TEN_KELVIN = 10.0
"""Step of temperature that a travel is stated for where no range is given [K]."""

SPARE_TRAVEL = 3e-3
"""Room to leave beyond the travel worked out, on either side [m]: play of the chain, assembly;
common practice, no source."""


class Travel(NamedTuple):
    """Travel of one take-up along its way, from the place on the drawing.

    Attributes
    ----------
    new : float
        With the new chain laid taut [m].
    worn, warm, cold : float
        Change by wear, by the highest and by the lowest temperature [m].
    low, high : float
        Ends in running [m]; NaN where it was not simulated.
    """

    new: float
    worn: float
    warm: float
    cold: float
    low: float
    high: float

    @property
    def is_simulated(self) -> bool:
        """Whether the ends in running are known."""
        return not math.isnan(self.low)

    @property
    def ends(self) -> tuple[float, float]:
        """Ends with everything that adds up [m]."""
        changes = (self.worn + self.warm, self.cold, 0.0)
        low = min(self.low, self.new) if self.is_simulated else self.new
        high = max(self.high, self.new) if self.is_simulated else self.new
        return low + min(changes), high + max(changes)


def movable_axles(case: Case) -> list[int]:
    """Return the indices of the axles that move (dimensionless).

    Parameters
    ----------
    case : Case
        The lift.
    """
    wheels = case.sized.path.wheels if case.sized else ()
    return [k for k, wheel in enumerate(wheels) if wheel.movable is not None]


def way_of(case: Case, k: int) -> np.ndarray:
    """Return the direction of positive travel of an axle, up for a hung one.

    Parameters
    ----------
    case : Case
        The lift.
    k : int
        Index of a movable axle (dimensionless).

    Returns
    -------
    ndarray, shape (2,)
        Unit vector (dimensionless).
    """
    return np.array(case.closed.path.wheels[k].movable or (0.0, 1.0), dtype=float)


def travel_per_chain(case: Case, k: int) -> float:
    """Return the travel of an axle that takes up one unit of chain length.

    Parameters
    ----------
    case : Case
        The lift.
    k : int
        Index of a movable axle (dimensionless).

    Returns
    -------
    float
        Along its way (dimensionless): −1/2 for an axle hung between two plumb strands; NaN where
        its travel takes up nothing.
    """
    direction = case.closed.path.direction
    gain = -float((direction[k] - direction[k - 1]) @ way_of(case, k))
    return 1.0 / gain if abs(gain) > 1e-6 else math.nan


def wear_allowance(case: Case) -> tuple[float, str]:
    """Return the growth of the pitch that the travel must allow for, and where it is from.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    growth : float
        As a fraction (dimensionless).
    reason : str
        In words.
    """
    stated = case.scenario.limits.wear
    if stated is not None:
        return stated, "allowance of the scenario"
    largest = max((wheel.teeth for wheel in case.lift.wheels), default=0) or 1
    growth = cf.wear_limit(largest, fixed_centers=not movable_axles(case))
    return growth, (
        "no allowance is stated: this is the growth at which makers of steel roller chain have it "
        "replaced, and moulded chain needs its maker's word"
    )


def travel_of(case: Case, k: int) -> Travel:
    """Work out the travel of one take-up.

    Parameters
    ----------
    case : Case
        The lift.
    k : int
        Index of a movable axle (dimensionless).

    Returns
    -------
    Travel
        Its parts; an arm's along the arc of its axle.
    """
    shift = case.lift.laid.wheel_center[k] - np.array(case.lift.wheels[k].center)
    gain, chain = travel_per_chain(case, k), case.scenario.chain
    warmth = case.scenario.frame.temperature
    warm = cold = 0.0
    if warmth is not None:
        warm = gain * chain.expansion * case.loop * max(warmth.high - warmth.built, 0.0)
        cold = gain * chain.expansion * case.loop * min(warmth.low - warmth.built, 0.0)
    low, high = _simulated_ends(case, k)
    worn = gain * cf.slack_of_growth(case.lift.n_links, chain.pitch, wear_allowance(case)[0])
    return Travel(float(shift @ way_of(case, k)), worn, warm, cold, low, high)


def resting_travel(case: Case, k: int) -> float | None:
    """Return the travel of an axle before the start, its chain stretched by what hangs on it.

    Parameters
    ----------
    case : Case
        The lift.
    k : int
        Index of a movable axle (dimensionless).

    Returns
    -------
    float or None
        Along its way from the place on the drawing [m]; None without a run.
    """
    center = case.simulated(lambda s: s.center[0, k])
    if center is None:
        return None
    return float((center - np.array(case.lift.wheels[k].center)) @ way_of(case, k))


def _simulated_ends(case: Case, k: int) -> tuple[float, float]:
    """Ends of the travel in the run, an arm's angle turned into an arc [m]; NaN without a run."""
    name, mount = case.lift.wheels[k].name, case.scenario.sprocket[k].mount
    for travel in case.simulated(takeup_travel) or ():
        if travel.sprocket == name:
            arm = 1.0
            if mount.pivot is not None:
                arm = math.dist(case.lift.wheels[k].center, mount.pivot)
            return arm * travel.low, arm * travel.high
    return math.nan, math.nan


def travel_lines(case: Case, k: int) -> Iterator[Line]:
    """Yield the travel of one take-up, part by part, and its stops.

    Parameters
    ----------
    case : Case
        The lift.
    k : int
        Index of a movable axle (dimensionless).
    """
    name, travel = case.lift.wheels[k].name, travel_of(case, k)
    growth, reason = wear_allowance(case)
    x, y = way_of(case, k)
    words = "up" if y > 0.99 else f"along ({case.across(x):.2f}, {y:.2f})"
    note = f"positive is {words}, from the place on the drawing"
    yield Line(f"{name}: travel with the new chain taut", travel.new, "m", DRAWN, note)
    yield ran_or_reckoned(Line(f"{name}: lowest travel in running", None, "m"), travel.low)
    yield ran_or_reckoned(Line(f"{name}: highest travel in running", None, "m"), travel.high)
    note = f"{100 * growth:.2g} % growth; {reason}"
    yield Line(f"{name}: change by wear", travel.worn, "m", CLOSED, note)
    yield from _temperature_lines(case, k, travel)
    low, high = travel.ends
    source = SIMULATED if travel.is_simulated else CLOSED
    note = "all of it added; the frame is taken to keep its length"
    if not travel.is_simulated:
        note += f"; running {UNKNOWN}"
    yield Line(f"{name}: lowest travel to allow for", low, "m", source, note)
    yield Line(f"{name}: highest travel to allow for", high, "m", source, note)
    yield from _stop_lines(case, k, low, high)


def _temperature_lines(case: Case, k: int, travel: Travel) -> Iterator[Line]:
    name, chain = case.lift.wheels[k].name, case.scenario.chain
    warmth = case.scenario.frame.temperature
    if warmth is None:
        value = travel_per_chain(case, k) * chain.expansion * case.loop * TEN_KELVIN
        note = "no temperatures are stated, none is added: add this for every 10 K"
        yield Line(f"{name}: change for each 10 K warmer", value, "m", CLOSED, note)
        return
    for what, value, at in (("warm", travel.warm, warmth.high), ("cold", travel.cold, warmth.low)):
        note = f"{at - warmth.built:+.0f} K from the day it was built"
        yield Line(f"{name}: change when {what}", value, "m", CLOSED, note)


def _stop_lines(case: Case, k: int, low: float, high: float) -> Iterator[Line]:
    name, mount = case.lift.wheels[k].name, case.scenario.sprocket[k].mount
    if mount.kind == "arm":
        ends = [f"{math.degrees(stop):.1f}°" for stop in mount.stops or ()]
        yield Line(f"{name}: stops of the arm", " to ".join(ends) or "none stated")
        return
    if mount.stops is None:
        note = f"the scenario states no stops; {1e3 * SPARE_TRAVEL:g} mm beyond the travel"
        item = f"{name}: catching stop at its low end, at"
        yield Line(item, low - SPARE_TRAVEL, "m", PRACTICE, note)
        yield Line(f"{name}: free at its high end, up to", high + SPARE_TRAVEL, "m", PRACTICE, note)
        return
    growth, worn = wear_allowance(case)[0], abs(travel_of(case, k).worn)
    low_spare, high_spare = low - mount.stops[0], mount.stops[1] - high
    for what, stop, spare in (("low", 0, low_spare), ("high", 1, high_spare)):
        note = f"{1e3 * spare:.1f} mm left with all of it added"
        if spare < 0.0:
            at = max(growth * (1.0 + spare / worn), 0.0) if worn else 0.0
            note = (
                f"{-1e3 * spare:.1f} mm SHORT with all of it added: reached at "
                f"{100 * at:.2g} % growth, replace the chain before"
            )
        yield Line(f"{name}: {what} stop", mount.stops[stop], "m", STATED, note)


def fixed_lines(case: Case) -> Iterator[Line]:
    """Yield what fixed axles ask for instead of a take-up.

    Parameters
    ----------
    case : Case
        The lift.
    """
    growth, reason = wear_allowance(case)
    slack = cf.slack_of_growth(case.lift.n_links, case.scenario.chain.pitch, growth)
    note = f"{100 * growth:.2g} % growth; {reason}"
    yield Line("take-up", "none: every axle stands where it is screwed")
    yield Line("surplus chain when worn", slack, "m", CLOSED, note)
    note = "half of the surplus for two strands, and room to put the chain on"
    yield Line("room to set one axle further off", 0.5 * slack + SPARE_TRAVEL, "m", CLOSED, note)
