"""Smallest gaps between what moves, and between that and what stands.

Counted are the chain with its rollers, the outlines of the pockets, and balls that sit in them,
against walls and the chute, against other strands, and against sprockets that stand outside the
loop. What is meant to touch is left out: chain on its sprockets and guides, a ball in its own
pocket, balls against walls and chute (surfaces that balls may touch), pockets that reach into the
trough.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.carried import carried_balls
from chainsim.analysis.chain_motion import excursion
from chainsim.analysis.distances import from_line, from_links, of_outlines, outline_points
from chainsim.analysis.survey import Survey, survey

N_SPREAD = 100
"""Moments that are looked at, spread over the run [dimensionless]."""

FINE_STEP, FINE_SPAN = 0.125, 12.0
"""Travel between further moments, and of all of them, in the middle of steady running [pitches]."""

N_MOMENTS = 12
"""Moments at which strands are held against each other, evenly spread; and as many in which they
swing inward most [dimensionless]."""


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

    Looked at some moments spread over the run, and some close together in steady running;
    strands against each other where they swing inward most. So a gap may be missed by what the
    parts move in between.

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
    """Sample numbers to look at: spread over the run, and close together over a few pitches."""
    even = np.linspace(0, len(s.time) - 1, min(N_SPREAD, len(s.time))).astype(int)
    if not s.steady:
        return np.unique(even)
    window = max(s.steady, key=lambda w: w.stop - w.start)
    step = max(1, int(FINE_STEP * s.tooth_samples))
    start = (window.start + window.stop) // 2
    fine = np.arange(start, min(start + int(FINE_SPAN * s.tooth_samples), window.stop), step)
    return np.union1d(even, fine)


def _smallest(s: Survey, samples: np.ndarray, gap: np.ndarray, parts: str) -> list[Gap]:
    """Smallest of gaps (n_samples, ...) with its moment; none where all are unknown."""
    flat = gap.reshape(len(samples), -1)
    if not np.isfinite(flat).any():
        return []
    row, _ = np.unravel_index(int(np.nanargmin(flat)), flat.shape)
    return [Gap(float(np.nanmin(flat)), float(s.time[samples[row]]), parts)]


def _to_walls(s: Survey, samples: np.ndarray) -> list[Gap]:
    """Chain and carriers against walls and chute."""
    standing = {f"wall {item.name}": np.asarray(item.points) for item in s.scenario.wall}
    chute = s.channel("geometry/chute")
    if chute is not None and len(chute) > 1:
        standing["chute"] = chute
    if not standing:
        return []
    roller, wall = 0.5 * s.scenario.chain.roller_diameter, _pocket_wall(s)
    corners, pins = outline_points(s, samples), s.position[samples].astype(float)
    gaps: list[Gap] = []
    for name, line in standing.items():
        gaps += _smallest(s, samples, from_line(pins, line) - roller, f"chain and {name}")
        if corners is not None:
            gap = of_outlines(corners, line) - wall
            gaps += _smallest(s, samples, gap, f"carriers and {name}")
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
            gap = from_links(a, b) - s.scenario.chain.roller_diameter
            gaps += _smallest(s, samples, gap, f"strand {name} and strand {other}")
    return gaps


def _leaning_most(s: Survey, samples: np.ndarray) -> np.ndarray:
    """Moments at which strands are looked at: evenly spread ones, and the deepest inward swings."""
    inward = sum(np.nan_to_num(excursion(s, k).inward) for k in range(len(s.strands)))
    even = samples[:: max(1, len(samples) // N_MOMENTS)]
    deepest = np.argpartition(-inward, min(N_MOMENTS, len(inward) - 1))[:N_MOMENTS]
    return np.union1d(even, deepest)


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
