"""The table inside a measurement file: headings with units, cells, and rows that can't be."""

from __future__ import annotations

import difflib
import math
import re
from collections.abc import Mapping, Sequence

import numpy as np

from chainsim.errors import Problem, UnitError
from chainsim.study.fit_forms import COUNT, FORMS, Form, Item
from chainsim.units import KIND_NAMES, to_si

GAP = 1.75
"""Step between time stamps, over the usual one, from which rows are missing [dimensionless]."""

_HEADING = re.compile(r"\s*([^\[\]]*?)\s*(?:\[\s*([^\]]*?)\s*\])?\s*$")


class Reading:
    """Collects values and faults of one file.

    Parameters
    ----------
    file : str
        Its name.
    """

    def __init__(self, file: str) -> None:
        self.file = file
        self.problems: list[Problem] = []
        self.stated: dict[str, float | str] = {}
        self.unit_kinds: dict[str, str] = {}
        self.lines: dict[str, int] = {}

    def fault(self, line: int | None, key: str, found: str, rule: str) -> None:
        """Note a fault.

        Parameters
        ----------
        line : int or None
            Its line (dimensionless).
        key, found, rule : str
            Column or stated value, what is there, and what is due.
        """
        self.problems.append(Problem(self.file, line, key, found, rule))


def due(kinds: Sequence[str]) -> str:
    """Name unit kinds in a sentence.

    Parameters
    ----------
    kinds : sequence of str
        Keys of `chainsim.units.UNITS`, or `COUNT`.
    """
    return " or ".join(KIND_NAMES.get(kind, "a whole number") for kind in kinds)


def quantity(text: str, kinds: Sequence[str]) -> tuple[float, str, str]:
    """Read a quantity: value in SI, its kind, and what is wrong.

    Parameters
    ----------
    text : str
        Number and unit.
    kinds : sequence of str
        Unit kinds it may have.
    """
    rules = []
    for kind in kinds:
        try:
            return to_si(text, kind), kind, ""
        except UnitError as error:
            rules.append(str(error))
    return math.nan, kinds[0], rules[0]


def read_table(
    reading: Reading, form: Form, rows: list[tuple[int, list[str]]]
) -> dict[str, np.ndarray]:
    """Read headings and cells; return column -> values [SI].

    Parameters
    ----------
    reading : Reading
        Takes the faults, and the unit kinds of the columns.
    form : Form
        What is due.
    rows : list of tuple
        Line number and cells of each row, headings first.
    """
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
    reading: Reading, form: Form, line: int, headings: list[str]
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
            reading.fault(line, item.name, "", f"this column is missing: {due(item.kinds)}")
    return places


def _unit_kind(
    reading: Reading, line: int, item: Item, heading: str, unit: str | None
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
    _, kind, rule = quantity(f"1 {unit}", item.kinds)
    if rule:
        reading.fault(line, item.name, f"'{heading}'", rule)
        return None
    return kind


def _example(item: Item) -> str:
    return {
        "length": "mm", "force": "N", "time": "s", "angle": "deg", "torque": "mN m",
        "angular_speed": "rev/min", "current": "A", "speed": "m/s",
    }[item.kinds[0]]  # fmt: skip


def _cell(reading: Reading, line: int, name: str, kind: str, unit: str, cell: str) -> float:
    """Read one cell."""
    if not cell:
        reading.fault(line, name, "an empty cell", "a gap: every row needs every value")
        return math.nan
    if kind == COUNT:
        if cell.isdecimal():
            return float(cell)
        reading.fault(line, name, f"'{cell}'", "a whole number is due")
        return math.nan
    value, _, rule = quantity(f"{cell} {unit}", (kind,))
    if rule:
        reading.fault(line, name, f"'{cell}'", "a number is due, with a decimal point and no unit")
    return value


def check_rows(
    reading: Reading, form: Form, columns: Mapping[str, np.ndarray], lines: list[int]
) -> None:
    """Refuse too few rows, broken time, and values that can't be.

    Parameters
    ----------
    reading : Reading
        Takes the faults.
    form : Form
        What is due.
    columns : mapping of str to ndarray, shape (n_rows,)
        Values [SI].
    lines : list of int
        Line of each row (dimensionless).
    """
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


def _check_time(reading: Reading, time: np.ndarray, lines: list[int]) -> None:
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
