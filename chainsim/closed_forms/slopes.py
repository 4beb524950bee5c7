"""A ball in a groove, on a slope, and bouncing."""

from __future__ import annotations

import math
from typing import NamedTuple

SPHERE = 0.4
"""Moment of inertia of a solid sphere over `m r²` (dimensionless)."""


class Rolling(NamedTuple):
    """Motion of a round body down a slope.

    Attributes
    ----------
    rolls : bool
        Whether it rolls without slip.
    acceleration : float
        Acceleration down the slope [m/s2].
    spin_acceleration : float
        Angular acceleration [rad/s2].
    least_friction : float
        Friction coefficient from which on it rolls (dimensionless).
    """

    rolls: bool
    acceleration: float
    spin_acceleration: float
    least_friction: float


class Braking(NamedTuple):
    """A ball set sliding on a level floor, until it rolls.

    Attributes
    ----------
    speed : float
        Speed at which it rolls on [m/s].
    time : float
        Time until then [s].
    distance : float
        Way until then [m].
    """

    speed: float
    time: float
    distance: float


def groove_acceleration(wall_angle: float, gravity: float) -> float:
    """Sideways acceleration at which a ball leaves a V of two equal walls.

    Parameters
    ----------
    wall_angle : float
        Angle of both walls from the horizontal [rad].
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    float
        `g tan β` [m/s2], with any friction: the ball can roll up the loaded wall.
    """
    return gravity * math.tan(wall_angle)


def groove_forces(
    mass: float, wall_angle: float, acceleration: float, gravity: float
) -> tuple[float, float]:
    """Forces of both walls of a V on a ball without friction.

    Parameters
    ----------
    mass : float
        Mass of the ball [kg].
    wall_angle : float
        Angle of both walls from the horizontal [rad].
    acceleration : float
        Sideways acceleration of the V [m/s2].
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    tuple of float
        Force of the wall that pushes the ball along, and of the other one [N].
    """
    weight = gravity / math.cos(wall_angle)
    push = acceleration / math.sin(wall_angle)
    return 0.5 * mass * (weight + push), 0.5 * mass * (weight - push)


def groove_inertia(wall_angle: float) -> float:
    """Inertia factor of a ball that rolls along a V, on two walls at once.

    Parameters
    ----------
    wall_angle : float
        Angle of both walls from the horizontal [rad].

    Returns
    -------
    float
        `(2/5) / cos² β` (dimensionless), for `rolling`; 0.8 in a right-angled V, which gives
        the 5/9 of the textbooks.
    """
    return SPHERE / math.cos(wall_angle) ** 2


def rolling(
    slope: float, friction: float, radius: float, gravity: float, inertia: float = SPHERE
) -> Rolling:
    """Round body released on a slope.

    Parameters
    ----------
    slope : float
        Angle of the slope [rad].
    friction : float
        Friction coefficient (dimensionless).
    radius : float
        Radius of the body [m].
    gravity : float
        Acceleration of free fall [m/s2].
    inertia : float
        Moment of inertia over `m r²` (dimensionless): 2/5 for a solid sphere.

    Returns
    -------
    Rolling
        Its motion; at less friction than `least_friction` it slides.

    References
    ----------
    D. Halliday, R. Resnick and J. Walker, *Fundamentals of Physics*, rolling down a ramp (from
    memory).
    """
    pull = gravity * math.sin(slope)
    least = inertia / (1.0 + inertia) * math.tan(slope)
    if friction >= least:
        acceleration = pull / (1.0 + inertia)
        return Rolling(True, acceleration, acceleration / radius, least)
    drag = friction * gravity * math.cos(slope)
    return Rolling(False, pull - drag, drag / (inertia * radius), least)


def slide_to_roll(speed: float, friction: float, gravity: float) -> Braking:
    """Ball thrown flat onto a level floor without spin, until it rolls.

    Parameters
    ----------
    speed : float
        Speed at the start [m/s].
    friction : float
        Friction coefficient (dimensionless), greater than zero.
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    Braking
        5/7 of the speed is left; 2/7 of the energy is lost.

    References
    ----------
    Billiard ball of the textbooks, e.g. A. P. Arya, *Introduction to Classical Mechanics*
    (from memory).
    """
    drag = friction * gravity
    return Braking(5.0 / 7.0 * speed, 2.0 / 7.0 * speed / drag, 12.0 / 49.0 * speed**2 / drag)


def bouncing_time(height: float, restitution: float, gravity: float) -> float:
    """Time until a dropped ball has stopped bouncing.

    Parameters
    ----------
    height : float
        Height of the drop [m].
    restitution : float
        Coefficient of restitution (dimensionless), below 1.
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    float
        `sqrt(2 h/g) (1 + e)/(1 − e)` [s].
    """
    return math.sqrt(2.0 * height / gravity) * (1.0 + restitution) / (1.0 - restitution)


def bounce_height(height: float, restitution: float, bounce: int) -> float:
    """Height that a dropped ball reaches after a number of bounces.

    Parameters
    ----------
    height : float
        Height of the drop [m].
    restitution : float
        Coefficient of restitution (dimensionless).
    bounce : int
        How many bounces (dimensionless).

    Returns
    -------
    float
        `h e^(2n)` [m].
    """
    return height * restitution ** (2 * bounce)
