"""A comparison on the terminal and as a page with overlaid plots."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

from markupsafe import Markup
from rich.console import Group
from rich.table import Table
from rich.text import Text

from chainsim.report import series
from chainsim.report.comparison import Comparison, cell
from chainsim.report.images import page_image
from chainsim.report.marks import outcome_bar
from chainsim.report.page import render_page
from chainsim.report.style import OUTCOME_COLORS, plot_style
from chainsim.report.text import BLIND_SPOTS, DEFERS, GROUP_TITLES
from chainsim.report.timeplots import overlay_figure

OVERLAYS: tuple[tuple[str, str, Callable[[Any], list[series.Panel]]], ...] = (
    ("Tension of the strands", "Averaged over one tooth passage.", series.tension_panels),
    ("Sideways excursion of the strands", "Outward positive.", series.excursion_panels),
    ("Seat reserve", "Of the worst seat at each moment.", series.seat_panels),
    ("Speed and accelerations", "Of the chain, and at the balls.", series.ride_panels),
    ("Take-up travel", "From the place on the drawing.", series.takeup_panels),
    ("The drive", "At the driven sprocket.", series.drive_panels),
)
"""Title, text and panels of each overlaid plot."""

TERMINAL_LOOKS = {"holds": "", "close": "bold", "fails": "bold reverse", "not judged": "dim"}


def comparison_table(comparison: Comparison) -> Group:
    """Return a comparison for the terminal, to be printed by `rich`.

    Parameters
    ----------
    comparison : Comparison
        From `chainsim.report.compare`.
    """
    inputs = Table(title="Inputs that differ", title_justify="left", title_style="bold")
    inputs.add_column("key")
    findings = Table(title="Findings", title_justify="left", title_style="bold")
    findings.add_column("finding")
    for name in comparison.names:
        inputs.add_column(Text(name))
        findings.add_column(Text(name))
    for difference in comparison.inputs:
        inputs.add_row(Text(difference.key), *(Text(value) for value in difference.values))
    group = None
    for row in comparison.findings:
        if group not in (None, row.group):
            findings.add_section()
        group = row.group
        cells = []
        for run in range(len(comparison.names)):
            outcome, text = cell(row, run)
            cells.append(Text.assemble((outcome, TERMINAL_LOOKS.get(outcome, "")), "\n", text))
        findings.add_row(Text(row.title), *cells)
    if not comparison.inputs:
        return Group(Text("The scenarios are the same in every value."), findings)
    return Group(inputs, findings)


def render_comparison(comparison: Comparison, path: str | Path) -> Path:
    """Write a comparison as one self-contained HTML page.

    Parameters
    ----------
    comparison : Comparison
        From `chainsim.report.compare`.
    path : str or Path
        File to write.

    Returns
    -------
    Path
        The file written.
    """
    path = Path(path)
    page = render_page(
        "compare.html.j2",
        title="Comparison: " + ", ".join(comparison.names),
        names=comparison.names,
        inputs=[(d.key, *d.values) for d in comparison.inputs],
        groups=finding_groups(comparison),
        plots=overlaid_plots(comparison),
        blind=BLIND_SPOTS,
        defers=DEFERS,
    )
    path.write_text(page, encoding="utf-8")
    return path


def finding_groups(comparison: Comparison) -> list[dict]:
    """Return the findings of a comparison as the page shows them, group by group."""
    groups = []
    for group, title in GROUP_TITLES.items():
        rows = [row for row in comparison.findings if row.group == group]
        if rows:
            shown = [
                (row.title, *(page_cell(row, k) for k in range(len(row.outcomes)))) for row in rows
            ]
            groups.append({"title": title, "rows": shown})
    return groups


def page_cell(row: Any, run: int) -> Markup:
    """Return outcome, value and margin of one run as the page shows them."""
    outcome, text = cell(row, run)
    bar = outcome_bar(outcome) if outcome in OUTCOME_COLORS else Markup("")
    return Markup('<span class="outcome">{} <strong>{}</strong></span><br>{}').format(
        bar, outcome, text
    )


def overlaid_plots(comparison: Comparison) -> list[dict]:
    """Return the plots in which the runs lie on top of each other."""
    runs = list(zip(comparison.names, comparison.runs, strict=True))
    shown = []
    for title, text, panels in OVERLAYS:
        found = [panels(rec) for rec in comparison.runs]
        if not any(found):
            continue
        with plot_style():
            shown.append(page_image(overlay_figure(runs, found), title, text))
    return shown
