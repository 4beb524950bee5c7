"""The taut loop as straight strands that touch the pin circles of its wheels.

Pure geometry: circles, tangent lines and wrap angles, no forces and no teeth but their number.
The loop is counted in links: straight strands by length, wraps by the teeth that they cover, for
a chain lies on a wheel as a polygon and not as an arc.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from chainsim.errors import LayoutError
from chainsim.model.loop import FULL_TURN, Route, Wheel
from chainsim.model.route_checks import refuse_obstacles, refuse_overlap, refuse_wrong_turning

__all__ = ["Route", "Wheel", "route"]

ANGLE_ROUNDING = 1e-9
"""A wrap nearer than this to a full turn [rad] is rounding of a wrap of zero."""


def route(wheels: Sequence[Wheel], pitch: float, down: tuple[float, float] = (0.0, -1.0)) -> Route:
    """Lead a taut chain round the wheels, in their order.

    Between wheels of radius ``r`` and side ``s`` at a distance ``D`` the strand is a common
    tangent: its angle is that of the line of centers less ``asin((s2 r2 - s1 r1)/D)``, its
    length ``sqrt(D^2 - (s2 r2 - s1 r1)^2)``.  The loop counts
    ``sum(length)/pitch + sum(wrap/seat_step)`` links.

    Parameters
    ----------
    wheels : sequence of Wheel
        In the order in which the chain meets them; one alone carries a free hanging loop.
    pitch : float
        Pitch of the chain [m].
    down : tuple of float, shape (2,)
        Unit direction of gravity (dimensionless), used for the hanging loop of a single wheel.

    Returns
    -------
    Route
        Strands, wraps and the number of links.

    Raises
    ------
    LayoutError
        If wheels overlap, are listed clockwise, are not reached from their side, or stand in
        the way of a strand.

    References
    ----------
    Common tangents of two circles: plane geometry.  That arcs count by teeth and not by arc
    length: derived here; it agrees with the handbook formula for two sprockets (checks A3).
    """
    wheels = tuple(wheels)
    if not wheels:
        raise LayoutError("a chain needs at least one sprocket to lie on")
    refuse_overlap(wheels)
    if len(wheels) == 1:
        return _hanging_loop(wheels[0], pitch, down)
    path = _tangents(wheels, pitch)
    other_way = _tangents((wheels[0], *reversed(wheels[1:])), pitch)
    refuse_wrong_turning(path, other_way)
    refuse_obstacles(path)
    return path


def _tangents(wheels: tuple[Wheel, ...], pitch: float) -> Route:
    """Work out strands and wraps without judging them."""
    center = np.array([wheel.center for wheel in wheels], dtype=float)
    signed_radius = np.array([wheel.side * wheel.radius for wheel in wheels])
    line = np.roll(center, -1, axis=0) - center
    distance = np.hypot(line[:, 0], line[:, 1])
    rise = np.roll(signed_radius, -1) - signed_radius
    length = np.sqrt(distance**2 - rise**2)
    heading = np.arctan2(line[:, 1], line[:, 0]) - np.arcsin(rise / distance)
    direction = np.column_stack([np.cos(heading), np.sin(heading)])
    right = np.column_stack([direction[:, 1], -direction[:, 0]])
    start = center + signed_radius[:, None] * right
    end = np.roll(center, -1, axis=0) + np.roll(signed_radius, -1)[:, None] * right

    side = np.array([wheel.side for wheel in wheels])
    wrap = (side * (heading - np.roll(heading, 1))) % FULL_TURN
    wrap[wrap > FULL_TURN - ANGLE_ROUNDING] = 0.0
    steps = np.array([wheel.seat_step(pitch) for wheel in wheels])
    from_axle_out, from_axle_in = start - center, np.roll(end, 1, axis=0) - center
    names = tuple(
        f"{wheel.name}-{wheels[(i + 1) % len(wheels)].name}" for i, wheel in enumerate(wheels)
    )
    return Route(
        wheels=wheels,
        pitch=pitch,
        names=names,
        start=start,
        end=end,
        direction=direction,
        length=length,
        wrap_in=np.arctan2(from_axle_in[:, 1], from_axle_in[:, 0]),
        wrap_out=np.arctan2(from_axle_out[:, 1], from_axle_out[:, 0]),
        wrap=wrap,
        links=float(length.sum() / pitch + (wrap / steps).sum()),
    )


def _hanging_loop(wheel: Wheel, pitch: float, down: tuple[float, float]) -> Route:
    """Lead the chain over the upper half of a single wheel and let the rest hang."""
    if wheel.side != 1:
        raise LayoutError(f"sprocket {wheel.name!r}: alone in the loop it must be inside")
    along = np.array(down, dtype=float)
    side = np.array([-along[1], along[0]])
    center = np.array(wheel.center, dtype=float)
    entry, exit_ = center + wheel.radius * side, center - wheel.radius * side
    angle = math.atan2(side[1], side[0])
    return Route(
        wheels=(wheel,),
        pitch=pitch,
        names=(f"{wheel.name}-{wheel.name}",),
        start=exit_[None, :],
        end=entry[None, :],
        direction=along[None, :],
        length=np.array([math.nan]),
        wrap_in=np.array([angle]),
        wrap_out=np.array([math.atan2(-side[1], -side[0])]),
        wrap=np.array([math.pi]),
        links=math.nan,
    )
