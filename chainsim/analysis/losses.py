"""Lost balls: what happened in the half second before, and the most likely cause."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.carried import carried_balls
from chainsim.analysis.chain_motion import chain_speed
from chainsim.analysis.stops import event_times
from chainsim.analysis.survey import Survey, survey
from chainsim.analysis.tilt import ball_link_lean

KEPT_FATES = frozenset({"delivered", "aboard"})
"""Fates of balls that were not lost."""

NEEDED = (
    "pins/position", "pins/velocity", "links/tension", "balls/number", "balls/pocket",
    "balls/acceleration", "balls/seat_reserve",
)  # fmt: skip
"""Channels without which nothing is known of the time before a loss."""

BEFORE = 0.5
"""Time before a loss that is looked at [s]."""

TIPPED = np.radians(15.0)
"""Lean of a carrier's link that a shallow pocket does not forgive [rad]; our own choice."""

UNEVEN = 0.5
"""Change of the chain speed, as a share of its mean, that is named as a cause; our own choice."""

CAUSED_BY = {
    "knock": "a knock on the frame",
    "jam": "a jam",
    "supply_cut": "the supply was cut",
    "supply_reversed": "the supply was reversed",
    "stop": "the lift was stopping",
    "start": "the lift was starting",
    "restart": "the lift was starting again",
    "takeup_blocked": "the take-up was blocked",
    "double_ball": "two balls in one pocket",
    "tooth_skipped": "the chain skipped a tooth",
    "skip": "the chain skipped a tooth",
}
"""Events that explain a loss shortly after them, in words."""


class Loss(NamedTuple):
    """One lost ball and the half second before it left its pocket.

    Attributes
    ----------
    ball : int
        Its number [dimensionless].
    fate : str
        What became of it.
    time : float
        When it left its pocket, or ended where it never sat in one [s].
    x, y : float
        Where it was then [m].
    pocket : int
        Index of its carrier [dimensionless], −1 for none.
    speed_least, speed_most : float
        Range of the chain speed [m/s].
    lean : float
        Largest lean of its link from the strand, either way [rad]; NaN off the carrying strands.
    tension_least : float
        Least tension of the link below its carrier [N].
    lateral_peak : float
        Largest lateral acceleration it felt [m s-2].
    reserve_least : float
        Least seat reserve [m s-2].
    cause : str
        Most likely cause, in words.
    """

    ball: int
    fate: str
    time: float
    x: float
    y: float
    pocket: int
    speed_least: float
    speed_most: float
    lean: float
    tension_least: float
    lateral_peak: float
    reserve_least: float
    cause: str


def is_lost(fate: str) -> bool:
    """Whether a fate is a loss: any but delivered or aboard.

    Parameters
    ----------
    fate : str
        What became of a ball.

    Returns
    -------
    bool
        True for a loss.
    """
    return fate not in KEPT_FATES


def losses(rec: Any) -> list[Loss]:
    """All lost balls, in the order in which they left their pockets.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    list of Loss
        Empty where none was lost. Peaks between samples are missed, except the seat reserve,
        which is the least of each interval.
    """
    s = survey(rec)
    lost = [ball for ball in s.balls if is_lost(ball.fate)]
    return sorted((_loss(s, ball) for ball in lost), key=_when)


def _when(loss: Loss) -> float:
    """Time of a loss [s]; last where it is not known."""
    return loss.time if np.isfinite(loss.time) else np.inf


def _loss(s: Survey, ball: Any) -> Loss:
    """What happened to one lost ball."""
    carried = _last_ride(s, ball.number)
    if carried is None:
        cause = ball.cause or _cause_without_seat(ball.fate)
        nothing = float("nan")
        return Loss(
            ball.number, ball.fate, float(ball.end_time), float(ball.end_x), float(ball.end_y),
            int(ball.pocket), nothing, nothing, nothing, nothing, nothing, nothing, cause,
        )  # fmt: skip
    samples, slot = carried
    pocket = int(s["balls/pocket"][samples[-1], slot])
    link = int(s["geometry/carrier_link"][pocket]) if pocket >= 0 else 0
    x, y = s["balls/position"][samples[-1], slot]
    speed = chain_speed(s)[samples]
    lean = np.abs(ball_link_lean(s)[samples, slot])
    loss = Loss(
        ball.number,
        ball.fate,
        float(s.time[samples[-1]]),
        float(x),
        float(y),
        pocket,
        _least(speed),
        -_least(-speed),
        -_least(-lean),
        _least(s.tension[samples, (link - 1) % s.n_pins]),
        -_least(-np.abs(s["balls/acceleration"][samples, slot, 0])),
        _least(s["balls/seat_reserve"][samples, slot]),
        "",
    )
    return loss._replace(cause=ball.cause or likely_cause(s, loss, link))


def _least(values: np.ndarray) -> float:
    """Least of the known values, in their unit; NaN where there is none."""
    known = values[np.isfinite(values)]
    return float(known.min()) if known.size else float("nan")


def _last_ride(s: Survey, number: int) -> tuple[np.ndarray, int] | None:
    """Samples of the half second before a ball was last seated, and its slot."""
    if not s.has(*NEEDED):
        return None
    rode = (s["balls/number"] == number) & carried_balls(s)
    samples, slots = np.nonzero(rode)
    if not samples.size:
        return None
    near = s.time[samples] >= s.time[samples[-1]] - BEFORE
    return samples[near & (slots == slots[-1])], int(slots[-1])


def _cause_without_seat(fate: str) -> str:
    """Cause for a ball that never sat in a pocket."""
    if fate == "missed the pocket":
        return "it met no pocket, or came too fast to stay in it"
    return "it never came to rest in a pocket"


def likely_cause(rec: Any, loss: Loss, link: int) -> str:
    """Most likely cause of a loss, in words.

    In this order: an event within the half second before; a strand that went slack below the
    carrier; a link that leaned far; a pocket on a wrap, which throws its ball outward; an
    uneven chain speed; else the plain acceleration.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    loss : Loss
        The loss, its cause not yet known.
    link : int
        Link of its carrier [dimensionless].

    Returns
    -------
    str
        A few words.
    """
    s = survey(rec)
    for kind, time in reversed(event_times(s)):
        if loss.time - BEFORE <= time <= loss.time and kind in CAUSED_BY:
            return CAUSED_BY[kind]
    if loss.fate == "carried over":
        return "it did not roll out at the discharge and rode down the return side"
    if loss.fate == "outside the mouth":
        return "it left the pocket at the head beside the mouth of the chute"
    sample = int(np.argmin(np.abs(s.time - loss.time)))
    on = next((k for k in range(len(s.side)) if _is_on(s, k, sample, link)), None)
    if loss.tension_least <= s.scenario.limits.slack_tension:
        return "the strand went slack below its carrier"
    if loss.lean >= TIPPED:
        return f"its carrier leaned by {np.degrees(loss.lean):.0f}°"
    if on is not None:
        return f"it was thrown outward on the {s.sprocket_names[on]} sprocket"
    if loss.speed_most - loss.speed_least > UNEVEN * abs(loss.speed_most + loss.speed_least) / 2.0:
        return "the chain speed changed too fast"
    return "the ride was too rough for its pocket"


def _is_on(s: Survey, sprocket: int, sample: int, link: int) -> bool:
    """Whether a link lies on a sprocket at one sample."""
    entry, leave = int(s.wraps.entry[sample, sprocket]), int(s.wraps.leave[sample, sprocket])
    return entry >= 0 and (link - entry) % s.n_pins < (leave - entry) % s.n_pins
