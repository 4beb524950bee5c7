"""The findings as the page shows them: words, gauge, and the mark to jump to."""

from __future__ import annotations

from typing import Any

from chainsim.report.marks import margin_gauge, outcome_bar
from chainsim.report.moments import Mark
from chainsim.report.text import GROUP_TITLES, moment_text, quantity, readable, signed, unit_of


def finding_view(finding: Any, reserve: float, marks: list[Mark]) -> dict:
    """Return everything the page needs to show one finding.

    Parameters
    ----------
    finding : Finding
        The finding.
    reserve : float
        Share of the scale below which an outcome is close [dimensionless].
    marks : list of Mark
        Marks of the playback, to find the one of this finding.
    """
    unit = unit_of(finding.name, finding.unit)
    measured = quantity(finding.value, unit)
    if finding.limit is not None:
        measured += f", limit {quantity(finding.limit, unit)}"
    where = moment_text(finding.time, finding.place or "")
    label = f"{finding.title}: "
    mark = next(
        (k for k, m in enumerate(marks) if m.kind == "worst" and m.label.startswith(label)), None
    )
    has_margin = finding.margin is not None
    return {
        "title": finding.title,
        "outcome": finding.outcome,
        "bar": outcome_bar(finding.outcome),
        "measured": measured if finding.value is not None else "No value.",
        "where": where,
        "note": readable(finding.note or ""),
        "why": finding.why,
        "gauge": margin_gauge(finding.margin, finding.scale, reserve),
        "margin": f"margin {signed(finding.margin, unit)}" if has_margin else "",
        "scale": f"scale {quantity(finding.scale, unit)}" if finding.scale and has_margin else "",
        "mark": mark,
    }


def grouped(findings: list, reserve: float, marks: list[Mark]) -> list[dict]:
    """Return the findings in their groups, in the order in which they stand on paper.

    Parameters
    ----------
    findings : list of Finding
        The findings.
    reserve : float
        Share of the scale below which an outcome is close [dimensionless].
    marks : list of Mark
        Marks of the playback.
    """
    return [
        {
            "name": title,
            "findings": [finding_view(f, reserve, marks) for f in findings if f.group == group],
        }
        for group, title in GROUP_TITLES.items()
        if any(f.group == group for f in findings)
    ]
