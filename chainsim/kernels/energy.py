"""Kinetic, potential and stored energy of the whole lift, for the audit."""

import math

from chainsim.kernels.balls import FREE, TOUCH_BALL, TOUCH_WHEEL, closest_on_piece, feature_ends
from chainsim.kernels.guides import closest_on_guide
from chainsim.kernels.jit import kernel
from chainsim.kernels.layout import (
    DROP,
    HOLD_BACKSTOP,
    HOLD_BEARING,
    HOLD_GEAR,
    HOLD_PULLEY,
    HOLD_SHIFT_0,
    HOLD_TURN,
    HOLD_TWIST,
    HOLDS,
    PER_WHEEL,
    SPIN,
    TOUCHES,
    TURN,
)
from chainsim.kernels.wheels import tooth_gap


@kernel
def chain_energy(chain, state):
    """Return kinetic, potential and stored energy of chain and carriers [J].

    Parameters
    ----------
    chain : Chain
    state : State
    """
    n = chain.n
    kinetic, lifted, stored = 0.0, 0.0, 0.0
    for i in range(n):
        vx, vy = state.vx[i], state.vy[i]
        ux, uy = state.vx[i + 1], state.vy[i + 1]
        re, im = chain.coupling_re[i], chain.coupling_im[i]
        kinetic += 0.5 * chain.mass[i] * (vx * vx + vy * vy)
        kinetic += vx * (re * ux - im * uy) + vy * (re * uy + im * ux)
        # weight W g on pin i: its potential is -Re(conj(W g) z), with gravity taken out in front
        gx = chain.weight_re[i] * chain.gx - chain.weight_im[i] * chain.gy
        gy = chain.weight_re[i] * chain.gy + chain.weight_im[i] * chain.gx
        lifted -= gx * state.x[i] + gy * state.y[i]
        if chain.open == 1 and i == n - 1:
            continue
        dx, dy = state.x[i + 1] - state.x[i], state.y[i + 1] - state.y[i]
        stretch = math.sqrt(dx * dx + dy * dy) - chain.pitch[i]
        half = 0.5 * chain.play
        beyond = max(stretch - half, 0.0) + min(stretch + half, 0.0)
        stored += 0.5 * chain.stiffness * beyond * beyond
        stored += 0.5 * chain.joint_stiffness * state.joint[i] ** 2
        if chain.front_bend > 0.0 or chain.back_bend > 0.0:
            stored += _bend_energy(chain, state, i)
    return kinetic, lifted, stored


@kernel
def _bend_energy(chain, state, i):
    """Return what the articulation limit of joint i stores [J]."""
    before = i - 1 if i > 0 else chain.n - 1
    ax, ay = state.x[i] - state.x[before], state.y[i] - state.y[before]
    bx, by = state.x[i + 1] - state.x[i], state.y[i + 1] - state.y[i]
    angle = math.atan2(ax * by - ay * bx, ax * bx + ay * by)
    if chain.front_bend > 0.0 and angle > chain.front_bend:
        return 0.5 * chain.bend_stiffness * (angle - chain.front_bend) ** 2
    if chain.back_bend > 0.0 and angle < -chain.back_bend:
        return 0.5 * chain.bend_stiffness * (angle + chain.back_bend) ** 2
    return 0.0


