"""The drive: a speed profile or a motor, a gear, a shaft that twists, and one-way elements."""

import numpy as np

from chainsim.kernels.contact import RELAXATION, hold
from chainsim.kernels.jit import kernel, woven
from chainsim.kernels.layout import (
    HOLD_BACKSTOP,
    HOLD_GEAR,
    HOLD_TWIST,
    HOLDS,
    PER_WHEEL,
    SPIN,
    TURN,
)

#: what feeds the drive
SUPPLY_ON, SUPPLY_OPEN, SUPPLY_SHORTED = range(3)
#: rows of a motor's table
TABLE_ROWS = 16

#: the one record of the drive; angles and torques at the sprocket's side of the gear
DRIVE = np.dtype(
    [
        ("wheel", np.int64),
        ("n_wheels", np.int64),
        ("motor", np.int64),  # 0: speed profile
        ("on_mount", np.int64),  # 1: the unit carries the motor
        ("stiffness", np.float64),  # of the shaft [N m/rad]
        ("damping", np.float64),  # [N m s/rad]
        ("backlash", np.float64),  # total [rad]
        ("low", np.float64),  # limits of the torque on the sprocket [N m]
        ("high", np.float64),
        ("supply", np.int64),
        ("level", np.float64),  # supply over its rated value, with its sign
        ("rate_from", np.float64),  # speed profile [rad/s]
        ("rate_to", np.float64),
        ("ramp_start", np.float64),  # [s]
        ("ramp_time", np.float64),  # [s]
        ("smooth", np.int64),
        ("inertia", np.float64),  # of the rotor, seen at the sprocket [kg m2]
        ("stall_torque", np.float64),  # at the sprocket, before gear losses [N m]
        ("free_rate", np.float64),  # no-load speed at the sprocket [rad/s]
        ("drag_torque", np.float64),  # of the unfed motor [N m]
        ("drive_loss", np.float64),  # 1/efficiency - 1 while the motor drives
        ("back_loss", np.float64),  # 1 - efficiency while the load drives; >= 1 holds
        ("gear_stiffness", np.float64),  # of the gear's friction [N m/rad]
        ("rows", np.int64),  # of the torque table; 0: straight line
        ("table_rate", np.float64, (TABLE_ROWS,)),
        ("table_torque", np.float64, (TABLE_ROWS,)),
        ("backstop", np.int64),
        ("backstop_stiffness", np.float64),  # [N m/rad]
        ("no_load_current", np.float64),  # [A]
        ("stall_current", np.float64),
        ("set_speed", np.float64),  # chain speed that a fed motor is meant to reach [m/s]
        ("speed_per_rate", np.float64),  # mean chain speed over sprocket rate [m]
        ("forward", np.float64),  # +1 or -1: the sense in which the sprocket runs forward
    ]
)


@kernel
def demanded_rate(drive, t):
    """Return the rate that the speed profile demands at time `t` [rad/s].

    Parameters
    ----------
    drive : record of DRIVE
    t : float
        Time [s].
    """
    if t >= drive.ramp_start + drive.ramp_time:
        return drive.rate_to
    if t <= drive.ramp_start:
        return drive.rate_from
    part = (t - drive.ramp_start) / drive.ramp_time
    if drive.smooth == 1:
        part = part * part * (3.0 - 2.0 * part)
    return drive.rate_from + part * (drive.rate_to - drive.rate_from)


@kernel
def motor_torque(drive, rate):
    """Return the motor's torque at the sprocket's side, before gear losses [N m].

    Parameters
    ----------
    drive : record of DRIVE
    rate : float
        Rotor rate over its mount, seen at the sprocket [rad/s].
    """
    if drive.supply == SUPPLY_OPEN:
        return 0.0
    level = drive.level if drive.supply == SUPPLY_ON else 0.0
    if drive.rows == 0 or level == 0.0:
        return drive.stall_torque * (level - rate / drive.free_rate)
    sign = 1.0 if level > 0.0 else -1.0
    speed = rate * sign
    table_rate, table_torque = drive.table_rate, drive.table_torque
    row = 1
    while row < drive.rows - 1 and table_rate[row] < speed:
        row += 1
    slope = (table_torque[row] - table_torque[row - 1]) / (table_rate[row] - table_rate[row - 1])
    return sign * (table_torque[row - 1] + slope * (speed - table_rate[row - 1])) * abs(level)


