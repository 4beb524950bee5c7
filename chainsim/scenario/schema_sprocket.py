"""Table `[[sprocket]]` with `tooth` and `mount`."""

from __future__ import annotations

from typing import Annotated, ClassVar, Literal

from pydantic import StringConstraints

from chainsim.scenario.quantity import (
    Angle,
    Count,
    DampingFromZero,
    Direction,
    ForceFromZero,
    Length,
    LengthFromZero,
    MassFromZero,
    NumberFromZero,
    Point,
    PositiveAngle,
    PositiveInertia,
    PositiveLength,
    PositiveMass,
    PositiveStiffness,
    Quantity,
    TorqueFromZero,
)
from chainsim.scenario.table import KindKeys, Table, key

FEWEST_TEETH = 6
MOST_TEETH = 400
Name = Annotated[str, StringConstraints(pattern=r"^[A-Za-z][A-Za-z0-9_]*$")]
MountKind = Literal["fixed", "screwed", "sliding", "hung", "arm", "spring", "counterweight"]


class Tooth(Table):
    """Form of a tooth; what is left out is worked out from teeth, pitch and roller."""

    height: PositiveLength | None = key(
        None,
        "Height of the tooth tip over the circle of the pins; left out, worked out.",
        example="2 mm",
    )
    pressure_angle: PositiveAngle | None = key(
        None,
        "Angle by which the flank leans beyond π/z; left out, the mean of two published rules.",
        example="18 deg",
    )
    seat_clearance: LengthFromZero | None = key(
        None, "Seat radius over roller radius; left out, worked out.", example="0.05 mm"
    )
    tip_radius: PositiveLength | None = key(
        None, "Radius of the tooth tip; left out, worked out.", example="0.8 mm"
    )
    friction: NumberFromZero = key(
        0.15,
        "Coefficient of friction of chain on tooth.",
        example=0.15,
        likely=(0.08, 0.3),
        usual=(0, 0.8),
    )


class Mount(Table):
    """What holds an axle: in place, on a slide, on an arm, or hung in the loop."""

    kind: MountKind = key("fixed", "How the axle is held.", example="hung")
    mass: MassFromZero = key(
        0.0,
        "Mass of all that moves with the axle except the chain: unit, axle, sprocket.",
        example="0.30 kg",
        usual=("0 kg", "20 kg"),
    )
    inertia: PositiveInertia | None = key(
        None,
        "Moment of inertia of that mass about its own center; left out, worked out from the "
        "mass and the size of the sprocket.",
        example="1 kg cm2",
    )
    center_of_mass: Point = key(
        (0.0, 0.0),
        "Place of the center of mass from the axle (right, up).",
        example=["0 mm", "-30 mm"],
    )
    friction: Annotated[float, Quantity("force", least=0.0, kind_where={"arm": "torque"})] = key(
        0.0,
        "Dry friction that holds: a force along the axis; a torque for an arm.",
        example="0.2 N",
    )
    damping: Annotated[
        float, Quantity("damping", least=0.0, kind_where={"arm": "torsional_damping"})
    ] = key(0.0, "Damping along the axis; about the pivot for an arm.", example="2 N s/m")
    stops: (
        tuple[
            Annotated[float, Quantity("length", kind_where={"arm": "angle"})],
            Annotated[float, Quantity("length", kind_where={"arm": "angle"})],
        ]
        | None
    ) = key(
        None,
        "Lowest and highest travel along the axis from the place on the drawing; angles for an "
        "arm; left out, no stops.",
        example=["-10 mm", "10 mm"],
    )
    free: Literal["y", "xy"] = key(
        "y", "Ways a hung axle may move: up and down, or sideways too.", example="y"
    )
    axis: Direction = key(
        (0.0, 1.0), "Direction of positive travel; any length, made one.", example=[0, 1]
    )
    shift: Length = key(
        0.0, "Travel along the axis to which a screwed axle is set.", example="1.5 mm"
    )
    pivot: Point | None = key(
        None, "Place of an arm's pivot (right, up).", example=["60 mm", "40 mm"]
    )
    rate: PositiveStiffness | None = key(None, "Rate of the spring.", example="200 N/m")
    set_force: ForceFromZero = key(
        0.0,
        "Force of the spring along +axis at zero travel.",
        example="4 N",
        usual=("0 N", "500 N"),
    )
    weight: PositiveMass | None = key(
        None, "Mass of the counterweight; its cord pulls along +axis.", example="0.8 kg"
    )
    cord_stiffness: PositiveStiffness = key(
        20e3,
        "Stiffness of the cord, which only pulls.",
        example="20 kN/m",
        likely=("5 kN/m", "50 kN/m"),
    )
    cord_damping: DampingFromZero = key(
        5.0,
        "Damping of the cord while it pulls.",
        example="5 N s/m",
        likely=("1 N s/m", "20 N s/m"),
    )
    pulley_drag: ForceFromZero = key(
        0.0, "Dry friction of the cord over its pulley, which holds at rest.", example="0.1 N"
    )

    keys_of_all_kinds: ClassVar = ("kind", "mass", "inertia", "center_of_mass")
    keys_by_kind: ClassVar = {
        "fixed": KindKeys(),
        "screwed": KindKeys(("shift",), ("axis",)),
        "sliding": KindKeys(("mass",), ("axis", "friction", "damping", "stops")),
        "hung": KindKeys(("mass",), ("free", "friction", "damping", "stops")),
        "arm": KindKeys(("mass", "pivot"), ("friction", "damping", "stops")),
        "spring": KindKeys(("mass", "rate", "set_force"), ("axis", "friction", "damping", "stops")),
        "counterweight": KindKeys(
            ("mass", "weight"),
            (
                "axis",
                "friction",
                "damping",
                "stops",
                "cord_stiffness",
                "cord_damping",
                "pulley_drag",
            ),
        ),
    }


