"""How taut a strand stays: the level that is never undercut for longer than a time."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.loops import least_level
from chainsim.analysis.survey import Survey, survey
from chainsim.analysis.tensions import station_tension


class Taut(NamedTuple):
    """How taut a strand stayed in steady running.

    Attributes
    ----------
    level : float
        Highest tension that is never undercut for longer than the allowed time [N].
    time : float
        Middle of the stretch that sets it [s].
    link : int
        Link that is there then [dimensionless].
    distance : float
        How far that is from the start of the strand [m].
    slack_time : float
        Longest time that any station spends below the limit [s].
    """

    level: float
    time: float
    link: int
    distance: float
    slack_time: float


def taut(rec: Any, strand: int) -> Taut | None:
    """How taut one strand stayed in steady running, against ``limits.slack_*``.

    The level is the highest tension that no station undercuts for longer than
    ``limits.slack_time``; only the part of the strand between feed and discharge counts.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    strand : int
        Index of the strand [dimensionless].

    Returns
    -------
    Taut or None
        None where there was too little steady running.
    """
    s = survey(rec)
    limits = s.scenario.limits
    stations = station_tension(s, strand)
    counted = between_feed_and_discharge(s, strand)
    if not s.steady or not counted.size:
        return None
    allowed = int(np.ceil(limits.slack_time / s.interval - 1e-9))
    warm_up = int(np.ceil(s.tooth_samples))
    below = np.empty((2, counted.size), np.int32)
    found: list[Taut] = []
    for window in s.steady:
        start = window.start + warm_up
        tension = stations.tension[start : window.stop]
        if np.isnan(tension).any():
            continue
        level, sample, station, longest = least_level(
            tension, counted, allowed, limits.slack_tension, below
        )
        if np.isfinite(level):
            found.append(
                Taut(
                    float(level),
                    float(s.time[start + sample]),
                    _link_at(s, strand, start + sample, station),
                    float(stations.distance[station]),
                    longest * s.interval,
                )
            )
    return _worst(found)


def _link_at(s: Survey, strand: int, sample: int, station: int) -> int:
    """Link that is at a station of a strand at one sample [dimensionless]."""
    pins = s.strand_pins[strand]
    return int((pins.first[sample] + min(station, pins.n_links[sample] - 1)) % s.n_pins)


def _worst(found: list[Taut]) -> Taut | None:
    """The least level of several windows, with the longest slack of all."""
    if not found:
        return None
    least = min(found, key=lambda taut: taut.level)
    return least._replace(slack_time=max(taut.slack_time for taut in found))


def between_feed_and_discharge(s: Survey, strand: int) -> np.ndarray:
    """Which stations of a strand lie between ``load_at`` and ``unload_at``.

    Left out, these are the heights of the lowest and the highest axle on the drawing; then the
    whole strand counts, wherever a take-up hangs.

    Parameters
    ----------
    s : Survey
        The recording.
    strand : int
        Index of the strand [dimensionless].

    Returns
    -------
    ndarray of bool, shape (n_stations,)
        By the heights where the strand is longest; all of them where the scenario has no balls,
        or where no station would be left.
    """
    pins = s.strand_pins[strand]
    low, high = _carrying_heights(s)
    if not pins.is_known.any():
        return np.ones(0, dtype=bool)
    longest = int(np.argmax(pins.n_links))
    y = s.position[longest, pins.pins(np.array([longest]))[0], 1]
    middle = 0.5 * (y[1:] + y[:-1])
    counted = (middle >= low) & (middle <= high)
    return counted if counted.any() else np.ones_like(counted)


def _carrying_heights(s: Survey) -> tuple[float, float]:
    """Heights between which balls are carried [m]; infinite where they lie beyond all axles."""
    balls = s.scenario.balls
    if balls is None:
        return -np.inf, np.inf
    axles = [sprocket.center[1] for sprocket in s.scenario.sprocket]
    low, high = balls.load_at, balls.unload_at
    return (
        -np.inf if low is None or low <= min(axles) else float(low),
        np.inf if high is None or high >= max(axles) else float(high),
    )


def resting_tension(rec: Any, strand: int) -> float:
    """Tension at the foot of a strand at rest, before the first step.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    strand : int
        Index of the strand [dimensionless].

    Returns
    -------
    float
        Tension of the lowest link of the strand in the first sample [N]; NaN where the strand
        hangs on no two sprockets then.
    """
    s = survey(rec)
    pins = s.strand_pins[strand]
    if not pins.is_known[0]:
        return float("nan")
    y = s.position[0, pins.pins(np.array([0]))[0], 1]
    return float(s.tension[0, _link_at(s, strand, 0, int(np.argmin(y[1:] + y[:-1])))])
