"""The outline of one sector of a sprocket: seat arc, flank, rounded tip, land.

A sprocket has mirror symmetry about every seat, so a pin is looked at in the frame of the
nearest seat, folded about that seat's radius: u points outward from the axle, w along the rim,
w ≥ 0, the origin S is the center of the seat's arc.  The reference for the compiled contact.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np


@dataclass(frozen=True, kw_only=True)
class ToothForm:
    """One seat and half a tooth, repeated round the wheel.

    Parameters
    ----------
    teeth : int
        Number of teeth ``z`` (dimensionless).
    pitch_radius : float
        Radius of the circle through pins that rest on the bottom of their seats [m].
    roller_radius : float
        Radius ``r`` of the chain's rollers [m].
    seat_clearance : float
        Seat radius less roller radius ``c`` [m].
    pressure_angle : float
        Lean of the flank beyond half a seat step [rad].
    outer_radius : float
        Radius of the tip, measured on the tooth's center line [m].
    corner_radius : float
        Radius of the rounded tip [m].
    corner_u, corner_w : float
        Center of that rounding in the frame of the seat [m].
    flank_end : float
        Length of the straight flank ``s_end`` [m], from the end of the seat's arc.
    has_land : bool
        Whether a flat land, square to the tooth's center line, joins the two roundings.

    Notes
    -----
    The seat's arc is centered at `seat_radius` = `pitch_radius` + `seat_clearance`, so that a pin
    at the bottom of its seat lies on the pitch polygon exactly.
    """

    teeth: int
    pitch_radius: float
    roller_radius: float
    seat_clearance: float
    pressure_angle: float
    outer_radius: float
    corner_radius: float
    corner_u: float
    corner_w: float
    flank_end: float
    has_land: bool

    @property
    def half_angle(self) -> float:
        """Half the angle from seat to seat, ``π/z`` [rad]."""
        return math.pi / self.teeth

    @property
    def lean(self) -> float:
        """Lean ``ψ`` of the flank from the radius of its seat [rad]."""
        return self.half_angle + self.pressure_angle

    @property
    def cos_lean(self) -> float:
        """Cosine of the flank's lean (dimensionless)."""
        return math.cos(self.lean)

    @property
    def sin_lean(self) -> float:
        """Sine of the flank's lean (dimensionless)."""
        return math.sin(self.lean)

    @property
    def seat_radius(self) -> float:
        """Distance of the center of a seat's arc from the axle [m]."""
        return self.pitch_radius + self.seat_clearance

    @property
    def height(self) -> float:
        """Height of the tip over the circle of the pins [m]."""
        return self.outer_radius - self.pitch_radius


class Gap(NamedTuple):
    """Distance of a roller from a wheel.

    Attributes
    ----------
    distance : float
        From surface to surface [m], negative where they overlap.
    normal : ndarray, shape (2,)
        Unit vector from the wheel to the pin, in the wheel's frame (dimensionless); it is the
        gradient of the distance.
    """

    distance: float
    normal: np.ndarray


def gap(tooth: ToothForm, pin: np.ndarray) -> Gap:
    """Measure the gap between the roller of one pin and the wheel.

    Below the start of the flank (``s = d · (P − S) <= 0``) the pin is over the seat's arc:
    ``c − |P − S|``.  Along the flank it is ``n · (P − S) + c``, with ``d = (cos ψ, sin ψ)`` and
    ``n = (sin ψ, −cos ψ)``; beyond, the distance from the corner or the land.

    Parameters
    ----------
    tooth : ToothForm
        The outline.
    pin : ndarray, shape (2,)
        Pin center in the wheel's frame, seat 0 on +x, origin in the axle [m].

    Returns
    -------
    Gap
        Distance and normal.
    """
    step = 2.0 * tooth.half_angle
    seat_angle = step * round(math.atan2(pin[1], pin[0]) / step)
    cos, sin = math.cos(seat_angle), math.sin(seat_angle)
    u = cos * pin[0] + sin * pin[1] - tooth.seat_radius
    w = -sin * pin[0] + cos * pin[1]
    mirror = -1.0 if w < 0.0 else 1.0
    distance, normal_u, normal_w = _gap_in_sector(tooth, u, mirror * w)
    normal_w *= mirror
    normal = np.array([cos * normal_u - sin * normal_w, sin * normal_u + cos * normal_w])
    return Gap(distance, normal)


