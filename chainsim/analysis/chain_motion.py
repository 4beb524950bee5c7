"""How the strands move: chain speed and its ripple, lateral excursion, sag."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from scipy.ndimage import maximum_filter1d, minimum_filter1d

from chainsim.analysis.loops import strand_excursions, strand_speeds
from chainsim.analysis.series import amplitudes_at
from chainsim.analysis.survey import Survey, survey
from chainsim.analysis.wraps import tangent_line

N_HARMONICS = 5
"""Harmonics of the tooth rate that are listed [dimensionless]."""


class Excursion(NamedTuple):
    """How far a strand leaves the straight line between its sprockets.

    Attributes
    ----------
    outward, inward : ndarray, shape (n_samples,)
        Largest distance of a pin from the tangent line, out of the loop and into it [m], each
        zero or more. NaN where the strand has no tangent line.
    outward_pin, inward_pin : ndarray of int, shape (n_samples,)
        The pins that reach it [dimensionless].
    """

    outward: np.ndarray
    inward: np.ndarray
    outward_pin: np.ndarray
    inward_pin: np.ndarray


class Ripple(NamedTuple):
    """Variation of the chain speed in steady running.

    Attributes
    ----------
    mean : float
        Mean chain speed [m/s].
    peak_to_peak : float
        Largest difference within one tooth passage, as a share of the mean [dimensionless].
    time : float
        End of that tooth passage [s].
    harmonic : ndarray, shape (N_HARMONICS,)
        Amplitude at 1, 2, … times the tooth rate, as a share of the mean [dimensionless]; NaN
        above half of the sample rate.
    """

    mean: float
    peak_to_peak: float
    time: float
    harmonic: np.ndarray


def chain_speed(rec: Any) -> np.ndarray:
    """Speed of the chain: mean over the links of the carrying strands, along each link.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    ndarray, shape (n_samples,)
        Instant chain speed [m/s], positive forward; NaN while no carrying strand hangs between
        two sprockets. Where no strand carries, all of them count.
    """
    s = survey(rec)
    return s.once(("chain_speed",), lambda: _chain_speed(s))


def _chain_speed(s: Survey) -> np.ndarray:
    """Work out `chain_speed`: mean over the strands that hang between two sprockets."""
    chosen = s.carrying or tuple(range(len(s.strands)))
    speed = np.array([_strand_speed(s, k) for k in chosen])
    is_known = np.isfinite(speed)
    total = np.where(is_known, speed, 0.0).sum(axis=0)
    count = is_known.sum(axis=0)
    return np.divide(total, count, out=np.full(total.shape, np.nan), where=count > 0)


def _strand_speed(s: Survey, strand: int) -> np.ndarray:
    """Mean speed of the links of one strand along themselves [m/s], shape (n_samples,)."""
    pins, speed = s.strand_pins[strand], np.empty(len(s.time))
    strand_speeds(s.position, s.velocity, pins.first, pins.n_links, speed)
    return speed


def ripple(rec: Any) -> Ripple | None:
    """Chain speed ripple in steady running.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Ripple or None
        None where there was no steady running with chain on its sprockets.
    """
    s = survey(rec)
    return s.once(("ripple",), lambda: _ripple(s))


def _ripple(s: Survey) -> Ripple | None:
    """Work out `ripple`."""
    speed = chain_speed(s)
    windows = [w for w in s.steady if np.isfinite(speed[w.start : w.stop]).all()]
    if not windows:
        return None
    mean = float(np.mean(np.concatenate([speed[w.start : w.stop] for w in windows])))
    worst, when = -1.0, float("nan")
    for window in windows:
        piece = speed[window.start : window.stop]
        size = max(2, min(round(s.tooth_samples) + 1, len(piece)))
        back = size // 2 if size % 2 else size // 2 - 1
        swing = maximum_filter1d(piece, size, origin=back) - minimum_filter1d(
            piece, size, origin=back
        )
        at = int(np.argmax(swing))
        if swing[at] > worst:
            worst, when = float(swing[at]), float(s.time[window.start + at])
    longest = max(windows, key=lambda w: w.stop - w.start)
    piece = speed[longest.start : longest.stop]
    harmonic = amplitudes_at(piece, s.interval, s.tooth_rate * np.arange(1, N_HARMONICS + 1))
    return Ripple(mean, worst / abs(mean), when, harmonic / abs(mean))


def excursion(rec: Any, strand: int) -> Excursion:
    """Lateral excursion of one strand from the straight line between its sprockets.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    strand : int
        Index of the strand [dimensionless].

    Returns
    -------
    Excursion
        Both sides, sample by sample. A strand on polygons swings inward by up to
        ``R (1 − cos π/z)`` by its nature.
    """
    s = survey(rec)
    return s.once(("excursion", strand), lambda: _excursion(s, strand))


def _excursion(s: Survey, strand: int) -> Excursion:
    """Work out `excursion`."""
    ends, pins = s.strands[strand], s.strand_pins[strand]
    start, outward, _ = tangent_line(
        s.center[:, ends.start],
        s.side[ends.start] * s.seat_radius[ends.start],
        s.center[:, ends.end],
        s.side[ends.end] * s.seat_radius[ends.end],
    )
    size, pin = np.empty((len(s.time), 2)), np.empty((len(s.time), 2), np.int32)
    offset = np.sum(start * outward, axis=1)
    strand_excursions(s.position, pins.first, pins.n_links, outward, offset, size, pin)
    size[np.isnan(offset)] = np.nan
    return Excursion(size[:, 0], size[:, 1], pin[:, 0], pin[:, 1])


def sag(rec: Any, strand: int) -> np.ndarray:
    """Largest distance of a strand below the chord between its end pins.

    Measured square to the chord. Of a vertical strand, "below" has no meaning and the distance
    to the side of the chord that lies lower by rounding says nothing: use `excursion`.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    strand : int
        Index of the strand [dimensionless].

    Returns
    -------
    ndarray, shape (n_samples,)
        Sag [m]; NaN where the strand hangs on no two sprockets.
    """
    s = survey(rec)
    pins = s.strand_pins[strand]
    samples = np.arange(len(s.time))
    place = s.position[samples[:, None], pins.pins(samples)].astype(float)
    away = place - place[:, :1]
    chord = away[:, -1]
    up = np.stack((-chord[:, 1], chord[:, 0]), axis=1) * np.where(chord[:, :1] < 0.0, -1.0, 1.0)
    below = -np.einsum("spc,sc->sp", away, up).min(axis=1)
    length = np.hypot(chord[:, 0], chord[:, 1])
    is_known = pins.is_known & (length > 0.0)
    return np.divide(below, length, out=np.full(len(below), np.nan), where=is_known)
