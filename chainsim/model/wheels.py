"""The wheels of a scenario: as the route sees them, and the outlines of their teeth."""

from __future__ import annotations

import math

from chainsim.closed_forms import pitch_radius
from chainsim.model.tangents import Wheel
from chainsim.model.tooth import ToothForm, tooth_form
from chainsim.scenario import Scenario

SIDES = {"inside": 1, "outside": -1}


def down_of(scenario: Scenario) -> tuple[float, float]:
    """Return the direction of gravity in the frame of the lift.

    Parameters
    ----------
    scenario : Scenario
        Its `frame.tilt` turns the lift counterclockwise, and gravity stays.

    Returns
    -------
    tuple of float, shape (2,)
        Unit vector (dimensionless).
    """
    return -math.sin(scenario.frame.tilt), -math.cos(scenario.frame.tilt)


def chain_pitch(scenario: Scenario) -> float:
    """Return the pitch of the chain as it runs, growth included [m].

    Parameters
    ----------
    scenario : Scenario
        Its `chain.pitch` and `chain.growth`.

    Returns
    -------
    float
        Pitch [m].
    """
    return scenario.chain.pitch * (1.0 + scenario.chain.growth)


def wheels_of(scenario: Scenario) -> tuple[Wheel, ...]:
    """Return the wheels in the order of travel, screwed axles set, movable ones free to shift.

    Parameters
    ----------
    scenario : Scenario
        Its sprockets with their mounts.

    Returns
    -------
    tuple of Wheel
        One for each sprocket.
    """
    return tuple(_wheel(scenario, sprocket) for sprocket in scenario.sprocket)


def teeth_of(scenario: Scenario) -> tuple[ToothForm | None, ...]:
    """Return the tooth form of every sprocket, None for smooth rollers.

    Parameters
    ----------
    scenario : Scenario
        Its sprockets and the chain's roller.

    Returns
    -------
    tuple of ToothForm or None
        In the order of travel.

    Raises
    ------
    LayoutError
        If a form is impossible or would be hit by arriving pins.
    """
    chain = scenario.chain
    return tuple(
        tooth_form(
            sprocket.teeth,
            sprocket.pitch or chain.pitch,
            chain.roller_diameter,
            chain_pitch=chain_pitch(scenario),
            height=sprocket.tooth.height,
            pressure_angle=sprocket.tooth.pressure_angle,
            seat_clearance=sprocket.tooth.seat_clearance,
            tip_radius=sprocket.tooth.tip_radius,
            name=sprocket.name,
        )
        if sprocket.teeth
        else None
        for sprocket in scenario.sprocket
    )


def _wheel(scenario: Scenario, sprocket) -> Wheel:
    mount, center = sprocket.mount, tuple(sprocket.center)
    if mount.kind == "screwed":
        center = tuple(c + mount.shift * a for c, a in zip(center, mount.axis, strict=True))
    movable, pivot = _way_of(mount, center)
    return Wheel(
        name=sprocket.name,
        center=(float(center[0]), float(center[1])),
        radius=_pin_circle(scenario, sprocket),
        teeth=sprocket.teeth,
        side=SIDES[sprocket.side],
        phase=sprocket.phase,
        movable=movable,
        pivot=pivot,
    )


def _pin_circle(scenario: Scenario, sprocket) -> float:
    """Return the radius of the circle through pins that lie on the wheel [m]."""
    if sprocket.teeth:
        return pitch_radius(sprocket.pitch or scenario.chain.pitch, sprocket.teeth)
    return sprocket.roller_radius + 0.5 * scenario.chain.roller_diameter


def _way_of(
    mount, center: tuple[float, ...]
) -> tuple[tuple[float, float] | None, tuple[float, float] | None]:
    """Return the direction in which an axle may move (dimensionless) and its pivot [m]."""
    if mount.kind in ("sliding", "spring", "counterweight"):
        return tuple(mount.axis), None
    if mount.kind == "hung":
        return (0.0, 1.0), None
    if mount.kind == "arm":
        arm = center[0] - mount.pivot[0], center[1] - mount.pivot[1]
        reach = math.hypot(*arm)
        return (-arm[1] / reach, arm[0] / reach), tuple(mount.pivot)
    return None, None
