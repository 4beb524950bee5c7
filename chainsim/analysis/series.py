"""Small tools for quantities over time: running means and extremes, runs, spectra."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np


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
        Means over the window that ends with each sample, in the unit of the values; NaN where
        it would start before the first.
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


def amplitudes_at(values: np.ndarray, interval: float, frequencies: np.ndarray) -> np.ndarray:
    """Amplitudes of several frequencies, by one least squares fit over the whole series.

    Fits ``Σ aₖ cos(2π fₖ t) + bₖ sin(2π fₖ t)`` and a straight line.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Values at even steps, in any unit.
    interval : float
        Time between samples [s].
    frequencies : ndarray, shape (m,)
        Frequencies to look at [Hz].

    Returns
    -------
    ndarray, shape (m,)
        Amplitudes, in the unit of the values; NaN with fewer than two periods, or at more than
        0.45 of the sample rate.
    """
    amplitude = np.full(len(frequencies), np.nan)
    is_seen = (frequencies * interval <= 0.45) & (len(values) * interval * frequencies >= 2.0)
    if not is_seen.any():
        return amplitude
    time = np.arange(len(values)) * interval
    wave = np.exp(2j * np.pi * time[:, None] * frequencies[is_seen])
    line = np.stack((np.ones_like(time), time / time[-1]), axis=1)
    basis = np.concatenate((wave.real, wave.imag, line), axis=1)
    fit = np.linalg.solve(basis.T @ basis, basis.T @ values.astype(float))
    count = int(is_seen.sum())
    amplitude[is_seen] = np.hypot(fit[:count], fit[count : 2 * count])
    return amplitude


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
