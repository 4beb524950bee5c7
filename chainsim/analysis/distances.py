"""Places of pockets, and distances between points, links and polylines."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np

from chainsim.analysis.survey import survey

FAR = 1e9
"""Stands for "no such part" [m]."""

TINY = 1e-30
"""Square of a length without meaning [m2]."""


def outline_points(rec: Any, samples: np.ndarray) -> np.ndarray | None:
    """Corners of all pockets in the frame.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    samples : ndarray of int, shape (n,)
        Samples to look at [dimensionless].

    Returns
    -------
    ndarray, shape (n, n_carriers, n_points, 2), or None
        Their places [m], NaN where a pocket has fewer; None where the chain is bare.
    """
    s = survey(rec)
    outline, link = s.channel("geometry/pocket_outline"), s.channel("geometry/carrier_link")
    if outline is None or link is None or not len(link):
        return None
    start = s.position[samples[:, None], link]
    along = s.position[samples[:, None], (link + 1) % s.n_pins] - start
    length = np.hypot(along[..., 0], along[..., 1])
    along = along / np.where(length > 0.0, length, np.nan)[..., None]
    normal = np.stack((along[..., 1], -along[..., 0]), axis=-1)
    return (
        start[:, :, None]
        + outline[None, ..., 0:1] * along[:, :, None]
        + outline[None, ..., 1:2] * normal[:, :, None]
    )


def from_line(points: np.ndarray, line: np.ndarray) -> np.ndarray:
    """Distance of points from a polyline.

    Parameters
    ----------
    points : ndarray, shape (..., 2)
        The points [m].
    line : ndarray, shape (n, 2)
        The polyline [m].

    Returns
    -------
    ndarray, shape (...)
        Distances [m].
    """
    best = np.full(points.shape[:-1], FAR)
    for a, b in pairwise(line):
        along = b - a
        share = np.clip(((points - a) @ along) / max(float(along @ along), TINY), 0.0, 1.0)
        away = points - a - share[..., None] * along
        best = np.fmin(best, np.hypot(away[..., 0], away[..., 1]))
    return best


def of_outlines(corners: np.ndarray, line: np.ndarray) -> np.ndarray:
    """Distance of moving polylines from a fixed one.

    Corners of each against the sides of the other; two sides that cross far from any corner
    are seen only when a corner comes near.

    Parameters
    ----------
    corners : ndarray, shape (..., k, 2)
        Corners of the moving ones [m].
    line : ndarray, shape (n, 2)
        The fixed one [m].

    Returns
    -------
    ndarray, shape (..., k)
        Distances of each corner and the side behind it [m]; NaN where there is no corner.
    """
    best = from_line(corners, line)
    start, along = corners[..., :-1, :], np.diff(corners, axis=-2)
    square = np.maximum((along**2).sum(axis=-1), TINY)
    for point in line:
        share = np.clip(((point - start) * along).sum(axis=-1) / square, 0.0, 1.0)
        away = point - start - share[..., None] * along
        best[..., :-1] = np.fmin(best[..., :-1], np.hypot(away[..., 0], away[..., 1]))
    best[np.isnan(corners[..., 0])] = np.nan
    return best


def from_links(pins: np.ndarray, chain: np.ndarray) -> np.ndarray:
    """Distance of pins from the links of another strand.

    Parameters
    ----------
    pins : ndarray, shape (n, a, 2)
        The pins [m].
    chain : ndarray, shape (n, b, 2)
        Pins of the other strand in their order [m].

    Returns
    -------
    ndarray, shape (n, a)
        Distances [m].
    """
    start, along = chain[:, None, :-1], (chain[:, 1:] - chain[:, :-1])[:, None]
    away = pins[:, :, None] - start
    square = np.maximum((along**2).sum(axis=-1), TINY)
    share = np.clip((away * along).sum(axis=-1) / square, 0.0, 1.0)
    left = away - share[..., None] * along
    return np.sqrt((left**2).sum(axis=-1).min(axis=2))
