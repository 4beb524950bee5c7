"""How chainsim draws: colors, tension classes, outcome words, and the style of its plots.

Tension is one hue from light to dark with growing line width, so that it reads in grey; a link that
pushes is dashed. An outcome is a word and a bar of its own shape; color only repeats what they say.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

INK = "#17232b"
PAPER = "#ffffff"
FAINT = "#5c6a72"
GRID = "#d9dee0"
STEEL = "#8d99a0"

TENSION_COLORS = ("#a5cbc9", "#79b0b0", "#4f9499", "#317982", "#1d5f6b", "#0f4753", "#07303b")
"""Line colors of the tension classes, lowest tension first; lightness falls evenly."""

TENSION_WIDTHS = (1.2, 1.7, 2.2, 2.8, 3.4, 4.1, 4.8)
"""Line widths of the tension classes [pt]."""

PUSH_DASH = (2.0, 1.4)
"""Dash and gap of a link that pushes, in line widths."""

LINE_CYCLE: tuple[dict, ...] = (
    {"color": "#0f4753", "linestyle": "-"},
    {"color": "#c07f1a", "linestyle": (0, (5, 1.5))},
    {"color": "#7a4b78", "linestyle": (0, (5, 1.2, 1.2, 1.2))},
    {"color": "#4f9499", "linestyle": (0, (1.2, 1.2))},
    {"color": "#17232b", "linestyle": (0, (8, 2, 1, 2, 1, 2))},
    {"color": "#a6543b", "linestyle": (0, (3, 3))},
)
"""Line looks in turn: hue, lightness and dash all differ, so that any one of them is enough."""

OUTCOME_COLORS = {
    "holds": "#1d5f6b",
    "close": "#a06500",
    "fails": "#9c2f1f",
    "not judged": "#5c6a72",
}

PLOT_STYLE: dict[Any, Any] = {
    "font.family": "sans-serif",
    "font.sans-serif": ["Liberation Sans", "DejaVu Sans"],
    "font.size": 9.0,
    "axes.edgecolor": FAINT,
    "axes.labelcolor": INK,
    "axes.titlesize": 10.0,
    "axes.titleweight": "bold",
    "axes.titlelocation": "left",
    "axes.grid": True,
    "axes.axisbelow": True,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "grid.color": GRID,
    "grid.linewidth": 0.6,
    "xtick.color": FAINT,
    "ytick.color": FAINT,
    "text.color": INK,
    "lines.linewidth": 1.4,
    "legend.frameon": False,
    "legend.handlelength": 3.2,
    "figure.facecolor": PAPER,
    "savefig.facecolor": PAPER,
    "svg.fonttype": "path",
    "svg.hashsalt": "chainsim",
    "path.simplify": True,
}


@contextmanager
def plot_style() -> Iterator[None]:
    """Draw with the package's style inside a ``with`` block, whatever the user's settings are."""
    with mpl.rc_context():
        mpl.rcdefaults()
        mpl.rcParams.update(PLOT_STYLE)
        yield


def new_figure(
    width: float = 7.4, height: float = 2.9, rows: int = 1
) -> tuple[Figure, tuple[Axes, ...]]:
    """Return a figure without any window and its axes, one below the other.

    Parameters
    ----------
    width, height : float
        Size of the figure [inch].
    rows : int
        Number of axes sharing their horizontal axis [dimensionless].

    Returns
    -------
    figure : Figure
        With an Agg canvas and a constrained layout.
    axes : tuple of Axes
        From the top down.
    """
    figure = Figure(figsize=(width, height), layout="constrained")
    FigureCanvasAgg(figure)
    axes = figure.subplots(rows, 1, sharex=True, squeeze=False)
    return figure, tuple(axes[:, 0])


def tension_edges(highest: float) -> np.ndarray:
    """Return the limits between the tension classes of a run.

    Parameters
    ----------
    highest : float
        Tension that the classes have to reach [N].

    Returns
    -------
    ndarray, shape (n_classes + 1,)
        Rising from 0 in round steps to the largest tension or more [N].
    """
    n_classes = len(TENSION_COLORS)
    return round_up(max(highest, 1e-3) / n_classes) * np.arange(n_classes + 1)


def round_up(value: float) -> float:
    """Return the next value of the row 1, 1.2, 1.5, 2, 2.5, 3, … 8 (times a power of ten).

    Parameters
    ----------
    value : float
        Greater than zero [any unit].

    Returns
    -------
    float
        At or over `value` [the same unit].
    """
    power = 10.0 ** np.floor(np.log10(value))
    for step in (1.0, 1.2, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0):
        if value <= step * power * (1.0 + 1e-9):
            return float(step * power)
    return float(10.0 * power)


def tension_text(edges: np.ndarray, index: int) -> str:
    """Return what a key says of a tension class; the last one takes in all that is higher.

    Parameters
    ----------
    edges : ndarray, shape (n_classes + 1,)
        From `tension_edges` [N].
    index : int
        Which class, from 0 [dimensionless].
    """
    if index == len(edges) - 2:
        return f"over {edges[index]:.3g} N"
    return f"{edges[index]:.3g} to {edges[index + 1]:.3g} N"


def tension_class(tension: np.ndarray, edges: np.ndarray) -> np.ndarray:
    """Return the class of each tension, −1 where the link pushes.

    Parameters
    ----------
    tension : ndarray
        Tensions [N], any shape.
    edges : ndarray, shape (n_classes + 1,)
        From `tension_edges` [N].

    Returns
    -------
    ndarray of int
        Of the shape of `tension`; 0 is the lowest class [dimensionless].
    """
    found = np.searchsorted(edges, tension, side="right") - 1
    return np.where(tension < 0.0, -1, np.clip(found, 0, len(TENSION_COLORS) - 1))
