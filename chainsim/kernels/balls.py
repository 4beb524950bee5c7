"""Balls: spheres that roll in the plane, on pockets, walls, chain, wheels and each other.

Every surface a ball can touch is a chain of straight pieces with a round cross-section (capsules):
the distance to it is smooth, a thin lip has two sides and can't pull a ball through, a convex
corner belongs to one piece, and a concave corner gives two contacts.
"""

import math
from typing import NamedTuple

import numpy as np

from chainsim.kernels.contact import hold, normal_force
from chainsim.kernels.jit import inlined, kernel, woven
from chainsim.kernels.layout import TOUCHES

#: one record per piece of surface
FEATURE = np.dtype(
    [
        ("link", np.int64),  # the link it is rigid on; -1: fixed in the frame
        ("carrier", np.int64),  # the carrier it belongs to; -1: none
        ("p_re", np.float64),  # first end: link map c, or place in the frame [m]
        ("p_im", np.float64),
        ("q_re", np.float64),  # second end
        ("q_im", np.float64),
        ("half", np.float64),  # half its thickness [m]
        ("before", np.int64),  # piece that shares the first end; -1: none
        ("after", np.int64),  # piece that shares the second end; -1: none
        ("stiffness", np.float64),
        ("dissipation", np.float64),
        ("friction", np.float64),
        ("grip_stiffness", np.float64),
        ("grip_damping", np.float64),
        ("inverse_mass", np.float64),  # of the lighter of ball and pin [1/kg]
    ]
)

#: ball states
EMPTY, WAITING, FREE, SEATED = range(4)
#: what a touch refers to; features are counted from 0, then links, balls and wheels by these codes
TOUCH_NONE = -1
TOUCH_BALL = 1_000_000
TOUCH_WHEEL = 2_000_000


class BallLaw(NamedTuple):
    """What all balls share."""

    radius: float  # [m]
    mass: float  # [kg]
    inertia: float  # 2/5 m r^2 [kg m2]
    stiffness: float  # ball on ball and ball on wheel [N/m]
    dissipation: float  # [s/m]
    friction: float  # dimensionless
    grip_stiffness: float  # [N/m]
    grip_damping: float  # [N s/m]
    inverse_mass: float  # of a ball [1/kg]


class Touches(NamedTuple):
    """What each ball may touch until the next search, and what it felt in the interval."""

    what: np.ndarray  # (balls, TOUCHES) code
    state: np.ndarray  # (balls,) EMPTY, WAITING, FREE, SEATED
    used: np.ndarray  # (1,) slots in use: none beyond it holds a ball
    fx: np.ndarray  # (balls,) force [N]
    fy: np.ndarray
    torque: np.ndarray  # (balls,) [N m]
    peak: np.ndarray  # (balls,) largest raw acceleration of the sample interval [m/s2]
    carrier_n: (
        np.ndarray
    )  # (carriers,) sum of (b/p)(F.n) of the sample, for the reported tension [N]


@kernel
def find_touches(features, law, state, frames, reach, n, margin, touches):
    """List what every ball may touch before the next search; known touches keep their friction.

    Parameters
    ----------
    features : ndarray of FEATURE, shape (n_features,)
    law : BallLaw
    state : State
        `grip` deflections [m] are rearranged with the list.
    frames : Frames
    reach : ndarray, shape (n_wheels,)
        Outermost radius of each wheel [m].
    n : int
        Number of pins (dimensionless).
    margin : float
        How far things may move toward each other before the next search [m].
    touches : Touches
        `what` is overwritten.
    """
    what, grip = touches.what, state.grip
    for b in range(touches.used[0]):
        old_what = (what[b, 0], what[b, 1], what[b, 2], what[b, 3])
        more_what = (what[b, 4], what[b, 5], what[b, 6], what[b, 7])
        base = b * TOUCHES
        old_grip = (grip[base], grip[base + 1], grip[base + 2], grip[base + 3])
        more_grip = (grip[base + 4], grip[base + 5], grip[base + 6], grip[base + 7])
        count = 0
        if touches.state[b] >= FREE:
            near = margin
            count = TOUCHES + 1
            # where more is near than fits, only what is nearer counts: a touch that is left out
            # would be found later, deep inside
            while count > TOUCHES and near > 0.1 * margin:
                count = _near_features(features, law, state, b, near, what)
                count = _near_bodies(law, state, frames, reach, touches, b, near, what, count)
                near *= 0.5
        for k in range(TOUCHES):
            if k >= count:
                what[b, k] = TOUCH_NONE
            kept = 0.0
            for m in range(4):
                if what[b, k] >= 0 and old_what[m] == what[b, k]:
                    kept = old_grip[m]
                if what[b, k] >= 0 and more_what[m] == what[b, k]:
                    kept = more_grip[m]
            grip[base + k] = kept