def _gap_in_sector(tooth: ToothForm, u: float, w: float) -> tuple[float, float, float]:
    """Return distance [m] and normal along u and w (dimensionless) for ``w >= 0`` [m]."""
    cos, sin = tooth.cos_lean, tooth.sin_lean
    along = cos * u + sin * w
    if along <= 0.0:
        away = math.hypot(u, w)
        if away == 0.0:
            return tooth.seat_clearance, 1.0, 0.0
        return tooth.seat_clearance - away, -u / away, -w / away
    if along < tooth.flank_end:
        return sin * u - cos * w + tooth.seat_clearance, sin, -cos
    du, dw = u - tooth.corner_u, w - tooth.corner_w
    out_u, out_w = math.cos(tooth.half_angle), math.sin(tooth.half_angle)
    if tooth.has_land and out_u * dw - out_w * du > 0.0:
        height = out_u * (u + tooth.seat_radius) + out_w * w
        return height - tooth.outer_radius - tooth.roller_radius, out_u, out_w
    away = math.hypot(du, dw)
    if away == 0.0:
        return -tooth.corner_radius - tooth.roller_radius, out_u, out_w
    return away - tooth.corner_radius - tooth.roller_radius, du / away, dw / away


def arriving_clearance(tooth: ToothForm, pitch: float) -> float:
    """Measure how far an arriving pin stays clear of the tooth tip.

    Seen from the wheel, a pin that arrives swings on an arc of radius one pitch about its seated
    neighbor ``N``, over one seat step.  It comes nearest to the rounded tip (center ``C``) where
    the arc crosses the line from ``N`` through ``C``: ``pitch − |C − N|`` less both radii.

    Parameters
    ----------
    tooth : ToothForm
        The outline.
    pitch : float
        Pitch of the chain [m].

    Returns
    -------
    float
        Clearance [m]; negative if the tip cuts the arc, by that much.

    Notes
    -----
    Derived here.  The flank itself is cut only beyond twice the pressure angle of swing, a chord
    of ``2 pitch sin(pressure angle)``; the tip has to begin before.
    """
    step = 2.0 * tooth.half_angle
    neighbor_u = tooth.pitch_radius * math.cos(step) - tooth.seat_radius
    neighbor_w = tooth.pitch_radius * math.sin(step)
    swing = math.atan2(tooth.corner_w - neighbor_w, tooth.corner_u - neighbor_u)
    seated = math.atan2(-neighbor_w, -tooth.seat_clearance - neighbor_u)
    turned = min(max(swing - seated, 0.0), step)
    pin_u = neighbor_u + pitch * math.cos(seated + turned)
    pin_w = neighbor_w + pitch * math.sin(seated + turned)
    apart = math.hypot(pin_u - tooth.corner_u, pin_w - tooth.corner_w)
    inside = math.hypot(tooth.corner_u - neighbor_u, tooth.corner_w - neighbor_w) < pitch
    signed = apart if inside else -apart
    return signed - tooth.corner_radius - tooth.roller_radius


def outline(tooth: ToothForm, arc_points: int = 12) -> np.ndarray:
    """Draw the whole wheel as a closed polygon.

    Parameters
    ----------
    tooth : ToothForm
        The outline.
    arc_points : int
        Points on each half seat arc and on each rounding (dimensionless), at least 2.

    Returns
    -------
    ndarray, shape (n_points, 2)
        Counterclockwise in the wheel's frame, seat 0 on +x, starting at its bottom [m]; the last
        point is not the first one again.

    Notes
    -----
    Points lie on the outline exactly; chords cut an arc by ``radius (1 − cos(half step))``.
    """
    half = _half_sector(tooth, arc_points)
    mirrored = half[::-1] * [1.0, -1.0]
    step = 2.0 * tooth.half_angle
    pieces = []
    for k in range(tooth.teeth):
        pieces += [_turned(half, k * step), _turned(mirrored, (k + 1) * step)]
    points = np.vstack(pieces)
    apart = np.linalg.norm(points - np.roll(points, -1, axis=0), axis=1)
    return np.ascontiguousarray(points[apart > 1e-9 * tooth.pitch_radius])


def _half_sector(tooth: ToothForm, arc_points: int) -> np.ndarray:
    """Return points [m] from the bottom of seat 0 to the middle of the next tooth."""
    seat_arc = tooth.roller_radius + tooth.seat_clearance
    down = np.linspace(math.pi, math.pi - (0.5 * math.pi - tooth.lean), arc_points)
    seat = seat_arc * np.column_stack([np.cos(down), np.sin(down)])
    corner = np.array([tooth.corner_u, tooth.corner_w])
    turn = np.linspace(tooth.lean - 0.5 * math.pi, tooth.half_angle, arc_points)
    tip = corner + tooth.corner_radius * np.column_stack([np.cos(turn), np.sin(turn)])
    sector = np.vstack([seat, tip]) + [tooth.seat_radius, 0.0]
    if tooth.has_land:
        middle = tooth.outer_radius * np.array(
            [math.cos(tooth.half_angle), math.sin(tooth.half_angle)]
        )
        sector = np.vstack([sector, middle])
    return sector


def _turned(points: np.ndarray, angle: float) -> np.ndarray:
    cos, sin = math.cos(angle), math.sin(angle)
    return points @ np.array([[cos, sin], [-sin, cos]])
