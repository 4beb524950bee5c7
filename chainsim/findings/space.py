"""Findings about space: the strand's clearance, gaps between parts, the take-up's travel."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from chainsim.analysis.axles import MOVABLE, Travel, takeup_travel, travel_per_length
from chainsim.analysis.chain_motion import excursion
from chainsim.analysis.gaps import Gap, smallest_gaps
from chainsim.analysis.survey import Survey
from chainsim.findings.finding import (
    DOES_NOT_APPLY,
    NOT_ENOUGH_DATA,
    Finding,
    Measure,
    judged,
    unjudged,
)
from chainsim.findings.places import at_pin, on_sprocket


def strand_in_clearance(s: Survey) -> Finding:
    """Whether the strands stay near the straight lines between their sprockets.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Largest excursion in steady running [m], inward and outward each against its own
        clearance. Judged on the carrying strands (on all, where none carries); the others are
        told beside.
    """
    clearance = s.scenario.limits.clearance
    if not s.steady:
        return unjudged(NOT_ENOUGH_DATA, "nothing ran steadily")
    measures = []
    for k, strand in enumerate(s.strands):
        away = excursion(s, k)
        for side, size, pin, limit in (
            ("inward", away.inward, away.inward_pin, clearance.inward),
            ("outward", away.outward, away.outward_pin, clearance.outward),
        ):
            steady = np.where(s.is_steady & np.isfinite(size), size, -1.0)
            at = int(np.argmax(steady))
            if steady[at] < 0.0:
                continue
            is_judged = strand.carrying or not s.carrying
            measures.append(
                Measure(
                    what=f"{side} excursion of {strand.name}",
                    value=float(size[at]),
                    unit="m",
                    limit=limit if is_judged else None,
                    time=float(s.time[at]),
                    place=at_pin(strand.name, int(pin[at])),
                )
            )
    if not measures:
        return unjudged(NOT_ENOUGH_DATA, "no strand hangs between two sprockets")
    measures.sort(key=lambda measure: -measure.value)
    return judged(measures, s.scenario.limits.reserve)


def parts_keep_clear(s: Survey) -> Finding:
    """Whether moving parts keep their distance from each other and from what stands.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: smallest gap [m]. A touch that is not meant fails it, whether or not a gap was
        asked for.
    """
    limit, extreme = s.scenario.limits.gap, s.extremes.get("gap")
    if extreme is not None:
        gaps = [Gap(extreme.value, extreme.time, extreme.place)]
    else:
        gaps = smallest_gaps(s)
    if not gaps:
        return unjudged(DOES_NOT_APPLY, "there are no parts that could touch")
    touches = gaps[0].size < 0.0
    measures = [
        Measure(
            what=f"gap between {gap.parts}",
            value=gap.size,
            unit="m",
            limit=(limit or 0.0) if limit is not None or touches else None,
            is_floor=True,
            time=gap.time,
            place=gap.parts,
            has_failed=gap.size < 0.0,
        )
        for gap in gaps
    ]
    unseen = "" if extreme is not None else "looked at some hundred moments"
    return judged(measures, s.scenario.limits.reserve, unseen)


def takeup_in_travel(s: Survey) -> Finding:
    """Whether every take-up stays off its stops, wear and temperature allowed for.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: the extreme of travel after the allowance [m], against the nearer stop; scale:
        the whole travel. The frame is taken to keep its length.
    """
    if not any(sprocket.mount.kind in MOVABLE for sprocket in s.scenario.sprocket):
        return unjudged(DOES_NOT_APPLY, "no axle moves")
    measures: list[Measure] = []
    used: list[str] = []
    notes: list[str] = []
    for travel in takeup_travel(s):
        used.append(_used(travel))
        measures += _against_stops(s, travel, notes)
    note = "; ".join([*used, *notes])
    if not measures:
        return unjudged(DOES_NOT_APPLY, f"no stops are stated; {note}")
    return judged(measures, s.scenario.limits.reserve, note)


def _used(travel: Travel) -> str:
    """Used range in words."""
    if travel.unit == "rad":
        low, high, unit = math.degrees(travel.low), math.degrees(travel.high), "°"
    else:
        low, high, unit = 1e3 * travel.low, 1e3 * travel.high, " mm"
    return f"{travel.sprocket} moved from {low:.2f} to {high:.2f}{unit}"


def _against_stops(s: Survey, travel: Travel, notes: list[str]) -> list[Measure]:
    """Both ends of one take-up's range against its stops."""
    k = s.sprocket_names.index(travel.sprocket)
    stops = s.scenario.sprocket[k].mount.stops
    if stops is None:
        return []
    longer, shorter = _length_changes(s)
    gain = travel_per_length(s, k)
    shifts = [gain * change for change in (longer, shorter) if change and math.isfinite(gain)]
    down, up = min([0.0, *shifts]), max([0.0, *shifts])
    if down or up:
        notes.append(f"with {_allowance(down, up, travel.unit)} for wear and temperature")
    touch = s.extremes.get(f"stop_touch.{travel.sprocket}")
    is_touched = touch is not None and touch.value > 0.0
    if touch is not None and is_touched:
        notes.append(f"{travel.sprocket} touched a stop with {touch.value:.3g} N")
    low, high = travel.low + down, travel.high + up
    is_low = low - stops[0] < stops[1] - high
    make: Callable[..., Measure] = lambda **differs: Measure(  # noqa: E731 - one shared part
        unit=travel.unit,
        scale=stops[1] - stops[0],
        place=on_sprocket(travel.sprocket),
        **differs,
    )
    return [
        make(
            what=f"lowest travel of {travel.sprocket}",
            value=low,
            limit=stops[0],
            is_floor=True,
            time=travel.low_time,
            has_failed=is_touched and is_low,
        ),
        make(
            what=f"highest travel of {travel.sprocket}",
            value=high,
            limit=stops[1],
            time=travel.high_time,
            has_failed=is_touched and not is_low,
        ),
    ]


def _allowance(down: float, up: float, unit: str) -> str:
    """Allowance in words."""
    if unit == "rad":
        return f"{math.degrees(down):+.2f}/{math.degrees(up):+.2f}°"
    return f"{1e3 * down:+.2f}/{1e3 * up:+.2f} mm"


def _length_changes(s: Survey) -> tuple[float, float]:
    """Growth and shrinkage of the whole chain to allow for [m]: wear and warmth, and cold."""
    length = s.n_pins * s.pitch
    longer, shorter = (s.scenario.limits.wear or 0.0) * length, 0.0
    warmth = s.scenario.frame.temperature
    if warmth is not None:
        expansion = s.scenario.chain.expansion * length
        longer += expansion * max(warmth.high - warmth.built, 0.0)
        shorter += expansion * min(warmth.low - warmth.built, 0.0)
    return longer, shorter
