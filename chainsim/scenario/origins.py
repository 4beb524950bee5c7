"""Work out where every value of a completed scenario came from."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from chainsim.errors import UnitError
from chainsim.scenario.faults import Fault, shown
from chainsim.scenario.filler import Filled, Origin, Path
from chainsim.scenario.paths import nearest, value_at
from chainsim.scenario.quantity import PLAIN_NUMBER, Quantity
from chainsim.scenario.schema import Document
from chainsim.scenario.schema_run import Bench, StatedOrigin
from chainsim.scenario.table import Leaf, hints, leaves


def origins_of(document: Document, given: Mapping[str, Any], filled: Filled) -> dict[str, Origin]:
    """Origin of every value that has one.

    Parameters
    ----------
    document : Document
        The completed scenario.
    given : mapping
        Tables of the file.
    filled : Filled
        What was filled in.

    Returns
    -------
    dict of str to Origin
        Dotted key -> origin, in the order of the schema.
    """
    found: dict[str, Origin] = {}
    for leaf in leaves(document):
        if leaf.value is not None and leaf.path[0] not in ("bench", "resolved"):
            found[leaf.key] = _origin(leaf, document, given, filled)
    return found


def _origin(leaf: Leaf, document: Document, given: Mapping[str, Any], filled: Filled) -> Origin:
    number = leaf.value if isinstance(leaf.value, float) else None
    if leaf.key in document.bench:
        return _measured(leaf, document.bench[leaf.key], number)
    if leaf.key in document.resolved:
        return _stated(leaf, document.resolved[leaf.key], number)
    if leaf.path in filled.origins:
        return filled.origins[leaf.path]
    if value_at(given, leaf.path) is not None:
        return Origin("given", number, number, number)
    low, high = _likely(leaf, number)
    return Origin("assumed", low, number, high)


def _likely(leaf: Leaf, number: float | None) -> tuple[float | None, float | None]:
    """Range of an assumed default."""
    likely = hints(leaf.field).get("likely")
    if likely is None:
        return number, number
    low, high = (_in_si(end, leaf) for end in likely)
    return low, high


def _in_si(value: str | float | None, leaf: Leaf) -> float | None:
    """A range's end as it is written in a file, in SI."""
    if value is None:
        return None
    return Quantity(leaf.unit_kind or PLAIN_NUMBER).read(value)


def _measured(leaf: Leaf, bench: Bench, number: float | None) -> Origin:
    low, high = _in_si(bench.low, leaf), _in_si(bench.high, leaf)
    return Origin(
        "bench",
        number if low is None else low,
        number,
        number if high is None else high,
        bench.source,
    )


def _stated(leaf: Leaf, stated: StatedOrigin, number: float | None) -> Origin:
    low, high = _in_si(stated.low, leaf), _in_si(stated.high, leaf)
    return Origin(stated.source, low, number, high, stated.note)


def faults_of_origins(document: Document) -> Iterator[Fault]:
    """Refuse bench values and stated origins of keys that do not exist, or in wrong units.

    Parameters
    ----------
    document : Document
        The completed scenario.

    Yields
    ------
    Fault
        One for each.
    """
    by_key = {leaf.key: leaf for leaf in leaves(document)}
    for table, entries in (("bench", document.bench), ("resolved", document.resolved)):
        for key, entry in entries.items():
            if key not in by_key:
                near = nearest(key, by_key)
                hint = f"; did you mean '{near}'?" if near else ""
                yield Fault((table, key), "", f"no value is called '{key}'{hint}")
                continue
            yield from _faults_of_ends((table, key), entry, by_key[key])


def _faults_of_ends(path: Path, entry: Any, leaf: Leaf) -> Iterator[Fault]:
    """Refuse the ends of a range that are no quantity of the right kind, or out of order."""
    ends: list[float] = []
    for name in ("low", "high"):
        value = getattr(entry, name)
        try:
            end = _in_si(value, leaf)
        except (UnitError, ValueError) as error:
            yield Fault((*path, name), shown(value), str(error))
            continue
        if end is not None:
            ends.append(end)
    if len(ends) == 2 and ends[0] > ends[1]:
        yield Fault((*path, "low"), shown(entry.low), "low must not exceed high")
