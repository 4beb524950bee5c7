"""Choice of the tooth form of a sprocket, and refusal of forms that arriving pins would hit."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
from scipy.optimize import brentq

from chainsim.closed_forms import pitch_radius as radius_of_pitch
from chainsim.closed_forms import pressure_angles, standard_tip_radius
from chainsim.errors import LayoutError
from chainsim.model.tooth_surface import Gap, ToothForm, arriving_clearance, gap, outline

__all__ = [
    "Gap",
    "ToothForm",
    "arriving_clearance",
    "gap",
    "outline",
    "seat_clearances",
    "tooth_form",
]

SHARPEST_TIP = 0.05
"""Least radius of a tooth tip in pitches (dimensionless): sharper, and the direction of contact
would swing round within less than the depth of one contact, just where a tooth is skipped."""

USUAL_TIP = 0.10
"""Radius of a tooth tip in pitches (dimensionless) unless one is given; common practice for small
moulded sprockets, no source."""

KEEP_CLEAR = 0.01
"""Clearance of the arriving pin's arc in pitches (dimensionless) that a worked-out height keeps:
what a small chain stretches and rattles; common practice, no source."""

LOWEST = 0.02
"""Least height of a tooth over the circle of the pins in pitches (dimensionless)."""


def seat_clearances(roller_diameter: float) -> tuple[float, float]:
    """Return the published least and greatest seat radius, less the roller's radius.

    Parameters
    ----------
    roller_diameter : float
        Diameter ``d`` of the roller [m].

    Returns
    -------
    tuple of float, shape (2,)
        Least and greatest clearance [m]; the default is their mean.

    References
    ----------
    ISO 606, tooth form: roller seating radius at least ``0.505 d``, at most
    ``0.505 d + 0.069 d^(1/3)`` with ``d`` in millimeters (from memory).
    """
    least = 0.005 * roller_diameter
    return least, least + 0.069e-3 * math.cbrt(1e3 * roller_diameter)


def tooth_form(
    teeth: int,
    pitch: float,
    roller_diameter: float,
    *,
    chain_pitch: float | None = None,
    height: float | None = None,
    pressure_angle: float | None = None,
    seat_clearance: float | None = None,
    tip_radius: float | None = None,
    name: str = "sprocket",
) -> ToothForm:
    """Work out the outline of a sprocket; values left out follow published forms.

    Parameters
    ----------
    teeth : int
        Number of teeth (dimensionless), at least 4.
    pitch : float
        Pitch for which the wheel is cut [m].
    roller_diameter : float
        Diameter of the chain's rollers [m].
    chain_pitch : float or None
        Pitch of the chain that runs on it [m]; that of the wheel if None.
    height : float or None
        Height of the tip over the circle of the pins [m]; None: the published one, lowered until
        an arriving pin clears it.
    pressure_angle : float or None
        Lean of the flank beyond half a seat step [rad]; None: the mean of the published range.
    seat_clearance : float or None
        Seat radius less roller radius [m]; None: the mean of the published range.
    tip_radius : float or None
        Radius of the rounded tip [m]; None: 0.1 pitch, or what fits.
    name : str
        Named in messages.

    Returns
    -------
    ToothForm
        The outline; see `arriving_clearance` for what it leaves free.

    Raises
    ------
    LayoutError
        If no tooth fits between the rollers, or the tip is too sharp, or the form cuts the arc of
        the arriving pin.

    References
    ----------
    Outside diameter ``p (0.6 + cot(180°/z))`` and pressure angles: ASME B29.1 (from memory).
    """
    if teeth < 4:
        raise LayoutError(f"sprocket {name!r}: a wheel of {teeth} teeth carries no chain")
    chain_pitch = pitch if chain_pitch is None else chain_pitch
    lean = pressure_angles(teeth).mean if pressure_angle is None else pressure_angle
    if not 0.0 < lean < 0.5 * math.pi - math.pi / teeth:
        raise LayoutError(
            f"sprocket {name!r}: pressure angle is {math.degrees(lean):.1f}°, need more than 0° "
            f"and less than {90.0 - 180.0 / teeth:.1f}°"
        )
    clearance = (
        sum(seat_clearances(roller_diameter)) / 2.0 if seat_clearance is None else seat_clearance
    )
    blank = ToothForm(
        teeth=teeth,
        pitch_radius=radius_of_pitch(pitch, teeth),
        roller_radius=0.5 * roller_diameter,
        seat_clearance=clearance,
        pressure_angle=lean,
        outer_radius=0.0,
        corner_radius=0.0,
        corner_u=0.0,
        corner_w=0.0,
        flank_end=0.0,
        has_land=False,
    )
    _refuse_no_tooth(blank, name)
    if height is None:
        return _worked_out(blank, pitch, chain_pitch, tip_radius, name)
    return _as_given(blank, pitch, chain_pitch, height, tip_radius, name)


def _refuse_no_tooth(blank: ToothForm, name: str) -> None:
    """Refuse rollers so large that the seats' arcs meet."""
    seat_arc = blank.roller_radius + blank.seat_clearance
    room = blank.seat_radius * math.sin(blank.half_angle)
    half_tooth = room - seat_arc * math.cos(blank.pressure_angle)
    if half_tooth <= 0.0:
        raise LayoutError(
            f"sprocket {name!r}: rollers of {2e3 * blank.roller_radius:.2f} mm leave no tooth "
            f"between seats {2e3 * room:.2f} mm apart; need smaller rollers or a longer pitch"
        )


