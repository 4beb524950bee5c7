"""Arrows and measures on the paper of a drawing, in millimeters with y downward."""

from __future__ import annotations

import math

import numpy as np

from chainsim.report.style import FAINT, INK


def round_length(longest: float) -> float:
    """Return the greatest length of 1, 2 or 5 times a power of ten up to `longest`.

    Parameters
    ----------
    longest : float
        Greatest length [m].

    Returns
    -------
    float
        Length for a scale bar [m].
    """
    unit = 10.0 ** math.floor(math.log10(longest))
    return max(step * unit for step in (1.0, 2.0, 5.0) if step * unit <= longest * (1.0 + 1e-9))


def arrow(tail: np.ndarray, tip: np.ndarray, color: str, width: float) -> str:
    """Draw an arrow.

    Parameters
    ----------
    tail, tip : ndarray, shape (2,)
        Its ends on the paper [mm, dimensionless in the SVG].
    color : str
        Color of line and head.
    width : float
        Width of the line [mm].

    Returns
    -------
    str
        SVG elements.
    """
    along = (tip - tail) / np.linalg.norm(tip - tail)
    across = np.array([-along[1], along[0]])
    back = tip - 1.8 * along
    points = " ".join(
        f"{x:.2f},{y:.2f}" for x, y in (tip, back + 0.6 * across, back - 0.6 * across)
    )
    return (
        f'<path d="M{tail[0]:.2f} {tail[1]:.2f}L{back[0]:.2f} {back[1]:.2f}" stroke="{color}" '
        f'stroke-width="{width}"/><polygon points="{points}" fill="{color}"/>'
    )


def measure(start: np.ndarray, end: np.ndarray, text: str) -> str:
    """Draw a measure between two places, its figure along it.

    Parameters
    ----------
    start, end : ndarray, shape (2,)
        Its ends on the paper [mm], from left to right or from below to above.
    text : str
        The figure.

    Returns
    -------
    str
        SVG elements.
    """
    middle = 0.5 * (start + end)
    turn = math.degrees(math.atan2(end[1] - start[1], end[0] - start[0]))
    return (
        arrow(middle, start, INK, 0.15)
        + arrow(middle, end, INK, 0.15)
        + f'<text class="measure" text-anchor="middle" transform="translate({middle[0]:.2f} '
        f'{middle[1]:.2f}) rotate({turn:.1f})" y="-0.8">{text}</text>'
    )


def dashed(start: tuple[float, float], end: tuple[float, float]) -> str:
    """Draw a thin dashed line that carries a place out to its measure.

    Parameters
    ----------
    start, end : tuple of float, shape (2,)
        Its ends on the paper [mm].

    Returns
    -------
    str
        SVG element.
    """
    return (
        f'<path d="M{start[0]:.2f} {start[1]:.2f}L{end[0]:.2f} {end[1]:.2f}" stroke="{FAINT}" '
        f'stroke-width="0.1" stroke-dasharray="2 1"/>'
    )
