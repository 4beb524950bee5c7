"""JSON Schema of the scenario format, for editors; the same texts are the reference manual."""

from __future__ import annotations

from typing import Any

from pydantic.fields import FieldInfo

from chainsim.scenario.quantity import PLAIN_NUMBER
from chainsim.scenario.schema import Document
from chainsim.scenario.schema_balls import EVERY_POCKET
from chainsim.scenario.schema_run import ALL_SITUATIONS, SITUATIONS
from chainsim.scenario.table import Table, fields_of, hints, quantity_of, table_in
from chainsim.scenario.write import si_text

DIALECT = "https://json-schema.org/draft/2020-12/schema"

_SHORT_FORMS: dict[tuple[str, str], dict[str, Any]] = {
    ("Balls", "feed"): {"const": EVERY_POCKET},
    ("Run", "situations"): {"enum": [ALL_SITUATIONS, *SITUATIONS]},
}
"""(table, key) -> what the file may hold there instead."""


def json_schema() -> dict[str, Any]:
    """Describe the scenario format.

    Returns
    -------
    dict
        A JSON Schema: for every key its type, unit, default, and one sentence.
    """
    schema = Document.model_json_schema(by_alias=True)
    definitions = schema.get("$defs", {})
    for table in all_tables():
        described = schema if table is Document else definitions[table.__name__]
        described.pop("title", None)
        for name, field in fields_of(table).items():
            _describe(described["properties"][name], field, table, name)
        if table.keys_by_kind:
            described["allOf"] = _rules_of_kinds(table)
    return {"$schema": DIALECT, "title": "chainsim scenario", **schema}


def all_tables() -> list[type[Table]]:
    """Every table class of the format, the whole file first."""
    found: list[type[Table]] = [Document]
    for table in found:
        inner = [table_in(field.annotation) for field in table.model_fields.values()]
        found.extend(item for item in dict.fromkeys(inner) if item and item not in found)
    return found


def _describe(described: dict[str, Any], field: FieldInfo, table: type[Table], name: str) -> None:
    """Put the default into the units of the file, and the range of an assumed one in words."""
    extra = described.pop("chainsim", hints(field))
    described.pop("title", None)
    described.pop("default", None)
    _drop_null(described)
    default = default_text(field)
    if default is not None:
        described["default"] = default
    if extra.get("likely"):
        low, high = extra["likely"]
        described["description"] = f"{field.description} Assumed; likely {low} to {high}."
    short = _SHORT_FORMS.get((table.__name__, name))
    if short is not None:
        whole = {key: described.pop(key) for key in ("$ref", "anyOf", "allOf") if key in described}
        described["anyOf"] = [short, whole]


def _drop_null(described: dict[str, Any]) -> None:
    """A file cannot hold null: leave it out of the choices, and the choice of one out too."""
    choices = [item for item in described.get("anyOf", []) if item != {"type": "null"}]
    if len(choices) == 1:
        del described["anyOf"]
        described.update(choices[0] | described)
    elif choices:
        described["anyOf"] = choices


def default_text(field: FieldInfo) -> Any:
    """Default of a key as it is written in a file; None where it has none of its own.

    Parameters
    ----------
    field : FieldInfo
        Description of the key.

    Returns
    -------
    object
        Text with a unit, number, word, list; None.
    """
    default = field.default
    if field.is_required() or default is None or isinstance(default, (Table, dict)):
        return None
    quantity = quantity_of(field)
    if quantity is None or quantity.kind == PLAIN_NUMBER:
        return list(default) if isinstance(default, tuple) else default
    if isinstance(default, tuple):
        return [si_text(item, quantity.kind) for item in default]
    return si_text(default, quantity.kind)


def _rules_of_kinds(table: type[Table]) -> list[dict[str, Any]]:
    """One rule for each kind: which keys it needs and which it understands."""
    usual = table.model_fields["kind"].default
    rules = []
    for kind, keys in table.keys_by_kind.items():
        is_kind: dict[str, Any] = {"required": ["kind"], "properties": {"kind": {"const": kind}}}
        if kind == usual:
            is_kind = {"anyOf": [is_kind, {"not": {"required": ["kind"]}}]}
        known = dict.fromkeys((*table.keys_of_all_kinds, *keys.required, *keys.optional))
        then: dict[str, Any] = {"propertyNames": {"enum": list(known)}}
        if keys.required:
            then["required"] = list(keys.required)
        rules.append({"if": is_kind, "then": then})
    return rules
