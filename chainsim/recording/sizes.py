"""Says before a run how large its recording will be."""

from __future__ import annotations

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from chainsim.recording.channels import CHANNELS, channel, is_kept

PER_FILE = 60_000
"""Size [bytes] of texts, tables and geometry, measured on short recordings."""
PER_CHANNEL = 2_500
"""Size [bytes] of a dataset's header and index, measured."""
LOSSES = 8
"""Causes of loss in the energy audit [dimensionless] that are counted on."""


class Counts(NamedTuple):
    """What a lift has of each kind [all dimensionless].

    Attributes
    ----------
    pins : int
        Pins, as many as links.
    sprockets, strands, carriers : int
        Sprockets, strands, carriers.
    slots : int
        Places for balls in the arrays.
    aboard : float
        Balls that are in the lift at a time, in the mean.
    """

    pins: int
    sprockets: int
    strands: int
    carriers: int
    slots: int
    aboard: float


def expected_size(
    counts: Counts, duration: float, rate: float, keep: str | Sequence[str] = "all"
) -> int:
    """Estimate the size of a recording; it is meant to be right within 20 %.

    Parameters
    ----------
    counts : Counts
        What the lift has of each kind.
    duration : float
        Length of the run [s].
    rate : float
        Samples per second [1/s].
    keep : str or sequence of str
        As of `Recorder`.

    Returns
    -------
    int
        Size of the file [bytes].
    """
    kept = keep if isinstance(keep, str) else tuple(keep)
    lengths = {
        "pin": counts.pins,
        "link": counts.pins,
        "sprocket": counts.sprockets,
        "strand": counts.strands,
        "carrier": counts.carriers,
        "slot": min(counts.aboard, counts.slots),  # empty slots pack to nothing
        "axis": 2,
        "direction": 2,
    }
    losses = [channel(f"energy/loss_{number}") for number in range(LOSSES)]
    rows = [row for row in (*CHANNELS.values(), *losses) if is_kept(row.path, kept)]
    per_sample = sum(
        float(np.prod([lengths[dim] for dim in row.dims]))
        * np.dtype(row.dtype).itemsize
        * row.share
        for row in rows
    )
    return round(PER_FILE + PER_CHANNEL * len(rows) + per_sample * duration * rate)
