"""The outline of a sprocket as lines and true arcs, from the form that the simulation ran on."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from chainsim.model.tooth import ToothForm


class Piece(NamedTuple):
    """A line or an arc of the outline, walked counterclockwise round the wheel.

    Attributes
    ----------
    start, end : ndarray, shape (2,)
        Its ends in the wheel's frame [m].
    radius : float
        Radius of the arc [m]; 0 for a line.
    sweep : float
        Angle of the arc [rad]: positive where it bulges out (tip), negative in a seat, 0 for a
        line.
    """

    start: np.ndarray
    end: np.ndarray
    radius: float
    sweep: float

    @property
    def bulge(self) -> float:
        """Tangent of a quarter of the sweep (dimensionless), as DXF polylines want it."""
        return math.tan(0.25 * self.sweep)


def outline_pieces(tooth: ToothForm) -> list[Piece]:
    """Cut the whole outline into seats, flanks, roundings and lands.

    Parameters
    ----------
    tooth : ToothForm
        The form.

    Returns
    -------
    list of Piece
        Closed, counterclockwise, starting with the arc of seat 0.
    """
    corners, arcs = _sector(tooth)
    points, radii, sweeps = [], [], []
    for k in range(tooth.teeth):
        points += list(_turned(corners, 2.0 * tooth.half_angle * k))
        radii += [radius for radius, _ in arcs]
        sweeps += [sweep for _, sweep in arcs]
    ends = points[1:] + points[:1]
    return [Piece(*values) for values in zip(points, ends, radii, sweeps, strict=True)]


def _sector(tooth: ToothForm) -> tuple[np.ndarray, list[tuple[float, float]]]:
    """Return the corners from seat 0 to seat 1 [m], and radius and sweep of what follows each."""
    lean, half = tooth.lean, tooth.half_angle
    seat_arc = tooth.roller_radius + tooth.seat_clearance
    seat_end = np.array([tooth.seat_radius - seat_arc * math.sin(lean), seat_arc * math.cos(lean)])
    flank = tooth.flank_end * np.array([tooth.cos_lean, tooth.sin_lean])
    corner = np.array([tooth.seat_radius + tooth.corner_u, tooth.corner_w])
    tip = corner + tooth.corner_radius * np.array([math.cos(half), math.sin(half)])
    mirror = np.array(
        [
            [math.cos(2.0 * half), math.sin(2.0 * half)],
            [math.sin(2.0 * half), -math.cos(2.0 * half)],
        ]
    )
    here = [seat_end * [1.0, -1.0], seat_end, seat_end + flank, tip]
    over = [mirror @ tip, mirror @ (seat_end + flank)]
    rounding = (tooth.corner_radius, 0.5 * math.pi - tooth.pressure_angle)
    seat, line = (seat_arc, 2.0 * lean - math.pi), (0.0, 0.0)
    if tooth.has_land:
        return np.array(here + over), [seat, line, rounding, line, rounding, line]
    return np.array(here + over[1:]), [seat, line, rounding, rounding, line]


def _turned(points: np.ndarray, angle: float) -> np.ndarray:
    cos, sin = math.cos(angle), math.sin(angle)
    return points @ np.array([[cos, sin], [-sin, cos]])


def seat_places(tooth: ToothForm) -> np.ndarray:
    """Return the centers of seated pins: the corners of the pitch polygon.

    Parameters
    ----------
    tooth : ToothForm
        The form.

    Returns
    -------
    ndarray, shape (teeth, 2)
        In the wheel's frame, counterclockwise from +x [m].
    """
    angle = 2.0 * tooth.half_angle * np.arange(tooth.teeth)
    return tooth.pitch_radius * np.column_stack([np.cos(angle), np.sin(angle)])
