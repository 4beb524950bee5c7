"""Tables that are filled in, and the origin of every value put there."""

from __future__ import annotations

from collections.abc import Mapping
from copy import deepcopy
from typing import Any, Literal, NamedTuple

from chainsim.scenario.kinds import Range
from chainsim.scenario.quantity import SI

Source = Literal["given", "kind", "assumed", "bench"]
Path = tuple[str | int, ...]


class Origin(NamedTuple):
    """Where a value came from, and what else it may be.

    Attributes
    ----------
    source : str
        `given` in the file, from the `kind` of chain, `assumed` (also where worked out from
        the rest by a rule of thumb), or from the `bench`.
    low, typical, high : float or None
        Range of the value [SI]; None where the value is no number.
    note : str
        What it was taken from or worked out by; empty for a value given in the file.
    """

    source: Source
    low: float | None = None
    typical: float | None = None
    high: float | None = None
    note: str = ""


class Filled(NamedTuple):
    """Tables with every value in place, and the origins of those that were filled in."""

    tables: dict[str, Any]
    origins: dict[Path, Origin]


class Filler:
    """Puts values into the tables and remembers where each came from."""

    def __init__(self, tables: Mapping[str, Any]) -> None:
        self.tables: dict[str, Any] = deepcopy(dict(tables))
        self.origins: dict[Path, Origin] = {}

    def table(self, path: Path) -> dict[str, Any]:
        """Table at `path`, made where it is missing."""
        node: Any = self.tables
        for step in path:
            node = node[step] if isinstance(step, int) else node.setdefault(step, {})
        return node

    def has(self, path: Path) -> bool:
        """Whether the file, or an earlier filling, states this value."""
        return path[-1] in self.table(path[:-1])

    def fill(self, path: Path, value: Range | float, source: Source, note: str) -> None:
        """State a value unless it is stated already.

        Parameters
        ----------
        path : tuple of str or int
            Where it goes.
        value : Range or float
            The value [SI unit of its kind].
        source : str
            Where it comes from.
        note : str
            What it was taken from.
        """
        if self.has(path):
            return
        span = value if isinstance(value, Range) else Range(value, value, value)
        self.table(path[:-1])[path[-1]] = SI(span.typical)  # type: ignore[index]
        self.origins[path] = Origin(source, span.low, span.typical, span.high, note)

    def replace(self, path: Path, instead: tuple[str, ...], value: float, note: str) -> None:
        """State a value that the file gives in another way.

        Parameters
        ----------
        path : tuple of str or int
            Where it goes.
        instead : tuple of str
            Keys of the same table that gave it, which are dropped.
        value : float
            The value [SI unit of its kind].
        note : str
            What it was worked out from.
        """
        table = self.table(path[:-1])
        for name in instead:
            del table[name]
        table[path[-1]] = SI(value)  # type: ignore[index]
        self.origins[path] = Origin("given", value, value, value, note)
