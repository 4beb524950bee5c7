"""Axes of a plan: what varies, as listed choices or as a distribution.

Every axis answers two questions: which choices it lists (a grid takes them all), and which
choice stands at a share of its range (a sample draws shares between 0 and 1).
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

from chainsim.study.amounts import Amount, spaced


@dataclass(frozen=True)
class Choice:
    """One place on an axis.

    Attributes
    ----------
    label : str
        How tables and maps call it.
    values : mapping of str to object
        Scenario values it sets, by dotted key.
    scenario : str or None
        Scenario file that replaces the plan's own; None keeps it.
    """

    label: str
    values: Mapping[str, Any] = field(default_factory=dict)
    scenario: str | None = None


@dataclass(frozen=True)
class ListedAxis:
    """An axis of separate choices: values of one key, several keys together, alternatives.

    Attributes
    ----------
    name : str
        Name in tables and maps.
    choices : tuple of Choice
        All choices, in the order of the plan; at least one.
    """

    name: str
    choices: tuple[Choice, ...]

    def at(self, share: float) -> Choice:
        """Choice at a share of the axis.

        Parameters
        ----------
        share : float
            Place on the axis, 0 up to 1 (dimensionless).

        Returns
        -------
        Choice
            The listed choice in whose equal part of the axis the share lies.
        """
        return self.choices[min(int(share * len(self.choices)), len(self.choices) - 1)]


@dataclass(frozen=True)
class RangeAxis:
    """An axis over a range of one key.

    Attributes
    ----------
    name, key : str
        Name in tables and maps, and the dotted scenario key.
    low, high : Amount
        Ends of the range, in one unit.
    count : int
        Number of choices in a grid (dimensionless).
    log : bool
        True where the steps are equal ratios.
    """

    name: str
    key: str
    low: Amount
    high: Amount
    count: int
    log: bool = False

    @property
    def choices(self) -> tuple[Choice, ...]:
        """The choices of a grid, evenly spaced with both ends included."""
        numbers = spaced(self.low.number, self.high.number, self.count, self.log)
        return tuple(self._choice(number) for number in numbers)

    def at(self, share: float) -> Choice:
        """Choice at a share of the range.

        Parameters
        ----------
        share : float
            Place on the axis, 0 to 1 (dimensionless).

        Returns
        -------
        Choice
            The value at that share, by equal steps or equal ratios.
        """
        low, high = self.low.number, self.high.number
        number = low * (high / low) ** share if self.log else low + (high - low) * share
        return self._choice(number)

    def _choice(self, number: float) -> Choice:
        value = self.low.at(number)
        label = str(value) if self.low.whole else f"{number:.4g} {self.low.unit}".strip()
        return Choice(label, {self.key: value})


@dataclass(frozen=True)
class SpreadAxis:
    """An axis that is a distribution: a tolerance on one key.

    Attributes
    ----------
    name, key : str
        Name in tables, and the dotted scenario key.
    kind : str
        `uniform` (low, high), `triangular` (low, typical, high) or `normal` (mean,
        deviation, and optional low and high that cut its tails).
    amounts : mapping of str to Amount
        The parameters by name, in one unit.
    """

    name: str
    key: str
    kind: str
    amounts: Mapping[str, Amount]

    @property
    def choices(self) -> None:
        """None: a distribution lists nothing, it is sampled."""
        return None

    def at(self, share: float) -> Choice:
        """Choice at a share of the distribution.

        Parameters
        ----------
        share : float
            Cumulative probability, above 0 and below 1 (dimensionless).

        Returns
        -------
        Choice
            The value at that quantile.
        """
        numbers = {name: amount.number for name, amount in self.amounts.items()}
        number = QUANTILES[self.kind](share, **numbers)
        amount = next(iter(self.amounts.values()))
        return Choice(f"{number:.4g} {amount.unit}".strip(), {self.key: amount.at(number)})


Axis = ListedAxis | RangeAxis | SpreadAxis


def _uniform(share: float, low: float, high: float) -> float:
    return low + share * (high - low)


def _triangular(share: float, low: float, typical: float, high: float) -> float:
    """Quantile of the triangular distribution, by inverting its two parabolas."""
    width = high - low
    if share * width < typical - low:
        return low + math.sqrt(share * width * (typical - low))
    return high - math.sqrt((1.0 - share) * width * (high - typical))


def _normal(
    share: float,
    mean: float,
    deviation: float,
    low: float = -math.inf,
    high: float = math.inf,
) -> float:
    """Quantile of the normal distribution, cut at low and high and renormalized."""
    from scipy.special import ndtr, ndtri

    below = ndtr((low - mean) / deviation)
    above = ndtr((high - mean) / deviation)
    return float(mean + deviation * ndtri(below + share * (above - below)))


QUANTILES: dict[str, Callable[..., float]] = {
    "uniform": _uniform,
    "triangular": _triangular,
    "normal": _normal,
}
