"""Lines of the sizing sheet about drive, shaft and what can fall."""

from __future__ import annotations

import math
from collections.abc import Iterator

from chainsim import closed_forms as cf
from chainsim.analysis.materials import SHAFT_MATERIALS
from chainsim.analysis.sheet_chain import Row
from chainsim.analysis.sized import (
    Sized,
    bearing_power,
    sprocket_torque,
    starting_pull,
    whirl_margin,
)
from chainsim.units import format_si


def drive_rows(sized: Sized) -> Iterator[Row]:
    """Yield torque, power and, with a motor, its duty.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    if len(sized.path.wheels) == 1:
        return
    lifting, bearings = sized.running.driven_pull * sized.speed, bearing_power(sized)
    torque, drive = sprocket_torque(sized), sized.scenario.drive
    yield Row("power of lifting", lifting, "power", "pull × v")
    yield Row(
        "power lost in bearings", bearings, "power", "μ r F ω", "joints and teeth come on top"
    )
    yield Row("mean torque on the driven sprocket", torque, "torque", "P / ω")
    yield Row(
        "extra pull while starting",
        starting_pull(sized),
        "force",
        "moving mass × v / ramp",
        "peak of a smooth ramp" if drive.ramp_shape == "smooth" else "linear ramp",
    )
    motor = drive.motor
    if motor is None:
        return
    load = torque / (motor.gear_ratio * motor.gear_efficiency)
    speed = cf.motor_speed(load, motor.no_load_speed, motor.stall_torque)
    radius = sized.path.wheels[sized.driven].radius
    stall = motor.stall_torque * motor.gear_ratio * motor.gear_efficiency / radius
    yield Row(
        "torque at the motor",
        load,
        "torque",
        "T / (ratio η)",
        f"{100 * load / motor.stall_torque:.0f} % of stall",
    )
    if motor.continuous_torque is not None:
        yield Row(
            "over its continuous torque", load / motor.continuous_torque, "fraction", "T / Tc"
        )
    yield Row("speed of the motor under it", speed, "angular_speed", "ω0 (1 − T/Ts)")
    chain = speed / motor.gear_ratio / sized.rate * sized.speed
    yield Row("chain speed the motor can reach", chain, "speed", "motor line at this torque")
    yield Row(
        "current",
        cf.motor_current(load, motor.stall_torque, motor.no_load_current, motor.stall_current),
        "current",
        "I0 + (Is − I0) T/Ts",
    )
    yield Row(
        "pull on the chain at stall",
        stall,
        "force",
        "Ts ratio η / R",
        f"links are allowed {format_si(sized.scenario.chain.allowable_tension, 'force')}",
    )


def shaft_rows(sized: Sized) -> Iterator[Row]:
    """Yield critical speed and support distance of a shaft.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    margin = whirl_margin(sized)
    shaft = sized.scenario.drive.shaft
    if math.isnan(margin) or shaft.length is None or shaft.diameter is None:
        return
    material = SHAFT_MATERIALS[shaft.material or "steel"]
    span = shaft.length / (shaft.supports - 1)
    yield Row(
        "first critical speed of the shaft",
        margin * sized.rate,
        "angular_speed",
        "(π/L)² sqrt(E I / (ρ A))",
        f"spans of {format_si(span, 'length')}, pinned ends",
    )
    widest = cf.support_distance(shaft.diameter, material.modulus, material.density, sized.rate)
    yield Row("greatest distance of supports", widest, "length", "whirl at twice the running speed")


def energy_rows(sized: Sized) -> Iterator[Row]:
    """Yield what falls, and how hard it lands.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    gravity, balls = sized.scenario.frame.gravity, sized.scenario.balls
    heights = [wheel.center[1] for wheel in sized.path.wheels]
    if balls is not None:
        drop = max(0.0, balls.unload_at - min(*heights, balls.load_at))
        yield Row(
            "energy of a ball that falls from the head",
            balls.mass * gravity * drop,
            "energy",
            "m g h",
            f"lands at {math.sqrt(2 * gravity * drop):.1f} m/s",
        )
    for sprocket in sized.scenario.sprocket:
        mount = sprocket.mount
        mass = mount.weight or (mount.mass if mount.kind != "fixed" else 0.0)
        if mass:
            yield Row(
                f"energy of what hangs at {sprocket.name}, each 100 mm it drops",
                mass * gravity * 0.1,
                "energy",
                "m g h",
                "if the chain or cord parts",
            )
