"""Work of the drive for each delivered ball, against the lifting of its weight."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.survey import survey


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


def efficiency(rec: Any) -> Efficiency | None:
    """Efficiency of the lift over whole ball cycles in steady running.

    Counted from the first to the last delivery in the longest steady window, so that as many
    balls are aboard at the end as at the beginning when they ride at even distances. Held balls
    rise from ``load_at`` to ``unload_at``.

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
    known = [rise for rise in rises if np.isfinite(rise)]
    rise = float(np.mean(known)) if known else s.scenario.balls.unload_at - s.scenario.balls.load_at
    lift = s.scenario.balls.mass * s.scenario.frame.gravity * rise
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
    slots = np.flatnonzero(s["balls/number"][sample] == ball.number)
    if not slots.size:
        return float("nan")
    return float(ball.end_y - s["balls/position"][sample, slots[0], 1])
