"""Tables `[carriers]` with `pocket`, and `[balls]` with `feed` and `discharge`."""

from __future__ import annotations

from typing import Annotated, Any, ClassVar, Literal

from pydantic import BeforeValidator

from chainsim.scenario.quantity import (
    Angle,
    Count,
    Length,
    LengthFromZero,
    NumberFromZero,
    Point,
    PositiveInertia,
    PositiveLength,
    PositiveMass,
    Quantity,
    Share,
    TimeFromZero,
)
from chainsim.scenario.table import KindKeys, Table, key

PocketShape = Literal["tray", "cup", "prongs", "hook"]
BallMaterial = Literal["steel", "glass", "acrylic", "nylon", "wood"]
EVERY_POCKET = "every pocket"


class Pocket(Table):
    """The hollow that takes one ball, seen from the front, on a level link."""

    shape: PocketShape | None = key(
        None,
        "Starting shape of our own that supplies what is left out; left out, a tray.",
        example="tray",
    )
    outline: tuple[Point, ...] | None = key(
        None,
        "Instead of floor, lip and back: points (along the link, along its outward normal) "
        "from the link's first pin, from back to lip.",
        example=[["2 mm", "4 mm"], ["-8 mm", "4 mm"], ["-9 mm", "22 mm"], ["-4 mm", "24 mm"]],
    )
    floor: PositiveLength = key(
        None,
        "Length of the floor from the back to the lip; left out, from ball and shape.",
        example="18 mm",
    )
    lip: LengthFromZero = key(
        None, "Height of the lip over the floor; left out, from ball and shape.", example="5 mm"
    )
    tilt: Angle = key(
        None,
        "Tilt of the floor; positive raises the lip end; left out, from the shape.",
        example="5 deg",
        usual=("-20 deg", "45 deg"),
    )
    offset: Length = key(
        None,
        "From the line of the pins to the back, outward; left out, 0.4 of the pitch.",
        example="4 mm",
    )
    back: LengthFromZero = key(
        None, "Height of the back over the floor; left out, from ball and shape.", example="12 mm"
    )
    wall: PositiveLength = key(
        1.5e-3, "Thickness of the material.", example="1.5 mm", usual=("0.3 mm", "10 mm")
    )
    friction: NumberFromZero = key(
        0.3,
        "Coefficient of friction of a ball on it.",
        example=0.3,
        likely=(0.15, 0.5),
        usual=(0, 1),
    )
    restitution: Share = key(
        0.4, "Speed of rebound over speed of approach.", example=0.4, likely=(0.2, 0.6)
    )


class Carriers(Table):
    """The parts on the chain that hold balls."""

    every: Annotated[int, Count(1, "a carrier sits on a whole link")] = key(
        ..., "Links from one carrier to the next.", example=4, usual=(1, 60)
    )
    mass: PositiveMass = key(
        None,
        "Mass of one carrier without its ball; left out, 0.15 of the ball's mass.",
        example="2 g",
        usual=("0.05 g", "500 g"),
    )
    inertia: PositiveInertia | None = key(
        None,
        "Moment of inertia about its center; left out, from its mass and outline.",
        example="2 g cm2",
    )
    first: Annotated[int, Count(0)] = key(
        0, "Number of the link that holds the first carrier.", example=0
    )
    at: tuple[Annotated[int, Count(0)], ...] | None = key(
        None,
        "Instead of an even spacing: numbers of the links that hold a carrier.",
        example=[0, 4, 9],
    )
    pocket: Pocket = key(
        Pocket(), "The pocket of every carrier.", example={"floor": "18 mm", "lip": "5 mm"}
    )


