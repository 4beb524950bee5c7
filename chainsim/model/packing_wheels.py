"""Packs wheels, mounts, guides and the drive of a lift into the kernels' records."""

from __future__ import annotations

import math

import numpy as np

from chainsim.closed_forms import depth_damping
from chainsim.kernels.drive import DRIVE, TABLE_ROWS
from chainsim.kernels.guides import GUIDE
from chainsim.kernels.mounts import MOUNT
from chainsim.kernels.wheels import WHEEL
from chainsim.model import constants
from chainsim.model.lift import Lift
from chainsim.model.tooth import ToothForm

FAR = 1.0e9
"""Stands for no limit [N m]."""


def contact_stiffness(lift: Lift) -> float:
    """Return the stiffness of a pin on a tooth [N/m]."""
    return constants.CONTACT_PER_LINK * lift.scenario.chain.link_stiffness


def pin_dissipation() -> float:
    """Return the dissipation of a pin on a tooth [s/m], from its rebound."""
    return depth_damping(constants.PIN_RESTITUTION, constants.PIN_IMPACT_SPEED)


def grip(stiffness: float, mass: float) -> tuple[float, float]:
    """Return tangential stiffness [N/m] and damping [N s/m] beside a normal stiffness.

    Parameters
    ----------
    stiffness : float
        Normal contact stiffness [N/m].
    mass : float
        Smaller mass of the pair [kg].
    """
    tangential = constants.GRIP_PER_CONTACT * stiffness
    return tangential, 2.0 * constants.GRIP_DAMPING * math.sqrt(tangential * mass)


def pack_wheels(lift: Lift) -> np.ndarray:
    """Return one WHEEL record per sprocket (SI)."""
    chain = lift.scenario.chain
    wheels = np.zeros(len(lift.wheels), WHEEL)
    stiffness = contact_stiffness(lift)
    tangential, damping = grip(stiffness, chain.link_mass)
    for s, (wheel, sprocket, form) in enumerate(
        zip(lift.wheels, lift.scenario.sprocket, lift.teeth, strict=True)
    ):
        record = wheels[s]
        record["teeth"] = wheel.teeth
        record["side"] = wheel.side
        record["stiffness"] = stiffness
        record["dissipation"] = pin_dissipation()
        record["friction"] = sprocket.tooth.friction
        record["grip_stiffness"], record["grip_damping"] = tangential, damping
        record["inverse_mass"] = 1.0 / chain.link_mass
        record["offset_x"] = sprocket.eccentricity
        middle = 0.5 * (lift.route.wrap_in[s] + lift.route.wrap_out[s])
        record["middle_x"], record["middle_y"] = _mid_wrap(lift, s, middle)
        roller = 0.5 * chain.roller_diameter
        if form is None:
            record["seat_radius"] = wheel.radius
            record["reach"] = wheel.radius + sprocket.eccentricity
            record["tip_radius"] = wheel.radius - roller
            continue
        write_tooth(record, form, roller)
        record["reach"] += sprocket.eccentricity
    return wheels


def write_tooth(record, form: ToothForm, roller: float) -> None:
    """Write the outline of a toothed wheel into its record.

    Parameters
    ----------
    record : record of WHEEL
        Its outline is overwritten.
    form : ToothForm
    roller : float
        Radius of the chain's rollers [m].
    """
    step = 2.0 * math.pi / form.teeth
    record["seat_radius"] = form.seat_radius
    record["tan_half"] = math.tan(0.5 * step)
    record["cos_step"], record["sin_step"] = math.cos(step), math.sin(step)
    record["cos_half"], record["sin_half"] = math.cos(0.5 * step), math.sin(0.5 * step)
    record["cos_flank"], record["sin_flank"] = form.cos_lean, form.sin_lean
    record["flank_end"] = form.flank_end
    record["clearance"] = form.seat_clearance
    record["corner_u"], record["corner_w"] = form.corner_u, form.corner_w
    record["corner_reach"] = form.corner_radius + roller
    record["land_height"] = form.outer_radius + roller
    record["has_land"] = int(form.has_land)
    record["reach"] = form.outer_radius + roller
    record["tip_radius"] = form.outer_radius


def _mid_wrap(lift: Lift, s: int, middle: float) -> tuple[float, float]:
    """Return the outward direction at mid-wrap, from the pins that lie on the wheel."""
    on = lift.laid.pin[lift.laid.seat == s] - lift.laid.wheel_center[s]
    outward = on.sum(axis=0) if len(on) else np.array([math.cos(middle), math.sin(middle)])
    size = float(np.hypot(*outward))
    if size < 1e-3 * lift.wheels[s].radius:
        return math.cos(middle), math.sin(middle)
    return float(outward[0] / size), float(outward[1] / size)