@kernel
def _near_features(features, law, state, b, margin, what):
    """Write the surface pieces near ball `b` that fit; returns how many there are."""
    count = 0
    px, py = state.bx[b], state.by[b]
    for f in range(features.shape[0]):
        feature = features[f]
        if feature.link >= 0:
            # a coarse look at the link first: no pocket is larger than eight pitches
            i = feature.link
            dx, dy = state.x[i] - px, state.y[i] - py
            length2 = (state.x[i + 1] - state.x[i]) ** 2 + (state.y[i + 1] - state.y[i]) ** 2
            if dx * dx + dy * dy > 64.0 * length2 + 16.0 * law.radius**2:
                continue
        ax, ay, bx, by = feature_ends(feature, state)
        cx, cy, _ = closest_on_piece(ax, ay, bx, by, px, py)
        limit = law.radius + feature.half + margin
        if (cx - px) ** 2 + (cy - py) ** 2 < limit * limit:
            if count < TOUCHES:
                what[b, count] = f
            count += 1
    return count


@kernel
def _near_bodies(law, state, frames, reach, touches, b, margin, what, count):
    """Add wheels and other balls near ball `b`; returns how many entries there are now."""
    px, py = state.bx[b], state.by[b]
    for s in range(reach.shape[0]):
        limit = reach[s] + law.radius + margin
        if (frames.cx[s] - px) ** 2 + (frames.cy[s] - py) ** 2 < limit * limit:
            if count < TOUCHES:
                what[b, count] = TOUCH_WHEEL + s
            count += 1
    limit = 2.0 * law.radius + margin
    for other in range(b + 1, touches.used[0]):
        if touches.state[other] < FREE:
            continue
        distance2 = (state.bx[other] - px) ** 2 + (state.by[other] - py) ** 2
        if distance2 < limit * limit:
            if count < TOUCHES:
                what[b, count] = TOUCH_BALL + other
            count += 1
    return count


@kernel
def feature_ends(feature, state):
    """Return both ends of a surface piece in the frame: ax, ay, bx, by [m].

    Parameters
    ----------
    feature : record of FEATURE
    state : State
    """
    if feature.link < 0:
        return feature.p_re, feature.p_im, feature.q_re, feature.q_im
    i = feature.link
    dx, dy = state.x[i + 1] - state.x[i], state.y[i + 1] - state.y[i]
    return (
        state.x[i] + feature.p_re * dx - feature.p_im * dy,
        state.y[i] + feature.p_re * dy + feature.p_im * dx,
        state.x[i] + feature.q_re * dx - feature.q_im * dy,
        state.y[i] + feature.q_re * dy + feature.q_im * dx,
    )


@inlined
def closest_on_piece(ax, ay, bx, by, px, py):
    """Return the closest point [m] of a straight piece to (px, py), and where it lies along it.

    Parameters
    ----------
    ax, ay, bx, by, px, py : float
        Ends of the piece and the point [m].
    """
    ex, ey = bx - ax, by - ay
    part = ((px - ax) * ex + (py - ay) * ey) / (ex * ex + ey * ey)
    clamped = min(max(part, 0.0), 1.0)
    return ax + clamped * ex, ay + clamped * ey, part


