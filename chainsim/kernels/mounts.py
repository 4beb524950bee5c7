"""Mounts of the wheels: rigid bodies with friction that holds, stops, springs, a counterweight.

A mount moves in at most two directions and one turn.  ``planar``: the axle stands at
``home + g0 e0 + g1 e1`` and the body may turn about it; ``arm``: the body turns about a pivot.
"""

import math

import numpy as np

from chainsim.kernels.contact import hold, one_sided_stop
from chainsim.kernels.jit import kernel, woven
from chainsim.kernels.layout import (
    DROP,
    HOLD_BEARING,
    HOLD_PULLEY,
    HOLD_SHIFT_0,
    HOLD_TURN,
    HOLDS,
    PER_WHEEL,
    SHIFT_0,
    SPIN,
    TURN,
)

#: one record per wheel's mount; SI
MOUNT = np.dtype(
    [
        ("arm", np.int64),  # 1: turns about a pivot
        ("home_x", np.float64),  # axle at zero travel (arm: the pivot) [m]
        ("home_y", np.float64),
        (
            "axis_x",
            np.float64,
        ),  # direction of the first shift; the second is 90 deg counterclockwise
        ("axis_y", np.float64),
        ("free_0", np.int64),
        ("free_1", np.int64),
        ("free_turn", np.int64),
        ("arm_x", np.float64),  # from the pivot to the axle at zero turn [m]
        ("arm_y", np.float64),
        ("mass", np.float64),  # [kg]
        ("inertia", np.float64),  # about the reference point: the axle, or the pivot [kg m2]
        ("center_x", np.float64),  # of mass, from the reference point at zero turn [m]
        ("center_y", np.float64),
        ("friction", np.float64),  # force [N], or torque of an arm [N m]
        ("hold_stiffness", np.float64),  # of that friction [N/m or N m/rad]
        ("damping", np.float64),  # [N s/m or N m s/rad]
        ("spring_rate", np.float64),  # [N/m or N m/rad]
        ("set_force", np.float64),  # along the axis at zero travel [N or N m]
        ("has_stops", np.int64),
        ("stop_low", np.float64),  # [m or rad]
        ("stop_high", np.float64),
        ("stop_stiffness", np.float64),
        ("stop_damping", np.float64),
        ("weight_mass", np.float64),  # counterweight [kg]; 0: none
        ("cord_stiffness", np.float64),  # [N/m]
        ("cord_damping", np.float64),  # [N s/m]
        ("pulley_drag", np.float64),  # [N]
        ("pulley_stiffness", np.float64),  # [N/m]
        ("wheel_inertia", np.float64),  # [kg m2]
        ("bearing_drag", np.float64),  # [N m]
        ("bearing_radius", np.float64),  # friction coefficient times axle radius [m]
        ("bearing_stiffness", np.float64),  # [N m/rad]
        ("blocked", np.int64),  # 1: the take-up is jammed where it stands
        ("block_at", np.float64),  # [m or rad]
        ("block_stiffness", np.float64),
    ]
)


@woven
def place_wheels(mounts, q, w, frames):
    """Write where every axle stands and how it moves, and clear the forces on the wheels.

    Parameters
    ----------
    mounts : ndarray of MOUNT, shape (n_wheels,)
    q, w : ndarray, shape (5 n_wheels + 1,)
        Generalized coordinates [m, rad] and rates.
    frames : Frames
        Overwritten.
    """
    for s in range(mounts.shape[0]):
        mount = mounts[s]
        base = PER_WHEEL * s
        if mount.arm == 1:
            c, sn = math.cos(q[base + TURN]), math.sin(q[base + TURN])
            ax, ay = c * mount.arm_x - sn * mount.arm_y, sn * mount.arm_x + c * mount.arm_y
            frames.cx[s], frames.cy[s] = mount.home_x + ax, mount.home_y + ay
            frames.vx[s], frames.vy[s] = -w[base + TURN] * ay, w[base + TURN] * ax
        else:
            a, b = mount.axis_x, mount.axis_y
            g0, g1 = q[base + SHIFT_0], q[base + SHIFT_0 + 1]
            v0, v1 = w[base + SHIFT_0], w[base + SHIFT_0 + 1]
            frames.cx[s], frames.cy[s] = (
                mount.home_x + a * g0 - b * g1,
                mount.home_y + b * g0 + a * g1,
            )
            frames.vx[s], frames.vy[s] = a * v0 - b * v1, b * v0 + a * v1
        frames.cos[s], frames.sin[s] = math.cos(q[base + SPIN]), math.sin(q[base + SPIN])
        frames.rate[s] = w[base + SPIN]
        frames.fx[s], frames.fy[s], frames.torque[s] = 0.0, 0.0, 0.0


