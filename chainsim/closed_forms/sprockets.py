"""Geometry of sprockets and of a chain over two of them.

A chain lies on a sprocket as a polygon: `teeth` counts its corners, `pitch` is its side.
"""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.errors import CallError


class PressureAngles(NamedTuple):
    """Range of the tooth pressure angle for a number of teeth.

    Attributes
    ----------
    least, mean, most : float
        Angle between the pull of the chain and the normal of the flank [rad].
    """

    least: float
    mean: float
    most: float


def pitch_radius(pitch: float, teeth: int) -> float:
    """Radius through the seated pins.

    Parameters
    ----------
    pitch : float
        Distance between neighboring seats, along the chord [m].
    teeth : int
        Number of teeth (dimensionless), at least 3.

    Returns
    -------
    float
        Radius of the circle through the corners of the polygon [m].

    References
    ----------
    ISO 606:2015, normative annex A, sprocket pitch diameter `p / sin(180°/z)` (from memory).
    """
    return pitch / (2.0 * math.sin(math.pi / teeth))


def pressure_angles(teeth: int) -> PressureAngles:
    """Published range of the pressure angle of a tooth for roller chain.

    Parameters
    ----------
    teeth : int
        Number of teeth (dimensionless).

    Returns
    -------
    PressureAngles
        `17° − 64°/z`, the mean, and `35° − 120°/z` [rad].

    References
    ----------
    ASME B29.1, appendix on tooth form: maximum and minimum pressure angle for a new chain
    (from memory).
    """
    least = math.radians(17.0 - 64.0 / teeth)
    most = math.radians(35.0 - 120.0 / teeth)
    return PressureAngles(least, 0.5 * (least + most), most)


def standard_tip_radius(pitch: float, teeth: int) -> float:
    """Outside radius of a standard sprocket for roller chain.

    Parameters
    ----------
    pitch : float
        Chain pitch [m].
    teeth : int
        Number of teeth (dimensionless).

    Returns
    -------
    float
        Radius of the tooth tips [m].

    References
    ----------
    ASME B29.1-2011, outside diameter `p (0.6 + cot(180°/z))` (from memory).
    """
    return pitch * (0.3 + 0.5 / math.tan(math.pi / teeth))


def standard_tip_height(pitch: float, teeth: int) -> float:
    """Height of a standard tooth tip above the circle through the seated pins.

    Parameters
    ----------
    pitch : float
        Chain pitch [m].
    teeth : int
        Number of teeth (dimensionless).

    Returns
    -------
    float
        `standard_tip_radius − pitch_radius` [m]; 0.3 p less the rise of the polygon.
    """
    return standard_tip_radius(pitch, teeth) - pitch_radius(pitch, teeth)


def chain_length(teeth_a: int, teeth_b: int, center_distance: float, pitch: float) -> float:
    """Length of a taut chain over two sprockets, wraps counted in teeth.

    Exact for straight strands tangent to the pitch circles; a wrap counts its share of the
    teeth, not the arc of the pitch circle, which is longer by 0.05 to 0.15 pitch.

    Parameters
    ----------
    teeth_a, teeth_b : int
        Numbers of teeth (dimensionless).
    center_distance : float
        Distance of the axles [m].
    pitch : float
        Chain pitch [m].

    Returns
    -------
    float
        Chain length in links (dimensionless), rarely a whole number.

    Raises
    ------
    CallError
        If one sprocket would stand inside the other.

    References
    ----------
    Tangent-line geometry of an open drive: R. G. Budynas and J. K. Nisbett, *Shigley's
    Mechanical Engineering Design*, chapter on flexible elements (from memory).
    """
    distance = center_distance / pitch
    difference = pitch_radius(1.0, teeth_b) - pitch_radius(1.0, teeth_a)
    if abs(difference) >= distance:
        raise CallError(
            f"sprockets of {teeth_a} and {teeth_b} teeth need more than "
            f"{abs(difference):.3g} pitches between their axles, not {distance:.3g}"
        )
    lean = math.asin(difference / distance)
    wraps = teeth_a * (math.pi - 2.0 * lean) + teeth_b * (math.pi + 2.0 * lean)
    return 2.0 * distance * math.cos(lean) + wraps / (2.0 * math.pi)


def handbook_chain_length(
    teeth_a: int, teeth_b: int, center_distance: float, pitch: float
) -> float:
    """Length of a taut chain over two sprockets by the handbook's short formula.

    Parameters
    ----------
    teeth_a, teeth_b : int
        Numbers of teeth (dimensionless).
    center_distance : float
        Distance of the axles [m].
    pitch : float
        Chain pitch [m].

    Returns
    -------
    float
        Chain length in links (dimensionless); within 0.004 at a ratio of 3.

    References
    ----------
    `L = 2 C + (N1 + N2)/2 + (N2 − N1)² / (4 π² C)`, lengths in pitches: *Machinery's
    Handbook*, chapter on roller chain (from memory).
    """
    distance = center_distance / pitch
    return (
        2.0 * distance
        + 0.5 * (teeth_a + teeth_b)
        + (teeth_b - teeth_a) ** 2 / (4.0 * math.pi**2 * distance)
    )


def center_distance(teeth_a: int, teeth_b: int, n_links: float, pitch: float) -> float:
    """Distance of the axles at which a chain of so many links is just taut.

    Parameters
    ----------
    teeth_a, teeth_b : int
        Numbers of teeth (dimensionless).
    n_links : float
        Number of links of the loop (dimensionless).
    pitch : float
        Chain pitch [m].

    Returns
    -------
    float
        Distance of the axles [m], the inverse of `chain_length`.

    Raises
    ------
    CallError
        If the chain is too short to pass over both sprockets.
    """
    from scipy.optimize import brentq

    touching = abs(pitch_radius(pitch, teeth_b) - pitch_radius(pitch, teeth_a))
    low = touching * (1.0 + 1e-12) + 1e-9 * pitch
    high = 0.5 * n_links * pitch
    shortest = chain_length(teeth_a, teeth_b, low, pitch)
    if n_links <= shortest:
        raise CallError(
            f"{n_links:g} links are too few for sprockets of {teeth_a} and {teeth_b} teeth: "
            f"more than {shortest:.1f} are needed"
        )

    def excess(distance: float) -> float:
        return chain_length(teeth_a, teeth_b, distance, pitch) - n_links

    return float(brentq(excess, low, high, xtol=1e-12 * pitch, rtol=1e-14))