@woven
def press_balls(features, law, state, grip_rate, frames, fx, fy, touches, reach, n, dt):
    """Add what balls and everything they touch do to each other.

    Parameters
    ----------
    features : ndarray of FEATURE, shape (n_features,)
    law : BallLaw
    state : State
        `grip` deflections [m] advance in place where ``dt > 0``.
    grip_rate : ndarray, shape (balls * TOUCHES,)
        Rates of those deflections [m/s]; overwritten where ``dt == 0``.
    frames : Frames
        Force and torque on the wheels; added to.
    fx, fy : ndarray, shape (n_pins,)
        Force on the pins [N]; added to.
    touches : Touches
        `fx`, `fy`, `torque` are overwritten without weight; `carrier_n` is added to.
    reach : ndarray, shape (n_wheels,)
        Outermost radius of each wheel [m].
    n : int
        Number of pins (dimensionless).
    dt : float
        Inner step [s] or 0.

    Returns
    -------
    power : float
        Dissipated [W].
    """
    lost = 0.0
    count = touches.used[0]
    for b in range(count):
        touches.fx[b] = touches.fy[b] = touches.torque[b] = 0.0
    for b in range(count):
        if touches.state[b] < FREE:
            continue
        for k in range(TOUCHES):
            code = touches.what[b, k]
            if code < 0:
                break
            if code < TOUCH_BALL:
                lost += _press_feature(
                    features, code, law, state, grip_rate, fx, fy, touches, b, k, n, dt
                )
            elif code < TOUCH_WHEEL:
                lost += _press_ball(law, state, grip_rate, touches, b, code - TOUCH_BALL, k, dt)
            else:
                s = code - TOUCH_WHEEL
                lost += _press_wheel(law, state, grip_rate, frames, reach[s], touches, b, s, k, dt)
    return lost


@kernel
def _press_feature(features, f, law, state, grip_rate, fx, fy, touches, b, k, n, dt):
    """Press ball `b` on surface piece `f`; returns the dissipated power [W]."""
    feature = features[f]
    slot = b * TOUCHES + k
    px, py = state.bx[b], state.by[b]
    ax, ay, bx, by = feature_ends(feature, state)
    cx, cy, part = closest_on_piece(ax, ay, bx, by, px, py)
    dx, dy = px - cx, py - cy
    reach = law.radius + feature.half
    squared = dx * dx + dy * dy
    gone = squared >= reach * reach
    if not gone and part <= 0.0 and feature.before >= 0:
        gone = True
    if not gone and part >= 1.0 and feature.after >= 0:
        ex, ey, gx, gy = feature_ends(features[feature.after], state)
        _, _, further = closest_on_piece(ex, ey, gx, gy, px, py)
        gone = further > 0.0
    if gone:
        if dt > 0.0:
            state.grip[slot] = 0.0
        return 0.0
    distance = math.sqrt(squared)
    nx, ny = dx / distance, dy / distance
    tx, ty = px - nx * law.radius, py - ny * law.radius
    i = feature.link
    sx, sy, c_re, c_im = 0.0, 0.0, 0.0, 0.0
    if i >= 0:
        lx, ly = state.x[i + 1] - state.x[i], state.y[i + 1] - state.y[i]
        inverse = 1.0 / (lx * lx + ly * ly)
        rx, ry = tx - state.x[i], ty - state.y[i]
        c_re, c_im = (rx * lx + ry * ly) * inverse, (ry * lx - rx * ly) * inverse
        ux, uy = state.vx[i + 1] - state.vx[i], state.vy[i + 1] - state.vy[i]
        sx = state.vx[i] + c_re * ux - c_im * uy
        sy = state.vy[i] + c_re * uy + c_im * ux
    force_x, force_y, power = _rub_ball(
        feature, law, state, grip_rate, touches, b, slot, nx, ny, reach - distance, sx, sy, dt
    )
    if i >= 0:
        j = i + 1 if i + 1 < n else 0
        jx, jy = c_re * force_x + c_im * force_y, c_re * force_y - c_im * force_x
        fx[j] -= jx
        fy[j] -= jy
        fx[i] -= force_x - jx
        fy[i] -= force_y - jy
        if feature.carrier >= 0 and dt > 0.0:
            length = math.sqrt(lx * lx + ly * ly)
            touches.carrier_n[feature.carrier] += c_im * (force_x * ly - force_y * lx) / length
    return power


