"""Write a scenario with every value in place, as TOML and as JSON."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from typing import Any

from chainsim.scenario.filler import Origin
from chainsim.scenario.quantity import PLAIN_NUMBER
from chainsim.scenario.schema import Document
from chainsim.scenario.table import Leaf, Table, leaves, name_of, quantities_of, understands
from chainsim.units import UNITS, to_si

HEAD = ("format", "title", "view")
SHORT = 7
"""Longest number, in characters, that reads well in its SI unit."""
_READABLE = ("mm", "g", "ms", "mm/s", "mN", "kN", "mN m", "kN/m", "MN/m", "deg", "mN m s/rad")


def si_text(value: float, unit_kind: str) -> str:
    """A number with a unit, so that reading it gives the very same float.

    In the SI unit, or in another where that takes fewer digits.

    Parameters
    ----------
    value : float
        The number [SI unit of the kind].
    unit_kind : str
        A key of `chainsim.units.UNITS`.

    Returns
    -------
    str
        Such as `12.7 mm`.
    """
    plain = f"{value!r} {next(iter(UNITS[unit_kind]))}"
    if len(repr(value)) <= SHORT:
        return plain
    others = [unit for unit in UNITS[unit_kind] if unit in _READABLE]
    texts = [f"{value / UNITS[unit_kind][unit]:.10g} {unit}" for unit in others]
    exact = [text for text in texts if to_si(text, unit_kind) == value]
    return min([plain, *exact], key=len)


def as_toml(document: Document, origins: Mapping[str, Origin]) -> str:
    """Write every value with its SI unit, and the origins of those not given in the file.

    Parameters
    ----------
    document : Document
        A complete scenario.
    origins : mapping
        Dotted key -> origin.

    Returns
    -------
    str
        TOML text that reads back to the same values and origins.
    """
    head = [f"{name} = {_literal(getattr(document, name))}" for name in HEAD]
    parts: list[str] = ["\n".join(head) + "\n"]
    for field_name in type(document).model_fields:
        value = getattr(document, field_name)
        if isinstance(value, Table):
            parts.append(_table_text(f"[{field_name}]", value))
        elif isinstance(value, tuple):
            parts.extend(_table_text(f"[[{field_name}]]", member) for member in value)
    parts.append(_bench_text(document))
    parts.append(_origins_text(document, origins))
    return "\n".join(part for part in parts if part)


def as_json(document: Document, origins: Mapping[str, Origin]) -> str:
    """Write every value in SI, and every origin, as one JSON object.

    Parameters
    ----------
    document : Document
        A complete scenario.
    origins : mapping
        Dotted key -> origin.

    Returns
    -------
    str
        `{"values": {…}, "origins": {key: {source, low, typical, high, note}, …}}`.
    """
    told = {key: origin._asdict() for key, origin in origins.items()}
    return json.dumps({"values": values_only(document), "origins": told}, ensure_ascii=False)


def values_only(document: Document) -> dict[str, Any]:
    """Every value in SI as plain tables and lists, without origins."""
    return document.model_dump(mode="json", by_alias=True, exclude={"bench", "resolved"})


def _table_text(header: str, table: Table) -> str:
    lines = [header]
    kind = getattr(table, "kind", None)
    for field_name, field in type(table).model_fields.items():
        value = getattr(table, field_name)
        if (
            value is not None
            and not _is_empty(value)
            and understands(table, name_of(field_name, field))
        ):
            kinds = [quantity.kind_for(kind) for quantity in quantities_of(field)]
            text = _columns(value, kinds) if len(set(kinds)) > 1 else _literal(value, *kinds[:1])
            lines.append(f"{name_of(field_name, field)} = {text}")
    return "\n".join(lines) + "\n"


def _columns(rows: Any, kinds: Sequence[str]) -> str:
    """TOML of a list of rows whose columns are of several unit kinds."""
    texts = [[_literal(item, kind) for item, kind in zip(row, kinds, strict=True)] for row in rows]
    lists = [f"[{', '.join(row)}]" for row in texts]
    return f"[{', '.join(lists)}]"


def _literal(value: Any, unit_kind: str | None = None) -> str:
    """TOML of one value."""
    if isinstance(value, Table):
        return _inline_table(value)
    if isinstance(value, tuple):
        return f"[{', '.join(_literal(item, unit_kind) for item in value)}]"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return toml_string(value)
    if isinstance(value, float) and unit_kind not in (None, PLAIN_NUMBER):
        return toml_string(si_text(value, str(unit_kind)))
    return repr(value)


def _is_empty(value: Any) -> bool:
    """Whether a table states nothing."""
    return isinstance(value, Table) and _inline_table(value) == "{  }"


def _inline_table(table: Table) -> str:
    rows = _table_text("", table).strip().split("\n")
    return "{ " + ", ".join(row for row in rows if row) + " }"


def toml_string(text: str) -> str:
    """A TOML basic string; JSON escapes are a subset, but for the delete character."""
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")


def _bench_text(document: Document) -> str:
    if not document.bench:
        return ""
    rows = [f"{toml_string(key)} = {_inline_table(item)}" for key, item in document.bench.items()]
    return "\n".join(["[bench]", *rows]) + "\n"


def _origins_text(document: Document, origins: Mapping[str, Origin]) -> str:
    by_key = {leaf.key: leaf for leaf in leaves(document)}
    rows = [
        f"{toml_string(key)} = {_origin_literal(origin, by_key[key])}"
        for key, origin in origins.items()
        if origin.source in ("kind", "assumed") or (origin.source == "given" and origin.note)
    ]
    return "\n".join(["[resolved]", *rows]) + "\n" if rows else ""


def _origin_literal(origin: Origin, leaf: Leaf) -> str:
    parts = [f"source = {toml_string(origin.source)}"]
    for name in ("low", "high"):
        value = getattr(origin, name)
        if value is not None:
            parts.append(f"{name} = {_literal(float(value), leaf.unit_kind)}")
    if origin.note:
        parts.append(f"note = {toml_string(origin.note)}")
    return "{ " + ", ".join(parts) + " }"
