"""Tables `[[event]]`, `[run]`, `[limits]`, `[study]`, `[bench]` and `[resolved]`."""

from __future__ import annotations

from typing import Annotated, Any, ClassVar, Literal

from pydantic import BeforeValidator, StrictBool

from chainsim.scenario.quantity import (
    Angle,
    Count,
    ForceFromZero,
    Length,
    LengthFromZero,
    NumberFromZero,
    PositiveAcceleration,
    PositiveForce,
    PositiveNumber,
    PositiveStiffness,
    PositiveTime,
    Quantity,
    TimeFromZero,
)
from chainsim.scenario.table import KindKeys, Table, key

EventKind = Literal[
    "start", "stop", "supply_cut", "supply_reversed", "jam", "knock", "missing_ball",
    "double_ball", "takeup_blocked",
]  # fmt: skip
Situation = Literal[
    "start empty", "start loaded", "steady", "stop", "restart loaded", "supply cut",
    "supply reversed", "jam", "missing ball", "double ball", "knock", "take-up blocked",
]  # fmt: skip
SITUATIONS: tuple[str, ...] = Situation.__args__  # type: ignore[attr-defined]
ALL_SITUATIONS = "all"


class Event(Table):
    """Something that happens at a stated moment of the run."""

    at: TimeFromZero = key(..., "Moment, from the start of the run.", example="5 s")
    kind: EventKind = key(..., "What happens.", example="stop")
    ramp: PositiveTime = key(0.5, "Time a start or a stop takes.", example="0.5 s")
    terminals: Literal["open", "shorted"] = key(
        "open",
        "Whether a cut supply leaves the motor open or shorts it, which brakes.",
        example="open",
    )
    height: Length | None = key(
        None, "Height at which a jam catches the next pocket.", example="200 mm"
    )
    stiffness: PositiveStiffness = key(
        20e3, "Stiffness of what jams.", example="20 kN/m", likely=("2 kN/m", "200 kN/m")
    )
    release_force: PositiveForce | None = key(None, "Force at which a jam lets go.", example="30 N")
    direction: Angle = key(
        0.0,
        "Direction in which a knock accelerates the frame, counterclockwise from right.",
        example="90 deg",
    )
    acceleration: PositiveAcceleration | None = key(
        None,
        "Peak acceleration of a knock, half a sine wave in time.",
        example="5 m/s2",
        usual=("0.1 m/s2", "100 m/s2"),
    )
    duration: PositiveTime | None = key(
        None, "How long a knock or a blocked take-up lasts.", example="30 ms"
    )
    sprocket: str | None = key(None, "Sprocket whose take-up is blocked.", example="tail")

    keys_of_all_kinds: ClassVar = ("at", "kind")
    keys_by_kind: ClassVar = {
        "start": KindKeys((), ("ramp",)),
        "stop": KindKeys((), ("ramp",)),
        "supply_cut": KindKeys((), ("terminals",)),
        "supply_reversed": KindKeys(),
        "jam": KindKeys(("height", "release_force"), ("stiffness",)),
        "knock": KindKeys(("acceleration", "duration"), ("direction",)),
        "missing_ball": KindKeys(),
        "double_ball": KindKeys(),
        "takeup_blocked": KindKeys(("sprocket", "duration")),
    }


def _situations(value: Any) -> Any:
    """Write `"all"`, or one name, as a list."""
    if value == ALL_SITUATIONS or value == [ALL_SITUATIONS]:
        return list(SITUATIONS)
    return [value] if isinstance(value, str) else value


