"""Pockets: from shapes and outlines to surfaces, the resting place of a ball, and its cone."""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from chainsim.errors import LayoutError

#: places across the pocket at which a ball is tried
TRIALS = 4001
#: rise of a floor on which a ball still moves before a lip stops it [rad]
LEVEL = math.radians(25.0)


@dataclass(frozen=True)
class PocketForm:
    """A pocket in its link's frame: ``a`` along the link from its first pin, ``b`` outward.

    Parameters
    ----------
    outline : ndarray, shape (n_points, 2)
        Surface from the back's edge to the lip's edge, the ball on its left [m].
    spine : ndarray, shape (n_points, 2)
        Middle line of the material [m]; the surface is half a wall away from it.
    half_wall : float
        Half the thickness of the material [m].
    seat : tuple of float, shape (2,)
        Center of a ball at rest on a level link [m].
    lip_slope, back_slope : float
        Steepest rise of the ball's center on its way out over either edge (dimensionless);
        infinite where the wall is higher than the ball's center.
    play : float
        How far the ball can move sideways on the floor [m].
    """

    outline: np.ndarray
    spine: np.ndarray
    half_wall: float
    seat: tuple[float, float]
    lip_slope: float
    back_slope: float
    play: float


def pocket_outline(pocket, ball_radius: float, pitch: float) -> np.ndarray:
    """Return the surface of a pocket from the edge of its back to the edge of its lip.

    Parameters
    ----------
    pocket : Pocket
        The scenario's table: an outline, or floor, lip, tilt, offset and back.
    ball_radius : float
        [m].
    pitch : float
        [m].

    Returns
    -------
    ndarray, shape (n_points, 2)
        Points ``(a, b)`` in the link's frame [m].  The floor stands so low that the center of a
        ball in its seat lies at the middle of the link, where it tips the link least.
    """
    if pocket.outline is not None:
        return np.asarray(pocket.outline, dtype=float)
    along = np.array([math.sin(pocket.tilt), math.cos(pocket.tilt)])
    up = np.array([math.cos(pocket.tilt), -math.sin(pocket.tilt)])
    # the ball touches back and floor: its center stands r / cos(tilt) + r tan(tilt) over the corner
    rise = ball_radius / math.cos(pocket.tilt) + ball_radius * math.tan(pocket.tilt)
    corner = np.array([0.5 * pitch - rise, pocket.offset])
    end = corner + pocket.floor * along
    points = [corner + np.array([pocket.back, 0.0]), corner, end]
    if pocket.lip > 0.0:
        points.append(end + pocket.lip * up)
    if pocket.back <= 0.0:
        points = points[1:]
    return np.array(points)


def pocket_form(
    pocket, ball_radius: float, pitch: float, name: str = "carriers.pocket"
) -> PocketForm:
    """Work out a pocket's surfaces, the seat of its ball and what the seat holds.

    Parameters
    ----------
    pocket : Pocket
        The scenario's table.
    ball_radius, pitch : float
        [m].
    name : str
        Named in messages.

    Returns
    -------
    PocketForm

    Raises
    ------
    LayoutError
        If a ball finds no resting place in it on a level link.
    """
    outline = pocket_outline(pocket, ball_radius, pitch)
    half = 0.5 * pocket.wall
    spine = _shifted(outline, half)
    heights, places = _rest_heights(spine, half + ball_radius)
    seat = _seat_index(heights, name)
    slopes = np.gradient(heights, places)
    # the place next to the seat may straddle a wall: its difference is left out
    lip = _steepest(slopes[seat + 2 :], heights[seat + 2 :], ball_radius)
    back = _steepest(-slopes[: seat - 1][::-1], heights[: seat - 1][::-1], ball_radius)
    back = back if heights[seat - 2] - heights[seat] < 0.5 * ball_radius else math.inf
    lip = lip if heights[seat + 2] - heights[seat] < 0.5 * ball_radius else math.inf
    level = _around(
        heights < heights[seat] + math.tan(LEVEL) * np.abs(places - places[seat]) + 1e-5, seat
    )
    return PocketForm(
        outline=outline,
        spine=spine,
        half_wall=half,
        seat=(float(heights[seat]), float(places[seat])),
        lip_slope=lip,
        back_slope=back,
        play=float(places[level[1]] - places[level[0]]),
    )