@kernel
def wheel_contact_energy(wheels, frames, near, state):
    """Return what pins on wheels store, normal and tangential [J].

    Parameters
    ----------
    wheels : ndarray of WHEEL, shape (n_wheels,)
    frames : Frames
        Of the state.
    near : Near
    state : State
    """
    stored = 0.0
    for e in range(near.count[0]):
        i, s = near.pin[e], near.wheel[e]
        wheel = wheels[s]
        c, sn = frames.cos[s], frames.sin[s]
        rx, ry = state.x[i] - frames.cx[s], state.y[i] - frames.cy[s]
        ox = rx - (c * wheel.offset_x - sn * wheel.offset_y)
        oy = ry - (sn * wheel.offset_x + c * wheel.offset_y)
        if wheel.teeth == 0:
            gap = math.sqrt(ox * ox + oy * oy) - wheel.seat_radius
        else:
            px, py = c * ox + sn * oy, -sn * ox + c * oy
            angle = math.atan2(py, px)
            step = 2.0 * math.pi / wheel.teeth
            seat = step * math.floor(angle / step + 0.5)
            radius = math.sqrt(px * px + py * py)
            radial = radius * math.cos(angle - seat)
            edge = abs(radius * math.sin(angle - seat))
            gap, _, _ = tooth_gap(wheel, radial - wheel.seat_radius, edge)
        if gap < 0.0:
            stored += 0.5 * wheel.stiffness * gap * gap
            stored += 0.5 * wheel.grip_stiffness * state.tooth[i] ** 2
    return stored


@kernel
def guide_energy(guides, near, state):
    """Return what pins on guides store [J].

    Parameters
    ----------
    guides : ndarray of GUIDE, shape (n_guides,)
    near : NearGuides
    state : State
    """
    stored = 0.0
    for e in range(near.count[0]):
        i = near.pin[e]
        guide = guides[near.guide[e]]
        px, py = closest_on_guide(guide, state.x[i], state.y[i])
        gap = math.sqrt((state.x[i] - px) ** 2 + (state.y[i] - py) ** 2) - guide.touch
        if gap < 0.0:
            stored += 0.5 * guide.stiffness * gap * gap
            stored += 0.5 * guide.grip_stiffness * state.guide[i] ** 2
    return stored


@kernel
def mount_energy(mounts, drive, gx, gy, state):
    """Return kinetic, potential and stored energy of mounts, wheels, weights and drive [J].

    Parameters
    ----------
    mounts : ndarray of MOUNT, shape (n_wheels,)
    drive : record of DRIVE
    gx, gy : float
        Gravity [m/s2].
    state : State
    """
    kinetic, lifted, stored = 0.0, 0.0, 0.0
    q, w, held = state.q, state.w, state.held
    for s in range(mounts.shape[0]):
        mount = mounts[s]
        base, hold_at = PER_WHEEL * s, HOLDS * s
        c, sn = math.cos(q[base + TURN]), math.sin(q[base + TURN])
        mx = c * mount.center_x - sn * mount.center_y
        my = sn * mount.center_x + c * mount.center_y
        rate = w[base + TURN]
        kinetic += 0.5 * mount.inertia * rate * rate
        kinetic += 0.5 * mount.wheel_inertia * w[base + SPIN] ** 2
        a, b = mount.axis_x, mount.axis_y
        px, py = a * q[base] - b * q[base + 1], b * q[base] + a * q[base + 1]
        vx, vy = a * w[base] - b * w[base + 1], b * w[base] + a * w[base + 1]
        if mount.free_0 + mount.free_1 + mount.free_turn > 0 or mount.arm == 1:
            kinetic += 0.5 * mount.mass * (vx * vx + vy * vy)
            kinetic += mount.mass * rate * (mx * vy - my * vx)
            lifted -= mount.mass * (gx * (px + mx) + gy * (py + my))
        guided = q[base + TURN] if mount.arm == 1 else q[base]
        stored += 0.5 * mount.spring_rate * guided * guided - mount.set_force * guided
        if mount.friction > 0.0:
            index = hold_at + (HOLD_TURN if mount.arm == 1 else HOLD_SHIFT_0)
            stored += 0.5 * mount.hold_stiffness * held[index] ** 2
        if mount.has_stops == 1:
            depth = max(mount.stop_low - guided, 0.0) + max(guided - mount.stop_high, 0.0)
            stored += 0.5 * mount.stop_stiffness * depth * depth
        if mount.blocked == 1:
            stored += 0.5 * mount.block_stiffness * (guided - mount.block_at) ** 2
        stored += 0.5 * mount.bearing_stiffness * held[hold_at + HOLD_BEARING] ** 2
        if mount.weight_mass > 0.0:
            kinetic += 0.5 * mount.weight_mass * w[base + DROP] ** 2
            lifted -= mount.weight_mass * math.sqrt(gx * gx + gy * gy) * q[base + DROP]
            stored += 0.5 * mount.cord_stiffness * max(q[base + DROP] - q[base], 0.0) ** 2
            stored += 0.5 * mount.pulley_stiffness * held[hold_at + HOLD_PULLEY] ** 2
    holds = HOLDS * mounts.shape[0]
    twist, half = held[holds + HOLD_TWIST], 0.5 * drive.backlash
    beyond = max(twist - half, 0.0) + min(twist + half, 0.0)
    stored += 0.5 * drive.stiffness * beyond * beyond
    if drive.motor == 1:
        kinetic += 0.5 * drive.inertia * w[PER_WHEEL * mounts.shape[0]] ** 2
        stored += 0.5 * drive.gear_stiffness * held[holds + HOLD_GEAR] ** 2
    if drive.backstop == 1:
        stop = held[HOLDS * drive.wheel + HOLD_BACKSTOP]
        stored += 0.5 * drive.backstop_stiffness * stop * stop
    return kinetic, lifted, stored


