"""The take-up on the build sheet: its setting with the safe range, and the travel it needs."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace
from typing import NamedTuple

import numpy as np

from chainsim import closed_forms as cf
from chainsim.analysis.axles import takeup_travel
from chainsim.analysis.sized import Sized, bounce_frequency, starting_pull
from chainsim.analysis.take_up_advice import SAFE_HANG
from chainsim.report.build_case import Case
from chainsim.report.build_line import (
    CLOSED,
    CLOSED_ONLY,
    DRAWN,
    SIMULATED,
    STATED,
    UNKNOWN,
    Line,
    Part,
    ran_or_reckoned,
)
from chainsim.units import format_si

SHARE_OF_STRENGTH = 0.8
"""Share of the allowable tension that running and starting may reach (dimensionless); the rest is
for teeth, knocks and jams; common practice, no source."""

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
    def ends(self) -> tuple[float, float]:
        """Ends with everything that adds up [m]."""
        changes = (self.worn + self.warm, self.cold, 0.0)
        low = self.new if math.isnan(self.low) else min(self.low, self.new)
        high = self.new if math.isnan(self.high) else max(self.high, self.new)
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
    return np.array(case.sized.path.wheels[k].movable, dtype=float)


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
    direction = case.sized.path.direction
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
        return stated, "wear allowance stated in the scenario"
    largest = max((wheel.teeth for wheel in case.lift.wheels), default=0) or 1
    growth = cf.wear_limit(largest, fixed_centers=not movable_axles(case))
    return growth, (
        "no allowance stated: the growth at which makers of steel roller chain have it replaced; "
        "moulded chain needs its maker's word"
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


def _simulated_ends(case: Case, k: int) -> tuple[float, float]:
    """Ends of the travel in the run, an arm's angle turned into an arc [m]; NaN without a run."""
    name = case.lift.wheels[k].name
    for travel in case.simulated(takeup_travel) or ():
        if travel.sprocket == name:
            mount = case.scenario.sprocket[k].mount
            arm = 1.0
            if travel.unit == "rad":
                arm = math.dist(case.lift.wheels[k].center, mount.pivot)
            return arm * travel.low, arm * travel.high
    return math.nan, math.nan


def takeup_part(case: Case) -> Part:
    """Write setting, safe range and travel of every take-up.

    Parameters
    ----------
    case : Case
        The lift.
    """
    lines: list[Line] = []
    for k in movable_axles(case):
        lines += [*_setting_lines(case, k), *_travel_lines(case, k)]
    if not lines:
        lines = list(_fixed_lines(case))
    return Part(
        "takeup",
        "Take-up: setting and travel",
        "The safe range is a closed form of steady running: below it a strand goes slack, above it "
        "links come near their strength. Only the setting itself was simulated, if at all.",
        tuple(lines),
    )


def _fixed_lines(case: Case) -> Iterator[Line]:
    """What fixed axles ask for instead."""
    growth, reason = wear_allowance(case)
    slack = cf.slack_of_growth(case.lift.n_links, case.scenario.chain.pitch, growth)
    yield Line("take-up", "none: every axle stands where it is screwed")
    yield Line(
        "surplus chain when worn", slack, "m", CLOSED, f"growth {100 * growth:.1f} %; {reason}"
    )
    yield Line("room to set one axle further away", 0.5 * slack + SPARE_TRAVEL, "m", CLOSED)


def _setting_lines(case: Case, k: int) -> Iterator[Line]:
    sized, mount, name = case.sized, case.scenario.sprocket[k].mount, case.lift.wheels[k].name
    newtons = _newtons_per_setting(sized, k)
    value, unit, item = _setting_of(mount)
    least = max(0.0, value - sized.running.least * _share(sized, k) / newtons)
    spare = SHARE_OF_STRENGTH * case.scenario.chain.allowable_tension
    spare -= sized.running.most + starting_pull(sized)
    most = value + spare * _share(sized, k) / newtons
    low = SAFE_HANG * least if mount.kind not in ("spring", "counterweight") else least
    yield Line(
        f"{name}: {item}",
        value,
        unit,
        STATED,
        "mass of everything that moves with the axle: sprocket, axle, bearings, hanger, weight"
        if unit == "kg" and mount.kind != "counterweight"
        else "",
        low if low > 0.0 else None,
        most,
    )
    yield Line(
        f"{name}: a strand goes slack below",
        least,
        unit,
        CLOSED,
        "steady running; 0: the chain's own weight keeps it taut"
        if not least
        else "steady running",
    )
    if mount.kind == "spring":
        yield from _spring_lines(case, k)
    yield from _tension_lines(case)
    yield from _bounce_lines(case, k)


def _setting_of(mount) -> tuple[float, str, str]:
    """Value, unit and name of what sets a take-up's pull."""
    if mount.kind == "spring":
        return mount.set_force, "N", "force of the spring at the place on the drawing"
    if mount.kind == "counterweight":
        return mount.weight, "kg", "counterweight"
    return mount.mass, "kg", "hung mass"


def _newtons_per_setting(sized: Sized, k: int) -> float:
    """Pull along the take-up's way for one unit of its setting [N/kg], or 1 for a spring."""
    mount = sized.scenario.sprocket[k].mount
    gravity = sized.scenario.frame.gravity
    if mount.kind == "spring":
        return 1.0
    if mount.kind == "counterweight":
        return gravity
    return gravity * max(abs(_way(sized, k)[1]), 1e-3)


def _way(sized: Sized, k: int) -> np.ndarray:
    return np.array(sized.path.wheels[k].movable, dtype=float)