@woven
def drive_wheel(t, drive, frames, q, w, held, held_rate, accel, reaction, dt):
    """Add the torque of shaft and backstop to the driven wheel, and move the rotor.

    Parameters
    ----------
    t : float
        Time [s].
    drive : record of DRIVE
    frames : Frames
        Torque on the driven wheel [N m]; added to.
    q, w : ndarray, shape (5 n_wheels + 1,)
        Generalized coordinates [m, rad] and rates.
    held, held_rate : ndarray, shape (6 n_wheels + 2,)
        Friction deflections [rad] and their rates.
    accel : ndarray, shape (5 n_wheels + 1,)
        Last entry, the rotor's acceleration [rad/s2]; overwritten.
    reaction : ndarray, shape (n_wheels,)
        Torque on each mount [N m]; overwritten.
    dt : float
        Inner step [s] or 0.

    Returns
    -------
    torque : float
        On the sprocket [N m].
    power_in, power_lost : float
        Work rate of the supply or profile, and what shaft, gear and slip take [W].
    """
    s = drive.wheel
    n_wheels = reaction.shape[0]
    twist_at = HOLDS * n_wheels + HOLD_TWIST
    gear_at = HOLDS * n_wheels + HOLD_GEAR
    rotor = PER_WHEEL * n_wheels
    mount_rate = w[PER_WHEEL * s + TURN] if drive.on_mount == 1 else 0.0
    wheel_rate = w[PER_WHEEL * s + SPIN]
    for m in range(n_wheels):
        reaction[m] = 0.0
    rotor_rate = w[rotor] if drive.motor == 1 else demanded_rate(drive, t) + mount_rate
    torque, deflection, rate, lost = _twist(drive, held[twist_at], rotor_rate - wheel_rate, dt)
    if dt > 0.0:
        held[twist_at] = deflection
    else:
        held_rate[twist_at] = rate
    frames.torque[s] += torque
    carried = torque
    if drive.motor == 1:
        turning = rotor_rate - mount_rate
        driving = motor_torque(drive, turning)
        ahead, behind = drive.drive_loss * abs(torque), drive.back_loss * abs(torque)
        idle = drive.drag_torque if drive.supply != SUPPLY_ON else 0.0
        high = (ahead if torque > 0.0 else behind) + idle
        low = -(behind if torque > 0.0 else ahead) - idle
        rub, deflection, rate, gear_lost = hold(
            held[gear_at], turning, low, high, drive.gear_stiffness, 0.0, dt
        )
        if dt > 0.0:
            held[gear_at] = deflection
        else:
            held_rate[gear_at] = rate
        accel[rotor] = (driving - rub - torque) / drive.inertia
        power_in = driving * turning
        lost += gear_lost
        carried = driving - rub
    else:
        accel[rotor] = 0.0
        power_in = torque * (rotor_rate - mount_rate)
    if drive.on_mount == 1:
        reaction[s] -= carried
    if drive.backstop == 1:
        lost += _hold_back(drive, s, frames, wheel_rate, held, held_rate, dt)
    return torque, power_in, lost


@kernel
def _twist(drive, twist, twist_rate, dt):
    """Return torque, new twist, twist rate and lost power of the shaft with its backlash."""
    half = 0.5 * drive.backlash
    if half == 0.0:
        return hold(twist, twist_rate, drive.low, drive.high, drive.stiffness, drive.damping, dt)
    trial = twist + twist_rate * dt
    beyond = max(trial - half, 0.0) + min(trial + half, 0.0)
    elastic = min(max(drive.stiffness * beyond, drive.low), drive.high)
    damper = drive.damping * twist_rate if beyond != 0.0 else 0.0
    torque = min(max(elastic + damper, drive.low), drive.high)
    if torque * beyond < 0.0:
        torque = 0.0
    slipped = drive.stiffness * beyond - elastic
    settled = trial - slipped / drive.stiffness
    if dt > 0.0:
        old = max(twist - half, 0.0) + min(twist + half, 0.0)
        new = elastic / drive.stiffness
        stored = 0.5 * drive.stiffness * (new * new - old * old)
        return torque, settled, 0.0, torque * twist_rate - stored / dt
    rate = twist_rate - RELAXATION * (twist - settled)
    return torque, twist, rate, torque * twist_rate - elastic * rate


@kernel
def _hold_back(drive, s, frames, wheel_rate, held, held_rate, dt):
    """Let a backstop resist backward rotation; returns the dissipated power [W]."""
    index = HOLDS * s + HOLD_BACKSTOP
    slip = wheel_rate * drive.forward
    torque, deflection, rate, lost = hold(
        held[index], slip, -1.0e9, 0.0, drive.backstop_stiffness, 0.0, dt
    )
    if dt > 0.0:
        held[index] = deflection
    else:
        held_rate[index] = rate
    frames.torque[s] -= torque * drive.forward
    return lost