class Sprocket(Table):
    """A toothed wheel or smooth roller, listed as the chain meets it when it runs forward."""

    name: Name = key(..., "Name in messages, recordings and other tables.", example="head")
    teeth: Annotated[int, Count(0, most=MOST_TEETH)] = key(
        0,
        f"Number of teeth, at least {FEWEST_TEETH}; 0 for a smooth roller.",
        example=8,
        usual=(0, 40),
    )
    roller_radius: PositiveLength | None = key(
        None,
        "Instead of `teeth`: radius of a smooth roller on which the chain's rollers run.",
        example="12 mm",
    )
    center: Point = key(
        ..., "Place of the axle on the drawing (right, up).", example=["0 mm", "520 mm"]
    )
    side: Literal["inside", "outside"] = key(
        "inside",
        "Whether the wheel stands inside the loop or presses on it from outside.",
        example="inside",
    )
    tooth: Tooth = key(Tooth(), "Form of the teeth.", example={"friction": 0.15})
    pitch: PositiveLength | None = key(
        None, "Pitch for which the wheel is cut; left out, that of the chain.", example="10 mm"
    )
    eccentricity: LengthFromZero = key(
        0.0,
        "Distance of the wheel's center from its axle, toward seat 0.",
        example="0.1 mm",
        usual=("0 mm", "1 mm"),
    )
    phase: Angle | None = key(
        None,
        "Angle of seat 0 at the start from +x; left out, as the chain lies best.",
        example="0 deg",
    )
    inertia: PositiveInertia | None = key(
        None,
        "Moment of inertia about the axle; left out, that of a plastic disk.",
        example="5 g cm2",
    )
    axle_diameter: PositiveLength = key(
        None,
        "Diameter on which the bearing rubs; left out, 0.4 of the pitch.",
        example="4 mm",
        usual=("1 mm", "30 mm"),
    )
    bearing_friction: NumberFromZero = key(
        0.1,
        "Coefficient of friction of the bearing: rolling about 0.005, plain about 0.1.",
        example=0.1,
        likely=(0.005, 0.25),
        usual=(0, 0.5),
    )
    bearing_drag: TorqueFromZero = key(
        0.0,
        "Drag torque of the bearing without load.",
        example="0.2 mN m",
        usual=("0 N m", "0.1 N m"),
    )
    mount: Mount = key(
        Mount(),
        "What holds the axle; left out, it is fixed.",
        example={"kind": "hung", "mass": "0.30 kg"},
    )
