"""From one `[[axis]]` table of a plan to an axis, with a clear fault for everything else."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any, Protocol

from chainsim.study.amounts import Amount, read_amount
from chainsim.study.axes import Axis, Choice, ListedAxis, RangeAxis, SpreadAxis

MOST_VALUES = 100_000
"""Most values of one axis, and most points of a sample (dimensionless)."""
_KINDS_OF_AXIS = ("values", "range", "together", "choice", "distribution")
_KNOWN = ("name", "key", "count", "log", *_KINDS_OF_AXIS)
_PARAMETERS = {  # kind of distribution -> (needed, optional), in ascending order where ordered
    "uniform": (("low", "high"), ()),
    "triangular": (("low", "typical", "high"), ()),
    "normal": (("mean", "deviation"), ("low", "high")),
}


class FaultList(Protocol):
    """What axis reading needs of a collector of faults."""

    def add(self, key: str, found: Any, rule: str) -> None:
        """Note one fault under a dotted key, with the value found and the rule."""
        ...

    def unknown(self, where: str, table: Mapping[str, Any], known: tuple[str, ...]) -> None:
        """Note every key of a table that is not known."""
        ...


def read_axis(where: str, table: Mapping[str, Any], faults: FaultList) -> Axis | None:
    """Read one axis.

    Parameters
    ----------
    where : str
        Dotted key of the table, such as ``axis.2``.
    table : mapping
        The table.
    faults : FaultList
        Takes the faults.

    Returns
    -------
    Axis or None
        None where it could not be read; then a fault was noted.
    """
    faults.unknown(where, table, _KNOWN)
    kinds = [kind for kind in _KINDS_OF_AXIS if kind in table]
    if len(kinds) != 1:
        faults.add(where, kinds or None, f"an axis has exactly one of {', '.join(_KINDS_OF_AXIS)}")
        return None
    kind = kinds[0]
    if kind in ("values", "range", "distribution") and not isinstance(table.get("key"), str):
        faults.add(f"{where}.key", table.get("key"), "the dotted scenario key that varies")
        return None
    name = table.get("name", table.get("key"))
    if kind in ("together", "choice") and not isinstance(name, str):
        name = _made_name(kind, table)
    return _READERS[kind](where, name, table, faults)


def _made_name(kind: str, table: Mapping[str, Any]) -> str:
    if kind == "together" and isinstance(table["together"], Mapping):
        return " with ".join(table["together"])
    return "alternative"


def _values(where: str, name: str, table: Mapping[str, Any], faults: FaultList) -> Axis | None:
    values = table["values"]
    if not isinstance(values, list) or not values:
        faults.add(f"{where}.values", values, "a list of at least one value")
        return None
    return ListedAxis(name, tuple(Choice(_shown(v), {table["key"]: v}) for v in values))


def _range(where: str, name: str, table: Mapping[str, Any], faults: FaultList) -> Axis | None:
    ends = table["range"]
    amounts = [read_amount(end) for end in ends] if isinstance(ends, list) else []
    if len(amounts) != 2 or None in amounts:
        faults.add(f"{where}.range", ends, 'two values with their unit: ["0.1 kg", "0.4 kg"]')
        return None
    low, high = (amount for amount in amounts if amount is not None)
    log = table.get("log", False)
    if low.unit != high.unit:
        faults.add(f"{where}.range", ends, "both ends in the same unit")
    elif low.number >= high.number:
        faults.add(f"{where}.range", ends, "the lower end first")
    elif not isinstance(log, bool):
        faults.add(f"{where}.log", log, "true or false")
    elif log and low.number <= 0:
        faults.add(f"{where}.range", ends, "equal ratios need both ends above zero")
    elif (count := _count(where, table, low, high, faults)) is not None:
        return RangeAxis(name, table["key"], low, high, count, log)
    return None


def _count(
    where: str, table: Mapping[str, Any], low: Amount, high: Amount, faults: FaultList
) -> int | None:
    """Number of values of a range; a range of whole numbers lists each of them by default."""
    default = round(high.number - low.number) + 1 if low.whole and high.whole else None
    count = table.get("count", default)
    if isinstance(count, bool) or not isinstance(count, int) or not 2 <= count <= MOST_VALUES:
        rule = f"the number of values on this axis, 2 to {MOST_VALUES}"
        faults.add(f"{where}.count", count, rule)
        return None
    if low.whole and high.whole and (high.number - low.number) % (count - 1):
        faults.add(
            f"{where}.count", count,
            "whole numbers do not divide evenly so; change the range or the count",
        )  # fmt: skip
        return None
    return count


def _together(where: str, name: str, table: Mapping[str, Any], faults: FaultList) -> Axis | None:
    lists = table["together"]
    if not isinstance(lists, dict) or not all(isinstance(v, list) and v for v in lists.values()):
        faults.add(f"{where}.together", lists, "a table of keys, each with its list of values")
        return None
    lengths = {key: len(values) for key, values in lists.items()}
    if len(lists) < 2 or len(set(lengths.values())) != 1:
        faults.add(f"{where}.together", lengths, "two keys or more with lists of equal length")
        return None
    rows = [dict(zip(lists, row, strict=True)) for row in zip(*lists.values(), strict=True)]
    return ListedAxis(
        name, tuple(Choice(", ".join(_shown(v) for v in row.values()), row) for row in rows)
    )


def _choice(where: str, name: str, table: Mapping[str, Any], faults: FaultList) -> Axis | None:
    tables = table["choice"]
    if not isinstance(tables, list) or not tables:
        faults.add(f"{where}.choice", tables, "one [[axis.choice]] table per alternative")
        return None
    choices = []
    for i, entry in enumerate(tables, 1):
        here = f"{where}.choice.{i}"
        if not isinstance(entry, dict):
            faults.add(here, entry, "a table")
            continue
        faults.unknown(here, entry, ("name", "set", "scenario"))
        values, scenario = entry.get("set", {}), entry.get("scenario")
        if not isinstance(values, dict):
            faults.add(f"{here}.set", values, "a table of dotted keys and values")
        elif scenario is not None and not isinstance(scenario, str):
            faults.add(f"{here}.scenario", scenario, "the path of a scenario file")
        else:
            choices.append(Choice(str(entry.get("name", f"{name} {i}")), values, scenario))
    labels = [choice.label for choice in choices]
    if len(set(labels)) != len(labels):
        faults.add(f"{where}.choice", labels, "every alternative needs its own name")
    return ListedAxis(name, tuple(choices)) if choices else None


def _distribution(
    where: str, name: str, table: Mapping[str, Any], faults: FaultList
) -> Axis | None:
    given = table["distribution"]
    here = f"{where}.distribution"
    kind = given.get("kind") if isinstance(given, dict) else None
    if kind not in _PARAMETERS:
        faults.add(here, given, f"a table with kind = one of {', '.join(_PARAMETERS)}")
        return None
    needed, optional = _PARAMETERS[kind]
    faults.unknown(here, given, ("kind", *needed, *optional))
    amounts = {k: read_amount(given[k]) for k in (*needed, *optional) if k in given}
    missing = [k for k in needed if k not in given] + [k for k, a in amounts.items() if a is None]
    if missing:
        faults.add(here, given, f"{kind} needs an amount for {', '.join(missing)}")
        return None
    read = {k: amount for k, amount in amounts.items() if amount is not None}
    if len({amount.unit for amount in read.values()}) != 1:
        faults.add(here, given, "all amounts of a distribution in the same unit")
        return None
    if (rule := _disorder(kind, {k: amount.number for k, amount in read.items()})) is not None:
        faults.add(here, given, rule)
        return None
    loose = {k: Amount(amount.number, amount.unit) for k, amount in read.items()}
    return SpreadAxis(name, table["key"], kind, loose)


def _disorder(kind: str, numbers: dict[str, float]) -> str | None:
    """Rule that the parameters of a distribution break, or None."""
    if kind == "normal":
        if numbers["deviation"] <= 0:
            return "the deviation must be above zero"
        low, high = numbers.get("low"), numbers.get("high")
        return "low must lie below high" if low is not None and high is not None and low >= high \
            else None  # fmt: skip
    ends = numbers["low"] < numbers["high"]
    inside = numbers["low"] <= numbers.get("typical", numbers["low"]) <= numbers["high"]
    return None if ends and inside else "amounts must rise from low to high"


def _shown(value: Any) -> str:
    return value if isinstance(value, str) else str(value)


_READERS: dict[str, Callable[..., Axis | None]] = {
    "values": _values,
    "range": _range,
    "together": _together,
    "choice": _choice,
    "distribution": _distribution,
}
