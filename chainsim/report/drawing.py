"""Draws the lift to scale at one recorded moment: chain by tension, teeth, carriers, balls."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection, PatchCollection
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Circle, Polygon

from chainsim.report.parts import (
    carrier_parts,
    held_seat,
    highest_tensions,
    n_slots,
    sprocket_parts,
    standing_parts,
    usual_tension,
    view_box,
)
from chainsim.report.style import (
    FAINT,
    INK,
    PUSH_DASH,
    STEEL,
    TENSION_COLORS,
    TENSION_WIDTHS,
    new_figure,
    tension_class,
    tension_edges,
    tension_text,
)

BALL_FILL = "#f4ead6"


def _turned(points: np.ndarray, angle: float, center: np.ndarray) -> np.ndarray:
    """Return points of a wheel's frame in the world's, shape (n, 2) [m]."""
    c, s = np.cos(angle), np.sin(angle)
    return np.asarray(points) @ np.array([[c, s], [-s, c]]) + center


def on_link(pins: np.ndarray, link: int, outline: list) -> np.ndarray:
    """Return an outline given along a link and along its normal in the world's frame.

    Parameters
    ----------
    pins : ndarray, shape (n_pins, 2)
        Pin centers [m].
    link : int
        Number of the link [dimensionless].
    outline : list
        Points along t and along n from the first pin [m].

    Returns
    -------
    ndarray, shape (n, 2)
        The points [m].
    """
    start, end = pins[link], pins[(link + 1) % len(pins)]
    along = (end - start) / np.linalg.norm(end - start)
    normal = np.array([along[1], -along[0]])
    points = np.asarray(outline)
    return start + points[:, :1] * along + points[:, 1:] * normal


class Parts(NamedTuple):
    """What a drawing needs that does not change in a run.

    Attributes
    ----------
    standing, sprockets, carriers, pockets : list
        From `chainsim.report.parts`.
    box : tuple of 4 floats
        Left, bottom, right and top of everything [m].
    edges : ndarray
        Limits of the tension classes [N].
    ball_radius : float
        Radius of a ball [m].
    held : tuple of 2 floats or None
        Center of a held ball along t and n of its link [m].
    """

    standing: list
    sprockets: list
    carriers: list
    pockets: list
    box: tuple[float, ...]
    edges: np.ndarray
    ball_radius: float
    held: tuple[float, float] | None


def drawing_parts(rec: Any) -> Parts:
    """Return the unchanging parts of a recorded lift."""
    standing, sprockets = standing_parts(rec), sprocket_parts(rec)
    carriers, pockets = carrier_parts(rec)
    return Parts(
        standing,
        sprockets,
        carriers,
        pockets,
        view_box(rec, sprockets, standing),
        tension_edges(usual_tension(rec)),
        0.5 * rec.scenario.balls.diameter if rec.scenario.balls else 0.0,
        held_seat(rec),
    )


def _draw_standing(axes: Axes, parts: Parts) -> None:
    """Draw walls, guides, chute and trough."""
    for line in parts.standing:
        points = 1e3 * np.asarray(line["points"])
        axes.plot(points[:, 0], points[:, 1], color=FAINT, linewidth=1.8, zorder=1)


def _draw_sprockets(axes: Axes, parts: Parts, centers: np.ndarray, angles: np.ndarray) -> None:
    """Draw the outline and the axle of every sprocket."""
    for part, center, angle in zip(parts.sprockets, centers, angles, strict=True):
        outline = 1e3 * _turned(np.asarray(part["outline"]), angle, center)
        patch = Polygon(outline, facecolor="#e4e9ea", edgecolor=STEEL, linewidth=0.7, zorder=2)
        axes.add_patch(patch)
        axes.plot(*(1e3 * center), marker="+", color=INK, markersize=7, zorder=3)


def _draw_chain(axes: Axes, pins: np.ndarray, tension: np.ndarray, edges: np.ndarray) -> None:
    """Draw every link in the hue and width of its tension, dashed where it pushes."""
    ends = 1e3 * np.stack([pins, np.roll(pins, -1, axis=0)], axis=1)
    classes = tension_class(tension, edges)
    for k, (color, width) in enumerate(zip(TENSION_COLORS, TENSION_WIDTHS, strict=True)):
        lines = LineCollection(list(ends[classes == k]), colors=color, linewidths=width, zorder=4)
        axes.add_collection(lines)
    pushing = list(ends[classes == -1])
    axes.add_collection(
        LineCollection(pushing, colors=INK, linewidths=1.5, linestyles=(0, PUSH_DASH), zorder=4)
    )


def _draw_carriers(axes: Axes, parts: Parts, pins: np.ndarray) -> None:
    """Draw the pockets."""
    outlines = [1e3 * on_link(pins, c["link"], parts.pockets[c["pocket"]]) for c in parts.carriers]
    axes.add_collection(LineCollection(outlines, colors=INK, linewidths=1.0, zorder=5))


def _draw_balls(axes: Axes, rec: Any, sample: int, radius: float) -> None:
    """Draw every ball that is in the lift."""
    if not n_slots(rec):
        return
    in_use = at(rec, "balls/number", sample) >= 0
    places = 1e3 * at(rec, "balls/position", sample)[in_use]
    circles = [Circle(place, 1e3 * radius) for place in places if np.isfinite(place).all()]
    axes.add_collection(
        PatchCollection(circles, facecolor=BALL_FILL, edgecolor=INK, linewidth=0.9, zorder=6)
    )


def _draw_held_balls(axes: Axes, rec: Any, sample: int, parts: Parts, pins: np.ndarray) -> None:
    """Draw a ball in every carrier that holds one."""
    if parts.held is None:
        return
    loaded = at(rec, "carriers/loaded", sample) > 0
    links = [c["link"] for c, is_loaded in zip(parts.carriers, loaded, strict=True) if is_loaded]
    places = [1e3 * on_link(pins, link, [parts.held])[0] for link in links]
    circles = [Circle((x, y), 1e3 * parts.ball_radius) for x, y in places]
    axes.add_collection(
        PatchCollection(circles, facecolor=BALL_FILL, edgecolor=INK, linewidth=0.9, zorder=6)
    )


def at(rec: Any, name: str, sample: int) -> np.ndarray:
    """Return one sample of a channel, in its unit, without reading the others."""
    return rec.read(name, slice(sample, sample + 1))[0]


def tension_key(edges: np.ndarray, has_push: bool) -> list[Line2D]:
    """Return what the legend needs to show the tension classes.

    Parameters
    ----------
    edges : ndarray, shape (n_classes + 1,)
        Limits of the classes [N].
    has_push : bool
        Whether some link pushes.
    """
    handles = []
    for k, (color, width) in enumerate(zip(TENSION_COLORS, TENSION_WIDTHS, strict=True)):
        label = tension_text(edges, k)
        handles.append(Line2D([], [], color=color, linewidth=width, label=label))
    if has_push:
        handles.append(
            Line2D([], [], color=INK, linewidth=1.5, linestyle=(0, PUSH_DASH), label="pushes")
        )
    return handles


def draw_lift(axes: Axes, rec: Any, sample: int, parts: Parts | None = None) -> None:
    """Draw the lift at one sample, in millimeters and to scale.

    Parameters
    ----------
    axes : Axes
        Where to draw.
    rec : Recording
        The run.
    sample : int
        Which sample [dimensionless].
    parts : Parts, optional
        From `drawing_parts`, to save time where many moments are drawn.
    """
    parts = parts or drawing_parts(rec)
    pins = at(rec, "pins/position", sample).astype(float)
    _draw_standing(axes, parts)
    _draw_sprockets(
        axes, parts, at(rec, "sprockets/center", sample), at(rec, "sprockets/angle", sample)
    )
    _draw_chain(axes, pins, at(rec, "links/tension", sample), parts.edges)
    _draw_carriers(axes, parts, pins)
    _draw_held_balls(axes, rec, sample, parts, pins)
    _draw_balls(axes, rec, sample, parts.ball_radius)
    left, bottom, right, top = (1e3 * side for side in parts.box)
    is_mirrored = rec.scenario.view == "back"
    axes.set_aspect("equal")
    axes.set_xlim(*((right, left) if is_mirrored else (left, right)))
    axes.set_ylim(bottom, top)
    axes.set_xlabel("x [mm], seen from behind" if is_mirrored else "x [mm]")
    axes.set_ylabel("y [mm]")


def lift_figure(rec: Any) -> Figure:
    """Draw the lift at the moment of the highest tension of any link."""
    sample = int(np.nanargmax(highest_tensions(rec)))
    parts = drawing_parts(rec)
    left, bottom, right, top = parts.box
    height = 7.0
    width = min(max(height * (right - left) / (top - bottom) + 2.6, 4.2), 7.4)
    figure, (axes,) = new_figure(width=width, height=height)
    draw_lift(axes, rec, sample, parts)
    keys = tension_key(parts.edges, bool((at(rec, "links/tension", sample) < 0.0).any()))
    figure.legend(handles=keys, loc="outside right upper", title="link tension", fontsize=8)
    axes.set_title(f"at {rec.time[sample]:.3f} s")
    return figure
