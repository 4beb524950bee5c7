"""What the drive does: torque, power, speed under load, run-back, efficiency of the lift."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.series import longest_run, trailing_mean
from chainsim.analysis.steady import kind_word
from chainsim.analysis.survey import Survey, survey

STALLED_SHARE = 0.05
"""A drive slower than this share of its set speed stands still [dimensionless]."""

STALL_TIME = 0.25
"""How long it may stand before it counts as stalled [s]; longer than a jam's first shock."""

SUPPLY_EVENTS = ("supply_cut", "supply_reversed", "stop")
"""Events after which a lift may run back."""


class Duty(NamedTuple):
    """Load on the drive, at the driven sprocket.

    Attributes
    ----------
    peak_torque : float
        Largest magnitude of the sample means, whole run [N m].
    peak_time : float
        When it was reached [s].
    rms_torque : float
        Root mean square in steady running [N m]; NaN where there was none.
    mean_torque : float
        Mean in steady running [N m]; NaN where there was none.
    mean_power : float
        Mean mechanical power in steady running [W]; NaN where there was none.
    """

    peak_torque: float
    peak_time: float
    rms_torque: float
    mean_torque: float
    mean_power: float


class Droop(NamedTuple):
    """Loss of speed under load in steady running.

    Attributes
    ----------
    share : float
        Largest loss of the speed averaged over a tooth passage, as a share of the set speed.
    time : float
        When it was reached [s].
    """

    share: float
    time: float


class RunBack(NamedTuple):
    """How far the driven sprocket turned back after a stop, a cut or a reversal.

    Attributes
    ----------
    distance : float
        Chain length that ran back [m].
    time : float
        When it was furthest back [s].
    cause : str
        Kind of the event before it; empty where there was none.
    """

    distance: float
    time: float
    cause: str


class Overrun(NamedTuple):
    """How far the chain ran on after a stop or a cut.

    Attributes
    ----------
    distance : float
        Chain length from the event to the furthest point [m].
    time : float
        When it was furthest [s].
    cause : str
        Kind of the event.
    """

    distance: float
    time: float
    cause: str


class Efficiency(NamedTuple):
    """Work of the drive for each delivered ball, against the lifting of its weight.

    Attributes
    ----------
    work_per_ball : float
        Work of the drive between the first and the last delivery, per ball [J].
    lift_work_per_ball : float
        Weight times rise of a ball [J].
    efficiency : float
        Second over first [dimensionless].
    n_balls : int
        Balls delivered after the first of them [dimensionless].
    """

    work_per_ball: float
    lift_work_per_ball: float
    efficiency: float
    n_balls: int


def duty(rec: Any) -> Duty:
    """Torque and power of the drive.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Duty
        At the driven sprocket; peaks between samples are missed.
    """
    s = survey(rec)
    torque = np.asarray(s.rec["drive/torque"], dtype=float)
    peak = int(np.argmax(np.abs(torque)))
    steady = torque[s.is_steady]
    power = s.channel("drive/power")
    nothing = float("nan")
    return Duty(
        float(abs(torque[peak])),
        float(s.time[peak]),
        float(np.sqrt(np.mean(steady**2))) if steady.size else nothing,
        float(steady.mean()) if steady.size else nothing,
        float(power[s.is_steady].mean()) if steady.size and power is not None else nothing,
    )


def droop(rec: Any) -> Droop | None:
    """Loss of speed under load, against the recorded set speed.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Droop or None
        None where nothing ran steadily, or no set speed is known.
    """
    s = survey(rec)
    wanted = s.channel("drive/set_speed")
    if wanted is None or not s.steady:
        return None
    speed = trailing_mean(s.drive_speed, s.tooth_samples)
    with np.errstate(invalid="ignore", divide="ignore"):
        loss = np.where(s.is_steady & (wanted > 0.0), 1.0 - speed / wanted, np.nan)
    if not np.isfinite(loss).any():
        return None
    worst = int(np.nanargmax(loss))
    return Droop(float(loss[worst]), float(s.time[worst]))


def stall(rec: Any) -> tuple[float, float]:
    """Longest time that the drive stood although it should have turned.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    start, duration : float
        When it began and how long it lasted [s]; duration 0 where it never stood, and NaN for
        the start. A start from rest is not counted while its ramp lasts.
    """
    s = survey(rec)
    wanted = s.channel("drive/set_speed")
    if wanted is None:
        return float("nan"), 0.0
    full = float(np.nanmax(np.abs(wanted), initial=0.0))
    stands = np.abs(s.drive_speed) < STALLED_SHARE * full
    stands &= np.abs(np.nan_to_num(wanted)) > 2.0 * STALLED_SHARE * full
    start, length = longest_run(stands)
    return (float(s.time[start]), length * s.interval) if length else (float("nan"), 0.0)


