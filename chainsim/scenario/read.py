"""Read a scenario file: text to checked values in SI, or every fault at once."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping, Sequence
from copy import deepcopy
from pathlib import Path as FilePath
from typing import Any

from pydantic import ValidationError

from chainsim.errors import Problem, Remark, ScenarioError
from chainsim.scenario.checks import Case, faults_of_names, faults_of_values
from chainsim.scenario.complete import complete
from chainsim.scenario.faults import Fault, faults_of_kinds, faults_of_reading, shown
from chainsim.scenario.locate import key_lines, line_of
from chainsim.scenario.origins import faults_of_origins, origins_of
from chainsim.scenario.overrides import apply_overrides
from chainsim.scenario.paths import (
    KeyNotFoundError,
    Path,
    assign,
    field_at,
    label,
    resolve,
    value_at,
)
from chainsim.scenario.remarks import remarks_on
from chainsim.scenario.scenario import Scenario
from chainsim.scenario.schema import Document
from chainsim.scenario.schema_balls import feed_table

LARGEST_FILE = 1_000_000
"""Longest scenario file that is read [bytes]."""
CALL_LINE = "--set"
BYTE_ORDER_MARK = "\ufeff"


def read_scenario(path: str | FilePath, overrides: Sequence[str] = ()) -> Scenario:
    """Read a scenario from a TOML file.

    Parameters
    ----------
    path : str or path
        The file.
    overrides : sequence of str
        Changes, each `KEY=VALUE`.

    Returns
    -------
    Scenario
        Every value in SI.

    Raises
    ------
    ScenarioError
        The file cannot be read, or with every fault found in it.
    """
    file = str(path)
    try:
        with open(path, "rb") as stream:
            raw = stream.read(LARGEST_FILE + 1)
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise ScenarioError([Problem(file, None, "", "", f"cannot be read: {reason}")]) from None
    if len(raw) > LARGEST_FILE:
        raise ScenarioError([Problem(file, None, "", "", "too long for a scenario (over 1 MB)")])
    try:
        text = raw.decode("utf-8")
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        found = f"byte 0x{raw[error.start]:02x}"
        raise ScenarioError([Problem(file, line, "", found, "text in UTF-8 is due")]) from None
    return parse_scenario(text, file, overrides)


def parse_scenario(text: str, file: str = "<text>", overrides: Sequence[str] = ()) -> Scenario:
    """Read a scenario from TOML text.

    Parameters
    ----------
    text : str
        The text.
    file : str
        Name to use in messages.
    overrides : sequence of str
        Changes, each `KEY=VALUE`.

    Returns
    -------
    Scenario
        Every value in SI.

    Raises
    ------
    ScenarioError
        With every fault found in it.
    """
    has_mark = text.startswith(BYTE_ORDER_MARK)
    text = text.removeprefix(BYTE_ORDER_MARK)
    tables = _tables(text, file)
    changed, faults = apply_overrides(tables, overrides)
    scenario = _build(tables, text, file, changed, faults)
    scenario._text = _with_notes(text, [f"{CALL_LINE} {item}" for item in overrides])
    if has_mark:
        note = Remark(
            "", "the file starts with a byte order mark, which was skipped; save as UTF-8"
        )
        scenario._remarks = (note, *scenario.remarks)
    return scenario


def changed_scenario(scenario: Scenario, values: Mapping[str, Any]) -> Scenario:
    """Build the scenario again with other values; see `Scenario.with_values`.

    Parameters
    ----------
    scenario : Scenario
        What to start from; not changed.
    values : mapping
        Dotted key -> value as in a file, or a bare number in SI.

    Returns
    -------
    Scenario
        The changed one.

    Raises
    ------
    ScenarioError
        With every fault found.
    """
    tables = deepcopy(scenario._tables)
    changed: set[Path] = set()
    faults: list[Fault] = []
    for key, value in values.items():
        try:
            path = resolve(key, tables)
            assign(tables, path, value)
            changed.add(path)
        except KeyNotFoundError as error:
            faults.append(Fault((key,), shown(value), str(error)))
    made = _build(tables, scenario.text, scenario.file, changed, faults)
    made._text = _with_notes(scenario.text, [f"{key} = {value}" for key, value in values.items()])
    return made


def _tables(text: str, file: str) -> dict[str, Any]:
    """Tables of a TOML text, or its one syntax error."""
    try:
        return tomllib.loads(text)
    except RecursionError:
        problem = Problem(file, None, "", "", "tables or lists are nested too deeply")
    except ValueError as error:
        match = re.search(r"\(at line (\d+), column (\d+)\)", str(error))
        line = int(match[1]) if match else max(1, text.count("\n"))
        reason = re.sub(r"\s*\(at .*\)$", "", str(error))
        column = f" at column {match[2]}" if match else " at the end"
        problem = Problem(
            file, line, "", "", f"not valid TOML{column}: {reason[:1].lower()}{reason[1:]}"
        )
    raise ScenarioError([problem])


def _build(
    tables: dict[str, Any], text: str, file: str, changed: set[Path], faults: list[Fault]
) -> Scenario:
    """Check, complete and convert the tables."""
    balls = tables.get("balls")
    if isinstance(balls, dict) and "feed" in balls:
        balls["feed"] = feed_table(balls["feed"])
    document, broken = _read(tables)
    faults = [*faults, *broken, *faults_of_kinds(tables), *faults_of_names(tables)]
    if document is None:
        raise _error(faults, tables, text, file, changed)
    filled = complete(_mended(tables, broken), document)
    scenario = Scenario.model_validate(filled.tables)
    found = [*faults_of_values(Case(tables, document, scenario)), *faults_of_origins(scenario)]
    faults += [fault for fault in found if not _rests_on(fault, broken)]
    if faults:
        raise _error(faults, tables, text, file, changed)
    scenario._file = file
    scenario._tables = tables
    scenario._origins = origins_of(scenario, tables, filled)
    scenario._remarks = remarks_on(scenario)
    return scenario


def _read(tables: dict[str, Any]) -> tuple[Document | None, list[Fault]]:
    """Read the tables; where some values are refused, go on with their examples instead.

    Returns
    -------
    tuple
        What was read, None where that is no use, and the values that were refused.
    """
    try:
        return Document.model_validate(tables), []
    except ValidationError as error:
        broken = faults_of_reading(error, tables)
    try:
        return Document.model_validate(_mended(tables, broken)), broken
    except ValidationError:
        return None, broken


def _mended(tables: dict[str, Any], broken: Sequence[Fault]) -> dict[str, Any]:
    """Tables in which each refused value is replaced by its key's example, or dropped."""
    mended = deepcopy(tables)
    for fault in broken:
        path = fault.path
        while path and isinstance(path[-1], int):
            path = path[:-1]
        parent, field = value_at(mended, path[:-1]), field_at(path)
        if not isinstance(parent, dict) or not path:
            continue
        parent.pop(path[-1], None)
        if field is not None and field.is_required() and field.examples:
            parent[path[-1]] = field.examples[0]
    return mended


