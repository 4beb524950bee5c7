"""Tension along a strand: at fixed stations and at its ends, averaged over one tooth passage."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.loops import station_means
from chainsim.analysis.survey import Survey, survey


class StationTension(NamedTuple):
    """Tension along one strand at stations that stand still while the links pass.

    Attributes
    ----------
    tension : ndarray, shape (n_samples, n_stations)
        Tension averaged over the tooth passage that ends with each sample [N].
    distance : ndarray, shape (n_stations,)
        Distance of each station from the start of the strand, along it [m].
    """

    tension: np.ndarray
    distance: np.ndarray


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
    n_stations = int(pins.n_links.max(initial=0))
    mean = np.empty((len(s.time), n_stations), np.float32)
    window = max(s.tooth_samples, 1.0) if np.isfinite(s.tooth_samples) else 1.0
    station_means(s.tension, pins.first, pins.n_links, window, np.empty(n_stations), mean)
    return StationTension(mean, (np.arange(n_stations) + 0.5) * s.pitch)


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
    if not tension.shape[1]:
        nothing = np.full(len(tension), np.nan)
        return StrandEnds(nothing, nothing)
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
