"""Tension along a strand: at fixed stations, averaged over one tooth passage; slack runs."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.series import longest_run, never_undercut_for_longer, trailing_mean
from chainsim.analysis.survey import Survey, survey


class StationTension(NamedTuple):
    """Tension along one strand at stations that stand still while the links pass.

    Attributes
    ----------
    tension : ndarray, shape (n_samples, n_stations)
        Tension averaged over the tooth passage that ends with each sample [N].
    distance : ndarray, shape (n_stations,)
        Distance of each station from the start of the strand, along it [m].
    link : ndarray of int, shape (n_samples, n_stations)
        Link that is at the station at that sample [dimensionless].
    """

    tension: np.ndarray
    distance: np.ndarray
    link: np.ndarray


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


class StrandEnds(NamedTuple):
    """Tension at both ends of a strand over time, averaged over one tooth passage.

    Attributes
    ----------
    start, end : ndarray, shape (n_samples,)
        Tension of the first and the last link [N].
    """

    start: np.ndarray
    end: np.ndarray


class Sides(NamedTuple):
    """The two sides of the driven sprocket in steady running.

    Attributes
    ----------
    tight, slack : float
        Mean tension of the larger and the smaller side [N].
    ratio : float
        Tight over slack [dimensionless]; infinite where the slack side pushes or hangs loose.
    tight_strand, slack_strand : str
        Names of the strands.
    """

    tight: float
    slack: float
    ratio: float
    tight_strand: str
    slack_strand: str


def station_tension(rec: Any, strand: int) -> StationTension:
    """Tension at every station of one strand, averaged over one tooth passage.

    Station ``j`` is the ``j``-th link after the start sprocket. Each link moves on by one
    station in a tooth passage, so that the average stands still in space.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    strand : int
        Index of the strand [dimensionless].

    Returns
    -------
    StationTension
        For the whole run; the window is one tooth passage at the steady speed, or a single
        sample where nothing ran steadily. NaN where the strand hangs on no two sprockets.
    """
    s = survey(rec)
    return s.once(("station_tension", strand), lambda: _station_tension(s, strand))


def _station_tension(s: Survey, strand: int) -> StationTension:
    """Work out `station_tension`."""
    pins = s.strand_pins[strand]
    tension = np.take_along_axis(s.tension, pins.link, axis=1).astype(float)
    window = s.tooth_samples if np.isfinite(s.tooth_samples) else 1.0
    mean = trailing_mean(tension, min(window, len(tension)))
    mean[~pins.is_known] = np.nan
    distance = (np.arange(pins.link.shape[1]) + 0.5) * s.pitch
    return StationTension(mean, distance, pins.link)


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
    allowed = int(np.ceil(limits.slack_time / s.interval - 1e-9)) if s.steady else 0
    warm_up = int(np.ceil(s.tooth_samples)) if s.steady else 0
    found: list[Taut] = []
    for window in s.steady:
        start = window.start + warm_up
        tension = stations.tension[start : window.stop, counted]
        highest = never_undercut_for_longer(tension, allowed)
        if highest.size == 0 or np.isnan(highest).any():
            continue
        late, column = np.unravel_index(int(np.argmin(highest)), highest.shape)
        station = int(np.flatnonzero(counted)[column])
        sample = start + int(late) + allowed // 2
        below = tension < limits.slack_tension
        slack = (
            max(longest_run(below[:, k])[1] for k in range(below.shape[1])) if below.any() else 0
        )
        found.append(
            Taut(
                float(highest[late, column]),
                float(s.time[sample]),
                int(stations.link[sample, station]),
                float(stations.distance[station]),
                slack * s.interval,
            )
        )
    return _worst(found)


def _worst(found: list[Taut]) -> Taut | None:
    """The least level of several windows, with the longest slack of all."""
    if not found:
        return None
    least = min(found, key=lambda taut: taut.level)
    return least._replace(slack_time=max(taut.slack_time for taut in found))


def between_feed_and_discharge(s: Survey, strand: int) -> np.ndarray:
    """Which stations of a strand lie between the heights of feed and discharge.

    Parameters
    ----------
    s : Survey
        The recording.
    strand : int
        Index of the strand [dimensionless].

    Returns
    -------
    ndarray of bool, shape (n_stations,)
        By the heights in the first sample; all of them where the scenario has no balls, or where
        no station would be left.
    """
    pins = s.strand_pins[strand]
    low, high = _carrying_heights(s)
    first = np.flatnonzero(pins.is_known)[:1]
    if first.size == 0:
        return np.ones(pins.link.shape[1], dtype=bool)
    y = s.position[first[0], pins.pin[first[0]], 1]
    middle = 0.5 * (y[1:] + y[:-1])
    counted = (middle >= low) & (middle <= high)
    return counted if counted.any() else np.ones_like(counted)


def _carrying_heights(s: Survey) -> tuple[float, float]:
    """Heights between which balls are carried [m]; infinite where the scenario names none."""
    balls = s.scenario.balls
    low, high = -np.inf, np.inf
    if balls is None:
        return low, high
    feed = balls.feed
    if getattr(feed, "load_at", None) is not None:
        low = float(feed.load_at)
    if getattr(feed, "unload_at", None) is not None:
        high = float(feed.unload_at)
    if balls.discharge is not None and getattr(balls.discharge, "at", None) is not None:
        high = min(high, float(balls.discharge.at[1]))
    return low, high


def strand_ends(rec: Any, strand: int) -> StrandEnds:
    """Tension at both ends of one strand over time, averaged over one tooth passage.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    strand : int
        Index of the strand [dimensionless].

    Returns
    -------
    StrandEnds
        In the order of travel.
    """
    tension = station_tension(rec, strand).tension
    return StrandEnds(tension[:, 0], tension[:, -1])


def sides_of_drive(rec: Any) -> Sides | None:
    """Tight and slack side of the driven sprocket, means of steady running.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Sides or None
        None where nothing ran steadily.
    """
    s = survey(rec)
    driven = s.sprocket_names.index(s.scenario.drive.sprocket)
    sides = []
    for k, strand in enumerate(s.strands):
        ends = strand_ends(s, k)
        if strand.end == driven:
            sides.append((_steady_mean(s, ends.end), strand.name))
        if strand.start == driven:
            sides.append((_steady_mean(s, ends.start), strand.name))
    sides = [side for side in sides if np.isfinite(side[0])]
    if len(sides) < 2:
        return None
    (slack, slack_name), (tight, tight_name) = min(sides), max(sides)
    return Sides(tight, slack, tight / slack if slack > 0 else np.inf, tight_name, slack_name)


def _steady_mean(s: Survey, values: np.ndarray) -> float:
    """Mean over steady running, in the unit of the values; NaN where there is none."""
    chosen = values[s.is_steady & np.isfinite(values)]
    return float(chosen.mean()) if chosen.size else float("nan")


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
    y = s.position[0, pins.pin[0], 1]
    lowest = int(np.argmin(y[1:] + y[:-1]))
    return float(s.tension[0, pins.link[0, lowest]])
