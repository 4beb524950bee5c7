"""Kinds of chain and of ball, of our own naming, that supply what the user does not know.

The figures are working values of our own, to start from: measure what a finding turns on.
Every property has a low, a typical and a high value at the kind's usual pitch, and grows with
a power of the pitch, as for bodies of similar shape: mass with the cube, strength with the
area, stiffness of a link (area over length) with the first power.
"""

from __future__ import annotations

import math
from types import MappingProxyType
from typing import NamedTuple


class Range(NamedTuple):
    """What a value may be: low, typical, high [SI]."""

    low: float
    typical: float
    high: float

    def scaled(self, factor: float) -> Range:
        """The same, each value multiplied.

        Parameters
        ----------
        factor : float
            By what (dimensionless).

        Returns
        -------
        Range
            The new one, in the unit of the product.
        """
        return Range(self.low * factor, self.typical * factor, self.high * factor)


class Property(NamedTuple):
    """One property of a kind of chain at its usual pitch, and how it grows with the pitch."""

    range: Range
    pitch_power: int


class KindOfChain(NamedTuple):
    """A kind of chain: usual pitch [m], properties by their key in `[chain]`."""

    pitch: float
    text: str
    properties: dict[str, Property]


def _kind(
    pitch: float,
    text: str,
    *,
    mass: Range,
    stiffness: Range,
    damping: Range,
    roller: Range,
    tension: Range,
    joint_friction: Range,
    pin_radius: Range,
    expansion: Range,
) -> KindOfChain:
    """Join the properties of a kind with the power of the pitch by which each grows."""
    properties = {
        "link_mass": Property(mass, 3),
        "link_stiffness": Property(stiffness, 1),
        "link_damping": Property(damping, 0),
        "roller_diameter": Property(roller, 1),
        "allowable_tension": Property(tension, 2),
        "joint.friction": Property(joint_friction, 0),
        "joint.pin_radius": Property(pin_radius, 1),
        "expansion": Property(expansion, 0),
    }
    return KindOfChain(pitch, text, properties)


KINDS_OF_CHAIN = MappingProxyType(
    {
        "moulded_light": _kind(
            6e-3,
            "thin moulded links that snap together; toys, shop windows",
            mass=Range(0.1e-3, 0.15e-3, 0.25e-3),
            stiffness=Range(5e3, 12e3, 25e3),
            damping=Range(0.05, 0.10, 0.20),
            roller=Range(2.4e-3, 2.7e-3, 3.0e-3),
            tension=Range(4.0, 8.0, 14.0),
            joint_friction=Range(0.10, 0.22, 0.40),
            pin_radius=Range(0.6e-3, 0.7e-3, 0.8e-3),
            expansion=Range(80e-6, 110e-6, 140e-6),
        ),
        "moulded_sturdy": _kind(
            10e-3,
            "thick moulded links with full pins; museum walls that run all day",
            mass=Range(0.7e-3, 1.0e-3, 1.4e-3),
            stiffness=Range(25e3, 50e3, 90e3),
            damping=Range(0.05, 0.10, 0.20),
            roller=Range(4.7e-3, 5.0e-3, 5.3e-3),
            tension=Range(25.0, 40.0, 60.0),
            joint_friction=Range(0.10, 0.20, 0.35),
            pin_radius=Range(1.0e-3, 1.2e-3, 1.4e-3),
            expansion=Range(80e-6, 110e-6, 140e-6),
        ),
        "steel_bead": _kind(
            6e-3,
            "hollow steel beads joined by short bars",
            mass=Range(0.20e-3, 0.30e-3, 0.45e-3),
            stiffness=Range(60e3, 150e3, 300e3),
            damping=Range(0.02, 0.04, 0.08),
            roller=Range(4.3e-3, 4.5e-3, 4.7e-3),
            tension=Range(30.0, 50.0, 80.0),
            joint_friction=Range(0.12, 0.20, 0.35),
            pin_radius=Range(0.6e-3, 0.8e-3, 1.0e-3),
            expansion=Range(10e-6, 12e-6, 17e-6),
        ),
        "steel_roller_small": _kind(
            8e-3,
            "small steel roller chain",
            mass=Range(1.3e-3, 1.45e-3, 1.6e-3),
            stiffness=Range(0.5e6, 1.0e6, 2.0e6),
            damping=Range(0.01, 0.03, 0.06),
            roller=Range(4.9e-3, 5.0e-3, 5.0e-3),
            tension=Range(300.0, 450.0, 600.0),
            joint_friction=Range(0.08, 0.13, 0.25),
            pin_radius=Range(1.1e-3, 1.15e-3, 1.2e-3),
            expansion=Range(11e-6, 12e-6, 13e-6),
        ),
    }
)
"""Name of a kind of chain -> its properties. Our own working values, from no catalogue."""

KIND_ASSUMED_WITHOUT_ONE = "moulded_sturdy"

BALL_DENSITIES = MappingProxyType(
    {
        "steel": Range(7700.0, 7800.0, 8000.0),
        "glass": Range(2400.0, 2500.0, 2600.0),
        "acrylic": Range(1170.0, 1190.0, 1200.0),
        "nylon": Range(1120.0, 1140.0, 1160.0),
        "wood": Range(600.0, 720.0, 850.0),
    }
)
"""Material of a ball -> density [kg/m3]; usual handbook figures, from memory."""

SHAFT_SHEAR_MODULI = MappingProxyType(
    {"steel": 80e9, "stainless": 77e9, "aluminum": 26e9, "brass": 37e9}
)
"""Material of a shaft -> shear modulus [Pa]; usual handbook figures, from memory."""


def chain_properties(kind: str, pitch: float) -> dict[str, Range]:
    """Properties of a kind of chain at a pitch.

    Parameters
    ----------
    kind : str
        A key of `KINDS_OF_CHAIN`.
    pitch : float
        Pitch of the chain [m].

    Returns
    -------
    dict of str to Range
        Key in `[chain]` -> low, typical, high [SI].
    """
    known = KINDS_OF_CHAIN[kind]
    ratio = pitch / known.pitch
    return {
        name: item.range.scaled(ratio**item.pitch_power) for name, item in known.properties.items()
    }


def ball_mass(material: str, diameter: float) -> Range:
    """Mass of a solid ball.

    Parameters
    ----------
    material : str
        A key of `BALL_DENSITIES`.
    diameter : float
        Diameter [m].

    Returns
    -------
    Range
        Low, typical, high mass [kg].
    """
    return BALL_DENSITIES[material].scaled(math.pi / 6.0 * diameter**3)


class PocketForm(NamedTuple):
    """A starting shape: lengths over the ball's diameter (dimensionless), tilt [rad]."""

    floor: float
    lip: float
    back: float
    tilt: float


POCKET_FORMS = MappingProxyType(
    {
        "tray": PocketForm(1.125, 0.3125, 0.75, math.radians(5.0)),
        "cup": PocketForm(1.10, 0.70, 1.00, 0.0),
        "prongs": PocketForm(1.02, 0.15, 0.50, math.radians(15.0)),
        "hook": PocketForm(1.05, 0.45, 0.90, math.radians(20.0)),
    }
)
"""Name of a pocket's starting shape -> its proportions; of our own choice."""
