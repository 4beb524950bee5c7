"""Exports a recording as CSV files that a spreadsheet opens: one file per channel or table."""

from __future__ import annotations

import csv
import json
from collections.abc import Iterator, Sequence
from itertools import product
from pathlib import Path
from typing import NamedTuple

import numpy as np

from chainsim.errors import CallError, RecordingError
from chainsim.recording.channels import TIME
from chainsim.recording.recording import Recording
from chainsim.recording.tables import TABLES

LINE_END = "\r\n"
"""End of a line in CSV (RFC 4180, section 2)."""
ROWS_AT_ONCE = 4096
"""Samples that are turned into text at a time [dimensionless], so that memory stays flat."""


class Style(NamedTuple):
    """How numbers and cells are written.

    Attributes
    ----------
    separator : str
        Between cells.
    decimal : str
        Decimal point or comma.
    encoding : str
        Encoding of the file; with a byte order mark for spreadsheets that need it.
    """

    separator: str
    decimal: str
    encoding: str


def export_csv(
    recording: Recording,
    folder: str | Path,
    names: Sequence[str] | None = None,
    separator: str = ",",
    decimal: str = ".",
    excel: bool = False,
) -> list[Path]:
    """Write channels and tables as CSV, with the unit in each heading.

    Parameters
    ----------
    recording : Recording
        What is exported.
    folder : str or Path
        Where to; made if it does not exist. Files of the same name are replaced.
    names : sequence of str, optional
        Channels and tables; all by default.
    separator : str
        Between cells, ``","`` or ``";"``.
    decimal : str
        ``"."``, or ``","`` for spreadsheets that expect a decimal comma (with ``";"`` between
        cells).
    excel : bool
        Begin with a byte order mark, which spreadsheets take as the sign of UTF-8
        [dimensionless].

    Returns
    -------
    list of Path
        The files: one per name, and ``recording.json`` with what is known about the run.

    Raises
    ------
    CallError
        If separator and decimal cannot be told apart.
    RecordingError
        If the recording does not hold a name, or the folder cannot be written to.
    """
    if separator == decimal or len(separator) != 1 or decimal not in (".", ","):
        raise CallError(f"separator '{separator}' with decimal '{decimal}' cannot be read back")
    style = Style(separator, decimal, "utf-8-sig" if excel else "utf-8")
    folder = Path(folder)
    try:
        folder.mkdir(parents=True, exist_ok=True)
        files = [_export(recording, name, folder, style) for name in names or _all(recording)]
        return [*files, _write_metadata(recording, folder)]
    except OSError as error:
        raise RecordingError(f"{folder}: cannot be written: {error}") from error


def _all(recording: Recording) -> list[str]:
    channels = [n for n in recording.names() if not n.startswith("geometry/") and n != TIME.path]
    return [*channels, *(name for name in TABLES if recording.rows(name))]


def _export(recording: Recording, name: str, folder: Path, style: Style) -> Path:
    path = folder / f"{name.replace('/', '_')}.csv"
    with open(path, "w", newline="", encoding=style.encoding) as file:
        writer = csv.writer(file, delimiter=style.separator, lineterminator=LINE_END)
        if name in TABLES:
            writer.writerows(_table(recording, name, style))
        else:
            writer.writerow(["time [s]", *_headings(recording, name)])
            for start in range(0, len(recording.time), ROWS_AT_ONCE):
                window = slice(start, start + ROWS_AT_ONCE)
                file.writelines(_lines(recording.time[window], recording.read(name, window), style))
    return path


def _lines(times: np.ndarray, values: np.ndarray, style: Style) -> Iterator[str]:
    """Lines of numbers with the digits that their type holds; NaN becomes an empty cell."""
    rows = values.reshape(len(values), -1)
    cell = "%d" if values.dtype.kind in "iu" else f"%.{np.finfo(values.dtype).precision + 1}g"
    line = style.separator.join(["%.15g", *([cell] * rows.shape[1])]) + LINE_END
    for time, row in zip(times.tolist(), rows.tolist(), strict=True):
        text = (line % (time, *row)).replace("nan", "")
        yield text if style.decimal == "." else text.replace(".", style.decimal)


def _headings(recording: Recording, name: str) -> list[str]:
    """Name, place along each axis, unit: ``position pin 3 x [m]``."""
    unit = recording.unit(name)
    suffix = "" if unit == "1" else f" [{unit}]"
    axes = [
        [f"{dim} {label}" if label.isdigit() else label for label in recording.labels(dim)]
        for dim in recording.dims(name)[1:]
    ]
    short = name.rsplit("/", 1)[-1].replace("_", " ")
    return [" ".join((short, *labels)) + suffix for labels in product(*axes)]


def _table(recording: Recording, name: str, style: Style) -> list[list[str]]:
    columns = TABLES[name].columns
    headings = [
        f"{field.replace('_', ' ')} [{column.unit}]" if column.unit not in ("", "1") else field
        for field, column in columns.items()
    ]
    rows = [[_cell(value, style) for value in row] for row in recording.rows(name)]
    return [headings, *rows]


def _cell(value: object, style: Style) -> str:
    if value is None or value != value:
        return ""
    text = str(value)
    return text.replace(".", style.decimal) if isinstance(value, float) else text


def _write_metadata(recording: Recording, folder: Path) -> Path:
    path = folder / "recording.json"
    held = recording.names()
    about = {
        "attributes": recording.attrs,
        "channels": {
            name: {"unit": recording.unit(name), "long_name": recording.long_name(name)}
            for name in held
        },
        "scenario": dict(recording.scenario_texts),
    }
    path.write_text(json.dumps(about, indent=1, ensure_ascii=False), encoding="utf-8")
    return path
