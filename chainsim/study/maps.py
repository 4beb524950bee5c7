"""Maps of a sweep: outcome and reserve over two axes, one map for each of the other choices."""

from __future__ import annotations

import itertools
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from chainsim.study.amounts import read_amount
from chainsim.study.axes import Axis
from chainsim.study.points import Point
from chainsim.study.ranking import choices_text
from chainsim.study.rows import Row, outcome, relative_margin, weakest


@dataclass(frozen=True)
class MapAxis:
    """One side of a map.

    Attributes
    ----------
    name : str
        Name of the axis.
    labels : tuple of str
        Its choices.
    numbers : tuple of float or None
        Their numbers [in `unit`]; None where the choices are no amounts of one unit.
    unit : str
        Unit of the numbers, empty for none.
    log : bool
        True where the numbers rise by equal ratios.
    """

    name: str
    labels: tuple[str, ...]
    numbers: tuple[float, ...] | None
    unit: str = ""
    log: bool = False


@dataclass(frozen=True)
class Map:
    """Outcome and reserve over two axes.

    Attributes
    ----------
    fixed : mapping of str to str
        Choices on the other axes, by axis name.
    across, up : MapAxis
        The two axes.
    outcome : ndarray of str, shape (n_up, n_across)
        Worst outcome; empty where there is no row.
    reserve : ndarray, shape (n_up, n_across)
        Least margin over scale (dimensionless); NaN where there is none.
    weakest : ndarray of str, shape (n_up, n_across)
        Finding with that margin.
    """

    fixed: Mapping[str, str]
    across: MapAxis
    up: MapAxis
    outcome: NDArray[np.str_]
    reserve: NDArray[np.float64]
    weakest: NDArray[np.str_]

    @property
    def title(self) -> str:
        """Choices on the other axes in words; empty where there are none."""
        return choices_text(self.fixed)


def maps(
    axes: Sequence[Axis],
    points: Sequence[Point],
    rows: Sequence[Row | None],
    names: tuple[str, ...] = (),
) -> list[Map]:
    """Maps of a grid.

    Parameters
    ----------
    axes : sequence of Axis
        Axes of the plan.
    points : sequence of Point
        Its points.
    rows : sequence of (Row or None)
        Their rows.
    names : tuple of str
        Findings that count; empty counts all.

    Returns
    -------
    list of Map
        One per combination of the choices on all but the two longest axes that are amounts;
        empty where the plan lists fewer than two axes.
    """
    listed = [axis for axis in axes if axis.choices is not None]
    if len(listed) < 2:
        return []
    sides = sorted(
        map(_map_axis, listed), key=lambda side: (side.numbers is None, -len(side.labels))
    )
    across, up, others = sides[0], sides[1], sides[2:]
    by_labels = {_key(point.labels): row for point, row in zip(points, rows, strict=True)}
    drawn = []
    for choice in itertools.product(*(other.labels for other in others)):
        fixed = {other.name: label for other, label in zip(others, choice, strict=True)}
        drawn.append(_map(fixed, across, up, by_labels, names))
    return drawn


def _map(
    fixed: Mapping[str, str],
    across: MapAxis,
    up: MapAxis,
    by_labels: Mapping[Any, Row | None],
    names: tuple[str, ...],
) -> Map:
    shape = (len(up.labels), len(across.labels))
    outcomes, least = np.full(shape, "", dtype="U16"), np.full(shape, np.nan)
    finding = np.full(shape, "", dtype="U32")
    for i, j in np.ndindex(shape):
        row = by_labels.get(_key({**fixed, across.name: across.labels[j], up.name: up.labels[i]}))
        if row is None:
            continue
        outcomes[i, j] = outcome(row, names)
        first = next(iter(weakest(row, names)), None)
        if first is not None:
            share = relative_margin(first)
            least[i, j] = share if np.isfinite(share) else np.sign(share)
            finding[i, j] = first["name"]
    return Map(fixed, across, up, outcomes, least, finding)


def _key(labels: Mapping[str, str]) -> tuple[tuple[str, str], ...]:
    return tuple(sorted(labels.items()))


def _map_axis(axis: Axis) -> MapAxis:
    choices = axis.choices or ()
    amounts = [
        read_amount(next(iter(choice.values.values()))) if len(choice.values) == 1 else None
        for choice in choices
    ]
    labels = tuple(choice.label for choice in choices)
    known = [amount for amount in amounts if amount is not None]
    if len(known) < len(labels) or len({amount.unit for amount in known}) != 1:
        return MapAxis(axis.name, labels, None)
    numbers = tuple(amount.number for amount in known)
    return MapAxis(axis.name, labels, numbers, known[0].unit, getattr(axis, "log", False))
