"""Findings about the balls: they stay seated, the rate is met, the ride is smooth."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from chainsim.analysis.chain_motion import ripple
from chainsim.analysis.losses import is_lost, losses
from chainsim.analysis.ride import ride
from chainsim.analysis.survey import Survey
from chainsim.analysis.tilt import carrier_tilts
from chainsim.closed_forms.statistics import failure_bound, share_interval
from chainsim.findings.finding import (
    DOES_NOT_APPLY,
    FAILS,
    NOT_ENOUGH_DATA,
    Finding,
    Measure,
    add_note,
    judged,
    unjudged,
)
from chainsim.findings.wording import amount

LEAST_DELIVERIES = 5
"""Fewest deliveries in steady running from which a rate is judged [dimensionless]."""

CONFIDENCE = 0.95
"""Confidence of the upper bound of the loss rate [dimensionless]."""

UNSEATED_PLAY = 0.05
"""Play above which the seat reserve is told to be optimistic, as a share of the diameter."""


def balls_stay_seated(s: Survey) -> Finding:
    """Whether every ball stayed in its pocket until the discharge, and how nearly it did not.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: smallest seat reserve [m s-2], limit 0, scale g. A lost ball fails it, with no
        margin. Held balls cannot leave: they fail below 0 and are else not judged.
    """
    balls = s.scenario.balls
    if balls is None:
        return unjudged(DOES_NOT_APPLY, "the scenario has no balls")
    reserve = _smallest_reserve(s)
    lost = [ball for ball in s.balls if is_lost(ball.fate)]
    note = _loss_note(s, len(lost))
    if lost:
        return replace(_lost(s, note), value=reserve.value if reserve else None)
    if reserve is None:
        return unjudged(NOT_ENOUGH_DATA, "no ball was carried")
    if balls.model == "fixed" and reserve.value >= 0.0:
        held = 'balls are held (model = "fixed") and cannot leave their pockets'
        return unjudged(DOES_NOT_APPLY, held, [replace(reserve, limit=None)])
    return judged([reserve], s.scenario.limits.reserve, "; ".join([note, *_seat_notes(s)]))


def _smallest_reserve(s: Survey) -> Measure | None:
    """Smallest seat reserve of the run, over every inner step where it was kept."""
    gravity = s.scenario.frame.gravity
    common = {"what": "seat reserve", "unit": "m s-2", "limit": 0.0, "scale": gravity}
    extreme = s.extremes.get("seat_reserve")
    if extreme is not None and math.isfinite(extreme.value):
        return Measure(
            value=extreme.value, is_floor=True, time=extreme.time, place=extreme.place, **common
        )
    reserve = s.channel("balls/seat_reserve")
    if reserve is None or not np.isfinite(reserve).any():
        return None
    sample, slot = np.unravel_index(int(np.nanargmin(reserve)), reserve.shape)
    number = int(s["balls/number"][sample, slot])
    return Measure(
        value=float(reserve[sample, slot]),
        is_floor=True,
        time=float(s.time[sample]),
        place=f"ball {number}",
        **common,
    )


def _lost(s: Survey, note: str) -> Finding:
    """Finding of a run that lost balls: the first of them."""
    first = losses(s)[0]
    text = f"ball {first.ball} {first.fate}: {first.cause}"
    place = f"ball {first.ball} at ({1e3 * first.x:.0f}, {1e3 * first.y:.0f}) mm"
    return Finding(
        outcome=FAILS,
        unit="m s-2",
        limit=0.0,
        scale=s.scenario.frame.gravity,
        time=first.time if math.isfinite(first.time) else None,
        place=place if math.isfinite(first.x) else f"ball {first.ball}",
        note=f"{note}; first: {text}",
    )


def _loss_note(s: Survey, n_lost: int) -> str:
    """How many balls were lost of how many that ended, and what that says about the rate."""
    ended = [ball for ball in s.balls if ball.fate != "aboard"]
    if not ended:
        return "no ball has ended its ride yet"
    if n_lost == 0:
        bound = failure_bound(len(ended), CONFIDENCE)
        says = f"all {len(ended)} balls delivered; that allows a loss rate of up to {bound:.2g}"
    else:
        # One-sided bound at the stated confidence: upper end of a two-sided interval of 2c − 1.
        bound = share_interval(n_lost, len(ended), 2.0 * CONFIDENCE - 1.0).high
        says = f"{n_lost} of {len(ended)} balls lost; the loss rate is below {bound:.2g}"
    return f"{says} ({100 * CONFIDENCE:.0f} % confidence, one-sided)"


def _seat_notes(s: Survey) -> list[str]:
    """Play of the pockets and raw peak beside the reserve."""
    notes = []
    play = s.channel("balls/play")
    if play is not None and np.isfinite(play).any():
        widest = float(np.nanmax(play))
        if widest > UNSEATED_PLAY * s.scenario.balls.diameter:
            notes.append(f"optimistic: balls have {1e3 * widest:.1f} mm of play in their pockets")
    tilts = carrier_tilts(s)
    if tilts:
        worst = max(tilts, key=lambda tilt: abs(tilt.tilt))
        lean = f"{abs(math.degrees(worst.tilt)):.1f}° at {amount(worst.tension, 'N')}"
        notes.append(f"a loaded carrier leans by {lean} in the mean")
    raw = s.channel("balls/raw_peak")
    if raw is not None and np.isfinite(raw).any():
        notes.append(f"raw contact peak {float(np.nanmax(raw)):.0f} m/s², not judged")
    return notes


def rate_met(s: Survey) -> Finding:
    """Whether balls are delivered at the demanded rate.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: ``(n − 1)/(t_n − t_1)`` over the balls delivered in steady running [1/s]. Fails
        when more than one ball is short. Margin: rate at which pockets come by, less the
        demand; where it fails, of the delivered rate if that is less. Scale: the demand.
    """
    balls, demand = s.scenario.balls, s.scenario.limits.ball_rate
    if balls is None:
        return unjudged(DOES_NOT_APPLY, "the scenario has no balls")
    delivered = _deliveries(s)
    total = sum(len(times) for times, _ in delivered)
    if total < LEAST_DELIVERIES:
        note = f"{total} balls delivered in steady running, {LEAST_DELIVERIES} are needed"
        return unjudged(NOT_ENOUGH_DATA, note)
    time = sum(times[-1] - times[0] for times, _ in delivered)
    rate = sum(len(times) - 1 for times, _ in delivered) / time
    pockets = _pocket_rate(s)
    measure = Measure(what="ball rate", value=rate, unit="s-1", time=delivered[-1][0][-1])
    note = f"{total} balls delivered in steady running; pockets come by at {pockets:.3g} s-1"
    if demand is None:
        return unjudged(DOES_NOT_APPLY, f"no ball rate is demanded; {note}", [measure])
    short = max(math.floor(demand * (end - t[0]) + 1e-9) - (len(t) - 1) for t, end in delivered)
    has_failed = short > 1
    judged_rate = min(pockets, rate) if has_failed else pockets
    finding = judged(
        [replace(measure, value=judged_rate, limit=demand, is_floor=True, has_failed=has_failed)],
        s.scenario.limits.reserve,
        note + (f"; {short} balls short" if has_failed else ""),
    )
    return replace(finding, value=rate)


def _deliveries(s: Survey) -> list[tuple[list[float], float]]:
    """Times of the deliveries in each steady window, with the end of the window [s]."""
    ended = sorted(ball.end_time for ball in s.balls if ball.fate == "delivered")
    found = []
    for window in s.steady:
        first, last = s.time[window.start], s.time[window.stop - 1]
        times = [time for time in ended if first <= time <= last]
        if len(times) >= 2:
            found.append((times, float(last)))
    return found


def _pocket_rate(s: Survey) -> float:
    """Rate at which pockets for balls come by in steady running [1/s]."""
    links = s.channel("geometry/carrier_link")
    if links is None or not len(links):
        return math.nan
    apart = s.n_pins / len(links) * (s.scenario.balls.spacing or 1)
    return s.tooth_rate / apart


def ride_smooth(s: Survey) -> Finding:
    """Whether the ride is as smooth as the user asks.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Measured in steady running: chain speed ripple, peak lateral and longitudinal
        acceleration at the carried balls, each against its limit.
    """
    limits = s.scenario.limits
    speed = ripple(s)
    if speed is None:
        return unjudged(NOT_ENOUGH_DATA, "nothing ran steadily")
    measures = [
        Measure(
            what="chain speed ripple, peak to peak over mean",
            value=speed.peak_to_peak,
            unit="1",
            limit=limits.ripple,
            time=speed.time,
            place="carrying strand",
        )
    ]
    rides = ride(s)
    notes = []
    allowed = (limits.lateral_acceleration, limits.longitudinal_acceleration)
    for name, felt, limit in zip(("lateral", "longitudinal"), rides or (), allowed, strict=False):
        measures.append(
            Measure(
                what=f"peak {name} acceleration",
                value=felt.peak,
                unit="m s-2",
                limit=limit,
                time=felt.time,
                place=f"ball {felt.ball}",
            )
        )
        notes.append(f"{name} r.m.s. {amount(felt.rms, 'm s-2')}")
    if rides:
        notes.append(f"accelerations are means over {1e3 * s.interval:.3g} ms")
    return add_note(judged(measures, limits.reserve), "; ".join(notes))
