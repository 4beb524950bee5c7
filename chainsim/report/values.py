"""Every value of a scenario with where it came from, for a reader."""

from __future__ import annotations

from typing import Any

from chainsim.scenario.table import leaves
from chainsim.units import format_si

ORIGIN_TEXTS = {
    "given": "given",
    "kind": "from the kind of chain",
    "assumed": "assumed",
    "bench": "from the bench",
}

TABLE_TITLES = {
    "frame": "Frame",
    "chain": "Chain",
    "sprocket": "Sprockets and take-ups",
    "wall": "Walls",
    "guide": "Guides",
    "drive": "Drive",
    "carriers": "Carriers",
    "balls": "Balls",
    "event": "Events",
    "run": "Run",
    "limits": "Limits",
    "study": "Studies",
}

HIDDEN_TABLES = ("bench", "resolved", "format", "title", "view")


def shown_value(value: Any, unit_kind: str | None) -> str:
    """Return a value of a scenario as a reader expects it.

    Parameters
    ----------
    value : object
        Text, whole number, flag, or number in SI.
    unit_kind : str or None
        Kind of its unit, a key of `chainsim.units.UNITS`; None where it has none.
    """
    if value is None:
        return "none"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, tuple | list):
        return "(" + ", ".join(shown_value(v, unit_kind) for v in value) + ")"
    if isinstance(value, float):
        return format_si(value, unit_kind) if unit_kind else f"{value:.6g}"
    return str(value)


def shown_range(origin: Any, unit_kind: str | None) -> str:
    """Return the range of a value that is not known for sure, empty where it is."""
    if origin.low is None or origin.high is None or origin.low == origin.high:
        return ""
    low, high = shown_value(origin.low, unit_kind), shown_value(origin.high, unit_kind)
    return f"{low} to {high}"


def shown_origin(origin: Any) -> str:
    """Return where a value came from, with its note."""
    text = ORIGIN_TEXTS.get(origin.source, origin.source)
    if not origin.note or origin.source == "given":
        return text
    return f"{text}: {origin.note}"


def value_blocks(scenario: Any) -> list[dict]:
    """Return the values of a scenario, table by table.

    Parameters
    ----------
    scenario : Scenario
        What was simulated.

    Returns
    -------
    list of dict
        ``title``, ``rows`` (key, value, origin, range) and ``open``.
    """
    origins = scenario.origins()
    rows: dict[str, list[tuple[str, ...]]] = {}
    for leaf in leaves(scenario):
        table = str(leaf.path[0])
        if leaf.value is None or table in HIDDEN_TABLES or leaf.key not in origins:
            continue
        origin = origins[leaf.key]
        rows.setdefault(table, []).append(
            (
                leaf.key,
                shown_value(leaf.value, leaf.unit_kind),
                shown_origin(origin),
                shown_range(origin, leaf.unit_kind),
            )
        )
    return [
        {
            "title": TABLE_TITLES.get(table, table),
            "rows": found,
            "open": table in ("chain", "drive"),
        }
        for table, found in rows.items()
    ]


def origin_counts(scenario: Any) -> str:
    """Return a sentence that says how many values are sure and how many are not."""
    sources = [origin.source for origin in scenario.origins().values()]
    parts = [
        f"{sources.count(source)} {text}"
        for source, text in ORIGIN_TEXTS.items()
        if source in sources
    ]
    unsure = len(scenario.uncertain())
    text = f"{len(sources)} values: {', '.join(parts)}."
    if unsure:
        text += (
            f" {unsure} of those that were not given have a range within which they may lie; "
            "findings may turn at its ends."
        )
    return text
