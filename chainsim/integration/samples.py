"""What a run hands on while it goes: blocks of samples, and the rows of its tables.

Named tuples of plain values, so that who writes a recording needs to know nothing of the loop.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

BLOCK_SAMPLES = 256
"""Largest number of samples in a block [dimensionless]; a block is shorter before an event."""


class Block(NamedTuple):
    """A few samples of every channel.

    Attributes
    ----------
    time : ndarray, shape (m,)
        Times of the samples [s], rising; m is at most `BLOCK_SAMPLES`.
    channels : dict of str to ndarray, each of shape (m, ...)
        Values by dataset path, such as ``"pins/position"``, in the unit of the channel's table row.
    """

    time: np.ndarray
    channels: dict[str, np.ndarray]


class Event(NamedTuple):
    """Something that happened at a moment.

    Attributes
    ----------
    time : float
        When it happened [s].
    kind : str
        What happened, such as ``"stop"`` or ``"tooth skipped"``.
    subject : str
        Name of the part it happened to; empty for the whole lift.
    value : float
        Size of it in `unit`; NaN where it has none.
    unit : str
        Unit of `value`; empty where it has none.
    text : str
        One sentence for a reader.
    """

    time: float
    kind: str
    subject: str
    value: float
    unit: str
    text: str


class BallRow(NamedTuple):
    """The life of one ball.

    Attributes
    ----------
    number : int
        Number of the ball, counted from 0 in the order of feeding [dimensionless].
    fed_time, seated_time, end_time : float
        When it was fed, first sat in a pocket, and left the lift [s]; NaN where it never did.
    end_x, end_y : float
        Where its center was when it left [m]; NaN where it never did.
    pocket : int
        Index of the carrier that held it last [dimensionless]; −1 for none.
    fate : str
        What became of it: ``"delivered"``, ``"spilled"``, ``"missed the pocket"``,
        ``"carried over"``, ``"outside the mouth"`` or ``"aboard"``.
    cause : str
        Why, in a few words; empty where it needs none.
    """

    number: int
    fed_time: float
    seated_time: float
    end_time: float
    end_x: float
    end_y: float
    pocket: int
    fate: str
    cause: str


class Extreme(NamedTuple):
    """The worst value of one quantity over every inner step of a run.

    Attributes
    ----------
    name : str
        Name of the quantity, such as ``"link_tension"``.
    value : float
        The worst value in `unit`.
    unit : str
        Its unit.
    time : float
        When it was reached [s].
    place : str
        Where, such as ``"link 17"``.
    """

    name: str
    value: float
    unit: str
    time: float
    place: str


class Ending(NamedTuple):
    """How a run ended.

    Attributes
    ----------
    stop_reason : str
        Why it ended, such as ``"reached the end"``.
    complete : bool
        Whether everything that was asked for was simulated [dimensionless].
    """

    stop_reason: str
    complete: bool
