"""Rows of a sweep as a CSV table, with units in the headings."""

from __future__ import annotations

import csv
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from chainsim.analysis import UNITS
from chainsim.study.rows import Row, outcome, relative_margin, weakest
from chainsim.study.sweeping import Sweep


def export_csv(sweep: Sweep, path: str | Path) -> Path:
    """Write every point of a sweep that has a row as a line of a table.

    Parameters
    ----------
    sweep : Sweep
        The sweep.
    path : str or Path
        File to write (UTF-8).

    Returns
    -------
    Path
        The file.
    """
    path = Path(path)
    pairs = [(p, r) for p, r in zip(sweep.points, sweep.rows(), strict=True) if r is not None]
    axes = [axis.name for axis in sweep.plan.axes]
    units = {f["name"]: f["unit"] for _, row in pairs for f in row.findings}
    summary = list(dict.fromkeys(name for _, row in pairs for name in row.summary))
    with path.open("w", newline="", encoding="utf-8") as file:
        table = csv.writer(file)
        table.writerow([
            "run", *axes, "state", "outcome", "weakest finding", "reserve [1]", "reason",
            *(heading for name, unit in units.items()
              for heading in (f"{name} outcome", f"{name} margin [{unit}]")),
            *(f"{name} [{summary_unit(name)}]" for name in summary),
        ])  # fmt: skip
        for point, row in pairs:
            labels = [point.labels[name] for name in axes]
            table.writerow([row.id, *labels, *_line(row, list(units), summary)])
    return path


def summary_unit(name: str) -> str:
    """Unit of a summary value.

    Parameters
    ----------
    name : str
        Its name; a part behind a dot does not matter.

    Returns
    -------
    str
        The unit, ``1`` where dimensionless or no quantity.
    """
    stem = name.partition(".")[0]
    by_stem = {"axle_load": "N", "takeup_low": "m", "takeup_high": "m"}
    return UNITS.get(stem, by_stem.get(stem, "1"))


def _line(row: Row, findings: list[str], summary: list[str]) -> Iterator[Any]:
    first = next(iter(weakest(row)), None)
    yield row.state
    yield outcome(row)
    yield first["name"] if first else ""
    yield relative_margin(first) if first else ""
    yield row.failure.text if row.failure else ""
    for name in findings:
        found = row.finding(name) or {}
        yield found.get("outcome", "")
        yield found.get("margin")
    for name in summary:
        yield row.summary.get(name)