def pack_mounts(lift: Lift) -> np.ndarray:
    """Return one MOUNT record per sprocket (SI)."""
    mounts = np.zeros(len(lift.wheels), MOUNT)
    for s, sprocket in enumerate(lift.scenario.sprocket):
        record = mounts[s]
        _pack_bearing(record, lift, s, sprocket)
        _pack_guiding(record, lift, s, sprocket.mount)
        if lift.scenario.drive.reaction == "mount" and s == lift.driven:
            record["free_turn"] = int(sprocket.mount.kind not in ("fixed", "screwed"))
    return mounts


def _pack_bearing(record, lift: Lift, s: int, sprocket) -> None:
    """Fill in the wheel's inertia and its bearing."""
    wheel = lift.wheels[s]
    pitch = lift.scenario.chain.pitch
    width = constants.WHEEL_WIDTH * pitch
    disk = 0.5 * constants.WHEEL_DENSITY * width * math.pi * wheel.radius**4
    record["wheel_inertia"] = sprocket.inertia or disk
    record["bearing_drag"] = sprocket.bearing_drag
    radius = sprocket.bearing_friction * 0.5 * sprocket.axle_diameter
    record["bearing_radius"] = radius
    usual = sprocket.bearing_drag + radius * usual_pull(lift)
    record["bearing_stiffness"] = usual / constants.SLIP_AT_BEARING


def usual_pull(lift: Lift) -> float:
    """Return a pull of the size that the chain sees at rest [N]: its weight plus what hangs."""
    scenario = lift.scenario
    hung = sum(sprocket.mount.mass for sprocket in scenario.sprocket)
    weight = 0.5 * lift.n_links * scenario.chain.link_mass + hung
    return max(0.5, weight * scenario.frame.gravity)


def _pack_guiding(record, lift: Lift, s: int, mount) -> None:
    """Fill in how the mount may move and what resists it."""
    wheel = lift.wheels[s]
    record["home_x"], record["home_y"] = wheel.center
    record["axis_x"], record["axis_y"] = 0.0, 1.0
    record["mass"] = mount.mass
    com = mount.center_of_mass
    record["center_x"], record["center_y"] = com
    about = mount.mass * (com[0] ** 2 + com[1] ** 2)
    own = mount.inertia or 0.5 * mount.mass * wheel.radius**2
    record["inertia"] = own + about
    record["friction"] = mount.friction or 0.0
    record["damping"] = mount.damping or 0.0
    kind = mount.kind
    if kind in ("sliding", "spring", "counterweight"):
        length = math.hypot(*mount.axis)
        record["axis_x"], record["axis_y"] = mount.axis[0] / length, mount.axis[1] / length
        record["free_0"] = 1
    elif kind == "hung":
        record["free_0"] = 1
        record["free_1"] = int(mount.free == "xy")
    elif kind == "arm":
        _pack_arm(record, wheel, mount, own)
    if kind == "spring":
        record["spring_rate"], record["set_force"] = mount.rate, mount.set_force
    if kind == "counterweight":
        record["weight_mass"] = mount.weight
        record["cord_stiffness"] = mount.cord_stiffness
        record["cord_damping"] = mount.cord_damping
        record["pulley_drag"] = mount.pulley_drag
        record["pulley_stiffness"] = mount.pulley_drag / constants.SLIP_AT_SLIDE
    lever = math.hypot(record["arm_x"], record["arm_y"]) if kind == "arm" else 1.0
    record["hold_stiffness"] = record["friction"] / (constants.SLIP_AT_SLIDE / lever)
    if mount.stops is not None:
        record["has_stops"] = 1
        record["stop_low"], record["stop_high"] = mount.stops
        if kind == "arm":
            record["stop_low"], record["stop_high"] = mount.stops
    stop = constants.STOP_PER_LINK * lift.scenario.chain.link_stiffness
    inertial = record["inertia"] / lever**2 if kind == "arm" else max(mount.mass, 1e-3)
    record["stop_stiffness"] = stop * lever**2
    record["stop_damping"] = 2.0 * constants.STOP_DAMPING * math.sqrt(stop * inertial) * lever**2


