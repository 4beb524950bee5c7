"""What a drawing of a lift at rest shows: lines and circles in meters, no paper yet."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from chainsim.model.lift import Lift
from chainsim.model.packing_balls import chute_line, trough_line
from chainsim.model.tangents import Route, route
from chainsim.model.tooth import outline

SHOE_POINTS = 25
"""Points on the arc of a shoe (dimensionless)."""

PIVOT_RADIUS = 2e-3
"""Size at which the pivot of an arm is drawn [m]."""


class Shape(NamedTuple):
    """A polyline to draw.

    Attributes
    ----------
    kind : str
        `chain`, `carrier`, `stem`, `wheel`, `guide`, `wall`, `chute` or `arm`.
    points : ndarray, shape (n_points, 2)
        Its corners in the frame [m].
    closed : bool
        Whether the last point joins the first.
    """

    kind: str
    points: np.ndarray
    closed: bool = False


class Spot(NamedTuple):
    """A circle to draw.

    Attributes
    ----------
    kind : str
        `ball`, `bore` or `roller`.
    center : ndarray, shape (2,)
        In the frame [m].
    radius : float
        [m].
    """

    kind: str
    center: np.ndarray
    radius: float


def shapes_of(lift: Lift) -> list[Shape]:
    """Collect everything that is drawn with lines.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.

    Returns
    -------
    list of Shape
        Standing parts first, then wheels, chain and carriers.
    """
    shapes = _standing(lift)
    for k, tooth in enumerate(lift.teeth):
        if tooth is not None:
            points = _turned(outline(tooth, 5), lift.laid.wheel_angle[k])
            shapes.append(Shape("wheel", points + lift.laid.wheel_center[k], closed=True))
    shapes.append(Shape("chain", lift.laid.pin, closed=True))
    if lift.pocket is not None:
        for link in lift.carrier_links:
            shapes.append(Shape("carrier", on_link(lift, int(link), lift.pocket.outline)))
            shapes.append(Shape("stem", on_link(lift, int(link), _stem(lift))))
    return shapes


def spots_of(lift: Lift) -> list[Spot]:
    """Collect everything that is drawn as a circle.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.

    Returns
    -------
    list of Spot
        Bores, smooth rollers, and a ball in every place of the carrying strand.
    """
    spots = []
    for k, sprocket in enumerate(lift.scenario.sprocket):
        center = lift.laid.wheel_center[k]
        if lift.teeth[k] is None:
            spots.append(Spot("roller", center, sprocket.roller_radius))
        spots.append(Spot("bore", center, 0.5 * sprocket.axle_diameter))
        if sprocket.mount.kind == "arm":
            spots.append(Spot("bore", np.array(sprocket.mount.pivot), PIVOT_RADIUS))
    return spots + [Spot("ball", place, lift.ball_radius) for place in ball_places(lift)]


def route_at_rest(lift: Lift) -> Route:
    """Lead the chain round the axles where they come to stand.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.

    Returns
    -------
    Route
        Taut strands and wraps; between fixed axles surplus chain is left out.
    """
    moved = (w.moved(d) for w, d in zip(lift.wheels, lift.laid.travel, strict=True))
    return route(tuple(moved), lift.route.pitch, (-lift.up[0], -lift.up[1]))


def ball_places(lift: Lift) -> list[np.ndarray]:
    """Place a ball in every pocket that rises between loading and unloading.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.

    Returns
    -------
    list of ndarray, shape (2,)
        Centers in the frame [m].
    """
    if lift.pocket is None:
        return []
    up, places = np.array(lift.up), []
    spacing = lift.scenario.balls.spacing or 1
    for link in lift.carrier_links[::spacing]:
        pins = lift.laid.pin[[link, (link + 1) % lift.n_links]]
        rising = (pins[1] - pins[0]) @ up > 0.5 * np.linalg.norm(pins[1] - pins[0])
        if rising and lift.load_height <= pins[0] @ up <= lift.unload_height:
            places.append(on_link(lift, int(link), np.array([lift.pocket.seat]))[0])
    return places


def on_link(lift: Lift, link: int, points: np.ndarray) -> np.ndarray:
    """Turn points of a link's frame into the frame of the lift.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.
    link : int
        Number of the link (dimensionless).
    points : ndarray, shape (n_points, 2)
        Along the link from its first pin, and outward [m].

    Returns
    -------
    ndarray, shape (n_points, 2)
        In the frame [m].
    """
    start, end = lift.laid.pin[link], lift.laid.pin[(link + 1) % lift.n_links]
    along = (end - start) / np.linalg.norm(end - start)
    outward = np.array([along[1], -along[0]])
    return start + points[:, :1] * along + points[:, 1:] * outward


def _stem(lift: Lift) -> np.ndarray:
    """Return the shortest way from a link to its pocket, in the link's frame [m]."""
    assert lift.pocket is not None  # drawn only where there are pockets
    outline_points = lift.pocket.outline
    near = outline_points[int(np.argmin(np.abs(outline_points[:, 1])))]
    return np.array([[min(max(near[0], 0.0), lift.route.pitch), 0.0], near])


def _standing(lift: Lift) -> list[Shape]:
    scenario = lift.scenario
    shapes = [Shape("wall", np.array(wall.points)) for wall in scenario.wall]
    for guide in scenario.guide:
        if guide.kind == "straight":
            shapes.append(Shape("guide", np.array([guide.start, guide.end])))
        else:
            first, last = guide.angles
            angle = np.linspace(first, last, SHOE_POINTS)
            arc = guide.radius * np.column_stack([np.cos(angle), np.sin(angle)])
            shapes.append(Shape("guide", np.array(guide.center) + arc))
    shapes += [
        Shape("chute", line) for line in (chute_line(lift), trough_line(lift)) if line is not None
    ]
    for k, sprocket in enumerate(scenario.sprocket):
        if sprocket.mount.kind == "arm":
            arm = np.array([sprocket.mount.pivot, lift.laid.wheel_center[k]])
            shapes.append(Shape("arm", arm))
    return shapes


def _turned(points: np.ndarray, angle: float) -> np.ndarray:
    cos, sin = math.cos(angle), math.sin(angle)
    return points @ np.array([[cos, sin], [-sin, cos]])