class Feed(Table):
    """How balls come to the chain."""

    kind: Literal["set down", "chute", "trough", "every pocket"] = key(
        "set down",
        "Set down in the next free pocket, released from a chute, scooped from a trough, or "
        "(`every pocket`) filled into each empty carrier as it passes `load_at`.",
        example="set down",
    )
    rate: Annotated[float, Quantity("rate", above=0.0)] | None = key(
        None,
        "Balls that arrive per unit of time; left out, the demanded ball rate, else 1 /s.",
        example="1 /s",
        usual=("0.02 /s", "10 /s"),
    )
    jitter: TimeFromZero = key(
        0.0, "Half-width of the uniform spread of the moments of arrival.", example="0.05 s"
    )
    at: Point | None = key(
        None,
        "Mouth of the chute, or lower end of the trough's floor (right, up).",
        example=["60 mm", "40 mm"],
    )
    velocity: tuple[Annotated[float, Quantity("speed")], Annotated[float, Quantity("speed")]] = key(
        (0.0, 0.0),
        "Velocity with which a ball leaves the chute (right, up).",
        example=["-0.1 m/s", "0 m/s"],
    )
    slope: Angle = key(
        0.0,
        "Slope of the trough, positive where it falls toward the chain.",
        example="6 deg",
        usual=("0 deg", "30 deg"),
    )
    queue: Annotated[int, Count(1)] = key(
        1, "Balls that stand in the trough at the start.", example=4, usual=(1, 30)
    )
    load_at: Length = key(None, "The same as `load_at` in `[balls]`.", example="0 mm")
    unload_at: Length = key(None, "The same as `unload_at` in `[balls]`.", example="520 mm")

    keys_of_all_kinds: ClassVar = ("kind", "load_at", "unload_at")
    keys_by_kind: ClassVar = {
        "set down": KindKeys((), ("rate", "jitter")),
        "chute": KindKeys(("at",), ("rate", "jitter", "velocity")),
        "trough": KindKeys(("at",), ("rate", "jitter", "slope", "queue")),
        "every pocket": KindKeys(),
    }


class Discharge(Table):
    """The chute that takes the balls at the head."""

    at: Point = key(..., "Lower edge of the mouth (right, up).", example=["-40 mm", "540 mm"])
    mouth: PositiveLength = key(
        ...,
        "Opening of the mouth, straight up from its lower edge.",
        example="40 mm",
        usual=("5 mm", "500 mm"),
    )
    slope: Angle = key(
        0.0,
        "Slope of the chute, positive where it falls away from the lift.",
        example="8 deg",
        usual=("0 deg", "60 deg"),
    )


def feed_table(value: Any) -> Any:
    """Write the short form `feed = "every pocket"` as a table."""
    return {"kind": value} if isinstance(value, str) else value


class Balls(Table):
    """The balls, their way onto the chain and off it."""

    diameter: PositiveLength = key(
        ..., "Diameter of a ball.", example="16 mm", usual=("3 mm", "120 mm")
    )
    material: BallMaterial | None = key(
        None, "Material, which gives the mass; left out with no mass, steel.", example="steel"
    )
    mass: PositiveMass = key(
        None,
        "Mass of a ball; left out, from the material.",
        example="16.7 g",
        usual=("0.05 g", "5 kg"),
    )
    model: Literal["rolling", "fixed"] = key(
        "rolling",
        "A body of its own that can leave its pocket, or a weight that rides in its seat.",
        example="rolling",
    )
    feed: Annotated[Feed, BeforeValidator(feed_table)] = key(
        Feed(),
        'How balls arrive; or just "every pocket".',
        example={"kind": "set down", "rate": "1 /s"},
    )
    start: Literal["empty", "loaded"] = key(
        "empty",
        "Whether every place of the carrying strand is filled at the start.",
        example="empty",
    )
    load_at: Length = key(
        None, "Height at which a pocket is filled; left out, the lowest axle's.", example="0 mm"
    )
    unload_at: Length = key(
        None,
        "Height at which a held ball is taken off; left out, the highest axle's.",
        example="520 mm",
    )
    discharge: Discharge | None = key(
        None,
        "The chute that takes the balls; left out, one that suits the speed is worked out.",
        example={"at": ["-40 mm", "540 mm"], "mouth": "40 mm"},
    )
    friction: NumberFromZero = key(
        0.2,
        "Coefficient of friction of ball on ball and on chain and sprockets.",
        example=0.2,
        likely=(0.1, 0.35),
        usual=(0, 1),
    )
    restitution: Share = key(
        0.6, "Rebound of ball on ball, at `restitution_speed`.", example=0.6, likely=(0.4, 0.8)
    )
    restitution_speed: Annotated[float, Quantity("speed", above=0.0)] = key(
        0.3, "Speed of approach at which every restitution holds.", example="0.3 m/s"
    )
    spacing: Annotated[int, Count(1)] | None = key(
        None, "Carriers from one ball to the next; left out, every carrier.", example=2
    )
