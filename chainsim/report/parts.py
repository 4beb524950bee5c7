"""The parts of a recorded lift that do not change in a run, as plain values for drawing."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from chainsim.model.pockets import pocket_form

OUTLINE_POINTS = 160
"""Most points of one tooth outline on the page [dimensionless]."""


WINDOW = 4096
"""Samples read at once [dimensionless], so that a long recording needs little memory."""


def sampled(rec: Any, name: str, samples: np.ndarray) -> np.ndarray:
    """Read a channel at some samples, without holding all of it.

    Parameters
    ----------
    rec : Recording
        The run.
    name : str
        Path of the channel.
    samples : ndarray of int, shape (n,)
        Rising sample numbers [dimensionless].

    Returns
    -------
    ndarray, shape (n, ...)
        Values in the unit of the channel.
    """
    pieces = []
    for start in range(0, len(rec.time), WINDOW):
        own = samples[(samples >= start) & (samples < start + WINDOW)]
        if len(own):
            pieces.append(rec.read(name, slice(start, start + WINDOW))[own - start])
    return np.concatenate(pieces)


def highest_tensions(rec: Any) -> np.ndarray:
    """Return the highest tension of any link at every sample [N], shape (n_samples,)."""
    pieces = [
        np.nanmax(rec.read("links/tension", slice(start, start + WINDOW)), axis=1)
        for start in range(0, len(rec.time), WINDOW)
    ]
    return np.concatenate(pieces)


def usual_tension(rec: Any) -> float:
    """Return the tension that is exceeded in 2 % of the samples only [N].

    The tension classes end there, so that one jerk does not make all the rest look light.
    """
    return float(np.nanpercentile(highest_tensions(rec), 98.0))


def standing_parts(rec: Any) -> list[dict]:
    """Return what stands still: walls, guides, chute and trough, as named polylines [m]."""
    parts = []
    for name in sorted(rec.names()):
        if name.startswith(("geometry/walls/", "geometry/guides/")) or name in (
            "geometry/chute",
            "geometry/trough",
        ):
            points = _finite_points(rec[name])
            if len(points) > 1:
                parts.append({"name": name.split("/", 1)[1], "points": points.round(5).tolist()})
    return parts


def _finite_points(points: np.ndarray) -> np.ndarray:
    """Return the points without the padding, shape (n, 2) [m]."""
    points = np.asarray(points, dtype=float).reshape(-1, 2)
    return points[np.isfinite(points).all(axis=1)]


def sprocket_parts(rec: Any) -> list[dict]:
    """Return name, outline, radius [m] and kind of mount of every sprocket."""
    outlines = rec["geometry/tooth_outline"]
    radii = rec["geometry/seat_radius"]
    centers = rec.read("sprockets/center", slice(0, 1))[0]
    parts = []
    for index, sprocket in enumerate(rec.scenario.sprocket):
        outline = _finite_points(outlines[index])
        stride = max(1, math.ceil(len(outline) / OUTLINE_POINTS))
        kind = sprocket.mount.kind
        moves = kind not in ("fixed", "screwed")
        home = sprocket.center if moves else centers[index]
        parts.append(
            {
                "name": sprocket.name,
                "outline": outline[::stride].round(6).tolist(),
                "radius": round(float(radii[index]), 6),
                "moves": moves,
                "hangs": kind in ("hung", "arm"),
                "weight": kind == "counterweight",
                "home": [round(float(x), 6) for x in home],
            }
        )
    return parts


def carrier_parts(rec: Any) -> tuple[list[dict], list[list]]:
    """Return link and outline number of every carrier, and the outlines [m]."""
    if "geometry/pocket_outline" not in rec:
        return [], []
    links = np.asarray(rec["geometry/carrier_link"], dtype=int)
    shapes: list[list] = []
    carriers = []
    for link, outline in zip(links, rec["geometry/pocket_outline"], strict=True):
        shape = _finite_points(outline).round(6).tolist()
        if shape not in shapes:
            shapes.append(shape)
        carriers.append({"link": int(link), "pocket": shapes.index(shape)})
    return carriers, shapes


STRAY = 0.35
"""How far beyond the standing lift a stray chain is still shown, as a share of its larger side."""


def view_box(rec: Any, parts: list[dict], standing: list[dict]) -> tuple[float, ...]:
    """Return left, bottom, right and top of what the whole view must show [m]."""
    corners = [point for line in standing for point in np.asarray(line["points"])]
    for part in parts:
        reach = 1.3 * part["radius"]
        drop = 2.4 * part["radius"] if part["hangs"] or part["weight"] else reach
        center = np.asarray(part["home"])
        corners += [center - [reach, drop], center + reach]
        if part["weight"]:
            corners.append(center + [3.2 * part["radius"], 2.4 * part["radius"]])
    low, high = np.min(corners, axis=0), np.max(corners, axis=0)
    stray = STRAY * float((high - low).max())
    pins = sampled(rec, "pins/position", np.arange(0, len(rec.time), max(1, len(rec.time) // 200)))
    reach = 0.0
    if "geometry/pocket_outline" in rec:
        reach = float(np.nanmax(np.abs(rec["geometry/pocket_outline"])))
    lowest, highest = np.nanmin(pins, axis=(0, 1)) - reach, np.nanmax(pins, axis=(0, 1)) + reach
    low = np.minimum(low, np.maximum(lowest, low - stray))
    high = np.maximum(high, np.minimum(highest, high + stray))
    return (*low, *high)


def held_seat(rec: Any) -> tuple[float, float] | None:
    """Return the center of a held ball along t and n of its link [m], None where none is held."""
    scenario = rec.scenario
    if scenario.balls is None or scenario.carriers is None or "carriers/loaded" not in rec:
        return None
    if scenario.balls.model != "fixed":
        return None
    radius = 0.5 * scenario.balls.diameter
    return pocket_form(scenario.carriers.pocket, radius, scenario.chain.pitch).seat


def n_slots(rec: Any) -> int:
    """Return the number of ball slots in a recording [dimensionless]."""
    return int(rec["balls/number"].shape[1]) if "balls/number" in rec else 0


def scalar(rec: Any, name: str) -> float:
    """Return a single stored value [m], 0 where there is none."""
    return float(np.asarray(rec[name]).reshape(-1)[0]) if name in rec else 0.0
