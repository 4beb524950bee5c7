"""The pocket as a drawing to make it by, twice its true size, and the room that carriers sweep."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from chainsim.errors import LayoutError
from chainsim.model.lift import Lift
from chainsim.model.pockets import PocketForm
from chainsim.model.route import Wheel
from chainsim.report.style import FAINT, GRID, INK, STEEL

SCALE = 2.0
"""Paper over part (dimensionless)."""

ROOM = 20.0
"""Paper round the drawing [mm]."""

TEXT = 3.0
"""Height of the letters [mm]."""

AXIS = 5.0
"""Length of the arms of the axes [mm]."""

Paper = Callable[[np.ndarray], tuple[float, float]]
"""Takes a place in the link's frame [m] to the paper [mm]."""


def pocket_of(lift: Lift) -> PocketForm:
    """Return the pocket that all carriers have.

    Parameters
    ----------
    lift : Lift
        The lift.

    Raises
    ------
    LayoutError
        If it has no pockets.
    """
    if lift.pocket is None:
        raise LayoutError("a lift without balls or carriers has no pocket")
    return lift.pocket


def swept_radius(lift: Lift, wheel: Wheel, loaded: bool = False) -> float:
    """Return how far from an axle the carriers reach as they go round it.

    Parameters
    ----------
    lift : Lift
        The lift.
    wheel : Wheel
        The wheel.
    loaded : bool
        Whether a ball lies in its seat.

    Returns
    -------
    float
        Radius [m]; for a wheel outside the loop that of the side away from it is meant, and the
        carriers face away.
    """
    pitch, form = lift.route.pitch, pocket_of(lift)
    half = math.asin(min(0.5 * pitch / wheel.radius, 1.0))
    points = np.vstack([form.spine, [[0.0, 0.0]]])
    inward = wheel.side * wheel.radius * math.cos(half)
    reach = np.hypot(points[:, 0] - 0.5 * pitch, inward + points[:, 1])
    empty = float(reach.max()) + form.half_wall
    if not loaded:
        return empty
    ball = math.hypot(form.seat[0] - 0.5 * pitch, inward + form.seat[1]) + lift.ball_radius
    return max(empty, ball)


def pocket_svg(lift: Lift, roller_diameter: float, mirrored: bool = False) -> str:
    """Draw a pocket on its link, with its ball, at twice the true size.

    Parameters
    ----------
    lift : Lift
        A lift with balls.
    roller_diameter : float
        Of the chain [m].
    mirrored : bool
        Whether it is seen from behind.

    Returns
    -------
    str
        An SVG in millimeters; the link stands upright as on a rising strand.
    """
    form, pitch, radius = pocket_of(lift), lift.route.pitch, lift.ball_radius
    roller = 0.5 * roller_diameter
    seat = np.asarray(form.seat)
    ball = np.array([seat - radius, seat + radius])
    pins = np.array([[-roller, -roller], [pitch + roller, roller]])
    points = np.vstack([form.outline, form.spine, ball, pins])
    low, high = points.min(axis=0), points.max(axis=0)
    width, height = 1e3 * SCALE * (high - low)[::-1] + 2.0 * ROOM

    def paper(point: np.ndarray) -> tuple[float, float]:
        across = high[1] - point[1] if mirrored else point[1] - low[1]
        return (
            ROOM + 1e3 * SCALE * float(across),
            ROOM + 1e3 * SCALE * float(high[0] - point[0]),
        )

    words = [_link(paper, pitch, roller), _material(paper, form), _ball(paper, form, radius)]
    words += [_corner(paper(point), k) for k, point in enumerate(form.outline, 1)]
    words.append(_caption(paper, pitch, roller, mirrored))
    words.append(_axes(height, mirrored))
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width:.2f}mm" height="{height:.2f}mm" '
        f'viewBox="0 0 {width:.2f} {height:.2f}" font-family="Liberation Sans, sans-serif" '
        f'font-size="{TEXT}" fill="{INK}"><title>Pocket at {SCALE:g}:1</title>'
        + "".join(words)
        + "</svg>"
    )


