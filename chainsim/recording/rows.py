"""Rows that a recording holds beside those of the run itself: its strands, modes, and findings."""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple


class StrandRow(NamedTuple):
    """One strand of the chain.

    Attributes
    ----------
    name : str
        Its name, such as ``"tail-head"``.
    start, end : str
        Names of the sprockets where the forward-running chain enters and leaves it.
    carrying : bool
        Whether it carries balls up [dimensionless].
    """

    name: str
    start: str
    end: str
    carrying: bool


class ModeRow(NamedTuple):
    """One natural mode of the whole lift at rest.

    Attributes
    ----------
    frequency : float
        Natural frequency [Hz].
    kind : str
        What moves most, such as ``"take-up tail"``, ``"strand tail-head 1"`` or ``"other"``.
    """

    frequency: float
    kind: str


class FindingRow(NamedTuple):
    """One judged finding as a recording keeps it; numbers that do not exist are None.

    Attributes
    ----------
    name, group, title : str
        Its name, its group on paper, and its heading.
    outcome : str
        ``"holds"``, ``"close"``, ``"fails"`` or ``"not judged"``.
    value, limit, margin, scale : float or None
        Worst value, limit, signed margin (positive is good) and its scale, in `unit`.
    unit : str
        Their unit.
    time : float or None
        When the worst value was reached [s].
    place : str
        Where.
    note, why : str
        A sentence for the reader, and the reason where it is not judged.
    """

    name: str
    group: str
    title: str
    outcome: str
    value: float | None
    unit: str
    limit: float | None
    margin: float | None
    scale: float | None
    time: float | None
    place: str
    note: str
    why: str


class Static(NamedTuple):
    """What names the axes of a recording, and what else is known before the first sample.

    Attributes
    ----------
    sprockets : tuple of str
        Names of the sprockets in the order of the scenario.
    strands : tuple of StrandRow
        Strands in the order of travel.
    attributes : mapping of str to str, int, float or list of str
        Further root attributes, such as the seed and the inner step.
    """

    sprockets: tuple[str, ...]
    strands: tuple[StrandRow, ...]
    attributes: Mapping[str, str | int | float | list[str]]
