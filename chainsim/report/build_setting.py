"""Setting of a take-up on the build sheet: mass or spring, with the range in which it is safe."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np

from chainsim.analysis.sized import Sized, bounce_frequency, starting_pull
from chainsim.analysis.take_up_advice import SAFE_HANG
from chainsim.report.build_case import Case
from chainsim.report.build_line import (
    CLOSED,
    CLOSED_ONLY,
    SIMULATED,
    STATED,
    Line,
    Part,
    ran_or_reckoned,
)
from chainsim.report.build_takeup import fixed_lines, movable_axles, travel_lines, travel_of
from chainsim.units import format_si

SHARE_OF_STRENGTH = 0.8
"""Share of the allowable tension that running and starting may reach (dimensionless); the rest is
for teeth, knocks and jams; common practice, no source."""

AS_SET = 0.05
"""How far below a setting that was calculated with is accepted where no closed form tells a least
one (dimensionless); our choice."""

LIGHTEST, HEAVIEST = 1e-4, 100.0
"""Hung masses between which a bounce is looked for [kg]."""


def takeup_part(case: Case) -> Part:
    """Write setting, safe range and travel of every take-up.

    Parameters
    ----------
    case : Case
        The lift.
    """
    lines: list[Line] = []
    for k in movable_axles(case):
        lines += [*_setting_lines(case, k), *travel_lines(case, k)]
    if not lines:
        lines = list(fixed_lines(case))
    return Part(
        "takeup",
        "Take-up: setting and travel",
        "The range to accept is a closed form of steady running: below it a strand may go slack "
        "(twice the slack mass is asked for; of a spring or counterweight as much more as the "
        "balls weigh), above it links come near their strength or the take-up bounces with the "
        "teeth. Only the setting itself was simulated, if at all.",
        tuple(lines),
    )


def _setting_lines(case: Case, k: int) -> Iterator[Line]:
    mount, name = case.scenario.sprocket[k].mount, case.lift.wheels[k].name
    value, unit, item, note = _setting_of(mount)
    least, most = _slack_and_strong(case, k, value)
    avoid = _masses_to_avoid(case, k) if mount.kind not in ("spring", "counterweight") else None
    low, high = _safe_range(value, _safe_low(case, k, value, least), most, avoid)
    if not low <= value <= high:
        note = f"OUTSIDE ITS RANGE; {note}" if note else "OUTSIDE ITS RANGE"
    yield Line(f"{name}: {item}", value, unit, STATED, note, low, high)
    words = "steady running" if least else "steady running; the chain's own weight keeps it taut"
    yield Line(f"{name}: a strand goes slack below", least, unit, CLOSED, words)
    note = f"running and starting reach {100 * SHARE_OF_STRENGTH:.0f} % of the allowable tension"
    yield Line(f"{name}: links come near their strength above", most, unit, CLOSED, note)
    if mount.kind == "spring":
        yield from _spring_lines(case, k, least)
    yield from _bounce_lines(case, name, avoid)
    yield from _tension_lines(case)


def _safe_low(case: Case, k: int, value: float, least: float) -> float:
    """Least setting to accept: well above slack, or as it was calculated with."""
    if least <= 0.0:
        return (1.0 - AS_SET) * value
    if case.scenario.sprocket[k].mount.kind in ("spring", "counterweight"):
        return least + case.closed.payload / _newtons_per_setting(case.closed, k)
    return SAFE_HANG * least


def _safe_range(
    value: float, low: float, most: float, avoid: tuple[float, float] | None
) -> tuple[float, float]:
    """Range that no closed form speaks against and that is nearest to a setting, in its unit."""
    if avoid is None:
        return low, most
    below, above = (low, min(most, avoid[0])), (max(low, avoid[1]), most)
    ranges = [ends for ends in (below, above) if ends[0] < ends[1]]
    return min(ranges, key=lambda ends: max(ends[0] - value, value - ends[1]), default=(low, most))


def _setting_of(mount: Any) -> tuple[float, str, str, str]:
    """Value, unit, name and remark of what sets a take-up's pull."""
    if mount.kind == "spring":
        return mount.set_force, "N", "force of the spring, at the place on the drawing", ""
    if mount.kind == "counterweight":
        return mount.weight, "kg", "counterweight", "its cord pulls the axle along its way"
    note = "all that moves with the axle: sprocket, axle, bearings, hanger, and weights to fill up"
    return mount.mass, "kg", "hung mass", note


