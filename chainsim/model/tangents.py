"""The taut loop as straight strands that touch the pin circles of its wheels.

Pure geometry: circles, tangent lines and wrap angles, no forces and no teeth but their number.
The loop is counted in links: straight strands by length, wraps by the teeth that they cover, for
a chain lies on a wheel as a polygon and not as an arc.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from chainsim.errors import LayoutError

FULL_TURN = 2.0 * math.pi
ANGLE_ROUNDING = 1e-9
"""A wrap nearer than this to a full turn [rad] is rounding of a wrap of zero."""


@dataclass(frozen=True)
class Wheel:
    """A wheel as the route of the chain sees it.

    Parameters
    ----------
    name : str
        Name used in every message.
    center : tuple of float, shape (2,)
        Axle (right, up) [m].
    radius : float
        Radius of the circle through the centers of the pins that lie on it [m].
    teeth : int
        Number of teeth (dimensionless); 0 for a smooth roller.
    side : int
        +1: inside the loop, the chain runs counterclockwise round it; −1: outside, clockwise
        (dimensionless).
    phase : float or None
        Angle of the wheel (that of seat 0) [rad]; None leaves it to the chain.
    movable : tuple of float, shape (2,), or None
        Direction in which the axle may be shifted to close the loop taut, of any length, made
        one (dimensionless); None for an axle at a fixed place.
    pivot : tuple of float, shape (2,), or None
        Where given [m], the axle swings about this point, starting out along `movable`.
    """

    name: str
    center: tuple[float, float]
    radius: float
    teeth: int
    side: int = 1
    phase: float | None = None
    movable: tuple[float, float] | None = None
    pivot: tuple[float, float] | None = None

    def __post_init__(self) -> None:
        if self.movable is not None:
            length = math.hypot(*self.movable)
            unit = (self.movable[0] / length, self.movable[1] / length)
            object.__setattr__(self, "movable", unit)

    def seat_step(self, pitch: float) -> float:
        """Angle between neighboring pins on the wheel [rad], for a chain of `pitch` [m]."""
        if self.teeth > 0:
            return FULL_TURN / self.teeth
        return 2.0 * math.asin(min(1.0, 0.5 * pitch / self.radius))

    def moved(self, travel: float) -> Wheel:
        """Return the wheel with its axle shifted by `travel` [m] along its way."""
        if self.movable is None or travel == 0.0:
            return self
        center, axis = np.array(self.center), np.array(self.movable)
        if self.pivot is None:
            return replace(self, center=tuple(center + travel * axis))
        arm = center - self.pivot
        reach = math.hypot(*arm)
        turn = math.copysign(travel / reach, travel * (arm[0] * axis[1] - arm[1] * axis[0]))
        cos, sin = math.cos(turn), math.sin(turn)
        swung = np.array([cos * arm[0] - sin * arm[1], sin * arm[0] + cos * arm[1]])
        return replace(self, center=tuple(swung + self.pivot))


@dataclass(frozen=True)
class Route:
    """The taut loop: strand `i` leads from wheel `i` to the next one.

    Attributes
    ----------
    wheels : tuple of Wheel
        In the order of travel.
    pitch : float
        Pitch of the chain [m].
    names : tuple of str
        Name of each strand, such as `tail-head`.
    start, end : ndarray, shape (n_wheels, 2)
        Where each strand leaves its wheel and meets the next [m].
    direction : ndarray, shape (n_wheels, 2)
        Unit vector of each strand in the direction of travel (dimensionless).
    length : ndarray, shape (n_wheels,)
        Length of each strand [m]; NaN for the hanging loop under a single wheel.
    wrap_in, wrap_out : ndarray, shape (n_wheels,)
        Direction, seen from the axle, of the point where the chain meets and leaves each wheel
        [rad], each in (−π, π].
    wrap : ndarray, shape (n_wheels,)
        Angle over which the chain lies on each wheel [rad], never negative.
    links : float
        Length of the loop in links, seldom whole (dimensionless); NaN for a single wheel.
    """

    wheels: tuple[Wheel, ...]
    pitch: float
    names: tuple[str, ...]
    start: np.ndarray
    end: np.ndarray
    direction: np.ndarray
    length: np.ndarray
    wrap_in: np.ndarray
    wrap_out: np.ndarray
    wrap: np.ndarray
    links: float


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
    _refuse_overlap(wheels)
    if len(wheels) == 1:
        return _hanging_loop(wheels[0], pitch, down)
    path = _tangents(wheels, pitch)
    _refuse_wrong_turning(path)
    _refuse_obstacles(path)
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


def _refuse_overlap(wheels: tuple[Wheel, ...]) -> None:
    for i, one in enumerate(wheels):
        for other in wheels[i + 1 :]:
            distance = math.dist(one.center, other.center)
            if distance <= one.radius + other.radius:
                raise LayoutError(
                    f"sprockets {one.name!r} and {other.name!r} overlap: axles "
                    f"{1e3 * distance:.2f} mm apart, need more than "
                    f"{1e3 * (one.radius + other.radius):.2f} mm"
                )


def _turns(path: Route) -> float:
    """Count the full turns of the loop, counterclockwise positive (dimensionless)."""
    side = np.array([wheel.side for wheel in path.wheels])
    return float((side * path.wrap).sum() / FULL_TURN)


def _refuse_wrong_turning(path: Route) -> None:
    if abs(_turns(path) - 1.0) < 1e-6:
        return
    first, *rest = path.wheels
    turned = (first, *reversed(rest))
    other_way = _tangents(turned, path.pitch)
    if abs(_turns(other_way) - 1.0) < 1e-6 and _obstacle(other_way) is None:
        order = ", ".join(wheel.name for wheel in turned)
        raise LayoutError(
            "the sprockets are listed clockwise; list them in the direction of travel, "
            f"counterclockwise round those inside the loop: {order}"
        )
    widest = path.wheels[int(np.argmax(path.wrap))]
    where, other = ("inside", "outside") if widest.side == 1 else ("outside", "inside")
    raise LayoutError(
        f"the chain does not reach sprocket {widest.name!r} with side = {where!r}: it passes "
        f"clear of it or would have to loop round it; move it towards the chain, list it "
        f"elsewhere in the order of travel, or try side = {other!r}"
    )


def _refuse_obstacles(path: Route) -> None:
    """Refuse a strand that runs through a wheel, or through another strand."""
    obstacle = _obstacle(path)
    if obstacle is not None:
        raise LayoutError(
            f"{obstacle}; list the sprockets in the order in which the chain meets them"
        )


def _obstacle(path: Route) -> str | None:
    """Say what stands in the way of a strand, if anything does."""
    count = len(path.wheels)
    for strand in range(count):
        ends = (strand, (strand + 1) % count)
        for k, wheel in enumerate(path.wheels):
            if k not in ends and _distance_to(path, strand, wheel) < wheel.radius:
                return f"strand {path.names[strand]!r} runs through sprocket {wheel.name!r}"
        for other in range(strand + 1, count):
            if _cross(path, strand, other):
                return f"strands {path.names[strand]!r} and {path.names[other]!r} cross"
    return None


def _distance_to(path: Route, strand: int, wheel: Wheel) -> float:
    """Return the least distance of a wheel's axle from a strand [m]."""
    offset = np.array(wheel.center) - path.start[strand]
    along = np.clip(offset @ path.direction[strand], 0.0, path.length[strand])
    return float(np.linalg.norm(offset - along * path.direction[strand]))


def _cross(path: Route, one: int, other: int) -> bool:
    """Say whether two strands meet between their ends."""
    u, v = path.direction[one], path.direction[other]
    determinant = u[0] * v[1] - u[1] * v[0]
    if abs(determinant) < ANGLE_ROUNDING:
        return False
    gap = path.start[other] - path.start[one]
    along_one = (gap[0] * v[1] - gap[1] * v[0]) / determinant
    along_other = (gap[0] * u[1] - gap[1] * u[0]) / determinant
    inside_one = 0.0 < along_one < path.length[one]
    return bool(inside_one and 0.0 < along_other < path.length[other])
