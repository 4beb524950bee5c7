"""Plain tables of a TOML text, and the places of faults in it."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping, Sequence
from typing import Any, NamedTuple

from chainsim.errors import Problem, ScenarioError
from chainsim.scenario.faults import Fault
from chainsim.scenario.locate import key_lines, line_of
from chainsim.scenario.paths import Path, label


class Source(NamedTuple):
    """Where the tables of a scenario came from.

    Attributes
    ----------
    text : str
        TOML text.
    file : str
        Its name for messages.
    call : str
        Name for messages about values that were changed since.
    changed : frozenset of tuple
        Paths of those values.
    """

    text: str
    file: str
    call: str
    changed: frozenset[Path]


def tables_of(text: str, file: str) -> dict[str, Any]:
    """Tables of a TOML text.

    Parameters
    ----------
    text : str
        The text.
    file : str
        Name to use in messages.

    Returns
    -------
    dict
        Plain tables, lists, numbers and texts.

    Raises
    ------
    ScenarioError
        With its first error of syntax.
    """
    try:
        return tomllib.loads(text)
    except RecursionError:
        problem = Problem(file, None, "", "", "tables or lists are nested too deeply")
    except ValueError as error:
        match = re.search(r"\(at line (\d+), column (\d+)\)", str(error))
        line = int(match[1]) if match else text.rstrip().count("\n") + 1
        reason = re.sub(r"\s*\(at .*\)$", "", str(error))
        column = f" at column {match[2]}" if match else " at the end"
        problem = Problem(
            file, line, "", "", f"not valid TOML{column}: {reason[:1].lower()}{reason[1:]}"
        )
    raise ScenarioError([problem])


def scenario_error(
    faults: Sequence[Fault],
    call_faults: Sequence[Fault],
    tables: Mapping[str, Any],
    source: Source,
) -> ScenarioError:
    """Gather all faults with their places, in the order of the file.

    Parameters
    ----------
    faults : sequence of Fault
        What is wrong with the tables.
    call_faults : sequence of Fault
        Changes that could not be made.
    tables : mapping
        The tables, for names.
    source : Source
        Where they came from.

    Returns
    -------
    ScenarioError
        To be raised.
    """
    lines = key_lines(source.text)
    problems = [
        Problem(source.call, None, ".".join(map(str, fault.path)), fault.found, fault.rule)
        for fault in call_faults
    ]
    for fault in faults:
        key = label(fault.path, tables)
        if any(fault.path[: len(path)] == path for path in source.changed):
            problems.append(Problem(source.call, None, key, fault.found, fault.rule))
        else:
            line = line_of(fault.path, lines)
            problems.append(Problem(source.file, line, key, fault.found, fault.rule))
    return ScenarioError(sorted(dict.fromkeys(problems), key=lambda problem: problem.line or 0))