def _rests_on(fault: Fault, broken: Sequence[Fault]) -> bool:
    """Whether a fault was judged by a value that was refused already."""
    return any(
        path[: len(bad.path)] == bad.path or bad.path[: len(path)] == path
        for bad in broken
        for path in (fault.path, *fault.uses)
    )


def _error(
    faults: Sequence[Fault], tables: dict[str, Any], text: str, file: str, changed: set[Path]
) -> ScenarioError:
    """All faults with their places, in the order of the file."""
    lines = key_lines(text)
    problems = []
    for fault in faults:
        is_changed = fault.path not in lines and not any(
            fault.path[:n] in lines for n in range(len(fault.path), 0, -1)
        )
        was_set = any(fault.path[: len(path)] == path for path in changed)
        key = label(fault.path, tables) if fault.path else ""
        if was_set or (is_changed and fault.path and fault.path[0] not in tables and changed):
            problems.append(Problem(CALL_LINE, None, key, fault.found, fault.rule))
        else:
            line = line_of(fault.path, lines)
            problems.append(Problem(file, line, key, fault.found, fault.rule))
    return ScenarioError(sorted(set(problems), key=lambda item: item.line or 0))


def _with_notes(text: str, notes: Sequence[str]) -> str:
    """Text with the changes made to it noted at its end."""
    if not notes:
        return text
    lines = [f"# changed: {note}".replace("\n", " ") for note in notes]
    return "\n".join([text.rstrip("\n"), *lines, ""])
