"""Read files of bench measurements: CSV with units in the headings, or every fault at once.

Comment lines above the table state what holds for all rows: ``# kind = stretch``,
``# length = 1 m``. Comment lines without an equals sign are remarks and are passed over.
"""

from __future__ import annotations

import csv
import difflib
import math
import re
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import NamedTuple

import numpy as np

from chainsim.errors import Problem, ScenarioError, UnitError
from chainsim.study.fit_forms import COUNT, FORMS, Form, Item
from chainsim.units import KIND_NAMES, to_si

LARGEST_FILE = 20_000_000
"""Longest measurement file that is read [bytes]."""

GAP = 1.75
"""Step between time stamps, over the usual one, from which rows are missing [dimensionless]."""

_STATED = re.compile(r"#\s*([A-Za-z_]\w*)\s*=\s*(.+?)\s*$")
_HEADING = re.compile(r"\s*([^\[\]]*?)\s*(?:\[\s*([^\]]*?)\s*\])?\s*$")


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


class _Reading:
    """Collects values and faults of one file."""

    def __init__(self, file: str) -> None:
        self.file = file
        self.problems: list[Problem] = []
        self.stated: dict[str, float | str] = {}
        self.unit_kinds: dict[str, str] = {}
        self.lines: dict[str, int] = {}

    def fault(self, line: int | None, key: str, found: str, rule: str) -> None:
        self.problems.append(Problem(self.file, line, key, found, rule))


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
    reading = _Reading(file)
    rows = _split(reading, text)
    form = _form(reading)
    if form is None:
        raise ScenarioError(reading.problems)
    _read_stated(reading, form)
    columns = _read_table(reading, form, rows)
    if not reading.problems:
        _check_rows(reading, form, columns, [line for line, _ in rows[1:]])
    if reading.problems:
        raise ScenarioError(sorted(reading.problems, key=lambda problem: problem.line or 0))
    kind = str(reading.stated.pop("kind"))
    return Measurement(file, kind, reading.stated, columns, reading.unit_kinds)


def _split(reading: _Reading, text: str) -> list[tuple[int, list[str]]]:
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


def _state(reading: _Reading, line: int, name: str, value: str) -> None:
    if name in reading.stated:
        reading.fault(line, name, value, f"stated twice, first in line {reading.lines[name]}")
    else:
        reading.stated[name], reading.lines[name] = value, line


def _form(reading: _Reading) -> Form | None:
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


def _read_stated(reading: _Reading, form: Form) -> None:
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
        value, kind, rule = _quantity(str(text), item.kinds)
        if rule or value <= 0.0:
            reading.fault(line, name, "" if rule else f"'{text}'", rule or "must be more than zero")
        reading.stated[name], reading.unit_kinds[name] = value, kind
    for item in form.stated:
        if item.required and item.name not in reading.stated:
            due = " or ".join(item.words) or _due(item.kinds)
            reading.fault(None, item.name, "", f"a comment line '# {item.name} = …' is due: {due}")


def _due(kinds: Sequence[str]) -> str:
    return " or ".join(KIND_NAMES.get(kind, "a whole number") for kind in kinds)


def _quantity(text: str, kinds: Sequence[str]) -> tuple[float, str, str]:
    """Read a quantity of one of some kinds: value in SI, its kind, and what is wrong."""
    rules = []
    for kind in kinds:
        try:
            return to_si(text, kind), kind, ""
        except UnitError as error:
            rules.append(str(error))
    return math.nan, kinds[0], rules[0]


def _read_table(
    reading: _Reading, form: Form, rows: list[tuple[int, list[str]]]
) -> dict[str, np.ndarray]:
    """Read headings and cells."""
    if not rows:
        names = ", ".join(f"{item.name} [unit]" for item in form.columns)
        reading.fault(None, "", "no table", f"a line of headings is due: {names}")
        return {}
    line, headings = rows[0]
    places = _read_headings(reading, form, line, headings)
    columns: dict[str, list[float]] = {name: [] for name, _, _ in places.values()}
    for number, cells in rows[1:]:
        if len(cells) != len(headings):
            rule = f"{len(headings)} values are due, as in the headings; a decimal sign is a point"
            reading.fault(number, "", f"{len(cells)} values", rule)
            continue
        for place, (name, kind, unit) in places.items():
            columns[name].append(_cell(reading, number, name, kind, unit, cells[place]))
    return {name: np.array(values) for name, values in columns.items()}


