"""A sweep as one self-contained page: ranking, maps, ensemble, runs that failed."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from markupsafe import Markup

from chainsim.errors import ChainsimError
from chainsim.report.images import page_image
from chainsim.report.marks import outcome_bar
from chainsim.report.page import render_page
from chainsim.report.style import OUTCOME_COLORS, plot_style
from chainsim.report.sweep_map import line_in_cells, map_figure
from chainsim.report.text import BLIND_SPOTS, DEFERS
from chainsim.scenario import parse_scenario
from chainsim.study.limit_estimates import estimate
from chainsim.study.limit_questions import question
from chainsim.study.maps import Map
from chainsim.study.ranking import Ranked, reason
from chainsim.study.rows import FAILED, Row
from chainsim.study.sweeping import Sweep
from chainsim.study.tolerances import (
    ensemble_verdict,
    influences,
    result_values,
)

SHOWN = 20
"""Most variants and failures in a table [dimensionless]."""
MAP_TEXT = (
    "Least margin of any finding, as a share of that finding's own scale. "
    "Thick line round what fails, dashed line round what is close."
)
LINE_TEXT = "closed form (free body)"


def render_sweep(sweep: Sweep, path: str | Path) -> Path:
    """Write a sweep as a page.

    Parameters
    ----------
    sweep : Sweep
        The sweep, with whatever is finished of it.
    path : str or Path
        File to write.

    Returns
    -------
    Path
        The file written.
    """
    path = Path(path)
    rows = sweep.rows()
    ranked = sweep.ranking()
    headings, table = ranking_table(sweep, ranked)
    page = render_page(
        "sweep.html.j2",
        title=sweep.plan.title,
        plan_name=Path(sweep.plan.file).name,
        reason=reason(ranked),
        counts=counts_text(rows),
        headings=headings,
        ranking=table,
        plots=map_images(sweep),
        ensemble=ensemble_lines(sweep, rows),
        influences=influence_rows(sweep, rows),
        influence_headings=("axis", "finding", "alone", "95 %", "with all others", "95 %"),
        failures=failure_rows(sweep, rows),
        blind=BLIND_SPOTS,
        defers=DEFERS,
    )
    path.write_text(page, encoding="utf-8")
    return path


def counts_text(rows: list[Row | None]) -> str:
    """How many runs of a sweep are finished, in a sentence."""
    missing = sum(row is None for row in rows)
    failed = sum(row is not None and row.state == FAILED for row in rows)
    text = f"{len(rows) - missing - failed} of {len(rows)} runs are completed"
    return text + (f", {failed} could not be, {missing} are not done yet." if failed or missing
                   else ".")  # fmt: skip


def ranking_table(sweep: Sweep, ranked: list[Ranked]) -> tuple[tuple[str, ...], list[tuple]]:
    """Headings and rows of the table of best variants."""
    axes = [axis.name for axis in sweep.plan.axes]
    headings = ("place", *short_names(axes), "outcome", "weakest finding", "its reserve")
    table = [
        (
            entry.place,
            *(entry.point.labels[name] for name in axes),
            outcome_cell(entry.outcome),
            entry.weakest.replace("_", " "),
            reserve_text(entry.reserve),
        )
        for entry in ranked[:SHOWN]
    ]
    return headings, table


def short_names(names: list[str]) -> list[str]:
    """Last parts of dotted keys, with as many parts as tell them apart."""
    shown = []
    for name in names:
        parts = name.split(".")
        others = [other.split(".") for other in names if other != name]
        length = next(
            n for n in range(1, len(parts) + 1)
            if n == len(parts) or all(other[-n:] != parts[-n:] for other in others)
        )  # fmt: skip
        shown.append(" ".join(parts[-length:]).replace("_", " "))
    return shown


def outcome_cell(word: str) -> Markup:
    """An outcome as word and bar."""
    bar = outcome_bar(word) if word in OUTCOME_COLORS else Markup("")
    return Markup('<span class="outcome">{} <strong>{}</strong></span>').format(bar, word)


def reserve_text(reserve: float) -> str:
    """A reserve in percent of its scale, or a dash where there is none.

    Parameters
    ----------
    reserve : float
        Margin over scale (dimensionless).
    """
    return f"{reserve:.0%}" if abs(reserve) < float("inf") else "–"


def map_images(sweep: Sweep) -> list[dict]:
    """Maps of a sweep as the page shows them."""
    shown = []
    for found in sweep.maps():
        with plot_style():
            figure = map_figure(found, closed_form_line(sweep, found), LINE_TEXT)
        title = f"Reserve where {found.title}" if found.title else "Reserve"
        shown.append(page_image(figure, title, MAP_TEXT))
    return shown


def closed_form_line(sweep: Sweep, found: Map) -> list[tuple[float, float]]:
    """Closed-form boundary of a take-up on a map, for each row of cells.

    Parameters
    ----------
    sweep : Sweep
        The sweep.
    found : Map
        One of its maps.

    Returns
    -------
    list of tuple of float
        Points in cells (dimensionless); empty where the map has no axis with a closed form.
    """
    if found.across.numbers is None:
        return []
    values = [_threshold(sweep, found, label) for label in found.up.labels]
    return line_in_cells(values, found.across)


def _threshold(sweep: Sweep, found: Map, up_label: str) -> float | None:
    """Closed-form take-up in one row of cells [unit of the horizontal axis]."""
    fixed = {**found.fixed, found.up.name: up_label}
    for point in sweep.points:
        if point.refusal is None and fixed.items() <= point.labels.items():
            scenario = parse_scenario(point.text, point.scenario).with_values(point.values)
            return _estimate(scenario, found)
    return None


def _estimate(scenario: Any, found: Map) -> float | None:
    try:
        asked = question(scenario, "takeup")
    except ChainsimError:
        return None
    key = next(iter(asked.values(asked.present)))
    value = estimate(scenario, "takeup").value
    if key != found.across.name or not value:
        return None
    number = float(found.across.labels[0].split()[0])
    in_unit = scenario.with_values({key: found.across.labels[0]})
    return value * number / question(in_unit, "takeup").present


def ensemble_lines(sweep: Sweep, rows: list[Row | None]) -> list[str]:
    """What a sample says as a whole; empty for a grid."""
    if sweep.plan.sample.kind == "grid" or not any(rows):
        return []
    told = ensemble_verdict(rows, sweep.plan.keep.findings)
    lines = [f"A finding fails in {told.failing} variants."]
    if told.losses is not None:
        lines.append(f"Balls lost: {told.losses}.")
        lines.append(
            f"To claim fewer than one loss in 10,000 at 95 %, {told.further_balls:,} balls must be "
            "carried without a loss."
        )
    if told.not_completed:
        lines.append(f"{told.not_completed} runs could not be completed and are counted nowhere.")
    return lines


def influence_rows(sweep: Sweep, rows: list[Row | None]) -> list[tuple]:
    """Which tolerance matters for which finding; empty unless the plan asks for indices."""
    if sweep.plan.sample.kind != "indices" or None in rows:
        return []
    axes = [axis.name for axis in sweep.plan.axes]
    table: list[tuple] = []
    names = {f["name"]: None for row in rows if row is not None for f in row.findings}
    for name in sweep.plan.keep.findings or names:
        try:
            found, _ = influences(result_values(rows, name), axes, sweep.plan.sample.count)
        except ChainsimError:
            continue
        table += [
            (
                entry.axis,
                name.replace("_", " "),
                f"{entry.alone:.2f}",
                "{:.2f} to {:.2f}".format(*entry.alone_range),
                f"{entry.in_all:.2f}",
                "{:.2f} to {:.2f}".format(*entry.in_all_range),
            )
            for entry in found
        ]
    return table


def failure_rows(sweep: Sweep, rows: list[Row | None]) -> list[tuple]:
    """Runs that could not be completed, with their choices and the reason."""
    table = []
    for point, row in zip(sweep.points, rows, strict=True):
        if row is not None and row.failure is not None:
            choices = ", ".join(f"{name} = {label}" for name, label in point.labels.items())
            table.append((point.id, choices, f"{row.failure.code}: {row.failure.text}"))
    return table[:SHOWN]
