"""Dotted keys of a scenario: how they name a value, and how a value is put there.

Members of an array of tables go by name: `sprocket.tail.mount.mass`. Those without a name
(events) go by their place, counted from 0: `event.0.at`.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Mapping
from typing import Any

from pydantic.fields import FieldInfo

from chainsim.scenario.quantity import SI
from chainsim.scenario.schema import Document
from chainsim.scenario.schema_balls import feed_table
from chainsim.scenario.table import Table, fields_of, kind_needs_unit, quantity_of, table_in

Path = tuple[str | int, ...]

_STATED_OTHERWISE: dict[Path, tuple[Path, ...]] = {
    ("chain", "link_mass"): (("chain", "mass_per_length"),),
    ("chain", "link_stiffness"): (("chain", "stretch"),),
    ("chain", "allowable_tension"): (("chain", "breaking_load"), ("chain", "load_factor")),
    ("balls", "load_at"): (("balls", "feed", "load_at"),),
    ("balls", "unload_at"): (("balls", "feed", "unload_at"),),
}
"""Path of a value -> other ways to state it, which a new value must clear away."""


class KeyNotFoundError(ValueError):
    """A dotted key that names nothing in this scenario; the text says what would."""


def nearest(name: str, known: Iterable[str]) -> str | None:
    """Name that looks most like the one given; None where none is close.

    Parameters
    ----------
    name : str
        What was written.
    known : iterable of str
        What could be.

    Returns
    -------
    str or None
        The likeliest of `known`.
    """
    found = difflib.get_close_matches(name, list(known), n=1, cutoff=0.6)
    return found[0] if found else None


def field_at(path: Path) -> FieldInfo | None:
    """Description of the key at a path; None where the format has no such key."""
    table: type[Table] | None = Document
    field: FieldInfo | None = None
    for step in path:
        if isinstance(step, int):
            continue
        field = fields_of(table).get(step) if table is not None else None
        if field is None:
            return None
        table = table_in(field.annotation)
    return field


def is_array(field: FieldInfo) -> bool:
    """Whether a field is an array of tables."""
    return table_in(field.annotation) is not None and "tuple[" in str(field.annotation)


def tables_at(path: Path) -> type[Table] | None:
    """Class of the table at a path; None where there is no table."""
    if not path:
        return Document
    field = field_at(path)
    return table_in(field.annotation) if field is not None else None


def label(path: Path, tables: Mapping[str, Any]) -> str:
    """Dotted key of a path, with names for the members of arrays.

    Parameters
    ----------
    path : tuple of str or int
        Keys and array places.
    tables : mapping
        Tables of the file.

    Returns
    -------
    str
        Such as `sprocket.tail.mount.mass`.
    """
    parts: list[str] = []
    node: Any = tables
    for step in path:
        node = _child(node, step)
        name = node.get("name") if isinstance(step, int) and isinstance(node, Mapping) else None
        text = name if isinstance(name, str) and name else str(step)
        parts.append(f'"{text}"' if "." in text else text)
    return ".".join(parts)


def _child(node: Any, step: str | int) -> Any:
    if isinstance(step, int):
        return node[step] if isinstance(node, (list, tuple)) and step < len(node) else None
    return node.get(step) if isinstance(node, Mapping) else None


def value_at(tables: Mapping[str, Any], path: Path) -> Any:
    """Value at a path; None where there is none."""
    node: Any = tables
    for step in path:
        node = _child(node, step)
    return node


def resolve(dotted: str, tables: Mapping[str, Any]) -> Path:
    """Find the path that a dotted key means.

    Parameters
    ----------
    dotted : str
        Such as `sprocket.tail.mount.mass`.
    tables : mapping
        Tables of the file, for the names of array members.

    Returns
    -------
    tuple of str or int
        Keys and array places.

    Raises
    ------
    KeyNotFoundError
        The scenario format has no such key, or the scenario no such member.
    """
    steps = dotted.split(".")
    path: Path = ()
    table: type[Table] | None = Document
    members: list[Any] | None = None
    for step in steps:
        if members is not None:
            path, members = (*path, _member(step, members, path)), None
            continue
        field = fields_of(table).get(step) if table is not None else None
        if field is None:
            raise KeyNotFoundError(unknown_key(step, table, path, tables))
        path = (*path, step)
        table = table_in(field.annotation)
        if is_array(field):
            members = list(value_at(tables, path) or [])
    return path


def unknown_key(name: str, table: type[Table] | None, path: Path, tables: Mapping[str, Any]) -> str:
    """Sentence that refuses an unknown key and offers the nearest, or all there are."""
    if table is None:
        return f"'{label(path, tables)}' is a value and has no key '{name}'"
    near = nearest(name, fields_of(table))
    if near:
        return f"unknown key '{name}'; did you mean '{near}'?"
    return f"unknown key '{name}'; known here: {', '.join(fields_of(table))}"


def _member(step: str, members: list[Any], path: Path) -> int:
    """Place of the member of an array that is meant."""
    names = [item.get("name") if isinstance(item, Mapping) else None for item in members]
    if step in names:
        return names.index(step)
    if step.isdecimal() and int(step) < len(members):
        return int(step)
    known = [name if isinstance(name, str) else str(i) for i, name in enumerate(names)]
    near = nearest(step, known)
    hint = f"did you mean '{near}'?" if near else f"there is {', '.join(known) or 'none'}"
    raise KeyNotFoundError(f"no {path[-1]} is called '{step}'; {hint}")


def assign(tables: dict[str, Any], path: Path, value: Any) -> None:
    """Put a value at a path, and clear away what states it in another way.

    Parameters
    ----------
    tables : dict
        Tables of the file, changed in place.
    path : tuple of str or int
        What `resolve` returned.
    value : object
        As in a file.

    Raises
    ------
    KeyNotFoundError
        A step on the way is no table in the file.
    """
    for stated, others in _STATED_OTHERWISE.items():
        if path == stated or path in others:
            for other in {stated, *others} - ({path} | set(others if path in others else ())):
                _remove(tables, other)
    _forget_origins(tables, label(path, tables))
    node: Any = tables
    for i, step in enumerate(path[:-1]):
        if isinstance(step, str):
            node[step] = feed_table(node.get(step, {}))
        node = node[step]
        if not isinstance(node, (dict, list)):
            raise KeyNotFoundError(f"'{label(path[: i + 1], tables)}' is no table in the file")
    node[path[-1]] = value


def _forget_origins(tables: dict[str, Any], changed: str) -> None:
    """Drop the stated origins of a value, or of all values in a table."""
    origins = tables.get("resolved")
    if isinstance(origins, dict):
        for stated in [k for k in origins if k == changed or k.startswith(f"{changed}.")]:
            del origins[stated]


def in_si(path: Path, value: Any) -> Any:
    """Mark a bare number of a program as SI where the file would need a unit.

    Parameters
    ----------
    path : tuple of str or int
        Where it goes.
    value : object
        A number, text, or a list of them.

    Returns
    -------
    object
        The same, with numbers of the type `SI` where a unit is due.
    """
    if isinstance(value, (list, tuple)):
        return [in_si(path, item) for item in value]
    field = field_at(path)
    quantity = quantity_of(field) if field is not None else None
    is_number = isinstance(value, (int, float)) and not isinstance(value, bool)
    if is_number and quantity is not None and kind_needs_unit(quantity.kind):
        return SI(value)
    return value


def _remove(tables: dict[str, Any], path: Path) -> None:
    parent = value_at(tables, path[:-1])
    if isinstance(parent, dict):
        parent.pop(path[-1], None)
