"""Draws panels over time: for one run, or several runs on top of each other."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from chainsim.report.moments import is_notable
from chainsim.report.series import DEMANDED, Curve, Panel
from chainsim.report.style import FAINT, LINE_CYCLE, OUTCOME_COLORS, new_figure

LABEL_ROOM = 0.08
"""Least distance of two labels, as a share of the axis [dimensionless]."""

MAX_EVENTS = 12
"""Most events that are drawn over time [dimensionless]."""

MAX_COLUMNS = 360
"""Most pieces of time of one curve [dimensionless]; more samples become bands."""

SMOOTH_PIECES = 7
"""Pieces of time that a drawn mean takes in [dimensionless]."""

NEARLY_CONSTANT = 0.15
"""Span of a quantity over its size below which its axis starts from zero [dimensionless]."""

PANEL_HEIGHT = 1.75
"""Height of one panel [inch]."""


def thinned(time: np.ndarray, values: np.ndarray) -> tuple[np.ndarray, ...]:
    """Return middle time, mean, least and largest value of each piece of time.

    Parameters
    ----------
    time, values : ndarray, shape (n_samples,)
        Times [s] and values [any unit]; pieces without a number come out as NaN.

    Returns
    -------
    tuple of 4 ndarrays, each of shape (n,)
        Times [s] and values [their unit]; n is at most `MAX_COLUMNS`, or every sample where
        there are no more than that.
    """
    size = max(1, int(np.ceil(len(time) / MAX_COLUMNS)))
    full = len(time) - len(time) % size
    middle = time[:full].reshape(-1, size).mean(axis=1)
    pieces = np.asarray(values[:full], dtype=float).reshape(-1, size)
    empty = ~np.isfinite(pieces).any(axis=1)
    count = np.maximum(np.isfinite(pieces).sum(axis=1), 1)
    mean = np.where(empty, np.nan, np.nansum(pieces, axis=1) / count)
    low = np.where(empty, np.nan, np.where(np.isfinite(pieces), pieces, np.inf).min(axis=1))
    high = np.where(empty, np.nan, np.where(np.isfinite(pieces), pieces, -np.inf).max(axis=1))
    return middle, mean, low, high


def smoothed(mean: np.ndarray) -> np.ndarray:
    """Return a mean over several pieces of time, so that no beat with the tooth rate shows.

    Parameters
    ----------
    mean : ndarray, shape (n,)
        Means of the pieces [any unit]; NaN where there is none.
    """
    known = np.isfinite(mean)
    window = np.ones(SMOOTH_PIECES)
    total = np.convolve(np.where(known, mean, 0.0), window, mode="same")
    count = np.convolve(known.astype(float), window, mode="same")
    return np.where(known, total / np.maximum(count, 1.0), np.nan)


def _draw_curve(axes: Axes, time: np.ndarray, curve: Curve, look: dict, label: str) -> None:
    """Draw a curve with the band between least and largest values behind it."""
    middle, mean, low, high = thinned(time, curve.values)
    if len(middle) < len(time):
        axes.fill_between(middle, low, high, color=look["color"], alpha=0.25, linewidth=0.5)
        mean = smoothed(mean)
    axes.plot(middle, mean, label=label, **look)


def _draw_limits(axes: Axes, panel: Panel) -> None:
    """Draw the levels that a quantity is judged against, each with its name."""
    color = OUTCOME_COLORS["fails"]
    for limit in panel.limits:
        axes.axhline(limit.value, color=color, linewidth=1.1, linestyle=(0, (7, 3)))
    low, high = axes.get_ylim()
    last = -np.inf
    for limit in sorted(panel.limits, key=lambda limit: limit.value):
        if limit.value - last < 2.0 * LABEL_ROOM * (high - low):
            continue
        last = limit.value
        axes.annotate(
            limit.label,
            (1.0, limit.value),
            xycoords=("axes fraction", "data"),
            xytext=(0, 2),
            textcoords="offset points",
            ha="right",
            va="bottom",
            fontsize=7.5,
            color=color,
        )


def _draw_events(axes: Axes, rec: Any, named: bool) -> None:
    """Draw a thin line at each notable event, and where the lift counts as settled."""
    top = axes.get_xaxis_transform()
    shown = [event for event in rec.events if is_notable(event) and event.time > rec.time[0]]
    moments = [(event.time, event.kind.replace("_", " ")) for event in shown[:MAX_EVENTS]]
    settle = getattr(rec.scenario.run, "settle", None)
    if settle and settle < rec.time[-1]:
        moments.append((settle, "settled"))
    room = LABEL_ROOM * (rec.time[-1] - rec.time[0])
    last = -np.inf
    for time, name in sorted(moments):
        axes.axvline(time, color=FAINT, linewidth=0.8, linestyle=(0, (1, 2)))
        if named and time - last > room:
            axes.text(time, 1.0, f" {name}", transform=top, fontsize=7.5, color=FAINT, va="bottom")
            last = time


def roomy(low: float, high: float) -> tuple[float, float]:
    """Return a range with room for labels above it; a nearly constant quantity starts from zero.

    Parameters
    ----------
    low, high : float
        Range of what is drawn [any unit].
    """
    if high - low < NEARLY_CONSTANT * max(abs(low), abs(high)):
        low, high = min(low, 0.0), max(high, 0.0)
    if high == low:
        low, high = low - 0.5, high + 0.5
    return low, high + 0.1 * (high - low)


def finish(axes: Axes, panel: Panel) -> None:
    """Label a panel and give its range some air."""
    axes.set_title(panel.title, pad=13)
    axes.set_ylabel(f"{panel.quantity} [{panel.unit}]")
    axes.margins(x=0.0)
    axes.set_ylim(*roomy(*axes.get_ylim()))
    if axes.get_legend_handles_labels()[1]:
        axes.legend(
            loc="lower right", bbox_to_anchor=(1.0, 1.0), ncols=4, borderaxespad=0.1, fontsize=8
        )


def panels_figure(rec: Any, panels: list[Panel]) -> Figure:
    """Draw the panels of one run, one above the other."""
    height = PANEL_HEIGHT * len(panels) + 0.5
    figure, all_axes = new_figure(height=height, rows=len(panels))
    for axes, panel in zip(all_axes, panels, strict=True):
        for k, curve in enumerate(panel.curves):
            look = LINE_CYCLE[k % len(LINE_CYCLE)]
            _draw_curve(axes, rec.time, curve, look, curve.label)
        _draw_limits(axes, panel)
        _draw_events(axes, rec, named=axes is all_axes[0])
        finish(axes, panel)
        axes.set_xlim(min(rec.time[0], 0.0), rec.time[-1])
    all_axes[-1].set_xlabel("time [s]")
    return figure


def overlay_figure(runs: list[tuple[str, Any]], panels: list[list[Panel]]) -> Figure:
    """Draw the curves of several runs on top of each other: a panel per curve, a look per run.

    Parameters
    ----------
    runs : list of (str, Recording)
        The runs with the names they go by.
    panels : list of list of Panel
        The panels of each run; curves of the same title share their axes.
    """
    single = [{p.title: p for panel in own for p in single_panels(panel)} for own in panels]
    titles = list(dict.fromkeys(title for own in single for title in own))
    figure, all_axes = new_figure(height=PANEL_HEIGHT * len(titles) + 0.5, rows=len(titles))
    for axes, title in zip(all_axes, titles, strict=True):
        shown = next(own[title] for own in single if title in own)
        for k, ((name, rec), own) in enumerate(zip(runs, single, strict=True)):
            if title in own:
                curve = own[title].curves[0]
                _draw_curve(axes, rec.time, curve, LINE_CYCLE[k % len(LINE_CYCLE)], name)
        _draw_limits(axes, shown)
        finish(axes, shown)
        axes.set_xlim(0.0, max(rec.time[-1] for _, rec in runs))
    all_axes[-1].set_xlabel("time [s]")
    return figure


def single_panels(panel: Panel) -> list[Panel]:
    """Return a panel for each curve; what was demanded of the drive is left out."""
    return [
        replace(
            panel,
            title=f"{panel.title}, {curve.label}" if curve.label else panel.title,
            curves=(curve,),
        )
        for curve in panel.curves
        if curve.label != DEMANDED
    ]