def _around(mask: np.ndarray, index: int) -> tuple[int, int]:
    """Return first and last index of the run of true values around `index`."""
    false = np.flatnonzero(~mask)
    before, after = false[false < index], false[false > index]
    first = int(before[-1]) + 1 if len(before) else 0
    last = int(after[0]) - 1 if len(after) else len(mask) - 1
    return first, last


def _shifted(points: np.ndarray, distance: float) -> np.ndarray:
    """Return a polyline shifted to its right, mitred, its ends drawn in by the same distance."""
    steps = np.diff(points, axis=0)
    directions = steps / np.linalg.norm(steps, axis=1, keepdims=True)
    rights = np.column_stack([-directions[:, 1], directions[:, 0]])
    # in (a, b) coordinates with a up and b to the right, the right-hand side of d = (da, db)
    # is (-db, da)
    moved = np.empty_like(points)
    moved[0] = points[0] + distance * rights[0] + distance * directions[0]
    moved[-1] = points[-1] + distance * rights[-1] - distance * directions[-1]
    for k in range(1, len(points) - 1):
        bisector = rights[k - 1] + rights[k]
        moved[k] = points[k] + distance * bisector / (0.5 * bisector @ bisector)
    return moved


def _rest_heights(spine: np.ndarray, reach: float) -> tuple[np.ndarray, np.ndarray]:
    """Return how high a ball's center stands over the pocket at places across it [m]."""
    low, high = spine[:, 1].min() - reach, spine[:, 1].max() + reach
    places = np.linspace(low, high, TRIALS)[1:-1]
    heights = np.full(places.shape, -np.inf)
    for a, b in spine:
        inside = np.abs(places - b) < reach
        rise = np.sqrt(np.maximum(reach**2 - (places - b) ** 2, 0.0))
        heights = np.where(inside, np.maximum(heights, a + rise), heights)
    for (a0, b0), (a1, b1) in pairwise(spine):
        length = math.hypot(a1 - a0, b1 - b0)
        # unit normal on the ball's side; straight pieces carry the ball only where it looks up
        normal = np.array([b1 - b0, -(a1 - a0)]) / length
        if normal[0] <= 1e-9:
            continue
        foot0, foot1 = b0 + reach * normal[1], b1 + reach * normal[1]
        between = (places >= min(foot0, foot1)) & (places <= max(foot0, foot1))
        slope = (a1 - a0) / (b1 - b0) if b1 != b0 else 0.0
        straight = a0 + reach * normal[0] + slope * (places - foot0)
        heights = np.where(between, np.maximum(heights, straight), heights)
    return heights, places


def _seat_index(heights: np.ndarray, name: str) -> int:
    """Return where a ball comes to rest: the lowest place with a rise on both sides."""
    inner = heights[1:-1]
    resting = np.flatnonzero((inner <= heights[:-2]) & (inner <= heights[2:])) + 1
    walled = [
        k
        for k in resting
        if heights[:k].max(initial=-np.inf) > heights[k] + 1e-6
        and heights[k:].max(initial=-np.inf) > heights[k] + 1e-6
    ]
    if not walled:
        raise LayoutError(
            f"{name}: a ball finds no place to rest in it on a level link; "
            "raise the lip or the back, or tilt the floor"
        )
    low = min(heights[k] for k in walled)
    level = [k for k in walled if heights[k] < low + 1e-9]
    return int(level[0])


def _steepest(slopes: np.ndarray, heights: np.ndarray, ball_radius: float) -> float:
    """Return the steepest rise on the way to the summit; infinite for a wall."""
    summit = int(np.argmax(heights))
    if summit == 0:
        return 0.0
    steepest = float(np.max(slopes[: summit + 1]))
    tallest = float(heights[summit] - heights[0])
    return math.inf if tallest > 0.98 * ball_radius or steepest > 50.0 else steepest
