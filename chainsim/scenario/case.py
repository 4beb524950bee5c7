"""What the checks of a scenario look at."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, NamedTuple

from chainsim.scenario.faults import Fault, shown
from chainsim.scenario.paths import Path, value_at
from chainsim.scenario.schema import Document

MOVABLE_MOUNTS = ("sliding", "hung", "arm", "spring", "counterweight")


class Case(NamedTuple):
    """What a check looks at: the file's tables, as read, and with every value filled in."""

    tables: Mapping[str, Any]
    given: Document
    filled: Document

    def fault(self, path: Path, rule: str, *uses: Path) -> Fault:
        """Make a fault that shows the value the file has there."""
        return Fault(path, shown(value_at(self.tables, path)), rule, uses)
