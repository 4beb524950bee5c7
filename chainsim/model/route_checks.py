"""Layouts that no chain can follow, each refused with its reason."""

from __future__ import annotations

import math

import numpy as np

from chainsim.errors import LayoutError
from chainsim.model.loop import FULL_TURN, Route, Wheel

WHOLE_TURN = 1e-6
"""Rounding of the number of turns of a loop (dimensionless)."""

PARALLEL = 1e-9
"""Sine of the angle between strands that count as parallel (dimensionless)."""


def refuse_overlap(wheels: tuple[Wheel, ...]) -> None:
    """Refuse wheels whose pin circles overlap.

    Parameters
    ----------
    wheels : tuple of Wheel
        All wheels of the loop.

    Raises
    ------
    LayoutError
        Naming the first two that do.
    """
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


def refuse_wrong_turning(path: Route, other_way: Route) -> None:
    """Refuse a loop that does not turn once, counterclockwise.

    Parameters
    ----------
    path : Route
        The loop as listed.
    other_way : Route
        The same wheels listed the other way round.

    Raises
    ------
    LayoutError
        With the order to use where that helps, else with the wheel that is not reached.
    """
    if abs(_turns(path) - 1.0) < WHOLE_TURN:
        return
    if abs(_turns(other_way) - 1.0) < WHOLE_TURN and _obstacle(other_way) is None:
        order = ", ".join(wheel.name for wheel in other_way.wheels)
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


def refuse_obstacles(path: Route) -> None:
    """Refuse a strand that runs through a wheel, or through another strand.

    Parameters
    ----------
    path : Route
        The loop.

    Raises
    ------
    LayoutError
        Naming the strand and what stands in its way.
    """
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
    if abs(determinant) < PARALLEL:
        return False
    gap = path.start[other] - path.start[one]
    along_one = (gap[0] * v[1] - gap[1] * v[0]) / determinant
    along_other = (gap[0] * u[1] - gap[1] * u[0]) / determinant
    inside_one = 0.0 < along_one < path.length[one]
    return bool(inside_one and 0.0 < along_other < path.length[other])
