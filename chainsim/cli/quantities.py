"""Units of machine-readable output: those of the recording."""

from __future__ import annotations

import re


def recording_unit(kind: str | None) -> str:
    """Return the SI unit of a kind of quantity as recordings write it.

    Parameters
    ----------
    kind : str or None
        A key of `chainsim.units.UNITS`; empty or None for a count or a text.

    Returns
    -------
    str
        Such as ``"m s-2"``; ``"1"`` where dimensionless.
    """
    from chainsim.units import UNITS

    return as_recorded(next(iter(UNITS[kind]))) if kind and kind in UNITS else "1"


def as_recorded(unit: str) -> str:
    """Return a unit as recordings write it.

    Parameters
    ----------
    unit : str
        As scenarios write it, such as ``"m/s2"``.

    Returns
    -------
    str
        Such as ``"m s-2"``; ``"1"`` where dimensionless.
    """
    above, _, below = unit.partition("/")
    parts = [part for part in above.split() if part != "1"]
    for part in below.split():
        name, power = re.fullmatch(r"(\D+)(\d*)", part).groups()  # type: ignore[union-attr]
        parts.append(f"{name}-{power or 1}")
    return " ".join(parts) or "1"
