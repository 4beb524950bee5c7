"""Synthetic bench measurements: made by the model with known values, noise added, as CSV text."""

import numpy as np

from chainsim.scenario import parse_scenario
from chainsim.study.fit_strand import bounce, growth, piece_of, pluck, tilts

# Our own invention.
SCENARIO = """\
format = 1
title = "A lift to be matched to the bench"   # our own invention

[chain]
kind = "moulded_sturdy"
pitch = "10 mm"
link_stiffness = "40 kN/m"       # a guess from the shelf
joint = { pin_radius = "1.2 mm" }

[[sprocket]]
name = "head"
teeth = 8
center = ["0 mm", "300 mm"]

[[sprocket]]
name = "tail"
teeth = 8
center = ["0 mm", "0 mm"]
mount = { kind = "hung", mass = "0.2 kg", free = "y" }

[drive]
sprocket = "head"
kind = "motor"
motor = { supply = "12 V", no_load_speed = "5000 rev/min", stall_torque = "30 mN m", gear_ratio = 50, gear_efficiency = 0.7 }

[carriers]
every = 4

[balls]
diameter = "16 mm"
"""  # noqa: E501
TRUE = {
    "chain.link_stiffness": 6.3e4,
    "chain.link_damping": 0.17,
    "chain.joint.moment": 0.8e-4,
    "chain.joint.friction": 0.26,
    "chain.air_damping": 1.3e-3,
}
MOTOR = {
    "drive.motor.no_load_speed": 600.0,
    "drive.motor.stall_torque": 0.024,
    "drive.motor.no_load_current": 0.08,
    "drive.motor.stall_current": 1.4,
}


def scenario(text: str = SCENARIO):
    return parse_scenario(text, "bench.toml")


def table(kind: str, stated: dict[str, str], headings: str, *columns) -> str:
    """CSV text of one measurement."""
    lines = ["# our own invention", f"# kind = {kind}"]
    lines += [f"# {name} = {value}" for name, value in stated.items()]
    lines.append(headings)
    lines += [",".join(f"{cell:.6g}" for cell in row) for row in zip(*columns, strict=True)]
    return "\n".join(lines) + "\n"


def stretch_text(rng, values=TRUE, noise=0.02e-3, length=0.3) -> str:
    loads = np.array([2.0, 4.0, 6.0, 8.0, 10.0, 12.0])
    grown = growth(piece_of(scenario(), length), values, loads)
    grown = grown + rng.normal(0.0, noise, len(loads))
    stated = {"length": f"{length:g} m"}
    return table("stretch", stated, "load [N], growth [mm]", loads, grown.clip(0.0) * 1e3)


def bounce_text(rng, values=TRUE, noise=0.02e-3) -> str:
    interval, count = 2e-3, 120
    time = np.arange(count) * interval
    trace = bounce(piece_of(scenario(), 0.1), values, 0.5, 1e-3, interval, count + 2)
    # the log starts a little late, and its zero is off
    moved = trace.at(time + 0.4e-3) + 0.1e-3 + rng.normal(0.0, noise, count)
    stated = {"length": "100 mm", "load": "0.5 N", "motion": "along"}
    return table("decay", stated, "time [ms], displacement [mm]", time * 1e3, moved * 1e3)


def pluck_text(rng, load, values=TRUE, noise=0.1e-3) -> str:
    interval, count = 3e-3, 80
    time = np.arange(count) * interval
    trace = pluck(piece_of(scenario(), 0.15), values, load, 0.07, 0.006, interval, count + 2)
    moved = trace.at(time) + rng.normal(0.0, noise, count)
    stated = {"length": "150 mm", "load": f"{load:g} N", "motion": "across", "at": "70 mm"}
    return table("decay", stated, "time [s], displacement [mm]", time, moved * 1e3)


def tilt_text(rng, values=TRUE, noise=1.7e-3, loads=(0.5, 1.0, 2.0, 3.0, 4.0)) -> str:
    loads = np.array(loads)
    tilt = tilts(piece_of(scenario(), 0.15), values, loads, 0.2, 0.012)
    tilt = np.degrees(tilt + rng.normal(0.0, noise, len(loads)))
    stated = {"length": "150 mm", "weight": "0.2 N", "arm": "12 mm"}
    return table("tilt", stated, "load [N], tilt [deg]", loads, tilt.clip(0.0))


def motor_text(rng, shaft="motor", ratio=50.0, efficiency=0.7) -> str:
    torque = np.linspace(0.0, 0.95, 8) * MOTOR["drive.motor.stall_torque"]
    share = torque / MOTOR["drive.motor.stall_torque"]
    speed = MOTOR["drive.motor.no_load_speed"] * (1.0 - share) + rng.normal(0.0, 3.0, 8)
    idle, stall = MOTOR["drive.motor.no_load_current"], MOTOR["drive.motor.stall_current"]
    current = idle + (stall - idle) * share + rng.normal(0.0, 0.01, 8)
    if shaft == "sprocket":
        torque, speed = torque * ratio * efficiency, speed / ratio
    columns = (torque * 1e3, speed, current.clip(0.0))
    return table("motor", {"shaft": shaft}, "torque [mN m], speed [rad/s], current [A]", *columns)
