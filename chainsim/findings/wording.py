"""Amounts in units that read well."""

from __future__ import annotations

from chainsim.units import format_si

KINDS = {
    "m": "length",
    "s": "time",
    "N": "force",
    "N m": "torque",
    "m s-2": "acceleration",
    "m s-1": "speed",
    "rad": "angle",
    "rad s-1": "angular_speed",
    "Hz": "frequency",
    "W": "power",
    "J": "energy",
}
"""Unit of a value and the kind that `chainsim.units` prints it as."""


def amount(value: float, unit: str) -> str:
    """A value in a unit that reads well.

    Parameters
    ----------
    value : float
        The value in `unit`.
    unit : str
        Its unit, ``"1"`` where dimensionless.

    Returns
    -------
    str
        Such as ``"3.2 mm"``, to three digits.
    """
    rounded = float(f"{value:.3g}")
    kind = KINDS.get(unit)
    return format_si(rounded, kind) if kind else f"{rounded:g} {unit}".removesuffix(" 1")
