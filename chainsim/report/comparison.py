"""Sets runs side by side: what differs in their inputs, then their findings and margins."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from chainsim.errors import CallError
from chainsim.report.text import findings_of, quantity, signed, unit_of
from chainsim.report.values import shown_value
from chainsim.scenario.table import leaves

MISSING = "–"


@dataclass(frozen=True)
class InputDifference:
    """One value of the scenarios that is not the same in all runs.

    Attributes
    ----------
    key : str
        Its dotted key.
    values : tuple of str
        Its value in each run, with unit; a dash where a run has none.
    """

    key: str
    values: tuple[str, ...]


@dataclass(frozen=True)
class FindingRow:
    """One finding in all runs.

    Attributes
    ----------
    name, title, group, unit : str
        As the findings have them.
    outcomes : tuple of str
        Outcome in each run; a dash where it has none.
    values, margins : tuple of float or None
        Value and margin in each run, in `unit`.
    changes : tuple of float or None
        Margin of each run less that of the first, in `unit`; positive is better.
    """

    name: str
    title: str
    group: str
    unit: str
    outcomes: tuple[str, ...]
    values: tuple[float | None, ...]
    margins: tuple[float | None, ...]
    changes: tuple[float | None, ...]


@dataclass(frozen=True)
class Comparison:
    """Runs side by side.

    Attributes
    ----------
    names : tuple of str
        What the runs are called.
    inputs : tuple of InputDifference
        Values that differ.
    findings : tuple of FindingRow
        Findings in their usual order.
    runs : tuple of Recording
        The runs themselves, for overlaid plots.
    """

    names: tuple[str, ...]
    inputs: tuple[InputDifference, ...]
    findings: tuple[FindingRow, ...]
    runs: tuple[Any, ...]


def compare(recs: Sequence[Any]) -> Comparison:
    """Set runs side by side; the first is what the others are measured against.

    Parameters
    ----------
    recs : sequence of Recording
        Two runs or more.

    Returns
    -------
    Comparison
        What differs.

    Raises
    ------
    CallError
        If there are fewer than two.
    """
    if len(recs) < 2:
        raise CallError(f"compare: {len(recs)} recording given; need two or more")
    judged = [{f.name: f for f in findings_of(rec)} for rec in recs]
    order = list(dict.fromkeys(name for own in judged for name in own))
    return Comparison(
        names=run_names(recs),
        inputs=input_differences([rec.scenario for rec in recs]),
        findings=tuple(finding_row([own.get(name) for own in judged]) for name in order),
        runs=tuple(recs),
    )


def run_names(recs: Sequence[Any]) -> tuple[str, ...]:
    """Return short names of the runs, all different."""
    plain = [
        Path(rec.path).name.removesuffix(".lift.h5") if rec.path else rec.scenario.stem
        for rec in recs
    ]
    names: list[str] = []
    for name in plain:
        twin = plain.count(name) > 1
        names.append(f"{name} ({1 + sum(n.startswith(name) for n in names)})" if twin else name)
    return tuple(names)


def input_differences(scenarios: Sequence[Any]) -> tuple[InputDifference, ...]:
    """Return every value that is not the same in all scenarios, in the order of the schema."""
    valued = {key for scenario in scenarios for key in scenario.origins()}
    tables = [{leaf.key: leaf for leaf in leaves(s) if leaf.key in valued} for s in scenarios]
    found = []
    for key in dict.fromkeys(key for table in tables for key in table):
        own = [table.get(key) for table in tables]
        values = [None if leaf is None else leaf.value for leaf in own]
        if any(value != values[0] for value in values):
            texts = tuple(
                MISSING if leaf is None or leaf.value is None
                else shown_value(leaf.value, leaf.unit_kind)
                for leaf in own
            )  # fmt: skip
            found.append(InputDifference(key, texts))
    return tuple(found)


def finding_row(found: Sequence[Any | None]) -> FindingRow:
    """Return one finding in all runs, given as each run has it or None."""
    known = next(f for f in found if f is not None)
    margins = tuple(None if f is None else f.margin for f in found)
    units_agree = all(f is None or f.unit == known.unit for f in found)
    return FindingRow(
        name=known.name,
        title=known.title,
        group=known.group,
        unit=known.unit,
        outcomes=tuple(MISSING if f is None else f.outcome for f in found),
        values=tuple(None if f is None else f.value for f in found),
        margins=margins,
        changes=tuple(_margin_change(margins[0], m) if units_agree else None for m in margins[1:]),
    )


def _margin_change(first: float | None, other: float | None) -> float | None:
    """Return how much a margin gained, None where one of them does not exist."""
    if first is None or other is None or not math.isfinite(other - first):
        return None
    return other - first


def cell(row: FindingRow, run: int) -> tuple[str, str]:
    """Return outcome with value, and margin with its change, of one run.

    Parameters
    ----------
    row : FindingRow
        The finding.
    run : int
        Which run, from 0 [dimensionless].

    Returns
    -------
    tuple of 2 str
        Two short texts.
    """
    margin, unit = row.margins[run], unit_of(row.name, row.unit)
    if margin is None:
        return row.outcomes[run], f"value {quantity(row.values[run], unit)}"
    text = f"margin {signed(margin, unit)}"
    change = row.changes[run - 1] if run else None
    if change is not None:
        text += f" (change {signed(change, unit)})" if change else " (no change)"
    return row.outcomes[run], text
