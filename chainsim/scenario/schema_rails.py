"""Tables `[[wall]]` and `[[guide]]`: what stands still beside the chain."""

from __future__ import annotations

from typing import ClassVar, Literal

from chainsim.scenario.quantity import Angle, NumberFromZero, Point, PositiveLength, Share
from chainsim.scenario.schema_sprocket import Name
from chainsim.scenario.table import KindKeys, Table, key


class Wall(Table):
    """A fixed polyline that balls may touch: back wall, guard."""

    name: Name = key(..., "Name in messages and recordings.", example="back_wall")
    points: tuple[Point, ...] = key(
        ...,
        "At least two points (right, up); solid on the left of the way through them.",
        example=[["30 mm", "0 mm"], ["30 mm", "500 mm"]],
    )
    friction: NumberFromZero = key(
        0.3,
        "Coefficient of friction of a ball on it.",
        example=0.3,
        likely=(0.15, 0.5),
        usual=(0, 1),
    )
    restitution: Share = key(
        0.5, "Speed of rebound over speed of approach.", example=0.5, likely=(0.3, 0.7)
    )


class Guide(Table):
    """A fixed rail that keeps the chain in place."""

    name: Name = key(..., "Name in messages and recordings.", example="rail")
    kind: Literal["straight", "shoe"] = key("straight", "Form of the guide.", example="straight")
    start: Point | None = key(
        None,
        "First end of a straight guide (right, up); the chain runs on the right of the way "
        "from it to the other end.",
        example=["20 mm", "100 mm"],
        alias="from",
    )
    end: Point | None = key(
        None, "Other end of a straight guide (right, up).", example=["20 mm", "400 mm"], alias="to"
    )
    center: Point | None = key(None, "Center of a shoe's arc.", example=["0 mm", "0 mm"])
    radius: PositiveLength | None = key(None, "Radius of a shoe's arc.", example="60 mm")
    angles: tuple[Angle, Angle] | None = key(
        None,
        "Angles at which a shoe's arc starts and ends, counterclockwise.",
        example=["20 deg", "70 deg"],
    )
    bears_on: Literal["pins", "backs"] = key(
        "pins", "Whether it touches the pins' rollers or the backs of the links.", example="pins"
    )
    friction: NumberFromZero = key(
        0.2,
        "Coefficient of friction of the chain on it.",
        example=0.2,
        likely=(0.1, 0.35),
        usual=(0, 0.8),
    )

    keys_of_all_kinds: ClassVar = ("name", "kind", "bears_on", "friction")
    keys_by_kind: ClassVar = {
        "straight": KindKeys(("from", "to")),
        "shoe": KindKeys(("center", "radius", "angles")),
    }
