"""Refuse scenarios whose values are each possible but do not go together.

Each check is one small function in `_CHECKS`; it yields a `Fault` for each thing it refuses.
What needs the chain's route (a chain too short, balls that cannot pass) is judged later.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator, Mapping
from typing import Any

from chainsim.scenario import checks_load, checks_machine
from chainsim.scenario.case import Case
from chainsim.scenario.faults import Fault, shown
from chainsim.scenario.paths import Path, nearest, value_at

_CHECKS: tuple[Callable[[Case], Iterator[Fault]], ...] = (
    checks_machine.check_chain,
    checks_machine.check_sprockets,
    checks_machine.check_places,
    checks_machine.check_drive,
    checks_machine.check_motor,
    checks_machine.check_fixed_parts,
    checks_load.check_carriers,
    checks_load.check_pocket,
    checks_load.check_balls,
    checks_load.check_run,
)


def faults_of_values(case: Case) -> Iterator[Fault]:
    """Run every check.

    Parameters
    ----------
    case : Case
        The scenario.

    Yields
    ------
    Fault
        One for each thing refused.
    """
    for check in _CHECKS:
        yield from check(case)


def faults_of_names(tables: Mapping[str, Any]) -> Iterator[Fault]:
    """Refuse names that are used twice, and references to names that are not there.

    Parameters
    ----------
    tables : mapping
        Tables of the file, which need not be readable otherwise.

    Yields
    ------
    Fault
        One for each.
    """
    for array in ("sprocket", "wall", "guide"):
        names = Counter(name for _, name in _names(tables, array))
        seen: set[str] = set()
        for i, name in _names(tables, array):
            if names[name] > 1 and name in seen:
                yield Fault((array, i, "name"), shown(name), f"another {array} has this name")
            seen.add(name)
    known = [name for _, name in _names(tables, "sprocket")]
    for path in [("drive", "sprocket"), *_event_sprockets(tables)]:
        name = value_at(tables, path)
        if isinstance(name, str) and name not in known:
            near = nearest(name, known)
            hint = f"; did you mean '{near}'?" if near else ""
            listed = ", ".join(known) or "none"
            yield Fault(path, shown(name), f"no sprocket has this name (there is {listed}){hint}")


def _names(tables: Mapping[str, Any], array: str) -> list[tuple[int, str]]:
    members = tables.get(array)
    if not isinstance(members, list):
        return []
    named = [(i, m.get("name")) for i, m in enumerate(members) if isinstance(m, Mapping)]
    return [(i, name) for i, name in named if isinstance(name, str)]


def _event_sprockets(tables: Mapping[str, Any]) -> list[Path]:
    events = tables.get("event")
    count = len(events) if isinstance(events, list) else 0
    return [("event", i, "sprocket") for i in range(count)]