def _read_headings(
    reading: _Reading, form: Form, line: int, headings: list[str]
) -> dict[int, tuple[str, str, str]]:
    """Return place -> column, unit kind and unit."""
    items = {item.name: item for item in form.columns}
    places: dict[int, tuple[str, str, str]] = {}
    seen: set[str] = set()
    for place, heading in enumerate(headings):
        match = _HEADING.match(heading)
        name = match[1].lower() if match else heading
        if name not in items:
            near = difflib.get_close_matches(name, items, n=1)
            hint = f"did you mean '{near[0]}'?" if near else f"due are {', '.join(items)}"
            reading.fault(line, name, f"'{heading}'", f"no such column; {hint}")
        elif name in seen:
            reading.fault(line, name, f"'{heading}'", "this column is there twice")
        else:
            seen.add(name)
            kind = _unit_kind(reading, line, items[name], heading, match[2] if match else None)
            if kind:
                places[place] = (name, kind, (match[2] or "") if match else "")
                reading.unit_kinds[name] = kind
    for item in form.columns:
        if item.required and item.name not in seen:
            reading.fault(line, item.name, "", f"this column is missing: {_due(item.kinds)}")
    return places


def _unit_kind(
    reading: _Reading, line: int, item: Item, heading: str, unit: str | None
) -> str | None:
    """Return the unit kind of a heading; None where its unit is missing or wrong."""
    if item.kinds == (COUNT,):
        if unit in (None, "", "1"):
            return COUNT
        reading.fault(line, item.name, f"'{heading}'", "a count has no unit")
        return None
    if not unit:
        rule = f"a unit in square brackets is due, such as '{item.name} [{_example(item)}]'"
        reading.fault(line, item.name, f"'{heading}'", rule)
        return None
    _, kind, rule = _quantity(f"1 {unit}", item.kinds)
    if rule:
        reading.fault(line, item.name, f"'{heading}'", rule)
        return None
    return kind


def _example(item: Item) -> str:
    return {
        "length": "mm", "force": "N", "time": "s", "angle": "deg", "torque": "mN m",
        "angular_speed": "rev/min", "current": "A", "speed": "m/s",
    }[item.kinds[0]]  # fmt: skip


def _cell(reading: _Reading, line: int, name: str, kind: str, unit: str, cell: str) -> float:
    """Read one cell."""
    if not cell:
        reading.fault(line, name, "an empty cell", "a gap: every row needs every value")
        return math.nan
    if kind == COUNT:
        if cell.isdecimal():
            return float(cell)
        reading.fault(line, name, f"'{cell}'", "a whole number is due")
        return math.nan
    value, _, rule = _quantity(f"{cell} {unit}", (kind,))
    if rule:
        reading.fault(line, name, f"'{cell}'", "a number is due, with a decimal point and no unit")
    return value


def _check_rows(
    reading: _Reading, form: Form, columns: Mapping[str, np.ndarray], lines: list[int]
) -> None:
    """Refuse too few rows, broken time, and values that can't be."""
    if len(lines) < form.least_rows:
        rule = f"at least {form.least_rows} rows are due to say anything"
        reading.fault(None, "", f"{len(lines)} rows", rule)
        return
    if "time" in columns:
        _check_time(reading, columns["time"], lines)
    for name in ("load", "growth", "torque", "speed", "current", "tilt"):
        for line, value in zip(lines, columns.get(name, ()), strict=False):
            if value < 0.0:
                reading.fault(line, name, f"{value:g} in SI", "must not be negative")
    if form is FORMS["motor"] and not {"speed", "current"} & set(columns):
        reading.fault(None, "speed", "", "a column of speed, of current, or both is due")
    if "lost" in columns:
        for line, lost, fed in zip(lines, columns["lost"], columns["fed"], strict=True):
            if lost > fed or fed == 0:
                found = f"{lost:.0f} of {fed:.0f}"
                reading.fault(line, "lost", found, "no more balls can be lost than were fed")


def _check_time(reading: _Reading, time: np.ndarray, lines: list[int]) -> None:
    """Refuse time stamps that repeat, run backward, leave a gap, or precede the letting go."""
    if time[0] < 0.0:
        reading.fault(lines[0], "time", f"{time[0]:g} s", "time counts from the letting go, at 0 s")
    steps = np.diff(time)
    usual = float(np.median(steps))
    for line, now, step in zip(lines[1:], time[1:], steps, strict=True):
        if step == 0.0:
            reading.fault(line, "time", f"{now:g} s", "this time stamp is there twice")
        elif step < 0.0:
            reading.fault(line, "time", f"{now:g} s", "time runs backward")
        elif step > GAP * usual > 0.0:
            rule = f"a gap of {step:.4g} s, where rows stand {usual:.4g} s apart"
            reading.fault(line, "time", f"{now:g} s", rule)