@woven
def move_mounts(mounts, frames, q, w, held, held_rate, gx, gy, reaction, accel, stop_force, dt):
    """Work out the acceleration of every mount, wheel and counterweight.

    Parameters
    ----------
    mounts : ndarray of MOUNT, shape (n_wheels,)
    frames : Frames
        Forces [N] and torques [N m] of chain, balls and shaft on the wheels.
    q, w : ndarray, shape (5 n_wheels + 1,)
        Generalized coordinates [m, rad] and rates [m/s, rad/s].
    held, held_rate : ndarray, shape (6 n_wheels + 2,)
        Friction deflections [m, rad] (advance in place where ``dt > 0``) and their rates.
    gx, gy : float
        Gravity, less the frame's acceleration [m/s2].
    reaction : ndarray, shape (n_wheels,)
        Torque of the drive on each mount [N m].
    accel : ndarray, shape (5 n_wheels + 1,)
        Generalized accelerations [m/s2, rad/s2]; overwritten.
    stop_force : ndarray, shape (n_wheels,)
        Push of the stops [N]; overwritten.
    dt : float
        Inner step [s] or 0.

    Returns
    -------
    bearing_power, mount_power : float
        Dissipated [W].
    """
    lost_bearing = 0.0
    lost_mount = 0.0
    for s in range(mounts.shape[0]):
        mount = mounts[s]
        base = PER_WHEEL * s
        hold_at = HOLDS * s
        hub = math.sqrt(frames.fx[s] ** 2 + frames.fy[s] ** 2)
        limit = mount.bearing_drag + mount.bearing_radius * hub
        drag = 0.0
        if limit > 0.0:
            slip = w[base + SPIN] - w[base + TURN]
            drag, deflection, rate, power = hold(
                held[hold_at + HOLD_BEARING], slip, -limit, limit, mount.bearing_stiffness, 0.0, dt
            )
            if dt > 0.0:
                held[hold_at + HOLD_BEARING] = deflection
            else:
                held_rate[hold_at + HOLD_BEARING] = rate
            lost_bearing += power
        accel[base + SPIN] = (frames.torque[s] - drag) / mount.wheel_inertia
        torque = drag + reaction[s]
        if mount.arm == 1:
            lost_mount += _turn_arm(
                mount, frames, s, q, w, held, held_rate, gx, gy, torque, accel, stop_force, dt
            )
        elif mount.free_0 + mount.free_1 + mount.free_turn > 0:
            lost_mount += _shift_mount(
                mount, frames, s, q, w, held, held_rate, gx, gy, torque, accel, stop_force, dt
            )
        else:
            stop_force[s] = 0.0
            accel[base + SHIFT_0] = accel[base + SHIFT_0 + 1] = accel[base + TURN] = 0.0
            accel[base + DROP] = 0.0
    return lost_bearing, lost_mount


@kernel
def _along(mount, travel, speed, index, held, held_rate, stop_force, s, dt):
    """Return the force along a guided coordinate of slide, spring and stops, and the power [W]."""
    force = mount.set_force - mount.spring_rate * travel - mount.damping * speed
    power = mount.damping * speed * speed
    if mount.friction > 0.0:
        rub, deflection, rate, lost = hold(
            held[index], speed, -mount.friction, mount.friction, mount.hold_stiffness, 0.0, dt
        )
        if dt > 0.0:
            held[index] = deflection
        else:
            held_rate[index] = rate
        force -= rub
        power += lost
    stop_force[s] = 0.0
    if mount.has_stops == 1:
        push, lost = one_sided_stop(
            travel, speed, mount.stop_low, mount.stop_high, mount.stop_stiffness, mount.stop_damping
        )
        force += push
        power += lost
        stop_force[s] = push
    if mount.blocked == 1:
        force -= mount.block_stiffness * (travel - mount.block_at)
    return force, power


