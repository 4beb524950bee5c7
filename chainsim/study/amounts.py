"""Amounts as a plan writes them: a number with its unit kept as text.

A plan never converts: it works in the unit in which the user wrote the value and hands the
text on to the scenario, which knows what kind of unit each key takes.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Any

_AMOUNT = re.compile(r"\s*([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(.*?)\s*")
_DIGITS = 12  # enough to tell two values of any scan apart, few enough to read


@dataclass(frozen=True)
class Amount:
    """A number and the unit that stands behind it.

    Attributes
    ----------
    number : float
        The number as written, in `unit`.
    unit : str
        The unit as written (its meaning belongs to the scenario key); empty where the value
        was a bare number (dimensionless, or a count).
    whole : bool
        True where the value was written as a TOML integer.
    """

    number: float
    unit: str = ""
    whole: bool = False

    def at(self, number: float) -> Any:
        """Write another number in the unit of this amount.

        Parameters
        ----------
        number : float
            The number [in the unit of this amount].

        Returns
        -------
        str, int or float
            Text with a unit, or a bare number where this amount has none.
        """
        if not self.unit:
            return round(number) if self.whole else float(f"{number:.{_DIGITS}g}")
        return f"{number:.{_DIGITS}g} {self.unit}"


def read_amount(value: Any) -> Amount | None:
    """Split a TOML value into number and unit.

    Parameters
    ----------
    value : object
        A TOML value: text such as ``"12.7 mm"``, or a number.

    Returns
    -------
    Amount or None
        None where the value is no amount (a word, a table, a truth value, not finite).
    """
    if isinstance(value, bool):
        return None
    if isinstance(value, int | float):
        return Amount(float(value), "", isinstance(value, int)) if math.isfinite(value) else None
    if not isinstance(value, str):
        return None
    match = _AMOUNT.fullmatch(value)
    return Amount(float(match[1]), match[2]) if match else None


def spaced(low: float, high: float, count: int, log: bool) -> list[float]:
    """Numbers from low to high, both included, at equal steps or equal ratios.

    Parameters
    ----------
    low, high : float
        Ends of the range [in the unit of the amount]; both above zero for equal ratios.
    count : int
        How many numbers (dimensionless); at least 1 (then `low` alone).
    log : bool
        True for equal ratios.

    Returns
    -------
    list of float, length count
        The numbers [in the unit of the amount].
    """
    if count == 1:
        return [low]
    shares = [i / (count - 1) for i in range(count)]
    if log:
        return [low * (high / low) ** share for share in shares]
    return [low + (high - low) * share for share in shares]