def _share(sized: Sized, k: int) -> float:
    """Pull along the way for one newton more in both strands (dimensionless)."""
    direction = sized.path.direction
    return abs(float((direction[k] - direction[k - 1]) @ _way(sized, k)))


def _spring_lines(case: Case, k: int) -> Iterator[Line]:
    mount, name = case.scenario.sprocket[k].mount, case.lift.wheels[k].name
    travel = travel_of(case, k)
    yield Line(f"{name}: rate of the spring", mount.rate, "N/m")
    for what, at in (("new", travel.new), ("worn", travel.new + travel.worn)):
        force = mount.set_force - mount.rate * at
        yield Line(f"{name}: force of the spring, chain {what}", force, "N", CLOSED)


def _tension_lines(case: Case) -> Iterator[Line]:
    running, n = case.sized.running, case.scenario.chain.allowable_tension
    peak = case.simulated(lambda s: s.extremes["link_tension"].value)
    yield Line("least tension in steady running", running.least, "N", CLOSED, "of all strand ends")
    yield Line(
        "greatest tension of a link",
        peak if peak is not None else running.most + starting_pull(case.sized),
        "N",
        SIMULATED if peak is not None else CLOSED_ONLY,
        f"links are allowed {format_si(n, 'force')}",
        None,
        n,
    )


def _bounce_lines(case: Case, k: int) -> Iterator[Line]:
    """Bounce of the take-up, and the masses at which it meets the tooth rate."""
    mount, name = case.scenario.sprocket[k].mount, case.lift.wheels[k].name
    tooth_rate = case.speed / case.scenario.chain.pitch
    found = bounce_frequency(case.sized)
    mode = case.simulated(
        lambda s: next(m.frequency for m in s.rec.modes if m.kind == f"take-up {name}")
    )
    line = Line(
        f"{name}: bounces on the chain at", None, "Hz", note=f"teeth pass at {tooth_rate:.3g} Hz"
    )
    yield ran_or_reckoned(line, mode, found)
    if math.isnan(found) or mount.kind in ("spring", "counterweight"):
        return
    guard = case.scenario.limits.guard_band
    ends = [_mass_at(case.sized, k, tooth_rate * share) for share in (1.0 + guard, 1.0 - guard)]
    if None not in ends:
        yield Line(
            f"{name}: masses to keep away from",
            f"{format_si(ends[0], 'mass')} to {format_si(ends[1], 'mass')}",
            source=CLOSED,
            note="there it would bounce with the teeth; estimate with stiff seats",
        )


def _mass_at(sized: Sized, k: int, frequency: float) -> float | None:
    """Return the hung mass at which the take-up bounces at a frequency [kg]; None if none does."""
    key = f"sprocket.{sized.path.wheels[k].name}.mount.mass"
    low, high = 1e-4, 100.0

    def at(mass: float) -> float:
        return bounce_frequency(replace(sized, scenario=sized.scenario.with_values({key: mass})))

    if not at(high) < frequency < at(low):
        return None
    for _ in range(24):
        middle = math.sqrt(low * high)
        low, high = (middle, high) if at(middle) > frequency else (low, middle)
    return float(f"{math.sqrt(low * high):.3g}")


def _travel_lines(case: Case, k: int) -> Iterator[Line]:
    name, travel = case.lift.wheels[k].name, travel_of(case, k)
    growth, reason = wear_allowance(case)
    way = way_of(case, k)
    words = "up" if way[1] > 0.99 else f"along ({way[0]:.2f}, {way[1]:.2f})"
    origin = f"travel is positive {words}, from the place on the drawing"
    yield Line(f"{name}: travel with the new chain taut", travel.new, "m", DRAWN, origin)
    for what, value in (("lowest", travel.low), ("highest", travel.high)):
        line = Line(f"{name}: {what} travel in running", None, "m")
        yield ran_or_reckoned(line, value)
    yield Line(
        f"{name}: change by wear",
        travel.worn,
        "m",
        CLOSED,
        f"{100 * growth:.2g} % growth; {reason}",
    )
    yield from _temperature_lines(case, k, travel)
    low, high = travel.ends
    source = CLOSED if math.isnan(travel.low) else SIMULATED
    note = "everything added; frame taken to keep its length"
    if math.isnan(travel.low):
        note += f"; running {UNKNOWN}"
    yield Line(f"{name}: lowest travel to allow for", low, "m", source, note)
    yield Line(f"{name}: highest travel to allow for", high, "m", source, note)
    yield from _stop_lines(case, k, low, high)


def _temperature_lines(case: Case, k: int, travel: Travel) -> Iterator[Line]:
    name, chain = case.lift.wheels[k].name, case.scenario.chain
    warmth = case.scenario.frame.temperature
    if warmth is None:
        value = travel_per_chain(case, k) * chain.expansion * case.loop * TEN_KELVIN
        note = "no temperatures stated: add this for every 10 K above the day it was built"
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
        yield Line(
            f"{name}: put a catching stop below, at", low - SPARE_TRAVEL, "m", CLOSED, "none stated"
        )
        yield Line(f"{name}: leave free above, to", high + SPARE_TRAVEL, "m", CLOSED, "none stated")
        return
    for what, stop, spare in (
        ("low", mount.stops[0], low - mount.stops[0]),
        ("high", mount.stops[1], mount.stops[1] - high),
    ):
        words = "left" if spare >= 0.0 else "MISSING"
        note = f"{abs(1e3 * spare):.1f} mm {words} with everything added"
        yield Line(f"{name}: {what} stop", stop, "m", STATED, note)
