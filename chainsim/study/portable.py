"""A scenario as file text, changes included, so that it can travel to another process."""

from __future__ import annotations

from typing import Any

import tomlkit

from chainsim.scenario.paths import field_at
from chainsim.scenario.quantity import SI
from chainsim.scenario.table import quantity_of
from chainsim.units import UNITS


def file_text(scenario: Any) -> str:
    """File that gives a scenario when it is read.

    Parameters
    ----------
    scenario : Scenario
        The scenario, with whatever has been changed in it.

    Returns
    -------
    str
        TOML of the values that are stated; what chainsim fills in is left to the reader, so
        that it follows any change made later.
    """
    return tomlkit.dumps(_stated(scenario._tables, (), None))


def _stated(node: Any, path: tuple[str | int, ...], table_kind: Any) -> Any:
    if isinstance(node, dict):
        kind = node.get("kind")
        return {key: _stated(value, (*path, key), kind) for key, value in node.items()}
    if isinstance(node, list | tuple):
        return [_stated(value, (*path, i), table_kind) for i, value in enumerate(node)]
    if isinstance(node, SI):
        return f"{float(node)!r} {_unit(path, table_kind)}"
    return node


def _unit(path: tuple[str | int, ...], table_kind: Any) -> str:
    """SI unit in which a value of this key is written."""
    field = field_at(path)
    quantity = quantity_of(field) if field is not None else None
    return next(iter(UNITS[quantity.kind_for(table_kind)])) if quantity else ""
