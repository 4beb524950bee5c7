"""Read files of bench measurements: CSV with units in the headings, or every fault at once.

Comment lines above the table state what holds for all rows: ``# kind = stretch``,
``# length = 1 m``. Comment lines without an equals sign are remarks and are passed over.
"""

from __future__ import annotations

import csv
import difflib
import re
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import NamedTuple

import numpy as np

from chainsim.errors import Problem, ScenarioError
from chainsim.study.fit_forms import FORMS, Form
from chainsim.study.fit_table import Reading, check_rows, due, quantity, read_table

LARGEST_FILE = 20_000_000
"""Longest measurement file that is read [bytes]."""

_STATED = re.compile(r"#\s*([A-Za-z_]\w*)\s*=\s*(.+?)\s*$")


class Measurement(NamedTuple):
    """One file of measurements, in SI.

    Attributes
    ----------
    file : str
        Its name.
    kind : str
        A key of `FORMS`.
    stated : mapping of str to float or str
        What the comment lines state [SI], or words.
    columns : mapping of str to ndarray, shape (n_rows,)
        Column -> values [SI].
    unit_kinds : mapping of str to str
        Column or stated value -> the unit kind it was given in.
    """

    file: str
    kind: str
    stated: Mapping[str, float | str]
    columns: Mapping[str, np.ndarray]
    unit_kinds: Mapping[str, str]

    @property
    def n_rows(self) -> int:
        """Number of rows (dimensionless)."""
        return len(next(iter(self.columns.values())))

    def force(self, name: str, gravity: float) -> np.ndarray:
        """Return a load as a force, whether it was given as a force or as a mass [N].

        Parameters
        ----------
        name : str
            Column or stated value.
        gravity : float
            Acceleration of free fall [m/s2].
        """
        value = np.asarray(self.columns.get(name, self.stated.get(name)), float)
        return value * gravity if self.unit_kinds[name] == "mass" else value


def read_measurements(paths: Sequence[str | Path]) -> list[Measurement]:
    """Read files of bench measurements.

    Parameters
    ----------
    paths : sequence of str or path
        The files.

    Returns
    -------
    list of Measurement
        In the same order.

    Raises
    ------
    ScenarioError
        With every fault of every file.
    """
    found: list[Measurement] = []
    problems: list[Problem] = []
    for path in paths:
        try:
            found.append(parse_measurement(_text(path), str(path)))
        except ScenarioError as error:
            problems += error.problems
    if problems:
        raise ScenarioError(problems)
    return found


def _text(path: str | Path) -> str:
    """Text of a file, without a byte order mark."""
    file = str(path)
    try:
        with open(path, "rb") as stream:
            raw = stream.read(LARGEST_FILE + 1)
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise ScenarioError([Problem(file, None, "", "", f"cannot be read: {reason}")]) from None
    if len(raw) > LARGEST_FILE:
        raise ScenarioError([Problem(file, None, "", "", "too long (over 20 MB)")])
    try:
        return raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        found = f"byte 0x{raw[error.start]:02x}"
        raise ScenarioError([Problem(file, line, "", found, "text in UTF-8 is due")]) from None


def parse_measurement(text: str, file: str = "<text>") -> Measurement:
    """Read one file of measurements from its text.

    Parameters
    ----------
    text : str
        The text.
    file : str
        Name to use in messages.

    Returns
    -------
    Measurement
        Every value in SI.

    Raises
    ------
    ScenarioError
        With every fault found in it.
    """
    reading = Reading(file)
    rows = _split(reading, text)
    form = _form(reading)
    if form is None:
        raise ScenarioError(reading.problems)
    _read_stated(reading, form)
    columns = read_table(reading, form, rows)
    if not reading.problems:
        check_rows(reading, form, columns, [line for line, _ in rows[1:]])
    if reading.problems:
        raise ScenarioError(sorted(reading.problems, key=lambda problem: problem.line or 0))
    kind = str(reading.stated.pop("kind"))
    return Measurement(file, kind, reading.stated, columns, reading.unit_kinds)


def _split(reading: Reading, text: str) -> list[tuple[int, list[str]]]:
    """Take the comment lines out; return the rows of the table with their line numbers."""
    rows: list[tuple[int, list[str]]] = []
    lines = text.splitlines()
    while lines and not lines[-1].strip():
        lines.pop()
    for number, line in enumerate(lines, 1):
        stated = _STATED.match(line.strip())
        if stated:
            _state(reading, number, stated[1], stated[2])
        elif line.strip().startswith("#"):
            continue
        elif line.strip():
            rows.append((number, [cell.strip() for cell in next(csv.reader([line]))]))
        elif rows:
            reading.fault(number, "", "an empty line", "a gap in the table: remove it or fill it")
    return rows


def _state(reading: Reading, line: int, name: str, value: str) -> None:
    if name in reading.stated:
        reading.fault(line, name, value, f"stated twice, first in line {reading.lines[name]}")
    else:
        reading.stated[name], reading.lines[name] = value, line


def _form(reading: Reading) -> Form | None:
    """Find the kind of measurement that a file holds."""
    kinds = ", ".join(FORMS)
    kind = reading.stated.get("kind")
    if kind is None:
        reading.fault(None, "kind", "", f"a comment line '# kind = …' is required: {kinds}")
        return None
    if kind not in FORMS:
        near = difflib.get_close_matches(str(kind), FORMS, n=1)
        hint = f"; did you mean '{near[0]}'?" if near else ""
        reading.fault(reading.lines["kind"], "kind", f"'{kind}'", f"must be one of {kinds}{hint}")
        return None
    return FORMS[str(kind)]


def _read_stated(reading: Reading, form: Form) -> None:
    """Turn what the comment lines state into SI."""
    items = {item.name: item for item in form.stated}
    for name, text in list(reading.stated.items()):
        if name == "kind":
            continue
        line = reading.lines[name]
        if name not in items:
            known = ", ".join(("kind", *items))
            reading.fault(line, name, f"'{text}'", f"unknown here; known: {known}")
            continue
        item = items[name]
        if item.words:
            if text not in item.words:
                reading.fault(line, name, f"'{text}'", f"must be {' or '.join(item.words)}")
            continue
        value, kind, rule = quantity(str(text), item.kinds)
        if rule or value <= 0.0:
            reading.fault(line, name, "" if rule else f"'{text}'", rule or "must be more than zero")
        reading.stated[name], reading.unit_kinds[name] = value, kind
    for item in form.stated:
        if item.required and item.name not in reading.stated:
            what = " or ".join(item.words) or due(item.kinds)
            reading.fault(None, item.name, "", f"a comment line '# {item.name} = …' is due: {what}")
