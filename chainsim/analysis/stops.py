"""What happens after a stop, a cut or a reversal: running on, running back."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.steady import kind_word
from chainsim.analysis.survey import Survey, survey

SUPPLY_EVENTS = ("supply_cut", "supply_reversed", "stop")
"""Events after which a lift may run back."""


class RunBack(NamedTuple):
    """How far the driven sprocket turned back after a stop, a cut or a reversal.

    Attributes
    ----------
    distance : float
        Chain length that ran back [m].
    time : float
        When it was furthest back [s].
    cause : str
        Kind of the event before it; empty where there was none.
    """

    distance: float
    time: float
    cause: str


class Overrun(NamedTuple):
    """How far the chain ran on after a stop or a cut.

    Attributes
    ----------
    distance : float
        Chain length from the event to the furthest point [m].
    time : float
        When it was furthest [s].
    cause : str
        Kind of the event.
    """

    distance: float
    time: float
    cause: str


def chain_travel(rec: Any) -> np.ndarray:
    """Travel of the chain by the angle of the driven sprocket.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    ndarray, shape (n_samples,)
        Travel since the first sample [m], positive forward; a skipped tooth is not in it.
    """
    s = survey(rec)
    driven = s.sprocket_names.index(s.scenario.drive.sprocket)
    angle = np.asarray(s["sprockets/angle"], dtype=float)[:, driven]
    arc = s.teeth[driven] * s.pitch / (2.0 * np.pi) if s.teeth[driven] else s.seat_radius[driven]
    return s.side[driven] * (angle - angle[0]) * arc


def run_back(rec: Any) -> RunBack:
    """How far the lift ran back after a stop, a cut or a reversal of the supply.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    RunBack
        The worst case; distance 0 where it never ran back. A lift that is *driven* backward
        after a reversal is counted too: it carries its balls down.
    """
    s = survey(rec)
    travel, worst = chain_travel(s), RunBack(0.0, float("nan"), "")
    for kind, start, stop in _after_events(s):
        piece = travel[start:stop]
        back = np.maximum.accumulate(piece) - piece
        furthest = int(np.argmax(back))
        if back[furthest] > worst.distance:
            worst = RunBack(float(back[furthest]), float(s.time[start + furthest]), kind)
    return worst


def overrun(rec: Any) -> Overrun | None:
    """How far the chain ran on after a stop or a cut of the supply.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Overrun or None
        The longest; None where nothing was stopped. A stop includes its ramp.
    """
    s = survey(rec)
    travel, worst = chain_travel(s), None
    for kind, start, stop in _after_events(s):
        if kind == "supply_reversed":
            continue
        furthest = int(np.argmax(travel[start:stop]))
        distance = float(travel[start + furthest] - travel[start])
        if worst is None or distance > worst.distance:
            worst = Overrun(distance, float(s.time[start + furthest]), kind)
    return worst


def _after_events(s: Survey) -> list[tuple[str, int, int]]:
    """Stretches from each stop, cut or reversal to the next start: kind, first, last sample."""
    events = event_times(s)
    starts = [time for kind, time in events if kind in ("start", "restart")]
    stretches = []
    for kind, time in events:
        if kind in SUPPLY_EVENTS:
            end = min((other for other in starts if other > time), default=np.inf)
            first = int(np.searchsorted(s.time, time))
            last = int(np.searchsorted(s.time, end))
            if last - first >= 2:
                stretches.append((kind, first, last))
    return stretches


def event_times(rec: Any) -> list[tuple[str, float]]:
    """Everything that was done to the lift, by the scenario or as the run logged it.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    list of (str, float)
        Kind as one lower-case word, and time [s], in the order of time; only what lies within
        the recorded time.
    """
    s = survey(rec)
    end = float(s.time[-1]) if len(s.time) else -np.inf
    events = {(kind_word(event.kind), round(float(event.time), 6)) for event in s.events}
    events |= {(kind_word(event.kind), round(float(event.at), 6)) for event in s.scenario.event}
    return sorted((event for event in events if event[1] <= end), key=lambda event: event[1])
