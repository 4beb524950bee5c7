"""A question of a limit: one value that varies over a range."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

from chainsim.units import format_si


@dataclass(frozen=True)
class Question:
    """What is searched.

    Attributes
    ----------
    name : str
        `takeup`, `speed`, `height`, `wear`, `slack`, or a dotted key.
    title : str
        What varies, in words.
    unit_kind : str
        Kind of unit of the value.
    low, high : float
        Range of the coarse scan [SI unit of the kind].
    log : bool
        True where the scan rises by equal ratios.
    harder : int
        -1 where a smaller value asks more of the lift, +1 where a larger one does
        (dimensionless).
    present : float
        Value in the scenario [SI unit of the kind].
    values : callable
        Gives the scenario values, by dotted key, that make the value what it is.
    step : float or None
        Smallest change that makes sense [SI unit of the kind]; None for any.
    least : float
        Smallest possible value [SI unit of the kind].
    """

    name: str
    title: str
    unit_kind: str
    low: float
    high: float
    log: bool
    harder: int
    present: float
    values: Callable[[float], Mapping[str, Any]]
    step: float | None = None
    least: float = -math.inf

    def snapped(self, value: float) -> float:
        """Nearest value that can be had.

        Parameters
        ----------
        value : float
            Any value [SI unit of the kind].

        Returns
        -------
        float
            The value itself, or the nearest one whole steps away from the present value
            [SI unit of the kind].
        """
        value = max(value, self.least)
        if self.step is None:
            return float(f"{value:.12g}")
        steps = round((value - self.present) / self.step)
        return self.present + steps * self.step

    def shown(self, value: float) -> str:
        """The value with a readable unit.

        Parameters
        ----------
        value : float
            A value [SI unit of the kind].

        Returns
        -------
        str
            Such as ``0.23 kg``.
        """
        return format_si(value, self.unit_kind)