def _sharpest_round(blank: ToothForm, outer_radius: float) -> float:
    """Return the radius [m] of a full round tip of that height: the largest that fits.

    With ``T`` the tip on the center line: ``r_t (1 − sin φ) = −(r_s + n · (T − S))``.
    """
    tip_u = outer_radius * math.cos(blank.half_angle) - blank.seat_radius
    tip_w = outer_radius * math.sin(blank.half_angle)
    seat_arc = blank.roller_radius + blank.seat_clearance
    over = blank.sin_lean * tip_u - blank.cos_lean * tip_w
    return -(seat_arc + over) / (1.0 - math.sin(blank.pressure_angle))


def _with_tip(blank: ToothForm, outer_radius: float, radius: float) -> ToothForm:
    """Put a tip of that height and radius on the flank; a full round where it just fits."""
    largest = _sharpest_round(blank, outer_radius)
    has_land = radius < largest * (1.0 - 1e-9)
    radius = min(radius, largest)
    out = np.array([math.cos(blank.half_angle), math.sin(blank.half_angle)])
    seat_arc = blank.roller_radius + blank.seat_clearance
    normal = np.array([blank.sin_lean, -blank.cos_lean])
    corner = np.linalg.solve(
        np.vstack([normal, out]),
        np.array([-seat_arc - radius, outer_radius - radius - blank.seat_radius * out[0]]),
    )
    return replace(
        blank,
        outer_radius=outer_radius,
        corner_radius=radius,
        corner_u=float(corner[0]),
        corner_w=float(corner[1]),
        flank_end=float(blank.cos_lean * corner[0] + blank.sin_lean * corner[1]),
        has_land=bool(has_land),
    )


def _worked_out(
    blank: ToothForm, pitch: float, chain_pitch: float, tip_radius: float | None, name: str
) -> ToothForm:
    """Take the published height, lowered until the tip is round enough and clears the arc."""
    wanted = USUAL_TIP * pitch if tip_radius is None else tip_radius
    needed = SHARPEST_TIP * pitch if tip_radius is None else tip_radius

    def slack(outer_radius: float) -> float:
        form = _with_tip(blank, outer_radius, wanted)
        clear = arriving_clearance(form, chain_pitch) - KEEP_CLEAR * pitch
        return min(clear, _sharpest_round(blank, outer_radius) - needed)

    highest = standard_tip_radius(pitch, blank.teeth)
    lowest = blank.pitch_radius + LOWEST * pitch
    if slack(lowest) <= 0.0 or highest <= lowest:
        raise LayoutError(
            f"sprocket {name!r}: no tooth of {blank.teeth} clears the arriving pin with a "
            f"pressure angle of {math.degrees(blank.pressure_angle):.1f}° and a tip radius of "
            f"{1e3 * needed:.2f} mm; lean the flank more or take smaller rollers"
        )
    if slack(highest) < 0.0:
        highest = float(brentq(slack, lowest, highest, xtol=1e-12))
    return _checked(_with_tip(blank, highest, wanted), pitch, chain_pitch, name)


def _as_given(
    blank: ToothForm,
    pitch: float,
    chain_pitch: float,
    height: float,
    tip_radius: float | None,
    name: str,
) -> ToothForm:
    """Take the height as given, and say what is wrong with it."""
    outer_radius = blank.pitch_radius + height
    largest = _sharpest_round(blank, outer_radius)
    wanted = USUAL_TIP * pitch if tip_radius is None else tip_radius
    if largest < SHARPEST_TIP * pitch or (tip_radius is not None and tip_radius > largest):
        raise LayoutError(
            f"sprocket {name!r}: a tooth of {1e3 * height:.2f} mm has room for a tip radius of "
            f"{1e3 * max(largest, 0.0):.2f} mm, need at least "
            f"{1e3 * max(SHARPEST_TIP * pitch, tip_radius or 0.0):.2f} mm; make it lower"
        )
    return _checked(_with_tip(blank, outer_radius, wanted), pitch, chain_pitch, name)


def _checked(form: ToothForm, pitch: float, chain_pitch: float, name: str) -> ToothForm:
    """Refuse a tip that is sharp, swallows its flank, or stands in the arriving pin's way."""
    if form.corner_radius < SHARPEST_TIP * pitch * (1.0 - 1e-9):
        raise LayoutError(
            f"sprocket {name!r}: tip radius is {1e3 * form.corner_radius:.2f} mm, need at least "
            f"{1e3 * SHARPEST_TIP * pitch:.2f} mm (0.05 of the pitch)"
        )
    if form.flank_end <= 0.0:
        raise LayoutError(
            f"sprocket {name!r}: a tooth of {1e3 * form.height:.2f} mm with a tip radius of "
            f"{1e3 * form.corner_radius:.2f} mm has no flank left; make it higher or sharper"
        )
    clear = arriving_clearance(form, chain_pitch)
    if clear < 0.0:
        raise LayoutError(
            f"sprocket {name!r}: the tooth cuts the arc of the arriving pin by "
            f"{-1e3 * clear:.2f} mm; make it lower than {1e3 * form.height:.2f} mm or lean the "
            f"flank more than {math.degrees(form.pressure_angle):.1f}°"
        )
    return form
