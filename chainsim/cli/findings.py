"""Findings on the terminal and as data: verdict, table in four groups, situations."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

from chainsim.cli.frame import FAILS, HOLDS
from chainsim.cli.screen import heading, remark_data, show

LOOKS = {"holds": "", "close": "bold", "fails": "bold reverse", "not judged": "dim"}
"""Look of an outcome's word on a terminal; the word alone says it all."""

KEYS = (
    "name", "group", "title", "outcome", "value", "unit", "limit", "margin", "scale", "time",
    "place", "note", "why",
)  # fmt: skip
"""What is told of a finding in machine-readable output."""


DOES_NOT_APPLY = "does not apply"
NOT_ENOUGH_DATA = "not enough data"


def status_of(findings: Sequence[Any], remarks: Sequence[Any], strict: bool) -> int:
    """Return the exit status that findings ask for.

    Parameters
    ----------
    findings : sequence of Finding
        Of one run.
    remarks : sequence of Remark
        Warnings of its scenario.
    strict : bool
        Whether warnings and missing data count as a failure.

    Returns
    -------
    int
        0 where all that is judged holds or is close, else 1 (dimensionless).
    """
    if any(finding.outcome == "fails" for finding in findings):
        return FAILS
    missing = any(finding.why == NOT_ENOUGH_DATA for finding in findings)
    return FAILS if strict and (missing or remarks) else HOLDS


def finding_data(finding: Any) -> dict[str, Any]:
    """Return a finding as plain data, in the units of the recording."""
    data = {key: getattr(finding, key) for key in KEYS}
    if finding.outcome != "not judged":
        del data["why"]
    return data


def run_data(rec: Any, remarks: Sequence[Any]) -> dict[str, Any]:
    """Return what a run showed as plain data."""
    from chainsim.findings import situations, verdict
    from chainsim.report.text import findings_of

    found, findings = situations(rec), findings_of(rec)
    return {
        "recording": str(rec.path.absolute()) if rec.path else None,
        "complete": bool(rec.complete),
        "stop_reason": rec.stop_reason,
        "verdict": verdict(findings, found),
        "findings": [finding_data(finding) for finding in findings],
        "situations": {"run": list(found.run), "not_run": list(found.not_run)},
        "remarks": remark_data(remarks),
    }


def show_verdict(rec: Any) -> None:
    """Print the verdict in a sentence, the findings in their groups, and the situations."""
    from chainsim.findings import situations, verdict
    from chainsim.report.text import findings_of, readable

    found, findings = situations(rec), findings_of(rec)
    show(f"\n{rec.scenario.title or rec.scenario.stem}")
    show(heading(readable(verdict(findings, found))), "", findings_table(findings))
    show("", notes_table(findings))
    show(
        f"\nSituations run: {', '.join(found.run) or 'none'}",
        f"Not run: {', '.join(found.not_run) or 'none'}",
    )


def findings_table(findings: Sequence[Any]) -> Any:
    """Return the findings as a table of `rich`, 80 columns wide."""
    from rich.table import Table
    from rich.text import Text

    from chainsim.report.text import GROUP_TITLES

    table = Table(box=None, padding=(0, 1, 0, 0), pad_edge=False, header_style="dim")
    table.add_column("finding", max_width=34)
    for name in ("outcome", "worst", "limit", "margin"):
        table.add_column(name, justify="left" if name == "outcome" else "right")
    for group, title in GROUP_TITLES.items():
        table.add_row(Text(title, style="bold"))
        for finding in findings:
            if finding.group == group:
                table.add_row(*_cells(finding))
    return table


def _cells(finding: Any) -> Iterator[Any]:
    """Cells of a finding: its title over when and where, its margin over the scale."""
    from rich.padding import Padding
    from rich.text import Text

    from chainsim.report.text import moment_text, quantity, signed, unit_of

    unit = unit_of(finding.name, finding.unit)
    moment = moment_text(finding.time, finding.place or "")
    under = [(f"\n  {moment}", "dim")] if moment else []
    yield Padding(Text.assemble(finding.title, *under), (0, 0, 0, 1))
    yield Text(finding.outcome, style=LOOKS.get(finding.outcome, ""))
    yield quantity(finding.value, unit)
    yield quantity(finding.limit, unit)
    if finding.margin is None:
        yield "–"
    else:
        scale = f"\nof {quantity(finding.scale, unit)}"
        yield Text.assemble(signed(finding.margin, unit), (scale, "dim"))


def notes_table(findings: Sequence[Any]) -> Any:
    """Return what to know about findings that fail, are close, or were not judged."""
    from rich.table import Table

    table = Table.grid(padding=(0, 1))
    for line in notes(findings):
        table.add_row("-", line)
    return table


def notes(findings: Sequence[Any]) -> Iterator[str]:
    """Yield one line for each finding that needs it; those that do not apply share one."""
    from chainsim.report.text import readable

    for outcome in ("fails", "close", "not judged"):
        for finding in findings:
            if finding.outcome == outcome and finding.why != DOES_NOT_APPLY:
                said = [part for part in (finding.why, readable(finding.note or "")) if part]
                yield f"{finding.title}, {outcome}{': ' if said else ''}{'; '.join(said)}"
    apart = [finding.title for finding in findings if finding.why == DOES_NOT_APPLY]
    if apart:
        yield f"does not apply, or no limit is set (the page says which): {', '.join(apart)}"