@kernel
def ball_energy(features, law, reach, frames, touches, gx, gy, state):
    """Return kinetic, potential and stored energy of the rolling balls [J].

    Parameters
    ----------
    features : ndarray of FEATURE, shape (n_features,)
    law : BallLaw
    reach : ndarray, shape (n_wheels,)
        Outermost radius of each wheel [m].
    frames : Frames
        Of the state.
    touches : Touches
    gx, gy : float
        Gravity [m/s2].
    state : State
    """
    kinetic, lifted, stored = 0.0, 0.0, 0.0
    for b in range(touches.used[0]):
        if touches.state[b] < FREE:
            continue
        px, py = state.bx[b], state.by[b]
        kinetic += 0.5 * law.mass * (state.bvx[b] ** 2 + state.bvy[b] ** 2)
        kinetic += 0.5 * law.inertia * state.bw[b] ** 2
        lifted -= law.mass * (gx * px + gy * py)
        for k in range(TOUCHES):
            code = touches.what[b, k]
            if code < 0:
                break
            slip = state.grip[b * TOUCHES + k]
            if code < TOUCH_BALL:
                depth = _feature_depth(features, code, law, state, px, py)
                feature = features[code]
                normal, tangential = feature.stiffness, feature.grip_stiffness
            else:
                normal, tangential = law.stiffness, law.grip_stiffness
                if code < TOUCH_WHEEL:
                    other = code - TOUCH_BALL
                    apart = math.sqrt((px - state.bx[other]) ** 2 + (py - state.by[other]) ** 2)
                    depth = 2.0 * law.radius - apart if touches.state[other] >= FREE else 0.0
                else:
                    s = code - TOUCH_WHEEL
                    apart = math.sqrt((px - frames.cx[s]) ** 2 + (py - frames.cy[s]) ** 2)
                    depth = reach[s] + law.radius - apart
            if depth > 0.0:
                stored += 0.5 * normal * depth * depth + 0.5 * tangential * slip * slip
    return kinetic, lifted, stored


@kernel
def _feature_depth(features, f, law, state, px, py):
    """Return how deep a ball at (px, py) sits in surface piece `f` [m]; negative apart from it."""
    feature = features[f]
    ax, ay, bx, by = feature_ends(feature, state)
    cx, cy, part = closest_on_piece(ax, ay, bx, by, px, py)
    if part <= 0.0 and feature.before >= 0:
        return -1.0
    if part >= 1.0 and feature.after >= 0:
        ex, ey, gx, gy = feature_ends(features[feature.after], state)
        _, _, further = closest_on_piece(ex, ey, gx, gy, px, py)
        if further > 0.0:
            return -1.0
    return law.radius + feature.half - math.sqrt((px - cx) ** 2 + (py - cy) ** 2)
