"""Faults of a plan, each with the line on which it stands."""

from __future__ import annotations

import difflib
import re
from collections.abc import Mapping
from typing import Any

from chainsim.errors import Problem

_TABLE = re.compile(r"\s*\[+\s*([^\]]+?)\s*\]+\s*(#.*)?")


_KEY = re.compile(r"\s*(?:\"([^\"]+)\"|'([^']+)'|([A-Za-z0-9_.\-]+))\s*=")


class Faults:
    """Collects the faults of one plan, each with the line on which it stands.

    Parameters
    ----------
    file : str
        Name of the plan file.
    text : str
        Its text.
    """

    def __init__(self, file: str, text: str) -> None:
        self.file = file
        self.problems: list[Problem] = []
        self.lines = key_lines(text)

    def add(self, key: str, found: Any, rule: str) -> None:
        """Note one fault.

        Parameters
        ----------
        key : str
            Dotted key; an array of tables is numbered from 1 (``axis.2.values``).
        found : object
            The value found; None where the key is missing.
        rule : str
            What is needed instead.
        """
        shown = "" if found is None else repr(found)
        self.problems.append(Problem(self.file, self.line(key), key, shown, rule))

    def line(self, key: str) -> int | None:
        """Line of a key, or of the nearest table around it.

        Parameters
        ----------
        key : str
            Dotted key.

        Returns
        -------
        int or None
            Line number from 1 (dimensionless); None where nothing around it has a line.
        """
        while key:
            if key in self.lines:
                return self.lines[key]
            key = key.rpartition(".")[0]
        return None

    def unknown(self, where: str, table: Mapping[str, Any], known: tuple[str, ...]) -> None:
        """Note every key of a table that is not known, with the nearest one that is.

        Parameters
        ----------
        where : str
            Dotted key of the table; empty for the top.
        table : mapping
            The table.
        known : tuple of str
            Keys that may stand in it.
        """
        for key in table:
            if key not in known:
                near = difflib.get_close_matches(key, known, 1)
                hint = f"did you mean {near[0]!r}?" if near else f"known are {', '.join(known)}"
                self.add(f"{where}.{key}".lstrip("."), table[key], f"unknown key; {hint}")


def key_lines(text: str) -> dict[str, int]:
    """Line of every table and key in a TOML text.

    Parameters
    ----------
    text : str
        TOML that has been read without a syntax error.

    Returns
    -------
    dict of str to int
        Line from 1 (dimensionless) by dotted key; arrays of tables are numbered from 1.
        Keys inside an inline table are found on the line of the table.
    """
    lines: dict[str, int] = {}
    counts: dict[str, int] = {}
    table = ""
    for number, line in enumerate(text.splitlines(), 1):
        if header := _TABLE.fullmatch(line):
            table = header[1].strip()
            if line.lstrip().startswith("[["):
                parent, _, name = table.rpartition(".")
                full = f"{parent}.{counts[parent]}.{name}" if parent in counts else table
                counts[full] = counts.get(full, 0) + 1
                counts[table] = counts[full]
                table = f"{full}.{counts[full]}"
            lines.setdefault(table, number)
        elif key := _KEY.match(line):
            name = key[1] or key[2] or key[3]
            lines.setdefault(f"{table}.{name}".lstrip("."), number)
    return lines
