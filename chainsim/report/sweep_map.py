"""Map of a sweep: the least reserve over two axes, with holds, close and fails outlined."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.colors import LinearSegmentedColormap
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.patches import Patch, Rectangle

from chainsim.report.style import FAINT, INK, PAPER, TENSION_COLORS, new_figure
from chainsim.study.maps import Map, MapAxis

HATCHES = {"fails": "xxx", "close": "..", "not completed": "++", "not judged": "//"}
"""Hatch of each outcome but `holds`, which is left plain: a map reads without its colors."""
EDGES = {"fails": (2.4, "-"), "close": (1.4, (0, (4, 2)))}
"""Line width [pt] and dash of the outline round the cells of an outcome."""
NUMBERED_CELLS = 160
"""Most cells whose reserve is written into them [dimensionless]."""
MOST_TICKS = 12
RESERVE_COLORS = LinearSegmentedColormap.from_list("reserve", ("#ffffff", *TENSION_COLORS[:5]))
DARK_FROM = 0.75
"""Reserve from which numbers stand in white [dimensionless]."""


def map_figure(shown: Map, line: Sequence[tuple[float, float]] = (), line_text: str = "") -> Figure:
    """Draw a map.

    Parameters
    ----------
    shown : Map
        The map.
    line : sequence of tuple of float
        Points of a closed-form boundary, in cells from the lower left (dimensionless).
    line_text : str
        What the line is.

    Returns
    -------
    Figure
        Cells filled by reserve (white where it fails, darker with more), hatched and outlined
        by outcome.
    """
    n_up, n_across = shown.outcome.shape
    figure, (axes,) = new_figure(7.4, min(2.2 + 0.32 * n_up, 9.0))
    axes.grid(False)
    _fill(axes, shown)
    for word, (width, dash) in EDGES.items():
        _outline(axes, shown.outcome == word, width, dash)
    if n_up * n_across <= NUMBERED_CELLS:
        _number(axes, shown)
    if len(line) > 1:
        axes.plot(*np.transpose(line), color="#c07f1a", linewidth=2.0, linestyle=(0, (6, 2, 1, 2)))
    _label(axes, shown.across, "x")
    _label(axes, shown.up, "y")
    axes.set_xlim(0, n_across)
    axes.set_ylim(0, n_up)
    if shown.title:
        axes.set_title(shown.title)
    _key(figure, shown, line_text if len(line) > 1 else "")
    return figure


def _fill(axes: Axes, shown: Map) -> None:
    for i, j in np.ndindex(shown.outcome.shape):
        word, reserve = str(shown.outcome[i, j]), float(shown.reserve[i, j])
        share = 0.0 if word == "fails" or not np.isfinite(reserve) else min(max(reserve, 0.0), 1.0)
        axes.add_patch(
            Rectangle(
                (j, i), 1, 1, facecolor=RESERVE_COLORS(share) if word else PAPER,
                edgecolor=FAINT, linewidth=0.3, hatch=HATCHES.get(word),
            )
        )  # fmt: skip


def _outline(axes: Axes, inside: np.ndarray, width: float, dash: object) -> None:
    """Draw the border round all cells of one outcome."""
    n_up, n_across = inside.shape
    padded = np.pad(inside, 1)
    for i in range(n_up + 1):
        for j in range(n_across + 1):
            if padded[i, j + 1] != padded[i + 1, j + 1] and j < n_across:
                axes.plot((j, j + 1), (i, i), color=INK, linewidth=width, linestyle=dash)
            if padded[i + 1, j] != padded[i + 1, j + 1] and i < n_up:
                axes.plot((j, j), (i, i + 1), color=INK, linewidth=width, linestyle=dash)


def _number(axes: Axes, shown: Map) -> None:
    for i, j in np.ndindex(shown.outcome.shape):
        reserve = shown.reserve[i, j]
        if not np.isfinite(reserve):
            continue
        dark = reserve > DARK_FROM and shown.outcome[i, j] not in HATCHES
        axes.text(
            j + 0.5, i + 0.5, f"{np.clip(reserve, -9.99, 9.99):.0%}", ha="center", va="center",
            fontsize=6.5, color=PAPER if dark else INK,
            bbox={"facecolor": "none" if dark else PAPER, "edgecolor": "none", "pad": 0.6,
                  "alpha": 0.8},
        )  # fmt: skip


def _label(axes: Axes, side: MapAxis, which: str) -> None:
    step = max(1, -(-len(side.labels) // MOST_TICKS))
    places = np.arange(0, len(side.labels), step)
    if side.numbers is not None:
        labels = [f"{side.numbers[k]:.4g}" for k in places]
        name = f"{side.name} [{side.unit or '1'}]"
    else:
        labels = [side.labels[k] for k in places]
        name = side.name
    if which == "x":
        axes.set_xticks(places + 0.5, labels)
        axes.set_xlabel(name)
    else:
        axes.set_yticks(places + 0.5, labels)
        axes.set_ylabel(name)


def _key(figure: Figure, shown: Map, line_text: str) -> None:
    found = [word for word in ("holds", "close", "fails", "not judged", "not completed")
             if word in shown.outcome]  # fmt: skip
    handles: list = [
        Patch(
            facecolor=RESERVE_COLORS(0.0 if word in HATCHES else 0.5), edgecolor=INK,
            hatch=HATCHES.get(word), label=word,
        )
        for word in found
    ]  # fmt: skip
    if line_text:
        line = Line2D([], [], color="#c07f1a", linewidth=2.0, linestyle=(0, (6, 2, 1, 2)))
        line.set_label(line_text)
        handles.append(line)
    figure.legend(handles=handles, loc="outside lower center", ncols=len(handles), fontsize=8)


def line_in_cells(values: Sequence[float | None], side: MapAxis) -> list[tuple[float, float]]:
    """Put a closed-form boundary into the cells of a map.

    Parameters
    ----------
    values : sequence of (float or None)
        Boundary on the horizontal axis for each row of cells [unit of `side`]; None for none.
    side : MapAxis
        The horizontal axis; its numbers rise.

    Returns
    -------
    list of tuple of float
        Points (across, up) in cells (dimensionless), two per row so that the line steps.
    """
    if side.numbers is None:
        return []
    numbers = np.log(side.numbers) if side.log else np.asarray(side.numbers)
    points: list[tuple[float, float]] = []
    for row, value in enumerate(values):
        if value is None or value <= 0.0:
            continue
        place = np.interp(np.log(value) if side.log else value, numbers, np.arange(len(numbers)))
        points += [(float(place) + 0.5, float(row)), (float(place) + 0.5, row + 1.0)]
    return points
