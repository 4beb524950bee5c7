"""Turn what is wrong with a scenario into one line per fault, with its place and the rule."""

from __future__ import annotations

import json
from collections.abc import Iterator, Mapping
from typing import Any, NamedTuple, get_args

from pydantic import ValidationError

from chainsim.scenario.paths import (
    Path,
    field_at,
    is_array,
    nearest,
    tables_at,
    unknown_key,
    value_at,
)
from chainsim.scenario.quantity import SI
from chainsim.scenario.schema import Document
from chainsim.scenario.table import KindKeys, Table, fields_of, table_in

LONGEST_SHOWN = 60


class Fault(NamedTuple):
    """One fault: where, what is there, what is needed instead, what else it was judged by."""

    path: Path
    found: str
    rule: str
    uses: tuple[Path, ...] = ()


def shown(value: Any) -> str:
    """A value as the file has it, cut where it is long; empty for none."""
    if value is None:
        return ""
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, SI):
        text = f"{float(value):g} in SI"
    else:
        text = json.dumps(value, ensure_ascii=False, default=str)
    return text if len(text) <= LONGEST_SHOWN else text[: LONGEST_SHOWN - 1] + "…"


def faults_of_reading(error: ValidationError, tables: Mapping[str, Any]) -> list[Fault]:
    """Translate what pydantic found.

    Parameters
    ----------
    error : ValidationError
        Everything it refused.
    tables : mapping
        Tables of the file.

    Returns
    -------
    list of Fault
        One for each, in its order, none twice.
    """
    faults: dict[Path, Fault] = {}
    for detail in error.errors(include_url=False):
        path = _path_in_file(detail["loc"], tables)
        if detail["type"] == "missing" and isinstance(path[-1], int):
            path = path[:-1]
        faults.setdefault(
            path, Fault(path, _found(detail, path, tables), _rule(detail, path, tables))
        )
    return list(faults.values())


def _path_in_file(loc: tuple[str | int, ...], tables: Mapping[str, Any]) -> Path:
    """Drop the steps that pydantic adds for the branches of a union."""
    path: Path = ()
    for i, step in enumerate(loc):
        is_last = i == len(loc) - 1
        if is_last or value_at(tables, (*path, step)) is not None:
            path = (*path, step)
    if path and path[-1] in ("str", "float", "int") and field_at(path) is None:
        path = path[:-1]
    return path


def _found(detail: Any, path: Path, tables: Mapping[str, Any]) -> str:
    return shown(value_at(tables, path))


def _rule(detail: Any, path: Path, tables: Mapping[str, Any]) -> str:
    """What is needed at a place that pydantic refused."""
    kind = detail["type"]
    if kind == "value_error":
        return str(detail["ctx"]["error"])
    if kind == "extra_forbidden":
        return unknown_key(str(path[-1]), tables_at(path[:-1]), path[:-1], tables)
    if kind == "literal_error":
        return _choice(value_at(tables, path), path)
    if kind in _RULES:
        return _RULES[kind]
    due = _due(path)
    if kind == "missing" and value_at(tables, path) is None:
        return f"required: {due}"
    return f"{due} is due" if not due.endswith(".") else due


_RULES = {
    "string_type": "text in quotes is due",
    "bool_type": "true or false is due",
    "string_pattern_mismatch": (
        "a name is a letter, then letters, digits and underscores, since it stands in dotted keys"
    ),
    "recursion_loop": "a table that holds itself",
}


def _choice(found: Any, path: Path) -> str:
    """Rule of a key that takes one of a few words."""
    field = field_at(path)
    choices = [str(item) for item in _literals(field.annotation if field else None)]
    near = nearest(found, choices) if isinstance(found, str) else None
    hint = f"; did you mean '{near}'?" if near else ""
    listed = " or ".join(item if item.isdecimal() else f"'{item}'" for item in choices)
    return f"must be {listed}{hint}"


def _literals(annotation: Any) -> list[Any]:
    """Words inside a type such as `Literal["a", "b"] | None`."""
    if "Literal" in str(getattr(annotation, "__origin__", "")):
        return list(get_args(annotation))
    return [word for inner in get_args(annotation) for word in _literals(inner)]


def _due(path: Path) -> str:
    """What a key holds, with an example."""
    field = field_at(path)
    if field is None:
        return "another kind of value"
    if is_array(field) and not isinstance(path[-1], int):
        return f"one or more [[{path[-1]}]] tables"
    example = (
        f", such as {json.dumps(field.examples[0], ensure_ascii=False)}" if field.examples else ""
    )
    if table_in(field.annotation) is not None:
        return f"a table{example}"
    what = "a list of values" if "tuple[" in str(field.annotation) else "a value"
    text = (field.description or "").rstrip(".")
    return f"{text[:1].lower()}{text[1:]}{example}" if what == "a value" else f"{what}{example}"


def faults_of_kinds(tables: Mapping[str, Any]) -> Iterator[Fault]:
    """Refuse keys that the `kind` of a table does not understand, and demand those it needs.

    Parameters
    ----------
    tables : mapping
        Tables of the file, as read.

    Yields
    ------
    Fault
        One for each key.
    """
    yield from _faults_of_kinds(tables, Document, ())


def _faults_of_kinds(node: Any, table: type[Table], path: Path) -> Iterator[Fault]:
    if isinstance(node, list):
        for i, member in enumerate(node):
            yield from _faults_of_kinds(member, table, (*path, i))
    elif isinstance(node, Mapping):
        if table.keys_by_kind:
            yield from _faults_of_kind(node, table, path)
        for name, field in fields_of(table).items():
            inner = table_in(field.annotation)
            if inner is not None and name in node:
                yield from _faults_of_kinds(node[name], inner, (*path, name))


def _faults_of_kind(node: Mapping[str, Any], table: type[Table], path: Path) -> Iterator[Fault]:
    kind = node.get("kind", table.model_fields["kind"].default)
    keys = table.keys_by_kind.get(kind) if isinstance(kind, str) else None
    if keys is None:
        return
    for name in keys.required:
        if name not in node:
            yield Fault((*path, name), "", f'required with kind = "{kind}": {_due((*path, name))}')
    allowed = {*table.keys_of_all_kinds, *keys.required, *keys.optional}
    for name in node:
        if name not in allowed and name in fields_of(table):
            yield Fault((*path, name), shown(node[name]), _wrong_kind(name, kind, table, keys))


def _wrong_kind(name: str, kind: str, table: type[Table], keys: KindKeys) -> str:
    """Sentence that says which kinds understand a key."""
    others = [k for k, v in table.keys_by_kind.items() if name in (*v.required, *v.optional)]
    own = ", ".join((*keys.required, *keys.optional)) or "no other keys"
    return f'not a key of kind = "{kind}" (it takes {own}); it belongs to {" or ".join(others)}'
