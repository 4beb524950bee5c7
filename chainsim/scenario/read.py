"""Read a scenario file: text to checked values in SI, or every fault at once."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from copy import deepcopy
from pathlib import Path as FilePath
from typing import Any

from pydantic import ValidationError

from chainsim.errors import Problem, Remark, ScenarioError
from chainsim.scenario.checks import Case, faults_of_names, faults_of_values
from chainsim.scenario.complete import complete
from chainsim.scenario.faults import Fault, faults_of_kinds, faults_of_reading, shown
from chainsim.scenario.origins import faults_of_origins, origins_of
from chainsim.scenario.overrides import apply_overrides
from chainsim.scenario.paths import (
    KeyNotFoundError,
    Path,
    assign,
    field_at,
    in_si,
    resolve,
    value_at,
)
from chainsim.scenario.places import Source, scenario_error, tables_of
from chainsim.scenario.remarks import remarks_on
from chainsim.scenario.scenario import Scenario
from chainsim.scenario.schema import Document
from chainsim.scenario.schema_balls import feed_table

LARGEST_FILE = 1_000_000
"""Longest scenario file that is read [bytes]."""
BYTE_ORDER_MARK = "\ufeff"
MARK_WAS_SKIPPED = Remark(
    "", "the file starts with a byte order mark, which was skipped; save it as plain UTF-8"
)


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
    tables = tables_of(text, file)
    changed, faults = apply_overrides(tables, overrides)
    source = Source(text, file, "--set", frozenset(changed))
    scenario = _build(tables, source, faults)
    scenario._text = _with_notes(text, overrides)
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
            assign(tables, path, in_si(path, value))
            changed.add(path)
        except KeyNotFoundError as error:
            faults.append(Fault((key,), shown(value), str(error)))
    source = Source(scenario.text, scenario.file, f"{scenario.file} (changed)", frozenset(changed))
    made = _build(tables, source, faults)
    made._text = _with_notes(scenario.text, [f"{key}={value}" for key, value in values.items()])
    return made


def _build(tables: dict[str, Any], source: Source, call_faults: Sequence[Fault]) -> Scenario:
    """Check, complete and convert the tables."""
    balls = tables.get("balls")
    if isinstance(balls, dict) and "feed" in balls:
        balls["feed"] = feed_table(balls["feed"])
    document, broken = _read(tables)
    of_kinds = list(faults_of_kinds(tables))
    faults = [*broken, *of_kinds, *faults_of_names(tables)]
    if document is None:
        raise scenario_error(faults, call_faults, tables, source)
    filled = complete(_mended(tables, broken), document)
    try:
        scenario = Scenario.model_validate(filled.tables)
    except ValidationError as error:
        faults += faults_of_reading(error, filled.tables)
        raise scenario_error(faults, call_faults, tables, source) from None
    found = [*faults_of_values(Case(tables, document, scenario)), *faults_of_origins(scenario)]
    faults += [fault for fault in found if not _rests_on(fault, [*broken, *of_kinds])]
    if faults or call_faults:
        raise scenario_error(faults, call_faults, tables, source)
    scenario._file = source.file
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


def _with_notes(text: str, changes: Sequence[str]) -> str:
    """Text with the changes made to it noted at its end."""
    if not changes:
        return text
    lines = [f"# changed: {change}".replace("\n", " ") for change in changes]
    return "\n".join([text.rstrip("\n"), *lines, ""])
