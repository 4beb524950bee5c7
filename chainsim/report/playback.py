"""Packs the motion of a run for the page: chosen moments, small whole numbers, squeezed.

Every series (one coordinate of one pin, one angle, …) becomes unsigned 16-bit whole numbers over
the range of its channel; successive differences along time are stored, all low bytes before all
high bytes; the whole is compressed with gzip and written as base64. The browser undoes it.
"""

from __future__ import annotations

import base64
import gzip
from dataclasses import dataclass

import numpy as np

MAX_RATE = 50.0
"""Most recorded moments per second that the page gets [1/s]; screens show hardly more."""

MAX_BASE64 = 1_150_000
"""Most characters that the packed motion may take [dimensionless]; long runs get fewer moments."""

LARGEST = 65535


@dataclass(frozen=True)
class Channel:
    """One packed quantity.

    Attributes
    ----------
    name : str
        Name the page knows it by.
    series : int
        Number of series in it [dimensionless].
    low, step : tuple of float
        Value of the whole number 0 and of one unit more, repeating over the series
        [the unit of the quantity].
    numbers : ndarray of uint16, shape (series, frames)
        The whole numbers [dimensionless].
    """

    name: str
    series: int
    low: tuple[float, ...]
    step: tuple[float, ...]
    numbers: np.ndarray

    def described(self) -> dict:
        """Return what the page has to know beside the numbers."""
        return {
            "name": self.name,
            "series": self.series,
            "low": list(self.low),
            "step": list(self.step),
        }


def chosen_samples(time: np.ndarray, keep: list[float], rate: float = MAX_RATE) -> np.ndarray:
    """Return the samples that the page shows.

    Parameters
    ----------
    time : ndarray, shape (n_samples,)
        Times of the samples [s].
    keep : list of float
        Moments that must be among them [s], such as the worst moment of a finding.
    rate : float
        Most samples per second, the kept ones not counted [1/s].

    Returns
    -------
    ndarray of int, shape (n_frames,)
        Rising sample numbers, the first and the last included [dimensionless].
    """
    last = len(time) - 1
    if last < 1:
        return np.arange(len(time))
    interval = (time[-1] - time[0]) / last
    stride = max(1, int(np.ceil(1.0 / (rate * interval) - 1e-9)))
    wanted = np.asarray([t for t in keep if np.isfinite(t)], dtype=float)
    after = np.clip(np.searchsorted(time, wanted), 1, last)
    nearest = np.where(wanted - time[after - 1] < time[after] - wanted, after - 1, after)
    return np.unique(np.concatenate([np.arange(0, last + 1, stride), nearest, [last]]))


def packed_range(name: str, values: np.ndarray, low: np.ndarray, high: np.ndarray) -> Channel:
    """Pack values over a stated range; what lies outside goes to its edge.

    Parameters
    ----------
    name : str
        Name the page knows it by.
    values : ndarray, shape (frames, series)
        The values [any unit]; NaN becomes the low end.
    low, high : ndarray, shape (k,)
        Ends of the range [the same unit], repeating over the series.
    """
    frames, series = values.shape
    repeats = -(-series // len(low))
    lows = np.tile(low, repeats)[:series]
    steps = np.tile((high - low) / LARGEST, repeats)[:series]
    steps = np.where(steps > 0.0, steps, 1.0)
    shares = np.nan_to_num((values - lows) / steps)
    numbers = np.clip(np.rint(shares), 0, LARGEST).astype(np.uint16).T.reshape(series, frames)
    return Channel(name, series, tuple(lows[: len(low)]), tuple(steps[: len(low)]), numbers)


def packed_angle(name: str, angle: np.ndarray) -> Channel:
    """Pack angles over one turn.

    Parameters
    ----------
    name : str
        Name the page knows it by.
    angle : ndarray, shape (frames, series)
        Angles [rad], of any number of turns.
    """
    turns = np.nan_to_num(angle) / (2.0 * np.pi)
    numbers = (np.rint(turns * (LARGEST + 1)).astype(np.int64) & LARGEST).astype(np.uint16)
    return Channel(name, angle.shape[1], (0.0,), (2.0 * np.pi / (LARGEST + 1),), numbers.T)


def packed_counts(name: str, counts: np.ndarray) -> Channel:
    """Pack whole numbers; what is below zero becomes the largest one, which means none.

    Parameters
    ----------
    name : str
        Name the page knows it by.
    counts : ndarray of int, shape (frames, series)
        The numbers [dimensionless].
    """
    numbers = np.where(counts < 0, LARGEST, counts).astype(np.uint16)
    return Channel(name, counts.shape[1], (0.0,), (1.0,), numbers.T)


def squeezed(channels: list[Channel]) -> str:
    """Return the base64 text of all channels one after the other."""
    parts = []
    for channel in channels:
        change = np.diff(channel.numbers, axis=1, prepend=np.uint16(0)).astype(np.uint16)
        parts.append((change & 255).astype(np.uint8).tobytes())
        parts.append((change >> 8).astype(np.uint8).tobytes())
    return base64.b64encode(gzip.compress(b"".join(parts), 9, mtime=0)).decode("ascii")


def unsqueezed(text: str, channels: list[Channel], frames: int) -> list[np.ndarray]:
    """Undo `squeezed`: what the browser does, for checking.

    Returns
    -------
    list of ndarray of uint16, each of shape (series, frames)
        The whole numbers of every channel [dimensionless].
    """
    data = np.frombuffer(gzip.decompress(base64.b64decode(text)), dtype=np.uint8)
    found = []
    start = 0
    for channel in channels:
        count = channel.series * frames
        low = data[start : start + count].astype(np.uint16)
        high = data[start + count : start + 2 * count].astype(np.uint16)
        start += 2 * count
        change = (low + 256 * high).reshape(channel.series, frames)
        found.append(np.cumsum(change, axis=1, dtype=np.uint16))
    return found
