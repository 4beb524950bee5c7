"""Write fitted values into a scenario's text, whose comments stay where they are."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import tomlkit
from tomlkit.items import Table

from chainsim.study.fit_claims import Fitted
from chainsim.units import format_si

INSTEAD = {"chain.link_stiffness": ("stretch",)}
"""Dotted key -> keys of the same table that state it in another way."""

PLAIN = "fraction"
DIGITS = 4


def with_fitted(text: str, fitted: Sequence[Fitted], confidence: float) -> str:
    """Put claimed values into the text of a scenario.

    Parameters
    ----------
    text : str
        TOML.
    fitted : sequence of Fitted
        Those that are not claimed are left alone.
    confidence : float
        Of their intervals (dimensionless).

    Returns
    -------
    str
        The same text with the values under their keys, and an entry in `[bench]` for each.
    """
    document = tomlkit.parse(text)
    claimed = [item for item in fitted if item.is_claimed]
    if not claimed:
        return text
    bench = document.setdefault("bench", tomlkit.table())
    for item in claimed:
        _put(document, item)
        bench[item.key] = _entry(item, confidence)
        if "resolved" in document:
            document["resolved"].pop(item.key, None)  # type: ignore[union-attr]
    return tomlkit.dumps(document)


def _put(document: Any, item: Fitted) -> None:
    """Write one value where its key stands, or where it belongs."""
    *tables, name = item.key.split(".")
    node = document
    for table in tables:
        if table not in node:
            node[table] = tomlkit.table() if node is document else tomlkit.inline_table()
        node = node[table]
    for other in INSTEAD.get(item.key, ()):
        node.pop(other, None)
    value = _written(item.value, item.unit_kind)
    if isinstance(node, Table) and name not in node:
        node.add(name, value)
    else:
        node[name] = value


def _entry(item: Fitted, confidence: float) -> Any:
    """Entry of a value in `[bench]`."""
    entry = tomlkit.inline_table()
    entry["low"] = _written(item.low, item.unit_kind)
    entry["high"] = _written(item.high, item.unit_kind)
    files = ", ".join(Path(file).name for file in item.files)
    entry["source"] = f"fit to {files}; {confidence:.0%} interval"
    return entry


def _written(value: float | None, unit_kind: str) -> str | float:
    """Write a value as a scenario has it."""
    assert value is not None
    if unit_kind == PLAIN:
        return float(f"{value:.{DIGITS}g}")
    return format_si(value, unit_kind)
