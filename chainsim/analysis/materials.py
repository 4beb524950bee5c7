"""Elastic constants of shaft materials."""

from __future__ import annotations

from types import MappingProxyType
from typing import NamedTuple


class Material(NamedTuple):
    """Constants that set a shaft's critical speed.

    Attributes
    ----------
    modulus : float
        Young's modulus [Pa].
    density : float
        Density [kg/m3].
    """

    modulus: float
    density: float


SHAFT_MATERIALS = MappingProxyType(
    {
        "steel": Material(205e9, 7850.0),
        "stainless": Material(195e9, 7900.0),
        "aluminum": Material(70e9, 2700.0),
        "brass": Material(105e9, 8500.0),
    }
)
"""Usual handbook figures, from memory; the critical speed goes with the square root."""
