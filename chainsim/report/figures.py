"""Plots that do not run over time: tension along a strand, harmonics, resonance, balls, work."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from chainsim.analysis.chain_motion import ripple
from chainsim.analysis.survey import Survey, survey
from chainsim.analysis.tensions import station_tension
from chainsim.closed_forms.chordal import speed_harmonic
from chainsim.report.moments import is_lost
from chainsim.report.style import FAINT, INK, LINE_CYCLE, OUTCOME_COLORS, STEEL, new_figure
from chainsim.report.text import significant


def height_figure(rec: Any) -> Figure | None:
    """Draw least, mean and largest tension along the carrying strands in steady running."""
    s = survey(rec)
    if not s.carrying:
        return None
    figure, all_axes = new_figure(height=2.7 * len(s.carrying) + 0.4, rows=len(s.carrying))
    for axes, k in zip(all_axes, s.carrying, strict=True):
        draw_profile(axes, s, k)
        slack = s.scenario.limits.slack_tension
        axes.axvline(slack, color=OUTCOME_COLORS["fails"], linewidth=1.1, linestyle=(0, (7, 3)))
        axes.annotate(
            " slack",
            (slack, 0.02),
            xycoords=("data", "axes fraction"),
            fontsize=7.5,
            color=OUTCOME_COLORS["fails"],
        )
        axes.set_title(f"carrying strand {s.strands[k].name}")
        axes.set_ylabel(f"distance from {s.sprocket_names[s.strands[k].start]} [mm]")
    text = "steady running" if s.steady else "whole run"
    all_axes[-1].set_xlabel(f"tension over one tooth passage [N]; line: mean, band: range, {text}")
    return figure


def draw_profile(axes: Axes, s: Survey, strand: int) -> None:
    """Draw the tension of one strand station by station."""
    found = station_tension(s, strand)
    chosen = found.tension[s.is_steady] if s.steady else found.tension
    known = np.isfinite(chosen).any(axis=0)
    values = chosen[:, known]
    distance = 1e3 * found.distance[known]
    low, high = np.nanmin(values, axis=0), np.nanmax(values, axis=0)
    look = LINE_CYCLE[0]
    axes.fill_betweenx(distance, low, high, color=look["color"], alpha=0.22, linewidth=0)
    axes.plot(np.nanmean(values, axis=0), distance, **look)


def harmonics_figure(rec: Any) -> Figure | None:
    """Draw the harmonics of the chain speed at the tooth rate, beside the polygon's own."""
    s = survey(rec)
    found = ripple(s)
    if found is None:
        return None
    teeth = s.teeth[s.sprocket_names.index(s.scenario.drive.sprocket)]
    order = np.arange(1, len(found.harmonic) + 1)
    figure, (axes,) = new_figure(height=2.4)
    axes.bar(
        order - 0.18, 100.0 * found.harmonic, 0.34, color=LINE_CYCLE[0]["color"], label="simulated"
    )
    if teeth:
        form = [100.0 * abs(speed_harmonic(teeth, int(k))) for k in order]
        label = f"polygon of {teeth} teeth, closed form"
        axes.bar(
            order + 0.18, form, 0.34, facecolor="none", edgecolor=INK, hatch="////", label=label
        )
    axes.set_xticks(order)
    axes.set_xlabel(f"harmonic of the tooth rate ({s.tooth_rate:.3g} Hz)")
    axes.set_ylabel("amplitude [% of mean speed]")
    axes.legend(loc="upper right", fontsize=8)
    axes.grid(axis="x", visible=False)
    return figure


SHOWN_RATES = 2.5
"""How far the axis of frequencies goes at least [tooth rates]."""


def is_judged(kind: str) -> bool:
    """Tell whether a mode is judged: those of the take-ups, and the first of each strand."""
    return kind.startswith("take-up") or (kind.startswith("strand") and kind.endswith(" 1"))


def resonance_figure(rec: Any) -> Figure | None:
    """Draw natural frequencies over the tooth rate, its half, and their guard bands."""
    modes = rec.modes
    s = survey(rec)
    if not modes or not np.isfinite(s.tooth_rate):
        return None
    kinds = [mode.kind for mode in modes]
    frequency = np.array([mode.frequency for mode in modes])
    rate = s.tooth_rate
    named = [k for k, kind in enumerate(kinds) if is_judged(kind)]
    rest = [k for k in range(len(kinds)) if k not in named and frequency[k] < SHOWN_RATES * rate]
    figure, (axes,) = new_figure(height=1.3 + 0.27 * (len(named) + 1))
    guard = rec.scenario.limits.guard_band
    for factor, label in ((1.0, "tooth rate"), (0.5, "half of it")):
        axes.axvspan(
            factor * rate * (1 - guard), factor * rate * (1 + guard), color=STEEL, alpha=0.25, lw=0
        )
        axes.axvline(factor * rate, color=INK, linewidth=1.4, linestyle=(0, (7, 3)))
        axes.annotate(
            label,
            (factor * rate, 1.0),
            xycoords=("data", "axes fraction"),
            ha="center",
            va="bottom",
            fontsize=8,
        )
    order = sorted(named, key=lambda k: -frequency[k])
    rows = ["all others"] + [kinds[k] for k in order] if rest else [kinds[k] for k in order]
    if rest:
        axes.plot(frequency[rest], np.zeros(len(rest)), "|", color=FAINT, markersize=9)
    for row, k in enumerate(order, start=1 if rest else 0):
        axes.plot([0.0, frequency[k]], [row, row], color=STEEL, linewidth=0.8)
        look = "D" if kinds[k].startswith("take-up") else "o"
        axes.plot(frequency[k], row, look, color=LINE_CYCLE[0]["color"], markersize=6)
        axes.annotate(
            f"{frequency[k]:.1f}",
            (frequency[k], row),
            xytext=(7, 0),
            textcoords="offset points",
            va="center",
            fontsize=8,
        )
    axes.set_yticks(range(len(rows)), rows)
    axes.set_ylim(-0.6, len(rows) - 0.4)
    axes.set_xlim(0.0, max([SHOWN_RATES * rate, *(1.15 * frequency[named])]))
    axes.set_xlabel(
        "frequency [Hz]; shaded: guard band around the tooth rate and around half of it"
    )
    axes.grid(axis="y", visible=False)
    return figure


