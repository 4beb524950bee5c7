"""Table `[drive]` with `motor` and `shaft`."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import StrictBool

from chainsim.scenario.quantity import (
    Count,
    PositiveInertia,
    PositiveLength,
    PositiveNumber,
    PositiveTime,
    PositiveTorque,
    Quantity,
)
from chainsim.scenario.table import Table, key

PositiveCurrent = Annotated[float, Quantity("current", above=0.0)]
PositiveRate = Annotated[float, Quantity("angular_speed", above=0.0)]
ShaftMaterial = Literal["steel", "stainless", "aluminum", "brass"]


class Motor(Table):
    """A motor with its gearing; speeds and torques are those of the motor's own shaft."""

    supply: Annotated[float, Quantity("voltage", above=0.0)] = key(
        ..., "Supply voltage at which the figures hold.", example="12 V", usual=("1 V", "400 V")
    )
    no_load_speed: PositiveRate = key(
        ...,
        "Speed of the motor's shaft without load.",
        example="6000 rev/min",
        usual=("1 rev/min", "30000 rev/min"),
    )
    stall_torque: PositiveTorque = key(
        ...,
        "Torque of the motor's shaft when held still.",
        example="20 mN m",
        usual=("0.1 mN m", "50 N m"),
    )
    no_load_current: PositiveCurrent = key(
        None, "Current without load; left out, 8 % of the stall current.", example="60 mA"
    )
    stall_current: PositiveCurrent = key(
        None,
        "Current when held still; left out, from the motor's constant (torque times no-load "
        "speed over supply) and the no-load current.",
        example="1.2 A",
    )
    table: (
        tuple[
            tuple[
                Annotated[float, Quantity("angular_speed", least=0.0)],
                Annotated[float, Quantity("torque", least=0.0)],
            ],
            ...,
        ]
        | None
    ) = key(
        None,
        "Pairs of speed and torque from standstill up; left out, a straight line.",
        example=[["0 rev/min", "20 mN m"], ["6000 rev/min", "0 N m"]],
    )
    gear_ratio: PositiveNumber = key(
        1.0, "Turns of the motor for one turn of the shaft.", example=100, usual=(1, 3000)
    )
    gear_efficiency: Annotated[float, Quantity("fraction", above=0.0, most=1.0)] = key(
        0.8, "Power out over power in of the gearing.", example="80 %", likely=(0.6, 0.9)
    )
    back_drivable: StrictBool = key(
        True, "Whether the load can turn the motor backward.", example=False
    )
    inertia: PositiveInertia = key(
        1e-6,
        "Moment of inertia of the rotor on the motor's shaft.",
        example="10 g cm2",
        likely=("1 g cm2", "50 g cm2"),
    )
    continuous_torque: PositiveTorque | None = key(
        None,
        "Torque of the motor's shaft it may give all day; left out, not judged.",
        example="5 mN m",
    )
    stepper: StrictBool = key(
        False, "Whether it is a stepper that follows the set speed.", example=True
    )
    pull_out_torque: PositiveTorque | None = key(
        None, "Torque beyond which a stepper loses its step.", example="40 mN m"
    )


class Shaft(Table):
    """What joins the gearing to the driven sprocket; the spring in it always exists."""

    stiffness: Annotated[float, Quantity("torsional_stiffness", above=0.0)] = key(
        None,
        "Torsional stiffness; left out, from length, diameter and material, else assumed.",
        example="20 N m/rad",
        usual=("0.01 N m/rad", "10000 N m/rad"),
    )
    damping: Annotated[float, Quantity("torsional_damping", least=0.0)] = key(
        5e-4,
        "Torsional damping.",
        example="0.5 mN m s/rad",
        likely=("0.1 mN m s/rad", "2 mN m s/rad"),
    )
    backlash: Annotated[float, Quantity("angle", least=0.0)] = key(
        0.0,
        "Whole free angle of gearing and couplings at the sprocket.",
        example="1 deg",
        usual=("0 deg", "20 deg"),
    )
    length: PositiveLength | None = key(
        None, "Length of the shaft; left out, whirl is not judged.", example="1.2 m"
    )
    diameter: PositiveLength | None = key(None, "Diameter of the shaft.", example="6 mm")
    material: ShaftMaterial | None = key(None, "Material of the shaft.", example="steel")
    supports: Annotated[int, Count(2)] = key(
        2, "Number of bearings that hold it, evenly spaced, ends included.", example=4
    )


class Drive(Table):
    """What turns which sprocket, and how."""

    sprocket: str = key(..., "Name of the driven sprocket.", example="tail")
    kind: Literal["speed", "motor"] = key(
        "speed", "A set speed, or a motor with its own torque and speed.", example="speed"
    )
    chain_speed: Annotated[float, Quantity("speed", above=0.0)] = key(
        None,
        "Chain speed, mean over a tooth; left out with a motor, 80 % of the speed without load.",
        example="0.15 m/s",
        usual=("0.005 m/s", "2 m/s"),
    )
    ramp: PositiveTime = key(
        0.5, "Time from standstill to the set speed.", example="0.5 s", usual=("0.02 s", "20 s")
    )
    ramp_shape: Literal["smooth", "linear"] = key(
        "smooth", "Smooth starts and ends without a jump of acceleration.", example="smooth"
    )
    max_torque: PositiveTorque | None = key(
        None,
        "Largest torque at the sprocket of a set speed; left out, no limit.",
        example="0.5 N m",
    )
    reaction: Literal["frame", "mount"] = key(
        "frame",
        "What takes the drive's torque: the frame, or the mount that carries the motor.",
        example="frame",
    )
    motor: Motor | None = key(
        None,
        'The motor; required with kind = "motor".',
        example={"supply": "12 V", "no_load_speed": "6000 rev/min", "stall_torque": "20 mN m"},
    )
    shaft: Shaft = key(Shaft(), "Shaft and couplings.", example={"backlash": "1 deg"})
    polarity: Literal["as wired", "rectified"] = key(
        "as wired",
        "Whether a reversed supply turns it backward, or a rectifier keeps it forward.",
        example="rectified",
    )
    supply_sign: Literal["forward", "reversed"] = key(
        "forward", "How the supply is connected at the start.", example="reversed"
    )
    overrunning: StrictBool = key(
        False,
        "Whether a clutch passes torque only forward, so that the lift may run ahead.",
        example=False,
    )
    backstop: StrictBool = key(
        False, "Whether a one-way element keeps the sprocket from turning back.", example=True
    )


__all__ = ["Drive", "Motor", "Shaft", "ShaftMaterial"]
