"""What every table of a scenario has in common, and how its keys are described.

Each key is one line of a table class: its type says the unit kind and what is possible,
`key(…)` says the default, one sentence, an example, and, for an assumed value, its range.
The JSON Schema, the list of values and their origins all read these lines.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any, ClassVar, NamedTuple, get_args, get_origin

from pydantic import BaseModel, ConfigDict, Field
from pydantic.fields import FieldInfo

from chainsim.scenario.quantity import PLAIN_NUMBER, Quantity


class KindKeys(NamedTuple):
    """Keys that one kind of a table understands beside those of all kinds."""

    required: tuple[str, ...] = ()
    optional: tuple[str, ...] = ()


class Table(BaseModel):
    """One table of a scenario: unknown keys are refused, values do not change.

    A table whose `kind` key decides which other keys make sense lists them in
    `keys_by_kind`; `chainsim.scenario.faults` refuses the others.
    """

    model_config = ConfigDict(extra="forbid", frozen=True, allow_inf_nan=False)
    keys_by_kind: ClassVar[dict[str, KindKeys]] = {}
    keys_of_all_kinds: ClassVar[tuple[str, ...]] = ()


def key(
    default: Any = ...,
    text: str = "",
    *,
    example: Any = None,
    likely: tuple[str | float, str | float] | None = None,
    usual: tuple[str | float, str | float] | None = None,
    alias: str | None = None,
    alternative: bool = False,
) -> Any:
    """Describe one key of a table.

    Parameters
    ----------
    default : object
        Value where the key is left out [SI]; `...` where it is required; None where it is
        worked out from the rest, as `text` says.
    text : str
        One sentence: meaning, sign, what happens when it is left out.
    example : object
        Value as it is written in a file.
    likely : tuple of two, or None
        Range of an assumed default, as it is written in a file.
    usual : tuple of two, or None
        Range outside which a value is legal but earns a remark.
    alias : str or None
        Name in the file, where Python does not allow it.
    alternative : bool
        Whether the key is another way to state a value, and is resolved into that.

    Returns
    -------
    FieldInfo
        For pydantic.
    """
    extra: Any = {"likely": likely, "usual": usual, "alternative": alternative}
    return Field(
        default,
        description=text,
        examples=None if example is None else [example],
        alias=alias,
        json_schema_extra={"chainsim": extra},
    )


class Leaf(NamedTuple):
    """One value of a scenario with its dotted key."""

    key: str
    value: Any
    field: FieldInfo
    unit_kind: str | None
    path: tuple[str | int, ...]


def hints(field: FieldInfo) -> dict[str, Any]:
    """What `key` noted beside the description of a field."""
    extra = field.json_schema_extra
    return dict(extra["chainsim"]) if isinstance(extra, dict) and "chainsim" in extra else {}  # type: ignore[arg-type]


def quantities_of(field: FieldInfo) -> list[Quantity]:
    """How the numbers of a field are read, in the order of its type; empty where it has none."""
    found = [item for item in field.metadata if isinstance(item, Quantity)]
    return found or _quantities_in(field.annotation)


def _quantities_in(annotation: Any) -> list[Quantity]:
    """Each `Quantity` inside a type such as `tuple[Length, Length] | None`."""
    own = [item for item in getattr(annotation, "__metadata__", ()) if isinstance(item, Quantity)]
    return own or [item for inner in get_args(annotation) for item in _quantities_in(inner)]


def quantity_of(field: FieldInfo) -> Quantity | None:
    """How the numbers of a field are read; None where it holds none, or of several kinds."""
    found = quantities_of(field)
    return found[0] if len({item.kind for item in found}) == 1 else None


def name_of(field_name: str, field: FieldInfo) -> str:
    """Name of a field in the file."""
    return field.alias or field_name


def fields_of(table: type[Table]) -> dict[str, FieldInfo]:
    """Fields of a table class by their names in the file."""
    return {name_of(name, field): field for name, field in table.model_fields.items()}


def table_in(annotation: Any) -> type[Table] | None:
    """Table class inside a type such as `tuple[Sprocket, ...]`; None where there is none."""
    if isinstance(annotation, type) and get_origin(annotation) is None:
        return annotation if issubclass(annotation, Table) else None
    for inner in get_args(annotation):
        found = table_in(inner)
        if found is not None:
            return found
    return None


def leaves(table: Table, key_prefix: str = "", path: tuple[str | int, ...] = ()) -> Iterator[Leaf]:
    """Walk every value of a table and of the tables in it.

    Members of an array of tables go by their name where they have one, else by their place.

    Parameters
    ----------
    table : Table
        Where to start.
    key_prefix : str
        Dotted key of `table`.
    path : tuple of str or int
        The same with array places as numbers.

    Yields
    ------
    Leaf
        A value that is no table; None where nothing is stated and nothing was worked out.
        Keys that the kind of a table does not understand are left out.
    """
    for field_name, field in type(table).model_fields.items():
        name = name_of(field_name, field)
        value = getattr(table, field_name)
        if not understands(table, name) or (value == () and table_in(field.annotation)):
            continue
        dotted = f"{key_prefix}.{name}" if key_prefix else name
        if isinstance(value, Table):
            yield from leaves(value, dotted, (*path, name))
        elif isinstance(value, tuple) and value and isinstance(value[0], Table):
            for i, member in enumerate(value):
                label = getattr(member, "name", None) or str(i)
                yield from leaves(member, f"{dotted}.{label}", (*path, name, i))
        else:
            quantity = quantity_of(field)
            kind = quantity.kind_for(getattr(table, "kind", None)) if quantity else None
            yield Leaf(dotted, value, field, kind, (*path, name))


def understands(table: Table, name: str) -> bool:
    """Whether the kind of a table, if it has kinds, understands a key.

    Parameters
    ----------
    table : Table
        The table.
    name : str
        Name of the key in the file.

    Returns
    -------
    bool
        True for every key of a table without kinds.
    """
    if not table.keys_by_kind:
        return True
    keys = table.keys_by_kind[getattr(table, "kind")]  # noqa: B009 - only some tables have it
    return name in (*table.keys_of_all_kinds, *keys.required, *keys.optional)


def kind_needs_unit(unit_kind: str | None) -> bool:
    """Whether a value of this unit kind is text with a unit in the file."""
    return unit_kind is not None and unit_kind != PLAIN_NUMBER