def _slack_and_strong(case: Case, k: int, value: float) -> tuple[float, float]:
    """Settings at which a strand goes slack, and at which links come near their strength."""
    sized, share = case.closed, _share(case.closed, k)
    newtons = _newtons_per_setting(sized, k)
    spare = SHARE_OF_STRENGTH * case.scenario.chain.allowable_tension
    spare -= sized.running.most + starting_pull(sized)
    slack = value - sized.running.least * share / newtons
    return max(0.0, slack), value + spare * share / newtons


def _newtons_per_setting(sized: Sized, k: int) -> float:
    """Pull along the take-up's way for one unit of its setting [N/kg], or 1 for a spring."""
    mount, gravity = sized.scenario.sprocket[k].mount, sized.scenario.frame.gravity
    if mount.kind == "spring":
        return 1.0
    return gravity if mount.kind == "counterweight" else gravity * max(abs(_way(sized, k)[1]), 1e-3)


def _way(sized: Sized, k: int) -> np.ndarray:
    return np.array(sized.path.wheels[k].movable or (0.0, 1.0), dtype=float)


def _share(sized: Sized, k: int) -> float:
    """Pull along the way for one newton more in both strands (dimensionless)."""
    direction = sized.path.direction
    return abs(float((direction[k] - direction[k - 1]) @ _way(sized, k)))


def _spring_lines(case: Case, k: int, least: float) -> Iterator[Line]:
    mount, name = case.scenario.sprocket[k].mount, case.lift.wheels[k].name
    travel, rate = travel_of(case, k), mount.rate or 0.0
    yield Line(f"{name}: rate of the spring", rate, "N/m")
    for what, at in (("new", travel.new), ("worn", travel.new + travel.worn)):
        force = mount.set_force - rate * at
        item = f"{name}: force of the spring, chain {what}"
        yield Line(item, force, "N", CLOSED, "", least if least > 0.0 else None)


def _tension_lines(case: Case) -> Iterator[Line]:
    running, allowed = case.closed.running, case.scenario.chain.allowable_tension
    peak = case.extreme("link_tension")
    note = "of all ends of strands, steady running"
    yield Line("least tension", running.least, "N", CLOSED, note)
    yield Line(
        "greatest tension of a link",
        peak if peak is not None else running.most + starting_pull(case.closed),
        "N",
        SIMULATED if peak is not None else CLOSED_ONLY,
        f"links are allowed {format_si(allowed, 'force')}",
        None,
        allowed,
    )


def _bounce_lines(case: Case, name: str, avoid: tuple[float, float] | None) -> Iterator[Line]:
    """Bounce of the take-up, and the masses at which it meets the tooth rate."""
    found, mode = bounce_frequency(case.closed), case.mode(f"take-up {name}")
    note = f"teeth pass at {case.speed / case.scenario.chain.pitch:.3g} Hz"
    line = Line(f"{name}: bounces on the chain at", None, "Hz", note=note)
    yield ran_or_reckoned(line, mode, found)
    if avoid is not None:
        yield Line(
            f"{name}: masses to keep away from",
            f"{format_si(avoid[0], 'mass')} to {format_si(avoid[1], 'mass')}",
            source=CLOSED,
            note="there it would bounce with the teeth"
            + ("; scaled to the simulated frequency" if mode is not None else "; stiff seats"),
        )


def _masses_to_avoid(case: Case, k: int) -> tuple[float, float] | None:
    """Hung masses at which the take-up bounces inside the guard band of the tooth rate [kg]."""
    found, name = bounce_frequency(case.closed), case.lift.wheels[k].name
    if math.isnan(found):
        return None
    mode = case.mode(f"take-up {name}")
    seen = (mode / found) if mode is not None else 1.0
    teeth, guard = case.speed / case.scenario.chain.pitch, case.scenario.limits.guard_band
    low = _mass_at(case.closed, name, teeth * (1.0 + guard) / seen)
    high = _mass_at(case.closed, name, teeth * (1.0 - guard) / seen)
    return (low, high) if low is not None and high is not None else None


def _mass_at(sized: Sized, name: str, frequency: float) -> float | None:
    """Return the hung mass at which the take-up bounces at a frequency [kg]; None if none does."""
    key = f"sprocket.{name}.mount.mass"

    def bounce(mass: float) -> float:
        return bounce_frequency(replace(sized, scenario=sized.scenario.with_values({key: mass})))

    low, high = LIGHTEST, HEAVIEST
    if not bounce(high) < frequency < bounce(low):
        return None
    for _ in range(24):
        middle = math.sqrt(low * high)
        low, high = (middle, high) if bounce(middle) > frequency else (low, middle)
    return float(f"{math.sqrt(low * high):.3g}")
