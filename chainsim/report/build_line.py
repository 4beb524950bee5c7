"""Lines of the build sheet: what, how much, within which band, and how it is known."""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.report.text import significant

STATED = "scenario"
DRAWN = "geometry"
CLOSED = "closed form"
SIMULATED = "simulated"
PRACTICE = "common practice, no source"
UNKNOWN = "NOT SIMULATED"
CLOSED_ONLY = f"closed form, {UNKNOWN}"
"""How a value is known. What only a run can tell is `CLOSED_ONLY` or `UNKNOWN` without one."""

SOURCE_TEXTS = (
    (STATED, "stated there, or filled in and marked by its range"),
    (DRAWN, "follows from the scenario's sizes"),
    (CLOSED, "reckoned with a formula, steady running"),
    (SIMULATED, "from the recorded run"),
    (PRACTICE, "what workshops do; ask your own"),
    (UNKNOWN, "only a run, or a measurement, can tell"),
)
"""What each way of knowing means, for the page."""

NO_VALUE = "–"
NO_BREAK = "\u00a0"

ROUNDING = 1e-6
"""Size below which a number is printed as none, in the sheet's unit: millionths of a millimeter."""

SHEET_UNITS = {
    "m": (1e3, "mm"),
    "kg": (1e3, "g"),
    "m s-1": (1e3, "mm/s"),
    "rad": (180.0 / math.pi, "°"),
    "rad s-1": (30.0 / math.pi, "rev/min"),
    "s-1": (60.0, "per min"),
    "share": (100.0, "%"),
    "m s-2": (1.0, "m/s²"),
    "N m": (1e3, "mN m"),
    "Pa": (1e-6, "MPa"),
    "N/m": (1e-3, "N/mm"),
    "m/m": (1e3, "mm per m"),
    "1": (1.0, ""),
}
"""Unit of a value -> factor to and name of the one unit that the whole sheet uses for it."""


class Line(NamedTuple):
    """One line of the sheet.

    Attributes
    ----------
    item : str
        What it is.
    value : float, str or None
        A number in `unit`, or words; None where it is not known.
    unit : str
        Unit of the number as a recording writes it; empty for words, ``"1"`` for a count.
    source : str
        How it is known, such as `SIMULATED`.
    note : str
        What a reader should know beside it.
    low, high : float or None
        Band to accept, in `unit`; None where that side is open.
    subject : str
        Part that it belongs to, where a table has a column for each.
    digits : int
        Significant digits shown (dimensionless).
    """

    item: str
    value: float | str | None
    unit: str = ""
    source: str = STATED
    note: str = ""
    low: float | None = None
    high: float | None = None
    subject: str = ""
    digits: int = 3

    @property
    def is_known(self) -> bool:
        """Whether it has a value."""
        return known(self.value)

    @property
    def sheet_unit(self) -> str:
        """Unit that the sheet uses."""
        return SHEET_UNITS.get(self.unit, (1.0, self.unit))[1]

    @property
    def number(self) -> str:
        """The value in the sheet's unit, without it; words as they are."""
        return self.shown(self.value)

    @property
    def text(self) -> str:
        """The value with its unit."""
        if not self.is_known:
            return UNKNOWN if self.source == UNKNOWN else NO_VALUE
        return self._with_unit(self.number)

    @property
    def band(self) -> str:
        """The band to accept, with its unit; empty where there is none."""
        low, high = self.shown(self.low), self.shown(self.high)
        if low and high:
            return f"{low} to {self._with_unit(high)}" if low != high else self._with_unit(low)
        if low or high:
            return f"{'at least' if low else 'at most'} {self._with_unit(low or high)}"
        return ""

    def _with_unit(self, number: str) -> str:
        """Add the sheet's unit to a number, with spaces that do not break."""
        return f"{number} {self.sheet_unit}".strip().replace(" ", NO_BREAK) if self.unit else number

    def shown(self, value: float | str | None) -> str:
        """Write a value in the sheet's unit.

        Parameters
        ----------
        value : float, str or None
            In `unit`.

        Returns
        -------
        str
            Without the unit; empty where there is none.
        """
        if isinstance(value, str):
            return value
        if value is None or not math.isfinite(value):
            return ""
        shown = SHEET_UNITS.get(self.unit, (1.0, ""))[0] * value
        return significant(0.0 if abs(shown) < ROUNDING else shown, self.digits)


class Part(NamedTuple):
    """One part of the sheet.

    Attributes
    ----------
    id, title, text : str
        Anchor on the page, heading, and a sentence below it.
    lines : tuple of Line
        In the order of the page.
    drawings : tuple of (str, str)
        Caption and SVG of each drawing.
    """

    id: str
    title: str
    text: str
    lines: tuple[Line, ...]
    drawings: tuple[tuple[str, str], ...] = ()


def known(value: float | str | None) -> bool:
    """Tell whether there is a value.

    Parameters
    ----------
    value : float, str or None
        In any unit.

    Returns
    -------
    bool
        False for None, NaN and an empty text.
    """
    if isinstance(value, str):
        return bool(value)
    return value is not None and math.isfinite(value)


def place_text(x: float, y: float, decimals: int = 1) -> str:
    """Write a place in millimeters, without a negative zero.

    Parameters
    ----------
    x, y : float
        Coordinates [m].
    decimals : int
        Digits behind the point (dimensionless).
    """
    numbers = (round(1e3 * value, decimals) + 0.0 for value in (x, y))
    return ", ".join(f"{number:.{decimals}f}" for number in numbers).replace("-", "−") + " mm"


def ran_or_reckoned(line: Line, simulated: float | None, closed: float | None = None) -> Line:
    """Give a line the simulated value where there is one, else the closed form's, and say which.

    Parameters
    ----------
    line : Line
        The line without its value; its note stays.
    simulated, closed : float or None
        What a run gave and what a closed form says, in the line's unit.

    Returns
    -------
    Line
        With its value and how it is known; both values told where both are known.
    """
    if known(simulated):
        note = line.note
        if known(closed):
            note = f"{note}; " if note else ""
            note += f"closed form {line._replace(value=closed).text}"
        return line._replace(value=simulated, source=SIMULATED, note=note)
    if known(closed):
        return line._replace(value=closed, source=CLOSED_ONLY)
    return line._replace(value=None, source=UNKNOWN)
