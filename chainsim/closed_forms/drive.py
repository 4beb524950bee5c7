"""Motor, gear and what they have to lift."""

from __future__ import annotations

import math
from typing import NamedTuple


class BestPoint(NamedTuple):
    """Point of best efficiency of a motor.

    Attributes
    ----------
    efficiency : float
        Mechanical over electrical power (dimensionless).
    current : float
        Current at that point [A].
    """

    efficiency: float
    current: float


def motor_speed(torque: float, no_load_speed: float, stall_torque: float) -> float:
    """Speed of a motor under a steady torque.

    Parameters
    ----------
    torque : float
        Torque at the motor's shaft [N m].
    no_load_speed : float
        Speed without load [rad/s].
    stall_torque : float
        Torque at which it stands still [N m].

    Returns
    -------
    float
        `ω₀ (1 − T/Ts)` [rad/s].

    References
    ----------
    Line between no-load and stall of a permanent-magnet motor: any text on electric drives
    (from memory).
    """
    return no_load_speed * (1.0 - torque / stall_torque)


def motor_peak_power(no_load_speed: float, stall_torque: float) -> float:
    """Largest mechanical power of a motor, at half its no-load speed.

    Parameters
    ----------
    no_load_speed : float
        Speed without load [rad/s].
    stall_torque : float
        Torque at which it stands still [N m].

    Returns
    -------
    float
        `Ts ω₀ / 4` [W].
    """
    return 0.25 * stall_torque * no_load_speed


def motor_current(
    torque: float, stall_torque: float, no_load_current: float, stall_current: float
) -> float:
    """Current of a motor under a steady torque.

    Parameters
    ----------
    torque : float
        Torque at the motor's shaft [N m].
    stall_torque : float
        Torque at which it stands still [N m].
    no_load_current, stall_current : float
        Current without load, and standing still [A].

    Returns
    -------
    float
        Current [A], a line between both.
    """
    return no_load_current + (stall_current - no_load_current) * torque / stall_torque


def motor_best_point(no_load_current: float, stall_current: float) -> BestPoint:
    """Best efficiency that a motor can reach.

    Parameters
    ----------
    no_load_current, stall_current : float
        Current without load, and standing still [A].

    Returns
    -------
    BestPoint
        `(1 − sqrt(I0/Is))²` at the current `sqrt(I0 Is)`.

    References
    ----------
    Handbooks of motor makers (from memory).
    """
    return BestPoint(
        (1.0 - math.sqrt(no_load_current / stall_current)) ** 2,
        math.sqrt(no_load_current * stall_current),
    )


def worm_efficiency(lead_angle: float, friction: float, pressure_angle: float) -> float:
    """Efficiency of a worm gear whose worm drives.

    Parameters
    ----------
    lead_angle : float
        Lead angle of the worm [rad].
    friction : float
        Friction coefficient (dimensionless).
    pressure_angle : float
        Normal pressure angle [rad].

    Returns
    -------
    float
        Efficiency (dimensionless).

    References
    ----------
    *Mechanical Engineer's Data Handbook*, section 2.10.6, p. 99.
    """
    cosine = math.cos(pressure_angle)
    return (cosine - friction * math.tan(lead_angle)) / (cosine + friction / math.tan(lead_angle))


def worm_back_efficiency(lead_angle: float, friction: float, pressure_angle: float) -> float:
    """Efficiency of a worm gear whose wheel drives; it locks where this is not positive.

    Parameters
    ----------
    lead_angle : float
        Lead angle of the worm [rad].
    friction : float
        Friction coefficient (dimensionless).
    pressure_angle : float
        Normal pressure angle [rad].

    Returns
    -------
    float
        Efficiency (dimensionless); negative where the worm has to be helped.
    """
    cosine = math.cos(pressure_angle)
    return (cosine - friction / math.tan(lead_angle)) / (cosine + friction * math.tan(lead_angle))


def worm_lock_angle(friction: float, pressure_angle: float) -> float:
    """Lead angle up to which a worm gear cannot be driven from its wheel.

    Parameters
    ----------
    friction : float
        Friction coefficient (dimensionless).
    pressure_angle : float
        Normal pressure angle [rad].

    Returns
    -------
    float
        `atan(μ / cos α)` [rad]. Vibration can unlock a worm near it.
    """
    return math.atan(friction / math.cos(pressure_angle))


def lifting_power(ball_rate: float, ball_mass: float, height: float, gravity: float) -> float:
    """Power that goes into lifting the balls.

    Parameters
    ----------
    ball_rate : float
        Balls lifted in a second [1/s].
    ball_mass : float
        Mass of a ball [kg].
    height : float
        Rise from pick-up to discharge [m].
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    float
        Power [W]; over the efficiency it is the supply power.
    """
    return ball_rate * ball_mass * gravity * height
