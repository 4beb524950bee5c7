"""Smallest gaps between what moves, and between that and what stands.

Counted are the chain with its rollers, the outlines of the pockets, and balls that sit in them,
against walls, against other strands, and against sprockets that stand outside the loop. What is
meant to touch is left out: chain on its sprockets and guides, a ball in its own pocket, balls
against walls (a wall is a surface that balls may touch).
"""

from __future__ import annotations

from itertools import pairwise
from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.carried import carried_balls
from chainsim.analysis.chain_motion import excursion
from chainsim.analysis.survey import Survey, survey

SHARE_OF_PITCH = 0.5
"""Travel of the chain from one looked-at moment to the next [pitches]."""

N_MOMENTS = 12
"""Moments at which strands are held against each other, evenly spread; and as many in which they
swing inward most [dimensionless]."""

FAR = 1e9
"""Stands for "no such part" [m]."""


class Gap(NamedTuple):
    """Smallest gap of one kind.

    Attributes
    ----------
    size : float
        The gap [m]; negative where the parts pass through each other.
    time : float
        When it was smallest [s].
    parts : str
        Which parts, in words.
    """

    size: float
    time: float
    parts: str


def smallest_gaps(rec: Any) -> list[Gap]:
    """Smallest gap of every kind of pair that the lift has.

    Looked at once per half pitch of travel, strands against each other at the moments in which
    they swing inward most, so that a gap may be missed by what the parts move in between.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    list of Gap
        Smallest first.
    """
    s = survey(rec)
    samples = _moments(s)
    gaps = [*_to_walls(s, samples), *_between_strands(s, samples), *_to_outside(s, samples)]
    gaps += _between_balls(s, samples)
    return sorted(gaps, key=lambda gap: gap.size)


def _moments(s: Survey) -> np.ndarray:
    """Sample numbers to look at."""
    speed = float(np.max(np.abs(s.drive_speed), initial=0.0))
    step = SHARE_OF_PITCH * s.pitch / (speed * s.interval) if speed > 0.0 else len(s.time)
    return np.arange(0, len(s.time), max(1, min(int(step), len(s.time))))


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
    along = along / np.hypot(along[..., 0], along[..., 1])[..., None]
    normal = np.stack((along[..., 1], -along[..., 0]), axis=-1)
    return (
        start[:, :, None]
        + outline[None, ..., 0:1] * along[:, :, None]
        + outline[None, ..., 1:2] * normal[:, :, None]
    )


def _distance_to_line(points: np.ndarray, line: np.ndarray) -> np.ndarray:
    """Distance of points (..., 2) from a polyline (n, 2) [m], shape (...)."""
    best = np.full(points.shape[:-1], FAR)
    for a, b in pairwise(line):
        along = b - a
        share = np.clip(((points - a) @ along) / float(along @ along), 0.0, 1.0)
        away = points - a - share[..., None] * along
        best = np.fmin(best, np.hypot(away[..., 0], away[..., 1]))
    return best


def _smallest(s: Survey, samples: np.ndarray, gap: np.ndarray, parts: str) -> list[Gap]:
    """Smallest of gaps (n_samples, ...) with its moment; none where all are unknown."""
    flat = gap.reshape(len(samples), -1)
    if not np.isfinite(flat).any():
        return []
    row, _ = np.unravel_index(int(np.nanargmin(flat)), flat.shape)
    return [Gap(float(np.nanmin(flat)), float(s.time[samples[row]]), parts)]


def _to_walls(s: Survey, samples: np.ndarray) -> list[Gap]:
    """Chain and carriers against walls."""
    if not s.scenario.wall:
        return []
    roller, wall = 0.5 * s.scenario.chain.roller_diameter, _pocket_wall(s)
    corners = outline_points(s, samples)
    gaps: list[Gap] = []
    for item in s.scenario.wall:
        line = np.asarray(item.points, dtype=float)
        pins = _distance_to_line(s.position[samples].astype(float), line) - roller
        gaps += _smallest(s, samples, pins, f"chain and wall {item.name}")
        if corners is not None:
            gap = _distance_to_line(corners, line) - wall
            gap[np.isnan(corners[..., 0])] = np.nan
            gaps += _smallest(s, samples, gap, f"carriers and wall {item.name}")
    return gaps


