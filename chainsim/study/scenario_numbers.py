"""Numbers of a scenario that searches turn."""

from __future__ import annotations

from typing import Any

from chainsim.errors import CallError
from chainsim.scenario.table import Leaf, leaves

NAMED_LIMITS = ("takeup", "speed", "height", "wear", "slack")
"""Questions that have a name; any other is a dotted key."""
TAKEUP_KEYS = {  # kind of mount -> key of the value that sets its pull
    "hung": "mass",
    "sliding": "mass",
    "arm": "mass",
    "counterweight": "weight",
    "spring": "set_force",
}


def takeup_sprocket(scenario: Any) -> Any:
    """Sprocket whose mount takes up the slack.

    Parameters
    ----------
    scenario : Scenario
        The lift.

    Returns
    -------
    Sprocket
        The first one that can move.

    Raises
    ------
    CallError
        If none can.
    """
    for sprocket in scenario.sprocket:
        if sprocket.mount.kind in TAKEUP_KEYS:
            return sprocket
    raise CallError(
        "limit takeup: every axle of this lift is fixed, so nothing takes up slack; "
        "ask for `slack` instead"
    )


def number_at(scenario: Any, key: str) -> Leaf:
    """Number of a scenario by its dotted key.

    Parameters
    ----------
    scenario : Scenario
        The scenario.
    key : str
        Dotted key.

    Returns
    -------
    Leaf
        The value with its unit kind.

    Raises
    ------
    CallError
        If there is no number of that key; the nearest are offered.
    """
    import difflib

    numbers = {
        leaf.key: leaf
        for leaf in leaves(scenario)
        if isinstance(leaf.value, int | float) and not isinstance(leaf.value, bool)
    }
    if key not in numbers:
        near = difflib.get_close_matches(key, [*numbers, *NAMED_LIMITS], 3)
        hint = (
            f"did you mean {', '.join(near)}?" if near else f"or one of {', '.join(NAMED_LIMITS)}"
        )
        raise CallError(f"{key!r} is no number of this scenario; {hint}")
    return numbers[key]
