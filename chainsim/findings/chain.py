"""Findings about the chain: no tooth skipped, it stays on, the strand stays taut, links hold."""

from __future__ import annotations

import math

import numpy as np

from chainsim.analysis.axles import axle_loads
from chainsim.analysis.slack import resting_tension, taut
from chainsim.analysis.steady import kind_word
from chainsim.analysis.survey import Survey
from chainsim.findings.finding import (
    DOES_NOT_APPLY,
    NOT_ENOUGH_DATA,
    Finding,
    Measure,
    add_note,
    judged,
    unjudged,
)
from chainsim.findings.places import on_sprocket, on_strand
from chainsim.findings.wording import amount

ONE_SEAT = 1.0

LEFT_WORDS = frozenset({"off", "left", "derailed"})
"""Words in the kind of an event that tells of a chain that came off a sprocket."""


def no_tooth_skipped(s: Survey) -> Finding:
    """Whether the chain went through each sprocket as far as the sprocket turned.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: largest difference, in whole and broken seats; limit and scale one seat.
    """
    skip = s.channel("sprockets/skip")
    if skip is None or not any(s.teeth):
        return unjudged(DOES_NOT_APPLY, "no sprocket has teeth")
    measures = []
    for k, name in enumerate(s.sprocket_names):
        if not s.teeth[k]:
            continue
        seats = np.abs(np.nan_to_num(skip[:, k]))
        at = int(np.argmax(seats))
        value, time = float(seats[at]), float(s.time[at])
        extreme = s.extremes.get(f"skip.{name}")
        if extreme is not None and abs(extreme.value) >= value:
            value, time = abs(extreme.value), extreme.time
        crossed = np.flatnonzero(seats >= ONE_SEAT)
        measures.append(
            Measure(
                what=f"skip at {name}",
                value=value,
                unit="1",
                limit=ONE_SEAT,
                scale=ONE_SEAT,
                time=float(s.time[crossed[0]]) if crossed.size else time,
                place=on_sprocket(name),
                has_failed=value >= ONE_SEAT,
            )
        )
    finding = judged(measures, s.scenario.limits.reserve)
    skipped = any(measure.has_failed for measure in measures)
    return add_note(finding, "time of the first skip" if skipped else "")


def chain_stays_on(s: Survey) -> Finding:
    """Whether every engaged pin stayed below the tips of the teeth.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: largest height of an engaged pin over its seat [m]; limit and scale the height
        of the tooth tip over the circle of the seats.
    """
    ride = s.channel("sprockets/ride_height")
    outlines = s.channel("geometry/tooth_outline")
    if not any(s.teeth) or outlines is None or ride is None:
        return unjudged(DOES_NOT_APPLY, "no sprocket has teeth")
    measures = []
    for k, name in enumerate(s.sprocket_names):
        if not s.teeth[k]:
            continue
        height = np.nan_to_num(ride[:, k])
        at = int(np.argmax(height))
        value, time = float(height[at]), float(s.time[at])
        extreme = s.extremes.get(f"ride_height.{name}")
        if extreme is not None and extreme.value >= value:
            value, time = extreme.value, extreme.time
        measures.append(
            Measure(
                what=f"ride-up on {name}",
                value=value,
                unit="m",
                limit=_tip_height(s, k),
                time=time,
                place=on_sprocket(name),
                has_failed=_left(s, name),
            )
        )
    off = [measure.place for measure in measures if measure.has_failed]
    note = f"the chain came off {', '.join(off)}" if off else ""
    return add_note(judged(measures, s.scenario.limits.reserve), note)


def _tip_height(s: Survey, sprocket: int) -> float:
    """Height of the tooth tip over the circle of the seated pins [m]."""
    outline = s["geometry/tooth_outline"][sprocket]
    radius = np.hypot(outline[:, 0], outline[:, 1])
    return float(np.nanmax(radius) - s.seat_radius[sprocket])


def _left(s: Survey, name: str) -> bool:
    """Whether the run logged that the chain left this sprocket."""
    kinds = [kind_word(event.kind).split("_") for event in s.events if event.subject == name]
    return any(LEFT_WORDS.intersection(words) for words in kinds)


def carrying_strand_taut(s: Survey) -> Finding:
    """Whether the carrying strand stays taut in steady running.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: highest tension that is never undercut for longer than the allowed time, on
        tension averaged over one tooth passage [N]; scale: the resting tension at the foot of
        the same strand.
    """
    limits = s.scenario.limits
    if not s.carrying:
        return unjudged(DOES_NOT_APPLY, "no strand carries balls up")
    measures, slack = [], 0.0
    for k in s.carrying:
        found = taut(s, k)
        if found is None:
            continue
        slack = max(slack, found.slack_time)
        name = s.strands[k].name
        measures.append(
            Measure(
                what=f"least tension of {name}",
                value=found.level,
                unit="N",
                limit=limits.slack_tension,
                scale=_or_zero(resting_tension(s, k)),
                is_floor=True,
                time=found.time,
                place=on_strand(name, found.distance, found.link),
            )
        )
    if not measures:
        return unjudged(NOT_ENOUGH_DATA, "the carrying strand did not run steadily")
    longest = (
        f"averaged over one tooth passage; longest time below {limits.slack_tension:.3g} N: "
        f"{1e3 * slack:.0f} ms of {1e3 * limits.slack_time:.0f} ms allowed"
    )
    return judged(measures, limits.reserve, longest)


def _or_zero(value: float) -> float:
    """The value [N], or zero where it is not known."""
    return value if math.isfinite(value) else 0.0


def links_hold(s: Survey) -> Finding:
    """Whether every link stays below its allowable tension.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: peak tension over every inner step [N], damper included; beside it the peak of
        the sample means and the load on each axle.
    """
    mean = _peak_of_means(s)
    extreme = s.extremes.get("link_tension")
    value, time, place = mean
    if extreme is not None and math.isfinite(extreme.value):
        value, time, place = extreme.value, extreme.time, extreme.place
    measure = Measure(
        what="peak tension",
        value=value,
        unit="N",
        limit=s.scenario.chain.allowable_tension,
        time=time,
        place=place,
    )
    notes = [f"peak of means over {1e3 * s.interval:.3g} ms: {amount(mean[0], 'N')}"]
    for load in axle_loads(s):
        kept = s.extremes.get(f"axle_load.{load.sprocket}")
        peak = max(load.peak, kept.value) if kept is not None else load.peak
        notes.append(f"axle {load.sprocket} {amount(peak, 'N')}")
    push = s.extremes.get("link_push")
    if push is not None and push.value:
        notes.append(f"largest push {amount(abs(push.value), 'N')}")
    return judged([measure], s.scenario.limits.reserve, "; ".join(notes))


def _peak_of_means(s: Survey) -> tuple[float, float, str]:
    """Largest sample mean of the tension [N], when [s] and where."""
    sample, link = np.unravel_index(int(np.argmax(s.tension)), s.tension.shape)
    return float(s.tension[sample, link]), float(s.time[sample]), f"link {link}"