def _link(paper: Paper, pitch: float, roller: float) -> str:
    """The link with its two pins and the arrow of travel."""
    (x, y), (_, y2) = paper(np.zeros(2)), paper(np.array([pitch, 0.0]))
    r = 1e3 * SCALE * roller
    line = (
        f'<path d="M{x:.2f} {y + 2 * r:.2f}V{y2 - 2 * r:.2f}" stroke="{FAINT}" '
        'stroke-width="0.2" stroke-dasharray="4 1 1 1"/>'
    )
    pins = "".join(
        f'<circle cx="{x:.2f}" cy="{at:.2f}" r="{r:.2f}" fill="{GRID}" stroke="{INK}" '
        'stroke-width="0.25"/>'
        for at in (y, y2)
    )
    return line + pins


def _material(paper: Paper, form: PocketForm) -> str:
    """The wall of the pocket along its middle line, and its inner surface."""
    middle = " ".join("{:.2f},{:.2f}".format(*paper(point)) for point in form.spine)
    inner = " ".join("{:.2f},{:.2f}".format(*paper(point)) for point in form.outline)
    wide = 2e3 * SCALE * form.half_wall
    return (
        f'<polyline points="{middle}" fill="none" stroke="{STEEL}" stroke-width="{wide:.2f}" '
        'stroke-linecap="round" stroke-linejoin="round"/>'
        f'<polyline points="{inner}" fill="none" stroke="{INK}" stroke-width="0.3"/>'
    )


def _ball(paper: Paper, form: PocketForm, radius: float) -> str:
    x, y = paper(np.asarray(form.seat))
    return (
        f'<circle cx="{x:.2f}" cy="{y:.2f}" r="{1e3 * SCALE * radius:.2f}" fill="none" '
        f'stroke="{FAINT}" stroke-width="0.25" stroke-dasharray="2 1"/>'
        f'<path d="M{x - 2:.2f} {y:.2f}h4M{x:.2f} {y - 2:.2f}v4" stroke="{FAINT}" '
        'stroke-width="0.2"/>'
    )


def _corner(place: tuple[float, float], number: int) -> str:
    x, y = place
    return (
        f'<circle cx="{x:.2f}" cy="{y:.2f}" r="0.6"/>'
        f'<text x="{x + 1.2:.2f}" y="{y - 1.2:.2f}">{number}</text>'
    )


def _caption(paper: Paper, pitch: float, roller: float, mirrored: bool) -> str:
    """Names of the two pins, and the axes along which the corners are measured."""
    x, y = paper(np.zeros(2))
    top = paper(np.array([pitch, 0.0]))[1]
    away, anchor = (1.0, "start") if mirrored else (-1.0, "end")
    beside = x + away * (1e3 * SCALE * roller + 1.5)
    return (
        f'<text x="{beside:.2f}" y="{y + 1:.2f}" text-anchor="{anchor}">a = b = 0</text>'
        f'<text x="{beside:.2f}" y="{top + 1:.2f}" text-anchor="{anchor}">next pin</text>'
        f'<text x="2" y="5">{SCALE:g}:1</text>'
    )


def _axes(height: float, mirrored: bool) -> str:
    """Directions in which the corners are measured, in a corner of the paper."""
    x, y = 2.0 + AXIS, height - 3.0
    tip = x - AXIS if mirrored else x + AXIS
    return (
        f'<path d="M{x:.2f} {y - AXIS:.2f}V{y:.2f}H{tip:.2f}" stroke="{INK}" stroke-width="0.3" '
        'fill="none"/>'
        f'<text x="{x:.2f}" y="{y - AXIS - 1:.2f}" text-anchor="middle">a</text>'
        f'<text x="{tip + (-1.5 if mirrored else 1.5):.2f}" y="{y + 1:.2f}" '
        'text-anchor="middle">b</text>'
    )