def _pack_arm(record, wheel, mount, own: float) -> None:
    """Fill in a body on a pivot; its reference point is the pivot."""
    record["arm"] = 1
    pivot = mount.pivot
    arm = (wheel.center[0] - pivot[0], wheel.center[1] - pivot[1])
    record["home_x"], record["home_y"] = pivot
    record["arm_x"], record["arm_y"] = arm
    mass_at = (arm[0] + mount.center_of_mass[0], arm[1] + mount.center_of_mass[1])
    record["center_x"], record["center_y"] = mass_at
    record["inertia"] = own + mount.mass * (mass_at[0] ** 2 + mass_at[1] ** 2)


def pack_guides(lift: Lift) -> np.ndarray:
    """Return one GUIDE record per guide (SI)."""
    chain = lift.scenario.chain
    guides = np.zeros(len(lift.scenario.guide), GUIDE)
    stiffness = contact_stiffness(lift)
    tangential, damping = grip(stiffness, chain.link_mass)
    for g, guide in enumerate(lift.scenario.guide):
        record = guides[g]
        record["touch"] = (
            0.5 * chain.roller_diameter
            if guide.bears_on == "pins"
            else constants.BACK_HEIGHT * chain.pitch
        )
        record["stiffness"], record["dissipation"] = stiffness, pin_dissipation()
        record["friction"] = guide.friction
        record["grip_stiffness"], record["grip_damping"] = tangential, damping
        record["inverse_mass"] = 1.0 / chain.link_mass
        if guide.kind == "straight":
            (record["ax"], record["ay"]), (record["bx"], record["by"]) = guide.start, guide.end
            continue
        record["arc"] = 1
        record["ax"], record["ay"] = guide.center
        record["radius"] = guide.radius
        first, last = guide.angles
        middle, half = 0.5 * (first + last), 0.5 * abs(last - first)
        record["middle_x"], record["middle_y"] = math.cos(middle), math.sin(middle)
        record["cos_half"] = math.cos(min(half, math.pi))
    return guides


def pack_drive(lift: Lift) -> np.ndarray:
    """Return the DRIVE record, at rest: the loop sets its profile when it starts (SI)."""
    drive = lift.scenario.drive
    record = np.zeros(1, DRIVE)
    entry = record[0]
    entry["wheel"] = lift.driven
    entry["n_wheels"] = len(lift.wheels)
    entry["on_mount"] = int(drive.reaction == "mount")
    entry["stiffness"] = drive.shaft.stiffness
    entry["damping"] = drive.shaft.damping
    entry["backlash"] = drive.shaft.backlash
    most = drive.max_torque if drive.max_torque is not None else FAR
    forward = float(lift.wheels[lift.driven].side)
    entry["low"], entry["high"] = -most, most
    if drive.overrunning:
        entry["low"], entry["high"] = (0.0, most) if forward > 0 else (-most, 0.0)
    entry["forward"] = forward
    sprocket = lift.scenario.sprocket[lift.driven]
    wheel = lift.wheels[lift.driven]
    per_turn = wheel.teeth * (sprocket.pitch or lift.scenario.chain.pitch)
    entry["speed_per_rate"] = per_turn / (2.0 * math.pi) if wheel.teeth else wheel.radius
    entry["set_speed"] = drive.chain_speed or 0.0
    entry["smooth"] = int(drive.ramp_shape == "smooth")
    entry["level"] = 1.0
    entry["backstop"] = int(drive.backstop)
    entry["backstop_stiffness"] = drive.shaft.stiffness
    if drive.kind == "motor":
        _pack_motor(entry, drive.motor, forward)
    return record


def _pack_motor(entry, motor, forward: float) -> None:
    """Fill in a motor as seen at the sprocket."""
    entry["motor"] = 1
    ratio = motor.gear_ratio
    entry["inertia"] = motor.inertia * ratio**2
    entry["stall_torque"] = motor.stall_torque * ratio
    entry["free_rate"] = motor.no_load_speed / ratio
    entry["drag_torque"] = motor.stall_torque * ratio * motor.no_load_current / motor.stall_current
    entry["no_load_current"], entry["stall_current"] = motor.no_load_current, motor.stall_current
    entry["drive_loss"] = 1.0 / motor.gear_efficiency - 1.0
    entry["back_loss"] = (1.0 - motor.gear_efficiency) if motor.back_drivable else 1.2
    entry["gear_stiffness"] = entry["stall_torque"] / 0.05
    entry["level"] = forward
    if motor.table:
        rows = sorted(motor.table)
        entry["rows"] = len(rows)
        rates = [row[0] / ratio for row in rows] + [0.0] * (TABLE_ROWS - len(rows))
        torques = [row[1] * ratio for row in rows] + [0.0] * (TABLE_ROWS - len(rows))
        entry["table_rate"], entry["table_torque"] = rates, torques
