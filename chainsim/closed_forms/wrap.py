"""Tension of a chain on its way round a wheel."""

from __future__ import annotations

import math

from chainsim.errors import CallError


def tooth_tension_ratio(teeth: int, pressure_angle: float, friction: float = 0.0) -> float:
    """Share of the tension that is left behind each seated pin.

    After `k` seated pins, counted from the tight side, the tension is `T0` times the ratio to
    the power `k`. (Some texts count the strand itself as tooth 1 and write `k − 1`.)

    Parameters
    ----------
    teeth : int
        Number of teeth (dimensionless).
    pressure_angle : float
        Angle between the pull and the normal of the flank [rad].
    friction : float
        Friction coefficient of pin on flank (dimensionless). Positive where it helps the
        teeth to hold the chain, negative where it helps the chain to climb.

    Returns
    -------
    float
        `sin φ / sin(φ + 2π/z)`, with φ less (climbing: more) by the friction angle
        (dimensionless).

    Raises
    ------
    CallError
        If friction alone holds the pin, so that no ratio exists.

    References
    ----------
    Rigid chain on a rigid sprocket: M. R. Naji and K. M. Marshek, "Analysis of roller chain
    sprocket pressure angles", *Mechanism and Machine Theory* 18(5), 1983 (abstract read, law
    from memory).
    """
    angle = pressure_angle - math.atan(friction)
    if angle <= 0.0:
        raise CallError(
            f"friction {friction:g} holds a pin on a flank of {math.degrees(pressure_angle):.1f}° "
            "by itself: there is no tension ratio"
        )
    return math.sin(angle) / math.sin(angle + 2.0 * math.pi / teeth)


def tooth_force_ratio(teeth: int, pressure_angle: float) -> float:
    """Force of a tooth on its pin over the tension before that pin, no friction.

    Parameters
    ----------
    teeth : int
        Number of teeth (dimensionless).
    pressure_angle : float
        Angle between the pull and the normal of the flank [rad].

    Returns
    -------
    float
        `sin(2π/z) / sin(φ + 2π/z)` (dimensionless).
    """
    turn = 2.0 * math.pi / teeth
    return math.sin(turn) / math.sin(pressure_angle + turn)


def back_tension(
    tight_tension: float, seated_pins: float, teeth: int, pressure_angle: float
) -> float:
    """Least tension on the slack side that keeps a chain from climbing its teeth.

    Parameters
    ----------
    tight_tension : float
        Tension on the tight side [N].
    seated_pins : float
        Number of pins in their seats (dimensionless), half the teeth for half a wrap.
    teeth : int
        Number of teeth (dimensionless).
    pressure_angle : float
        Angle between the pull and the normal of the flank [rad].

    Returns
    -------
    float
        Tension needed on the slack side [N].
    """
    return tight_tension * tooth_tension_ratio(teeth, pressure_angle) ** seated_pins


def capstan_ratio(friction: float, wrap_angle: float) -> float:
    """Ratio of the tensions on a smooth drum at the limit of slip.

    Parameters
    ----------
    friction : float
        Friction coefficient (dimensionless).
    wrap_angle : float
        Angle of the wrap [rad].

    Returns
    -------
    float
        Larger over smaller tension (dimensionless).

    References
    ----------
    Euler–Eytelwein (capstan) equation, `exp(μ φ)`.
    """
    return math.exp(friction * wrap_angle)


def polygon_capstan_ratio(friction: float, teeth: int, corners: float) -> float:
    """Ratio of the tensions over a dragging polygon at the limit of slip.

    Each corner turns the chain by 2π/z and drags along the bisector's normal.

    Parameters
    ----------
    friction : float
        Friction coefficient at each corner (dimensionless).
    teeth : int
        Corners of the whole polygon (dimensionless).
    corners : float
        Corners in the wrap (dimensionless), half of them for half a wrap.

    Returns
    -------
    float
        Larger over smaller tension (dimensionless).

    Notes
    -----
    Force balance along and across the bisector of one corner gives
    `(1 + μ tan(π/z)) / (1 − μ tan(π/z))`; for many corners it tends to the capstan equation.
    """
    drag = friction * math.tan(math.pi / teeth)
    return ((1.0 + drag) / (1.0 - drag)) ** corners


def bisector_pin_force(tension: float, teeth: int) -> float:
    """Force on a pin of a wrap without friction, along the bisector of its corner.

    Parameters
    ----------
    tension : float
        Tension of the chain [N].
    teeth : int
        Corners of the whole polygon (dimensionless).

    Returns
    -------
    float
        `2 T sin(π/z)` [N].
    """
    return 2.0 * tension * math.sin(math.pi / teeth)


def centrifugal_tension(mass_per_length: float, speed: float) -> float:
    """Tension that the speed alone puts into a moving chain, everywhere alike.

    Parameters
    ----------
    mass_per_length : float
        Mass of the chain per length [kg/m].
    speed : float
        Speed of the chain; of the pins, where it runs round a polygon [m/s].

    Returns
    -------
    float
        `m v²` [N]; exact for a spinning ring of point masses with the pin speed.

    References
    ----------
    *Shigley's Mechanical Engineering Design*, section on belts: hoop tension (from memory).
    """
    return mass_per_length * speed**2