def _pocket_wall(s: Survey) -> float:
    """Half the thickness of a pocket's material [m]."""
    return 0.5 * s.scenario.carriers.pocket.wall if s.scenario.carriers is not None else 0.0


def _strand_ranges(s: Survey, samples: np.ndarray) -> list[tuple[str, np.ndarray]]:
    """Pins of each strand without its two ends at the looked-at samples, with its name."""
    found = []
    for strand, pins in zip(s.strands, s.strand_pins, strict=True):
        if len(samples) and int(pins.n_links[samples].min()) > 2:
            found.append((strand.name, pins.pins(samples)[:, 1:-1]))
    return found


def _between_strands(s: Survey, samples: np.ndarray) -> list[Gap]:
    """Each strand against each other one: rollers against the line of links."""
    samples = _leaning_most(s, samples)
    strands, gaps = _strand_ranges(s, samples), []
    rows = np.arange(len(samples))[:, None]
    position = s.position[samples].astype(float)
    for k, (name, first) in enumerate(strands):
        for other, second in strands[k + 1 :]:
            a, b = position[rows, first], position[rows, second]
            gap = _pin_to_links(a, b) - s.scenario.chain.roller_diameter
            gaps += _smallest(s, samples, gap, f"strand {name} and strand {other}")
    return gaps


def _leaning_most(s: Survey, samples: np.ndarray) -> np.ndarray:
    """Moments at which strands are looked at: evenly spread ones, and the deepest inward swings."""
    inward = sum(np.nan_to_num(excursion(s, k).inward) for k in range(len(s.strands)))
    even = samples[:: max(1, len(samples) // N_MOMENTS)]
    deepest = np.argpartition(-inward, min(N_MOMENTS, len(inward) - 1))[:N_MOMENTS]
    return np.union1d(even, deepest)


def _pin_to_links(pins: np.ndarray, chain: np.ndarray) -> np.ndarray:
    """Distance of pins (n, a, 2) from the links between pins (n, b, 2) [m], shape (n, a)."""
    start, along = chain[:, None, :-1], (chain[:, 1:] - chain[:, :-1])[:, None]
    away = pins[:, :, None] - start
    square = np.maximum((along**2).sum(axis=-1), 1e-30)
    share = np.clip((away * along).sum(axis=-1) / square, 0.0, 1.0)
    left = away - share[..., None] * along
    return np.sqrt((left**2).sum(axis=-1).min(axis=2))


def _to_outside(s: Survey, samples: np.ndarray) -> list[Gap]:
    """Carriers against sprockets outside the loop, over whose outside they pass."""
    corners = outline_points(s, samples) if np.any(s.side < 0) else None
    if corners is None:
        return []
    gaps: list[Gap] = []
    roller, wall = 0.5 * s.scenario.chain.roller_diameter, _pocket_wall(s)
    for k in np.flatnonzero(s.side < 0):
        away = corners - s.center[samples, k][:, None, None]
        gap = np.hypot(away[..., 0], away[..., 1]) - wall - (s.seat_radius[k] - roller)
        gaps += _smallest(s, samples, gap, f"carriers and {s.sprocket_names[k]} sprocket")
    return gaps


def _between_balls(s: Survey, samples: np.ndarray) -> list[Gap]:
    """Balls in different pockets against each other."""
    place, pocket = s.channel("balls/position"), s.channel("balls/pocket")
    if place is None or pocket is None or s.scenario.balls is None:
        return []
    held = carried_balls(s)[samples] & (pocket[samples] >= 0)
    spot = np.where(held[..., None], place[samples], np.nan).astype(float)
    n_slots, gaps = spot.shape[1], np.full(len(samples), np.nan)
    for k in range(1, n_slots // 2 + 1):
        away = spot - np.roll(spot, -k, axis=1)
        size = np.hypot(away[..., 0], away[..., 1])
        size[pocket[samples] == np.roll(pocket[samples], -k, axis=1)] = np.nan
        gaps = np.fmin(gaps, np.fmin.reduce(size, axis=1))
    return _smallest(s, samples, gaps - s.scenario.balls.diameter, "balls in neighboring pockets")