class Run(Table):
    """How long to simulate, and what to record."""

    duration: PositiveTime | None = key(
        None,
        "Simulated time; left out, the strand is filled, three full turns of the chain, a stop "
        "and a restart loaded.",
        example="40 s",
        usual=("0.5 s", "24 h"),
    )
    situations: Annotated[tuple[Situation, ...], BeforeValidator(_situations)] | None = key(
        None,
        'Named sequences to run, or "all" for the proving run; left out, as `duration` says.',
        example=["start loaded", "steady", "stop"],
    )
    settle: TimeFromZero = key(
        5.0, "Time after the start before running counts as steady.", example="5 s"
    )
    sample_rate: Annotated[float, Quantity("frequency", above=0.0)] = key(
        500.0, "Samples recorded per unit of time.", example="500 Hz", usual=("50 Hz", "10 kHz")
    )
    seed: Annotated[int, Count(0)] = key(1, "Seed of everything random.", example=1)
    step: PositiveTime | None = key(
        None, "Longest inner step; left out, what the stiffest mode allows.", example="20 us"
    )
    allow_coarse_step: StrictBool = key(
        False, "Whether `step` may exceed what the stiffest mode allows.", example=False
    )


class Clearance(Table):
    """Room beside the carrying strand."""

    inward: LengthFromZero | None = key(
        None, "Room toward the inside of the loop; left out, not judged.", example="8 mm"
    )
    outward: LengthFromZero | None = key(
        None, "Room toward the outside of the loop; left out, not judged.", example="15 mm"
    )


class Limits(Table):
    """What the findings are judged by."""

    clearance: Clearance = key(
        Clearance(), "Room beside the strand.", example={"inward": "8 mm", "outward": "15 mm"}
    )
    gap: LengthFromZero | None = key(
        None,
        "Smallest gap between what moves and what stands; left out, not judged.",
        example="3 mm",
    )
    slack_tension: ForceFromZero = key(
        0.0, "Tension at or below which a strand counts as slack.", example="0 N"
    )
    slack_time: PositiveTime = key(0.05, "How long a strand may be slack.", example="50 ms")
    ball_rate: Annotated[float, Quantity("rate", above=0.0)] | None = key(
        None, "Balls to deliver per unit of time; left out, not judged.", example="1 /s"
    )
    ripple: PositiveNumber | None = key(
        None,
        "Largest chain speed ripple, peak to peak over mean; left out, not judged.",
        example="15 %",
    )
    lateral_acceleration: PositiveAcceleration | None = key(
        None,
        "Largest acceleration of a carried ball across the strand; left out, not judged.",
        example="3 m/s2",
    )
    longitudinal_acceleration: PositiveAcceleration | None = key(
        None,
        "Largest acceleration of a carried ball along the strand; left out, not judged.",
        example="3 m/s2",
    )
    droop: Annotated[float, Quantity("fraction", above=0.0, most=1.0)] | None = key(
        None, "Largest loss of speed under load; left out, not judged.", example="20 %"
    )
    guard_band: PositiveNumber = key(
        0.2,
        "Distance of a natural frequency from the tooth rate, as a share.",
        example=0.2,
        usual=(0.05, 0.5),
    )
    wear: NumberFromZero | None = key(
        None,
        "Growth of the pitch by wear that the take-up must allow for; left out, none.",
        example="2 %",
    )
    reserve: NumberFromZero = key(
        0.2, "Share of a finding's scale within which it is close.", example=0.2, usual=(0, 0.9)
    )


class Study(Table):
    """Marks for studies of many runs."""

    free: tuple[str, ...] = key(
        (), "Dotted keys that a search for a mend may change.", example=["sprocket.tail.mount.mass"]
    )


class Bench(Table):
    """Where a measured value came from, and how well it is known."""

    low: str | float | None = key(
        None, "Lower end of what the measurement allows.", example="40 kN/m"
    )
    high: str | float | None = key(
        None, "Upper end of what the measurement allows.", example="60 kN/m"
    )
    source: str = key("", "Where it was measured, and how.", example="stretch of 1 m under 5 N")


class StatedOrigin(Table):
    """Origin of a value in a scenario that chainsim wrote."""

    source: Literal["given", "kind", "assumed", "bench"] = key(
        ..., "Where the value came from.", example="assumed"
    )
    low: str | float | None = key(None, "Lower end of its range.", example="40 kN/m")
    high: str | float | None = key(None, "Upper end of its range.", example="60 kN/m")
    note: str = key("", "What it was taken from.", example="moulded_sturdy")