def chain_travel(rec: Any) -> np.ndarray:
    """Travel of the chain by the angle of the driven sprocket.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    ndarray, shape (n_samples,)
        Travel since the first sample [m], positive forward; a skipped tooth is not in it.
    """
    s = survey(rec)
    driven = s.sprocket_names.index(s.scenario.drive.sprocket)
    angle = np.asarray(s.rec["sprockets/angle"], dtype=float)[:, driven]
    arc = s.teeth[driven] * s.pitch / (2.0 * np.pi) if s.teeth[driven] else s.seat_radius[driven]
    return s.side[driven] * (angle - angle[0]) * arc


def run_back(rec: Any) -> RunBack:
    """How far the lift ran back after a stop, a cut or a reversal of the supply.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    RunBack
        The worst case; distance 0 where it never ran back. A lift that is *driven* backward
        after a reversal is counted too: it carries its balls down.
    """
    s = survey(rec)
    travel, worst = chain_travel(s), RunBack(0.0, float("nan"), "")
    for kind, start, stop in _after_events(s):
        piece = travel[start:stop]
        back = np.maximum.accumulate(piece) - piece
        furthest = int(np.argmax(back))
        if back[furthest] > worst.distance:
            worst = RunBack(float(back[furthest]), float(s.time[start + furthest]), kind)
    return worst


def overrun(rec: Any) -> Overrun | None:
    """How far the chain ran on after a stop or a cut of the supply.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Overrun or None
        The longest; None where nothing was stopped. A stop includes its ramp.
    """
    s = survey(rec)
    travel, worst = chain_travel(s), None
    for kind, start, stop in _after_events(s):
        if kind == "supply_reversed":
            continue
        furthest = int(np.argmax(travel[start:stop]))
        distance = float(travel[start + furthest] - travel[start])
        if worst is None or distance > worst.distance:
            worst = Overrun(distance, float(s.time[start + furthest]), kind)
    return worst


def _after_events(s: Survey) -> list[tuple[str, int, int]]:
    """Stretches from each stop, cut or reversal to the next start: kind, first, last sample."""
    events = event_times(s)
    starts = [time for kind, time in events if kind in ("start", "restart")]
    stretches = []
    for kind, time in events:
        if kind in SUPPLY_EVENTS:
            end = min((other for other in starts if other > time), default=np.inf)
            first = int(np.searchsorted(s.time, time))
            last = int(np.searchsorted(s.time, end))
            if last - first >= 2:
                stretches.append((kind, first, last))
    return stretches


def event_times(rec: Any) -> list[tuple[str, float]]:
    """Everything that was done to the lift, by the scenario or as the run logged it.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    list of (str, float)
        Kind as one lower-case word, and time [s], in the order of time; only what lies within
        the recorded time.
    """
    s = survey(rec)
    end = float(s.time[-1]) if len(s.time) else -np.inf
    events = {(kind_word(event.kind), round(float(event.time), 6)) for event in s.events}
    events |= {(kind_word(event.kind), round(float(event.at), 6)) for event in s.scenario.event}
    return sorted((event for event in events if event[1] <= end), key=lambda event: event[1])


def efficiency(rec: Any) -> Efficiency | None:
    """Efficiency of the lift over whole ball cycles in steady running.

    Counted from the first to the last delivery in the longest steady window, so that as many
    balls are aboard at the end as at the beginning when they ride at even distances.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Efficiency or None
        None with fewer than two deliveries in steady running.
    """
    s = survey(rec)
    work = s.channel("energy/work_drive")
    if work is None or not s.steady or s.scenario.balls is None:
        return None
    window = max(s.steady, key=lambda w: w.stop - w.start)
    first, last = s.time[window.start], s.time[window.stop - 1]
    ended = [
        (ball.end_time, ball)
        for ball in s.balls
        if ball.fate == "delivered" and first <= ball.end_time <= last
    ]
    ended.sort(key=lambda row: row[0])
    if len(ended) < 2:
        return None
    done = np.interp([ended[0][0], ended[-1][0]], s.time, work)
    rises = [lift_height(s, ball) for _, ball in ended[1:]]
    weight = s.scenario.balls.mass * s.scenario.frame.gravity
    lift = weight * float(np.nanmean(rises))
    per_ball = float(done[1] - done[0]) / (len(ended) - 1)
    return Efficiency(per_ball, lift, lift / per_ball if per_ball > 0 else np.nan, len(ended) - 1)


def lift_height(rec: Any, ball: Any) -> float:
    """Rise of one ball from where it was seated to where it left the lift.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    ball : BallRow
        Its row of the table of balls.

    Returns
    -------
    float
        Rise [m]; NaN where one of the two places is not known. The frame's tilt is left out:
        gravity pulls straight down and y is up.
    """
    s = survey(rec)
    sample = int(np.searchsorted(s.time, ball.seated_time))
    if not np.isfinite(ball.seated_time) or sample >= len(s.time):
        return float("nan")
    slots = np.flatnonzero(np.asarray(s.rec["balls/number"])[sample] == ball.number)
    if not slots.size:
        return float("nan")
    return float(ball.end_y - np.asarray(s.rec["balls/position"])[sample, slots[0], 1])
