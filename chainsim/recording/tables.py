"""Tables of a recording: rows of named tuples to columns and back.

A table is a group with one column per field. A column of texts from a small set (a fate, a kind of
event) is an enumeration that carries its texts.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any, NamedTuple

import numpy as np

from chainsim.integration.samples import BallRow, Event, Extreme
from chainsim.recording.rows import FindingRow, ModeRow, StrandRow

FATES = (
    "delivered",
    "spilled",
    "missed the pocket",
    "carried over",
    "outside the mouth",
    "aboard",
)
OUTCOMES = ("holds", "close", "fails", "not judged")


class Column(NamedTuple):
    """One column of a table.

    Attributes
    ----------
    kind : str
        ``"number"``, ``"optional"`` (a number or None), ``"index"``, ``"text"`` or ``"choice"``.
    long_name : str
        What it is, in a few words.
    unit : str
        Unit of its values; empty where the row tells it or it has none.
    texts : tuple of str
        Known texts of a choice, in the order of their codes; others are added behind.
    """

    kind: str
    long_name: str
    unit: str = ""
    texts: tuple[str, ...] = ()


class Table(NamedTuple):
    """One table.

    Attributes
    ----------
    row : type
        Named tuple of its rows.
    dim : str
        Name of its axis.
    columns : dict of str to Column
        Its columns by field name.
    """

    row: Any
    dim: str
    columns: dict[str, Column]


class Choice(NamedTuple):
    """A column of texts from a small set.

    Attributes
    ----------
    codes : ndarray, shape (n,)
        Index of each row's text [dimensionless].
    texts : tuple of str
        The texts by code.
    """

    codes: np.ndarray
    texts: tuple[str, ...]


TABLES = {
    "events": Table(
        Event,
        "event",
        {
            "time": Column("number", "time of the event", "s"),
            "kind": Column("choice", "kind of event"),
            "subject": Column("text", "part it happened to"),
            "value": Column("number", "size of it, in the row's unit"),
            "unit": Column("text", "unit of the value"),
            "text": Column("text", "what happened"),
        },
    ),
    "balls/table": Table(
        BallRow,
        "ball",
        {
            "number": Column("index", "number of the ball", "1"),
            "fed_time": Column("number", "time of feeding", "s"),
            "seated_time": Column("number", "time of the first seat", "s"),
            "end_time": Column("number", "time of leaving", "s"),
            "end_x": Column("number", "place of leaving, x", "m"),
            "end_y": Column("number", "place of leaving, y", "m"),
            "pocket": Column("index", "last carrier, -1 none", "1"),
            "fate": Column("choice", "what became of the ball", "", FATES),
            "cause": Column("text", "why"),
        },
    ),
    "extremes": Table(
        Extreme,
        "extreme",
        {
            "name": Column("text", "quantity"),
            "value": Column("number", "worst value, in the row's unit"),
            "unit": Column("text", "unit of the value"),
            "time": Column("number", "time of the worst value", "s"),
            "place": Column("text", "place of the worst value"),
        },
    ),
    "modes": Table(
        ModeRow,
        "mode",
        {
            "frequency": Column("number", "natural frequency", "Hz"),
            "kind": Column("text", "what moves most"),
        },
    ),
    "findings": Table(
        FindingRow,
        "finding",
        {
            "name": Column("text", "finding"),
            "group": Column("text", "group of findings"),
            "title": Column("text", "heading"),
            "outcome": Column("choice", "outcome", "", OUTCOMES),
            "value": Column("optional", "worst value, in the row's unit"),
            "unit": Column("text", "unit of value, limit, margin and scale"),
            "limit": Column("optional", "limit, in the row's unit"),
            "margin": Column("optional", "margin, in the row's unit; positive is good"),
            "scale": Column("optional", "scale of the margin, in the row's unit"),
            "time": Column("optional", "time of the worst value", "s"),
            "place": Column("text", "place of the worst value"),
            "note": Column("text", "note"),
            "why": Column("text", "why it is not judged"),
        },
    ),
    "geometry/strands": Table(
        StrandRow,
        "strand_row",
        {
            "name": Column("text", "strand"),
            "start": Column("text", "sprocket where it starts"),
            "end": Column("text", "sprocket where it ends"),
            "carrying": Column("index", "1 where it carries balls up", "1"),
        },
    ),
}


def to_columns(name: str, rows: Iterable[Any]) -> dict[str, np.ndarray | Choice]:
    """Turn rows into columns.

    Parameters
    ----------
    name : str
        Name of the table.
    rows : iterable
        Named tuples, mappings or objects with the table's fields; a missing text is empty.

    Returns
    -------
    dict of str to ndarray, shape (n_rows,), or Choice
        Columns by field name, each in its unit.
    """
    table = TABLES[name]
    listed = list(rows)
    return {
        field: _column(column, [_field(row, field) for row in listed])
        for field, column in table.columns.items()
    }


def to_rows(name: str, columns: Mapping[str, np.ndarray | Choice]) -> list[Any]:
    """Turn columns back into rows.

    Parameters
    ----------
    name : str
        Name of the table.
    columns : mapping of str to ndarray, shape (n_rows,), or Choice
        Columns by field name, each in its unit; none for a table that was never written.

    Returns
    -------
    list
        Named tuples of the table's kind.
    """
    table = TABLES[name]
    if not columns:
        return []
    values = [_values(column, columns[field]) for field, column in table.columns.items()]
    return [table.row(*cells) for cells in zip(*values, strict=True)]


def _field(row: Any, field: str) -> Any:
    return row.get(field) if isinstance(row, Mapping) else getattr(row, field)


def _column(column: Column, values: list[Any]) -> np.ndarray | Choice:
    if column.kind in ("number", "optional"):
        return np.array([np.nan if value is None else value for value in values], dtype="f8")
    if column.kind == "index":
        return np.array(values, dtype="i4")
    texts = ["" if value is None else str(value) for value in values]
    if column.kind == "text":
        return np.array(texts, dtype=object)
    texts = [text or "unknown" for text in texts]
    known = tuple(dict.fromkeys([*column.texts, *texts]))
    codes = {text: code for code, text in enumerate(known)}
    return Choice(np.array([codes[text] for text in texts], dtype="i2"), known)


def _values(column: Column, stored: np.ndarray | Choice) -> list[Any]:
    if isinstance(stored, Choice):
        return [stored.texts[code] for code in stored.codes]
    if column.kind == "optional":
        return [None if np.isnan(value) else float(value) for value in stored]
    if column.kind == "text":
        return [str(value) for value in stored]
    return stored.tolist()
