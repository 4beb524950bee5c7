"""Surplus chain between two points: a bow of equal links that hangs to one side of them."""

from __future__ import annotations

import math

import numpy as np
from scipy.optimize import brentq

from chainsim.errors import LayoutError

STRAIGHT = 1e-9
"""Excess of length over the chord, in shares of the chord (dimensionless), below which a bow is
drawn straight."""


def bow_out(
    start: np.ndarray,
    end: np.ndarray,
    links: int,
    pitch: float,
    down: tuple[float, float],
) -> np.ndarray:
    """Place the inner pins of `links` unstrained links that hang between two points.

    Little surplus makes a flat arc; more than a half circle needs two straight legs with a half
    circle between them, as a loop hangs from a wheel.  All chords have exactly one pitch.

    Parameters
    ----------
    start, end : ndarray, shape (2,)
        The pins at the ends, already placed [m].
    links : int
        Number of links between them (dimensionless).
    pitch : float
        Length of each link [m].
    down : tuple of float, shape (2,)
        Unit direction of gravity (dimensionless); the bow lies on that side of its ends.

    Returns
    -------
    ndarray, shape (links - 1, 2)
        Inner pins in order from start to end [m].

    Raises
    ------
    LayoutError
        If the links do not reach from start to end.
    """
    chord = end - start
    apart = float(np.hypot(*chord))
    if links < 1 or apart > links * pitch * (1.0 + 1e-6):
        raise LayoutError(
            f"{max(links, 0)} links of {1e3 * pitch:.2f} mm do not reach over {1e3 * apart:.2f} mm"
        )
    side = _lower_side(chord / apart, np.array(down, dtype=float))
    legs = _straight_links(apart, links, pitch)
    reach = np.arange(1, legs + 1)[:, None] * pitch * side
    arc = _arc(
        start + legs * pitch * side, end + legs * pitch * side, links - 2 * legs, pitch, side
    )
    if legs == 0:
        return arc
    foot_in, foot_out = start + reach, (end + reach)[::-1]
    return np.vstack([foot_in, arc, foot_out])


def _lower_side(along: np.ndarray, down: np.ndarray) -> np.ndarray:
    """Return the normal of the chord that points down; out of the loop where neither does."""
    outward = np.array([along[1], -along[0]])
    return -outward if outward @ down < -1e-9 else outward


def _straight_links(apart: float, links: int, pitch: float) -> int:
    """Return the links in each leg that leave the arc nearest to a half circle (dimensionless)."""
    half_circle = math.pi / (2.0 * math.asin(min(1.0, pitch / apart))) if apart > pitch else 2.0
    return max(0, int((links - half_circle) // 2))


def _arc(
    start: np.ndarray, end: np.ndarray, links: int, pitch: float, side: np.ndarray
) -> np.ndarray:
    """Place the inner pins of a regular polygon arc with `links` sides of one pitch.

    With ``a`` half the angle of one side: ``sin(links a)/sin(a) = chord/pitch``.
    """
    chord = end - start
    apart = float(np.hypot(*chord))
    ratio = apart / pitch
    if links < 2 or ratio >= links * (1.0 - STRAIGHT):
        return start + np.arange(1, links)[:, None] / links * chord
    half = brentq(
        lambda a: math.sin(links * a) - ratio * math.sin(a), 1e-9, math.pi / links, xtol=1e-16
    )
    along = chord / apart
    turn = (links - 1) * half - 2.0 * half * np.arange(links)
    steps = pitch * (np.cos(turn)[:, None] * along + np.sin(turn)[:, None] * side)
    return start + np.cumsum(steps, axis=0)[:-1]
