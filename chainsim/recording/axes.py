"""Axes of a recording's datasets and the labels along them."""

from __future__ import annotations

import numpy as np

from chainsim.recording.channels import AXES, DIRECTIONS
from chainsim.recording.geometry import LINK_AXES
from chainsim.recording.rows import Static

AXIS_NAMES = {
    "pin": "number of the pin",
    "link": "number of the link",
    "slot": "place for a ball in the arrays",
    "carrier": "number of the carrier",
    "sprocket": "name of the sprocket",
    "strand": "name of the strand",
    "axis": "coordinate",
    "direction": "direction in the frame of a link",
    "link_axis": "coordinate in the frame of a link",
}
"""What the labels along each shared axis are."""


def axis_labels(dim: str, length: int, static: Static | None) -> np.ndarray:
    """Return the labels along an axis.

    Parameters
    ----------
    dim : str
        Name of the axis.
    length : int
        Its length [dimensionless].
    static : Static, optional
        Names of sprockets and strands.

    Returns
    -------
    ndarray, shape (length,)
        Texts where the axis has names, numbers from 0 where it has not [dimensionless].
    """
    named: dict[str, tuple[str, ...]] = {
        "axis": AXES,
        "direction": DIRECTIONS,
        "link_axis": LINK_AXES,
    }
    if static is not None:
        named["sprocket"] = static.sprockets
        named["strand"] = tuple(strand.name for strand in static.strands)
    if dim in named:
        return np.array(named[dim], dtype=object)
    return np.arange(length, dtype="i4")
