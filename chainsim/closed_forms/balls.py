"""A ball behind the lip of its pocket, and on its flight into the chute."""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.errors import CallError


class SpeedWindow(NamedTuple):
    """Speeds at which a ball flies into a mouth.

    Attributes
    ----------
    low, high : float
        Slowest and fastest speed at the start of the flight [m/s].
    """

    low: float
    high: float


def lip_angle(ball_radius: float, lip_height: float, lip_radius: float = 0.0) -> float:
    """Angle from the vertical of the line from lip to ball, for a ball that touches both.

    Parameters
    ----------
    ball_radius : float
        Radius of the ball [m].
    lip_height : float
        Height of the lip above the floor of the pocket [m].
    lip_radius : float
        Rounding of the lip [m].

    Returns
    -------
    float
        `acos((r − h + ρ) / (r + ρ))` [rad].

    Raises
    ------
    CallError
        If the lip is not lower than the ball's center, so that no edge holds it.
    """
    if not 0.0 <= lip_height < ball_radius:
        raise CallError(
            f"a lip of {lip_height:g} m is no edge for a ball of radius {ball_radius:g} m: "
            "it has to end between its floor and its center"
        )
    return math.acos((ball_radius - lip_height + lip_radius) / (ball_radius + lip_radius))


def lip_acceleration(
    ball_radius: float,
    lip_height: float,
    gravity: float,
    lip_radius: float = 0.0,
    floor_tilt: float = 0.0,
    lifting_acceleration: float = 0.0,
) -> float:
    """Sideways acceleration at which a seated ball turns over the lip of its pocket.

    Parameters
    ----------
    ball_radius : float
        Radius of the ball [m].
    lip_height : float
        Height of the lip above the floor of the pocket [m], across the floor.
    gravity : float
        Acceleration of free fall [m/s2].
    lip_radius : float
        Rounding of the lip [m].
    floor_tilt : float
        Tilt of the pocket, positive where it raises the lip [rad].
    lifting_acceleration : float
        Upward acceleration of the pocket [m/s2].

    Returns
    -------
    float
        `(g + A) tan(θ + tilt)` [m/s2]; infinite where the lip leans over the ball.

    References
    ----------
    Moment about the edge of a step: D. C. Giancoli, *Physics*, statics, wheel on a curb,
    `F = M g sqrt(h (2 R − h)) / (R − h)` (from memory). The ball touches the lip already, and
    the acceleration grows slowly; a ball with play reaches the lip with speed and leaves
    earlier.
    """
    angle = lip_angle(ball_radius, lip_height, lip_radius) + floor_tilt
    if angle >= 0.5 * math.pi:
        return math.inf
    return (gravity + lifting_acceleration) * math.tan(angle)


def discharge_speeds(
    distance: float, highest: float, lowest: float, gravity: float, launch_angle: float = 0.0
) -> SpeedWindow:
    """Speeds at which a ball that flies off the head enters the mouth of a chute.

    Parameters
    ----------
    distance : float
        Horizontal distance from the start of the flight to the mouth [m].
    highest, lowest : float
        Heights of the ball's center, against its start, at which it clears the upper and the
        lower edge of the mouth [m]; negative below the start.
    gravity : float
        Acceleration of free fall [m/s2].
    launch_angle : float
        Direction at the start, positive upward from the horizontal [rad].

    Returns
    -------
    SpeedWindow
        `high` is infinite where a straight flight still enters.

    Raises
    ------
    CallError
        If no speed carries the ball there, or the mouth is no higher than the ball.

    Notes
    -----
    Ballistic flight `y = x tan α − g x² / (2 v² cos² α)`, solved for the speed; air and spin
    play no part over such distances.
    """
    if highest <= lowest:
        raise CallError("the mouth is too low for the ball: its center has no way through")
    aimed = distance * math.tan(launch_angle)

    def speed(height: float) -> float:
        drop = aimed - height
        if drop <= 0.0:
            return math.inf
        return distance / math.cos(launch_angle) * math.sqrt(0.5 * gravity / drop)

    low = speed(lowest)
    if math.isinf(low):
        raise CallError("the mouth lies above every flight in this direction")
    return SpeedWindow(low, speed(highest))
