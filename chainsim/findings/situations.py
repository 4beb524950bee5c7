"""Which situations a run went through, and which it did not."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.carried import carried_balls
from chainsim.analysis.stops import event_times
from chainsim.analysis.survey import Survey, survey
from chainsim.scenario.schema_run import SITUATIONS

BY_EVENT = {
    "stop": "stop",
    "supply_cut": "supply cut",
    "supply_reversed": "supply reversed",
    "jam": "jam",
    "knock": "knock",
    "missing_ball": "missing ball",
    "double_ball": "double ball",
    "takeup_blocked": "take-up blocked",
}
"""Kinds of event and the situation that each of them makes."""

NEED_BALLS = frozenset({"start loaded", "restart loaded", "missing ball", "double ball"})
"""Situations that a lift without balls cannot be in."""


class Situations(NamedTuple):
    """Situations of a run, in the order of the proving run.

    Attributes
    ----------
    run, not_run : list of str
        Those it went through, and those it did not.
    """

    run: list[str]
    not_run: list[str]


def situations(rec: Any) -> Situations:
    """Say which situations a run went through, from its events and channels.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Situations
        A situation counts once its event lies within the recorded time. A lift without balls
        runs its start, and no situation that needs balls is listed.
    """
    s = survey(rec)
    events = event_times(s)
    seen = {BY_EVENT[kind] for kind, _ in events if kind in BY_EVENT}
    seen |= _starts(s, events)
    if s.steady:
        seen.add("steady")
    listed = [name for name in SITUATIONS if s.scenario.balls is not None or name not in NEED_BALLS]
    return Situations(
        [name for name in listed if name in seen], [name for name in listed if name not in seen]
    )


def _starts(s: Survey, events: list[tuple[str, float]]) -> set[str]:
    """The start of the run, and a restart with balls aboard."""
    if not len(s.time) or not np.any(np.abs(s.drive_speed) > 0.0):
        return set()
    found = {"start loaded" if _is_loaded(s, 0.0) else "start empty"}
    halts = [time for kind, time in events if kind in ("stop", "supply_cut")]
    for kind, time in events:
        is_again = any(halt < time for halt in halts)
        if kind in ("start", "restart") and is_again and _is_loaded(s, time):
            found.add("restart loaded")
    return found


def _is_loaded(s: Survey, time: float) -> bool:
    """Whether balls are aboard at a moment [s]."""
    if s.scenario.balls is None:
        return False
    if time <= 0.0 and s.scenario.balls.start == "loaded":
        return True
    sample = min(int(np.searchsorted(s.time, time)), len(s.time) - 1)
    held = s.channel("carriers/loaded")
    if held is not None and np.any(held[sample] > 0):
        return True
    return bool(carried_balls(s)[sample].any())