@kernel
def _turn_arm(mount, frames, s, q, w, held, held_rate, gx, gy, torque, accel, stop_force, dt):
    """Write the acceleration of a body on a pivot; returns the dissipated power [W]."""
    base = PER_WHEEL * s
    turn, rate = q[base + TURN], w[base + TURN]
    c, sn = math.cos(turn), math.sin(turn)
    mx, my = c * mount.center_x - sn * mount.center_y, sn * mount.center_x + c * mount.center_y
    rx, ry = frames.cx[s] - mount.home_x, frames.cy[s] - mount.home_y
    guided, power = _along(
        mount, turn, rate, HOLDS * s + HOLD_TURN, held, held_rate, stop_force, s, dt
    )
    moment = mount.mass * (mx * gy - my * gx) + rx * frames.fy[s] - ry * frames.fx[s]
    accel[base + SHIFT_0] = accel[base + SHIFT_0 + 1] = accel[base + DROP] = 0.0
    accel[base + TURN] = (moment + torque + guided) / mount.inertia
    return power


@kernel
def _shift_mount(mount, frames, s, q, w, held, held_rate, gx, gy, torque, accel, stop_force, dt):
    """Write the accelerations of a body that shifts and may turn; returns the power [W]."""
    base = PER_WHEEL * s
    a, b = mount.axis_x, mount.axis_y
    turn, rate = q[base + TURN], w[base + TURN]
    c, sn = math.cos(turn), math.sin(turn)
    mx, my = c * mount.center_x - sn * mount.center_y, sn * mount.center_x + c * mount.center_y
    whirl = mount.mass * rate * rate
    fx = frames.fx[s] + mount.mass * gx + whirl * mx
    fy = frames.fy[s] + mount.mass * gy + whirl * my
    force_0, force_1 = fx * a + fy * b, fy * a - fx * b
    power = 0.0
    if mount.free_0 == 1:
        along, power = _along(
            mount, q[base], w[base], HOLDS * s + HOLD_SHIFT_0, held, held_rate, stop_force, s, dt
        )
        force_0 += along
        if mount.weight_mass > 0.0:
            pull, lost = _pull_cord(mount, s, q, w, held, held_rate, gx, gy, accel, dt)
            force_0 += pull
            power += lost
    else:
        stop_force[s] = 0.0
    if mount.free_1 == 1:
        force_1 -= mount.damping * w[base + 1]
        power += mount.damping * w[base + 1] ** 2
    moment = mount.mass * (mx * gy - my * gx) + torque
    # unknown accelerations: two shifts of the reference point and the turn, coupled by the offset
    e0, e1 = -my * a + mx * b, my * b + mx * a
    if mount.free_turn == 0:
        accel[base + TURN] = 0.0
        accel[base] = force_0 / mount.mass if mount.free_0 == 1 else 0.0
        accel[base + 1] = force_1 / mount.mass if mount.free_1 == 1 else 0.0
        return power
    inertia = mount.inertia
    if mount.free_0 == 1:
        inertia -= mount.mass * e0 * e0
        moment -= e0 * force_0
    if mount.free_1 == 1:
        inertia -= mount.mass * e1 * e1
        moment -= e1 * force_1
    alpha = moment / inertia
    accel[base + TURN] = alpha
    accel[base] = force_0 / mount.mass - e0 * alpha if mount.free_0 == 1 else 0.0
    accel[base + 1] = force_1 / mount.mass - e1 * alpha if mount.free_1 == 1 else 0.0
    return power


@kernel
def _pull_cord(mount, s, q, w, held, held_rate, gx, gy, accel, dt):
    """Return the pull of the counterweight's cord on the mount [N] and the lost power [W].

    The cord runs from the mount along +axis over a pulley to a weight that hangs; it only pulls.
    ``q[DROP]`` is how far the weight has sunk.
    """
    base = PER_WHEEL * s
    stretch = q[base + DROP] - q[base + SHIFT_0]
    speed = w[base + DROP] - w[base + SHIFT_0]
    pull = mount.cord_stiffness * stretch + mount.cord_damping * speed
    power = mount.cord_damping * speed * speed
    if stretch <= 0.0:
        pull, power = 0.0, 0.0
    elif pull < 0.0:
        power = -mount.cord_stiffness * stretch * speed
        pull = 0.0
    drag = 0.0
    if mount.pulley_drag > 0.0:
        index = HOLDS * s + HOLD_PULLEY
        drag, deflection, rate, lost = hold(
            held[index],
            w[base + DROP],
            -mount.pulley_drag,
            mount.pulley_drag,
            mount.pulley_stiffness,
            0.0,
            dt,
        )
        if dt > 0.0:
            held[index] = deflection
        else:
            held_rate[index] = rate
        power += lost
    weight = mount.weight_mass * math.sqrt(gx * gx + gy * gy)
    accel[base + DROP] = (weight - pull - drag) / mount.weight_mass
    return pull, power
