"""Small tools for quantities over time: running means and extremes, runs, spectra."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from scipy.ndimage import maximum_filter1d


class Spectrum(NamedTuple):
    """Amplitudes by frequency.

    Attributes
    ----------
    frequency : ndarray, shape (n_lines,)
        Frequencies [Hz].
    amplitude : ndarray, shape (n_lines,)
        Amplitude of a sine at each of them, in the unit of the quantity.
    """

    frequency: np.ndarray
    amplitude: np.ndarray


def trailing_mean(values: np.ndarray, n_samples: float) -> np.ndarray:
    """Mean over the last so many samples, a fraction of a sample included.

    Parameters
    ----------
    values : ndarray, shape (n, ...)
        Means over the sample intervals, in any unit.
    n_samples : float
        Length of the window [samples]; less than one gives the values themselves.

    Returns
    -------
    ndarray, shape (n, ...)
        Means over the window that ends with each sample; NaN where it would start before
        the first.
    """
    window = max(float(n_samples), 1.0)
    whole, part = int(window), window - int(window)
    total = np.zeros((len(values) + 1, *values.shape[1:]))
    np.cumsum(values, axis=0, dtype=float, out=total[1:])
    mean = np.full(values.shape, np.nan)
    skip = whole if part == 0.0 else whole + 1
    if skip > len(values):
        return mean
    late = total[skip:]
    early = total[skip - whole : len(total) - whole]
    mean[skip - 1 :] = late - early
    if part > 0.0:
        mean[skip - 1 :] += part * values[: len(values) - whole]
    mean[skip - 1 :] /= window
    return mean


def never_undercut_for_longer(values: np.ndarray, n_samples: int) -> np.ndarray:
    """Highest level under which the values never stay for longer than a time.

    A level is undercut for longer than ``n`` samples exactly where the largest of ``n + 1``
    samples in a row lies under it; so the level sought is the least of those maxima.

    Parameters
    ----------
    values : ndarray, shape (n, ...)
        Values at even steps, in any unit.
    n_samples : int
        Allowed time [samples]; zero gives the values themselves.

    Returns
    -------
    ndarray, shape (m, ...)
        Largest of each ``n_samples + 1`` values in a row, m = n − n_samples; the level sought
        is the least of them along axis 0. Empty where the series is too short.
    """
    if len(values) <= n_samples:
        return values[:0]
    if n_samples == 0:
        return values
    size = n_samples + 1
    largest = maximum_filter1d(values, size, axis=0, mode="nearest", origin=-(size // 2))
    return largest[: len(values) - n_samples]


def longest_run(is_so: np.ndarray) -> tuple[int, int]:
    """Longest run of true values.

    Parameters
    ----------
    is_so : ndarray of bool, shape (n,)
        Whether it is so, sample by sample.

    Returns
    -------
    start, length : int
        First sample and number of samples of the longest run [samples]; length 0 where none.
    """
    runs = true_runs(is_so)
    if not runs:
        return 0, 0
    start, stop = max(runs, key=lambda run: run[1] - run[0])
    return start, stop - start


def true_runs(is_so: np.ndarray) -> list[tuple[int, int]]:
    """All runs of true values.

    Parameters
    ----------
    is_so : ndarray of bool, shape (n,)
        Whether it is so, sample by sample.

    Returns
    -------
    list of (int, int)
        First sample of each run and the one after its last [samples].
    """
    edge = np.flatnonzero(np.diff(np.concatenate(([False], is_so, [False])).astype(np.int8)))
    return [(int(start), int(stop)) for start, stop in zip(edge[::2], edge[1::2], strict=True)]


def amplitude_at(values: np.ndarray, interval: float, frequency: float) -> float:
    """Amplitude of one frequency, least squares over the whole series.

    Fits ``a cos(2π f t) + b sin(2π f t) + c + d t``.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Instant values at even steps, in any unit.
    interval : float
        Time between samples [s].
    frequency : float
        Frequency to look at [Hz].

    Returns
    -------
    float
        Amplitude, in the unit of the values; NaN with fewer than two periods, or above half
        of the sample rate.
    """
    if len(values) * interval * frequency < 2.0 or frequency * interval > 0.5:
        return float("nan")
    time = np.arange(len(values)) * interval
    phase = 2.0 * np.pi * frequency * time
    basis = np.stack((np.cos(phase), np.sin(phase), np.ones_like(time), time), axis=1)
    fit = np.linalg.lstsq(basis, values.astype(float), rcond=None)[0]
    return float(np.hypot(fit[0], fit[1]))


def spectrum(values: np.ndarray, interval: float) -> Spectrum:
    """Amplitudes by frequency of a whole series, its mean taken out, Hann window.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Values at even steps, in any unit.
    interval : float
        Time between samples [s].

    Returns
    -------
    Spectrum
        Up to half of the sample rate; empty with fewer than eight samples.
    """
    if len(values) < 8:
        return Spectrum(np.empty(0), np.empty(0))
    window = np.hanning(len(values))
    line = np.fft.rfft((values - np.mean(values)) * window)
    return Spectrum(
        np.fft.rfftfreq(len(values), interval), 2.0 * np.abs(line) / float(window.sum())
    )
