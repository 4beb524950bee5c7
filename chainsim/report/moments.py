"""Moments of a run worth a jump: events, losses, and the worst moment of each finding."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Any

import numpy as np

from chainsim.recording.channels import BALL_STATES
from chainsim.report.parts import n_slots
from chainsim.report.text import readable

KEPT_FATES = ("delivered", "aboard")
"""Fates that are no loss."""

EVERYDAY_EVENTS = (
    *("fed", "seated", "delivered", "aboard"),
    *("spilled", "missed the pocket", "carried over", "outside the mouth"),
)
"""Kinds of event that every ball has; losses have marks of their own."""

SEATED = BALL_STATES.index("seated")

MAX_EVENT_MARKS = 60
"""Most events that get a mark of their own [dimensionless]; losses and worst moments always do."""


@dataclass(frozen=True)
class Mark:
    """A moment one can jump to.

    Attributes
    ----------
    time : float
        When [s].
    kind : str
        ``"worst"``, ``"loss"`` or ``"event"``.
    label : str
        What is to be seen there.
    target : dict or None
        What to ring: ``kind`` (sprocket, link, ball) and ``index``.
    """

    time: float
    kind: str
    label: str
    target: dict | None


def is_lost(fate: str) -> bool:
    """Tell whether a ball with this fate went astray."""
    return fate not in KEPT_FATES


def is_notable(event: Any) -> bool:
    """Tell whether an event is more than what every ball goes through."""
    return event.kind.replace("_", " ") not in EVERYDAY_EVENTS


def place_target(place: str, names: list[str]) -> dict | None:
    """Return what a place in words points at, where the page can ring it.

    Parameters
    ----------
    place : str
        Such as ``"link 17"``, ``"ball 3"`` or ``"sprocket tail"``.
    names : list of str
        Names of the sprockets in the order of the scenario.
    """
    numbered = re.search(r"\b(link|pin|ball) (\d+)", place or "")
    if numbered:
        kind = "ball" if numbered[1] == "ball" else "link"
        return {"kind": kind, "index": int(numbered[2])}
    for index, name in enumerate(names):
        if re.search(rf"(?<![\w-]){re.escape(name)}(?![\w-])", place or ""):
            return {"kind": "sprocket", "index": index}
    return None


def marks(rec: Any, findings: list) -> list[Mark]:
    """Return every moment worth a jump, in the order of time.

    Parameters
    ----------
    rec : Recording
        The run.
    findings : list of Finding
        Its findings.
    """
    names = [s.name for s in rec.scenario.sprocket]
    found = []
    for finding in findings:
        if finding.time is not None and math.isfinite(finding.time):
            label = f"{finding.title}: worst moment"
            if finding.place:
                label += f", {readable(finding.place)}"
            target = place_target(finding.place or "", names)
            found.append(Mark(finding.time, "worst", label, target))
    for ball in rec.balls:
        if is_lost(ball.fate):
            cause = f" ({ball.cause})" if ball.cause else ""
            text = f"ball {ball.number} {ball.fate}{cause}"
            target = {"kind": "ball", "index": int(ball.number)}
            found.append(Mark(loss_time(rec, ball), "loss", text, target))
    shown = [event for event in rec.events if is_notable(event)]
    for event in shown[:MAX_EVENT_MARKS]:
        text = event.text or f"{event.kind} {event.subject}".strip()
        found.append(Mark(event.time, "event", text, place_target(event.subject, names)))
    return sorted(found, key=lambda mark: mark.time)


def loss_time(rec: Any, ball: Any) -> float:
    """Return when a lost ball was last seen in a pocket, or last seen at all [s]."""
    if n_slots(rec):
        own = rec["balls/number"] == ball.number
        seated = (own & (rec["balls/state"] == SEATED)).any(axis=1)
        seen = np.flatnonzero(seated if seated.any() else own.any(axis=1))
        if len(seen):
            return float(rec.time[seen[-1]])
    return float(ball.end_time if math.isfinite(ball.end_time) else rec.time[-1])