@kernel
def _rub_ball(law_of, law, state, grip_rate, touches, b, slot, nx, ny, depth, sx, sy, dt):
    """Return the force on ball `b` from a surface that moves at (sx, sy), and the lost power."""
    radius = law.radius
    wx = state.bvx[b] + state.bw[b] * radius * ny - sx
    wy = state.bvy[b] - state.bw[b] * radius * nx - sy
    opening = wx * nx + wy * ny
    sliding = wy * nx - wx * ny
    push, damped = normal_force(
        depth, -opening, law_of.stiffness, law_of.dissipation, dt * law_of.inverse_mass
    )
    limit = law_of.friction * push
    rub, deflection, slip, power = hold(
        state.grip[slot], sliding, -limit, limit, law_of.grip_stiffness, law_of.grip_damping, dt
    )
    if dt > 0.0:
        state.grip[slot] = deflection
    else:
        grip_rate[slot] = slip
    force_x, force_y = push * nx + rub * ny, push * ny - rub * nx
    touches.fx[b] += force_x
    touches.fy[b] += force_y
    # the contact point lies at -radius n from the center
    touches.torque[b] += radius * rub
    return force_x, force_y, power - damped * opening


@kernel
def _press_ball(law, state, grip_rate, touches, b, other, k, dt):
    """Press two balls on each other; returns the dissipated power [W]."""
    slot = b * TOUCHES + k
    dx, dy = state.bx[b] - state.bx[other], state.by[b] - state.by[other]
    distance = math.sqrt(dx * dx + dy * dy)
    depth = 2.0 * law.radius - distance
    if depth <= 0.0 or touches.state[other] < FREE:
        if dt > 0.0:
            state.grip[slot] = 0.0
        return 0.0
    nx, ny = dx / distance, dy / distance
    arm = distance - law.radius
    sx = state.bvx[other] - state.bw[other] * arm * ny
    sy = state.bvy[other] + state.bw[other] * arm * nx
    force_x, force_y, power = _rub_ball(
        law, law, state, grip_rate, touches, b, slot, nx, ny, depth, sx, sy, dt
    )
    touches.fx[other] -= force_x
    touches.fy[other] -= force_y
    touches.torque[other] -= arm * (nx * force_y - ny * force_x)
    return power


@kernel
def _press_wheel(law, state, grip_rate, frames, reach, touches, b, s, k, dt):
    """Press a ball on the tips of a wheel, taken as a round disk; returns the power [W]."""
    slot = b * TOUCHES + k
    dx, dy = state.bx[b] - frames.cx[s], state.by[b] - frames.cy[s]
    distance = math.sqrt(dx * dx + dy * dy)
    depth = reach + law.radius - distance
    if depth <= 0.0 or distance == 0.0:
        if dt > 0.0:
            state.grip[slot] = 0.0
        return 0.0
    nx, ny = dx / distance, dy / distance
    arm = distance - law.radius
    sx = frames.vx[s] - frames.rate[s] * arm * ny
    sy = frames.vy[s] + frames.rate[s] * arm * nx
    force_x, force_y, power = _rub_ball(
        law, law, state, grip_rate, touches, b, slot, nx, ny, depth, sx, sy, dt
    )
    frames.fx[s] -= force_x
    frames.fy[s] -= force_y
    frames.torque[s] -= arm * (nx * force_y - ny * force_x)
    return power


@woven
def accelerate_balls(law, gx, gy, touches, state, rate):
    """Write the accelerations of the balls, and keep the largest raw one of the interval.

    Parameters
    ----------
    law : BallLaw
    gx, gy : float
        Gravity, less the frame's acceleration [m/s2].
    touches : Touches
        `peak` [m/s2] is updated.
    state : State
    rate : State
        `bvx`, `bvy`, `bw` are overwritten.
    """
    for b in range(touches.used[0]):
        if touches.state[b] < FREE:
            rate.bvx[b] = rate.bvy[b] = rate.bw[b] = 0.0
            continue
        ax, ay = touches.fx[b] / law.mass, touches.fy[b] / law.mass
        rate.bvx[b], rate.bvy[b] = ax + gx, ay + gy
        rate.bw[b] = touches.torque[b] / law.inertia
        raw = math.sqrt((ax + gx) ** 2 + (ay + gy) ** 2)
        if raw > touches.peak[b]:
            touches.peak[b] = raw