FATE_LOOKS = {
    "delivered": ("o", "full"),
    "aboard": (">", "none"),
}


def balls_figure(rec: Any) -> Figure | None:
    """Draw the life of every ball: fed, seated, and how it ended."""
    if not rec.balls:
        return None
    figure, (axes,) = new_figure(height=min(1.4 + 0.14 * len(rec.balls), 6.0))
    end = float(rec.time[-1])
    seen: set[str] = set()
    for ball in rec.balls:
        fed = ball.fed_time if math.isfinite(ball.fed_time) else 0.0
        over = ball.end_time if math.isfinite(ball.end_time) else end
        seated = ball.seated_time if math.isfinite(ball.seated_time) else over
        axes.plot([fed, seated], [ball.number] * 2, color=STEEL, linewidth=1.0, linestyle=":")
        axes.plot([seated, over], [ball.number] * 2, color=STEEL, linewidth=1.8)
        lost = is_lost(ball.fate)
        marker, fill = FATE_LOOKS.get(ball.fate, ("X", "full"))
        color = OUTCOME_COLORS["fails"] if lost else LINE_CYCLE[0]["color"]
        label = ball.fate if ball.fate not in seen else None
        seen.add(ball.fate)
        axes.plot(
            over,
            ball.number,
            marker,
            fillstyle=fill,
            color=color,
            markersize=7 if lost else 4.5,
            linestyle="none",
            label=label,
            clip_on=False,
        )
        if lost:
            axes.annotate(
                ball.fate,
                (over, ball.number),
                xytext=(7, 0),
                textcoords="offset points",
                fontsize=7.5,
                va="center",
            )
    axes.set_xlabel("time [s]; dotted: waiting or free, solid: in a pocket")
    axes.set_ylabel("number of the ball")
    axes.yaxis.set_major_locator(MaxNLocator(integer=True))
    axes.legend(loc="lower right", bbox_to_anchor=(1.0, 1.0), ncols=6, fontsize=8)
    return figure


STATES = ("kinetic", "potential", "stored")
INPUTS = ("work_drive", "work_knock", "balls_in")


def work_rows(rec: Any) -> list[tuple[str, float, bool]]:
    """Return name, energy by the end of the run [mJ] and whether it came in, row by row."""
    rows = []
    for path in (name for name in rec.names() if name.startswith("energy/")):
        name = path.split("/")[1]
        value = float(rec[path][-1])
        text = rec.long_name(path)
        if name in STATES:
            value -= float(rec[path][0])
            text = f"change of {text.replace('energy stored', 'the energy')}"
        if value != 0.0:
            rows.append((text, 1e3 * value, name in INPUTS))
    return sorted(rows, key=lambda row: (not row[2], -abs(row[1])))


def work_figure(rec: Any) -> Figure | None:
    """Draw what came in by the end of the run, and where it went."""
    rows = work_rows(rec)
    if not rows:
        return None
    figure, (axes,) = new_figure(height=1.1 + 0.24 * len(rows))
    for is_input, label, look in (
        (True, "came in", {"facecolor": "none", "edgecolor": INK, "hatch": "////"}),
        (False, "went out or stayed", {"color": LINE_CYCLE[0]["color"]}),
    ):
        own = [k for k, row in enumerate(rows) if row[2] is is_input]
        axes.barh(own, [rows[k][1] for k in own], height=0.6, label=label, **look)
    axes.set_yticks(range(len(rows)), [text for text, _, _ in rows])
    axes.invert_yaxis()
    axes.margins(x=0.14)
    for k, (_, value, _) in enumerate(rows):
        axes.annotate(
            significant(value),
            (value, k),
            xytext=(4 if value >= 0 else -4, 0),
            textcoords="offset points",
            ha="left" if value >= 0 else "right",
            va="center",
            fontsize=8,
        )
    axes.axvline(0.0, color=INK, linewidth=0.8)
    axes.set_xlabel("energy by the end of the run [mJ]")
    axes.legend(loc="lower right", bbox_to_anchor=(1.0, 1.0), ncols=2, fontsize=8)
    axes.grid(axis="y", visible=False)
    return figure
