"""Tables `[frame]` and `[chain]`."""

from __future__ import annotations

from typing import Annotated, Literal

from chainsim.scenario.quantity import (
    Angle,
    Count,
    DampingFromZero,
    LengthFromZero,
    NumberFromZero,
    PositiveAcceleration,
    PositiveAngle,
    PositiveForce,
    PositiveLength,
    PositiveMass,
    PositiveNumber,
    PositiveStiffness,
    Quantity,
    Temperature,
    TorqueFromZero,
)
from chainsim.scenario.table import Table, key

STANDARD_GRAVITY = 9.80665  # m/s2, by definition (3rd CGPM, 1901, from memory)
MOST_LINKS = 20_000
ChainKind = Literal["moulded_light", "moulded_sturdy", "steel_bead", "steel_roller_small"]


class TemperatureRange(Table):
    """Temperatures that the take-up has to allow for."""

    built: Temperature = key(..., "Temperature at which it is put together.", example="20 degC")
    low: Temperature = key(..., "Lowest temperature in use.", example="5 degC")
    high: Temperature = key(..., "Highest temperature in use.", example="40 degC")


class Frame(Table):
    """What carries the lift, and where it stands."""

    tilt: Angle = key(
        0.0,
        "Angle by which the whole lift is turned, positive counterclockwise; gravity stays.",
        example="2 deg",
        usual=("-60 deg", "60 deg"),
    )
    gravity: PositiveAcceleration = key(
        STANDARD_GRAVITY,
        "Acceleration of free fall, straight down.",
        example="9.81 m/s2",
        usual=("9.7 m/s2", "9.9 m/s2"),
    )
    temperature: TemperatureRange | None = key(
        None,
        "Temperatures; left out, the take-up needs no allowance for them.",
        example={"built": "20 degC", "low": "5 degC", "high": "40 degC"},
    )


class Joint(Table):
    """Resistance of a pin to being bent."""

    moment: TorqueFromZero = key(
        0.0,
        "Friction moment of a pin without tension.",
        example="0.1 mN m",
        usual=("0 N m", "0.02 N m"),
    )
    friction: NumberFromZero = key(
        None,
        "Coefficient of friction in the pin; left out, from the kind of chain.",
        example=0.2,
        usual=(0, 0.8),
    )
    pin_radius: PositiveLength = key(
        None,
        "Radius of the pin's bearing surface; left out, from the kind of chain.",
        example="1.2 mm",
        usual=("0.1 mm", "5 mm"),
    )


class Stretch(Table):
    """Stiffness as it is measured: a length of chain that grows under a load."""

    load: PositiveForce = key(..., "Load hung on the chain.", example="5 N")
    length: PositiveLength = key(..., "Length of chain before the load.", example="1 m")
    growth: PositiveLength = key(..., "How much longer it becomes.", example="3 mm")


class Chain(Table):
    """The closed loop of links; all links are alike."""

    kind: ChainKind | None = key(
        None,
        "Kind of chain that supplies every value left out here; left out, those are assumed.",
        example="moulded_sturdy",
    )
    pitch: PositiveLength = key(
        None,
        "Length of an unstretched link from pin to pin; left out, the kind's usual one.",
        example="10 mm",
        usual=("3 mm", "30 mm"),
    )
    link_mass: PositiveMass = key(
        None,
        "Mass of one link without a carrier; left out, from the kind of chain.",
        example="1.0 g",
        usual=("0.02 g", "50 g"),
    )
    link_stiffness: PositiveStiffness = key(
        None,
        "Axial stiffness of one link; left out, from the kind of chain.",
        example="50 kN/m",
        usual=("1 kN/m", "10 MN/m"),
    )
    link_damping: NumberFromZero = key(
        None,
        "Damping ζ of a link as a share of critical, c = ζ sqrt(k m); left out, from the kind.",
        example=0.1,
        usual=(0.005, 1.0),
    )
    roller_diameter: PositiveLength = key(
        None,
        "Diameter of what lies in the sprocket's seat; left out, from the kind of chain.",
        example="5 mm",
    )
    allowable_tension: PositiveForce = key(
        None,
        "Largest tension a link may carry in use; left out, from the kind of chain.",
        example="40 N",
        usual=("1 N", "5 kN"),
    )
    play: LengthFromZero = key(
        0.0, "Free play of a link along its length; no force inside it.", example="0.05 mm"
    )
    scatter: NumberFromZero = key(
        0.0,
        "Standard deviation of the pitch from link to link, as a share of the pitch.",
        example="0.2 %",
        usual=(0, 0.02),
    )
    growth: Annotated[float, Quantity("fraction", above=-0.5)] = key(
        0.0,
        "Growth of every pitch by wear, heat, damp or creep, as a share; negative shrinks.",
        example="0.5 %",
        usual=(-0.01, 0.05),
    )
    joint: Joint = key(Joint(), "Resistance of the pins to being bent.", example={"friction": 0.2})
    back_bend: PositiveAngle | None = key(
        None,
        "Largest angle between neighboring links away from the sprockets inside the loop; "
        "left out, no limit.",
        example="20 deg",
    )
    front_bend: PositiveAngle | None = key(
        None,
        "Largest angle between neighboring links the way they lie on a sprocket inside the "
        "loop; left out, no limit.",
        example="70 deg",
    )
    air_damping: DampingFromZero = key(
        0.0, "Damping of each pin's sideways motion by air.", example="0.001 N s/m"
    )
    expansion: Annotated[float, Quantity("expansion")] = key(
        None,
        "Thermal expansion of the pitch; left out, from the kind of chain.",
        example="100 ppm/K",
        usual=("0 1/K", "300 ppm/K"),
    )
    links: Annotated[int, Count(3, most=MOST_LINKS)] | None = key(
        None, "Number of links; left out, the count that fits best.", example=112
    )
    mass_per_length: Annotated[float, Quantity("mass_per_length", above=0.0)] | None = key(
        None,
        "Instead of `link_mass`: mass of the chain per length.",
        example="100 g/m",
        alternative=True,
    )
    stretch: Stretch | None = key(
        None,
        "Instead of `link_stiffness`: a measured stretch.",
        example={"load": "5 N", "length": "1 m", "growth": "3 mm"},
        alternative=True,
    )
    breaking_load: PositiveForce | None = key(
        None,
        "Instead of `allowable_tension`, with `load_factor`: tension that breaks a link.",
        example="200 N",
        alternative=True,
    )
    load_factor: PositiveNumber | None = key(
        None,
        "Breaking load over allowable tension.",
        example=5,
        usual=(3, 20),
        alternative=True,
    )


__all__ = ["STANDARD_GRAVITY", "Chain", "ChainKind", "Frame", "Joint", "Stretch"]
