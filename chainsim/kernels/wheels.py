"""Pins on toothed wheels and smooth rollers: where a pin stands on the outline, and what it feels.

The outline of one pitch sector is folded about the radius of its seat: seat arc, straight flank,
rounded corner, land.  ``u`` points radially outward, ``w`` along the wheel's edge, both from the
place of a seated pin.  There is one closest point, so one force, per pin and tooth.
"""

import math
from typing import NamedTuple

import numpy as np

from chainsim.kernels.contact import hold, normal_force
from chainsim.kernels.jit import inlined, kernel, woven

#: one record per wheel; lengths [m], stiffness [N/m]
WHEEL = np.dtype(
    [
        ("teeth", np.int64),  # 0: smooth roller
        ("side", np.float64),  # +1 inside the loop, -1 outside
        ("seat_radius", np.float64),  # axle to a seated pin
        ("tan_half", np.float64),  # tangent of half the tooth angle
        ("cos_step", np.float64),  # of one tooth angle
        ("sin_step", np.float64),
        ("cos_flank", np.float64),  # flank direction in (u, w)
        ("sin_flank", np.float64),
        ("flank_end", np.float64),  # where the flank meets the corner, along it
        ("clearance", np.float64),  # seat arc radius less roller radius
        ("corner_u", np.float64),  # center of the corner arc
        ("corner_w", np.float64),
        ("corner_reach", np.float64),  # corner radius plus roller radius
        ("cos_half", np.float64),  # of half the tooth angle: the land's normal
        ("sin_half", np.float64),
        ("land_height", np.float64),  # along that normal, of a pin center that lies on the land
        ("has_land", np.int64),
        ("reach", np.float64),  # pins farther from the axle than this can't touch
        ("stiffness", np.float64),
        ("dissipation", np.float64),  # [s/m]
        ("friction", np.float64),  # dimensionless
        ("grip_stiffness", np.float64),
        ("grip_damping", np.float64),  # [N s/m]
        ("inverse_mass", np.float64),  # of a pin [1/kg]
        ("offset_x", np.float64),  # outline center in the wheel's frame (eccentricity)
        ("offset_y", np.float64),
        ("middle_x", np.float64),  # outward direction at mid-wrap
        ("middle_y", np.float64),
        ("tip_radius", np.float64),  # outermost radius of the outline, for balls
    ]
)


class Near(NamedTuple):
    """Pins that may touch a wheel until the next search."""

    pin: np.ndarray  # (capacity,) int
    wheel: np.ndarray  # (capacity,) int
    seat_x: np.ndarray  # (capacity,) unit vector of the seat last found, in the wheel's frame
    seat_y: np.ndarray
    count: np.ndarray  # type: ignore[assignment]  # (1,) int


class Frames(NamedTuple):
    """Where every wheel stands now: one entry per wheel."""

    cx: np.ndarray  # axle [m]
    cy: np.ndarray
    vx: np.ndarray  # axle velocity [m/s]
    vy: np.ndarray
    cos: np.ndarray  # of the wheel's angle
    sin: np.ndarray
    rate: np.ndarray  # rotation rate [rad/s]
    fx: np.ndarray  # force of chain and balls on the wheel [N]
    fy: np.ndarray
    torque: np.ndarray  # about the axle [N m]


class Watch(NamedTuple):
    """Extremes of the sample interval that the contact kernels keep."""

    penetration: np.ndarray  # (1,) deepest pin contact [m]
    ride: np.ndarray  # (wheels,) largest height of a touching pin over its seat [m]
    engaged: np.ndarray  # (wheels,) pins in contact in the last step
    load: np.ndarray  # (wheels,) largest hub force [N]


@kernel
def find_near(wheels, frames, x, y, n, margin, near):
    """List the pins within reach of a wheel; far pins cost nothing until the next search.

    Parameters
    ----------
    wheels : ndarray of WHEEL, shape (n_wheels,)
    frames : Frames
    x, y : ndarray, shape (n_pins,)
        Pin positions [m].
    n : int
        Number of pins (dimensionless).
    margin : float
        How far a pin may move before the next search [m].
    near : Near
        Overwritten.
    """
    count = 0
    for s in range(wheels.shape[0]):
        reach = wheels[s].reach + margin
        limit = reach * reach
        cx, cy = frames.cx[s], frames.cy[s]
        for i in range(n):
            dx, dy = x[i] - cx, y[i] - cy
            if dx * dx + dy * dy < limit and count < near.pin.shape[0]:
                near.pin[count] = i
                near.wheel[count] = s
                count += 1
    near.count[0] = count
    for entry in range(count):
        i, s = near.pin[entry], near.wheel[entry]
        _first_seat(wheels[s], frames, s, x[i] - frames.cx[s], y[i] - frames.cy[s], near, entry)


@kernel
def _first_seat(wheel, frames, s, dx, dy, near, entry):
    """Write the unit vector of the seat nearest to a pin, in the wheel's frame, to ``near``."""
    if wheel.teeth == 0:
        near.seat_x[entry], near.seat_y[entry] = 1.0, 0.0
        return
    c, sn = frames.cos[s], frames.sin[s]
    angle = math.atan2(-sn * dx + c * dy - wheel.offset_y, c * dx + sn * dy - wheel.offset_x)
    step = 2.0 * math.pi / wheel.teeth
    seat = step * math.floor(angle / step + 0.5)
    near.seat_x[entry] = math.cos(seat)
    near.seat_y[entry] = math.sin(seat)


@inlined
def tooth_gap(wheel, u, w):
    """Return the gap between a pin and the outline, and the direction away from the outline.

    Parameters
    ----------
    wheel : record of WHEEL
    u, w : float
        Pin center from its seat: radially outward, along the edge (``w >= 0``) [m].

    Returns
    -------
    gap : float
        Negative in contact [m].
    normal_u, normal_w : float
        Unit normal, from the outline to the pin (dimensionless).
    """
    along = u * wheel.cos_flank + w * wheel.sin_flank
    if along <= 0.0:
        distance = math.sqrt(u * u + w * w)
        if distance <= wheel.clearance or distance == 0.0:
            return wheel.clearance - distance, 1.0, 0.0
        return wheel.clearance - distance, -u / distance, -w / distance
    if along < wheel.flank_end:
        across = u * wheel.sin_flank - w * wheel.cos_flank
        return across + wheel.clearance, wheel.sin_flank, -wheel.cos_flank
    du, dw = u - wheel.corner_u, w - wheel.corner_w
    if wheel.has_land == 1 and dw * wheel.cos_half - du * wheel.sin_half > 0.0:
        height = (u + wheel.seat_radius) * wheel.cos_half + w * wheel.sin_half
        return height - wheel.land_height, wheel.cos_half, wheel.sin_half
    distance = math.sqrt(du * du + dw * dw)
    return distance - wheel.corner_reach, du / distance, dw / distance


@woven
def press_wheels(wheels, frames, near, state, slip_rate, fx, fy, watch, dt):
    """Add what pins and wheels do to each other.

    Force acts along one line through the pin's center, on both: sums of force and torque stay zero.

    Parameters
    ----------
    wheels : ndarray of WHEEL, shape (n_wheels,)
    frames : Frames
        `fx`, `fy` [N] and `torque` [N m] are added to.
    near : Near
        Its seats are updated as pins pass from one sector to the next.
    state : State
        Pins; `tooth` deflections [m] advance in place where ``dt > 0``.
    slip_rate : ndarray, shape (n_pins,)
        Rates of those deflections [m/s]; overwritten where ``dt == 0``.
    fx, fy : ndarray, shape (n_pins,)
        Force on the pins [N]; added to.
    watch : Watch
        Extremes; updated.
    dt : float
        Inner step [s] or 0.

    Returns
    -------
    contact_power, friction_power : float
        Dissipated [W].
    """
    lost_contact = 0.0
    lost_friction = 0.0
    for s in range(wheels.shape[0]):
        watch.engaged[s] = 0.0
    for e in range(near.count[0]):
        i, s = near.pin[e], near.wheel[e]
        wheel = wheels[s]
        c, sn = frames.cos[s], frames.sin[s]
        rx, ry = state.x[i] - frames.cx[s], state.y[i] - frames.cy[s]
        if rx * rx + ry * ry > wheel.reach * wheel.reach:
            if dt > 0.0:
                state.tooth[i] = 0.0
            continue
        ox = rx - (c * wheel.offset_x - sn * wheel.offset_y)
        oy = ry - (sn * wheel.offset_x + c * wheel.offset_y)
        if wheel.teeth == 0:
            distance = math.sqrt(ox * ox + oy * oy)
            gap = distance - wheel.seat_radius
            nx, ny = ox / distance, oy / distance
            height = gap
        else:
            px, py = c * ox + sn * oy, -sn * ox + c * oy
            sx, sy = near.seat_x[e], near.seat_y[e]
            radial = px * sx + py * sy
            edge = py * sx - px * sy
            for _ in range(wheel.teeth):
                if abs(edge) <= wheel.tan_half * radial:
                    break
                turn = wheel.sin_step if edge > 0.0 else -wheel.sin_step
                sx, sy = sx * wheel.cos_step - sy * turn, sx * turn + sy * wheel.cos_step
                radial = px * sx + py * sy
                edge = py * sx - px * sy
            near.seat_x[e], near.seat_y[e] = sx, sy
            mirror = 1.0 if edge >= 0.0 else -1.0
            height = radial - wheel.seat_radius
            gap, nu, nw = tooth_gap(wheel, height, mirror * edge)
            nw *= mirror
            lx, ly = nu * sx - nw * sy, nu * sy + nw * sx
            nx, ny = c * lx - sn * ly, sn * lx + c * ly
        if gap >= 0.0:
            if dt > 0.0:
                state.tooth[i] = 0.0
            continue
        wx = state.vx[i] - (frames.vx[s] - frames.rate[s] * ry)
        wy = state.vy[i] - (frames.vy[s] + frames.rate[s] * rx)
        opening = wx * nx + wy * ny
        sliding = wy * nx - wx * ny
        push, damped = normal_force(
            -gap, -opening, wheel.stiffness, wheel.dissipation, dt * wheel.inverse_mass
        )
        limit = wheel.friction * push
        rub, deflection, rate, power = hold(
            state.tooth[i], sliding, -limit, limit, wheel.grip_stiffness, wheel.grip_damping, dt
        )
        if dt > 0.0:
            state.tooth[i] = deflection
        else:
            slip_rate[i] = rate
        force_x = push * nx + rub * ny
        force_y = push * ny - rub * nx
        fx[i] += force_x
        fy[i] += force_y
        frames.fx[s] -= force_x
        frames.fy[s] -= force_y
        frames.torque[s] -= rx * force_y - ry * force_x
        lost_contact -= damped * opening
        lost_friction += power
        watch.engaged[s] += 1.0
        if -gap > watch.penetration[0]:
            watch.penetration[0] = -gap
        if height > watch.ride[s]:
            watch.ride[s] = height
    return lost_contact, lost_friction


@kernel
def chain_through(wheel, frames, s, near, x, y, n, last):
    """Return the link index, with its fraction, at mid-wrap of a wheel; -1 where none lies there.

    Where the ray at mid-wrap cuts the chain more than once, the cut nearest to the last one counts,
    so that the count is followed continuously.

    Parameters
    ----------
    wheel : record of WHEEL
    frames : Frames
    s : int
        Which wheel (dimensionless).
    near : Near
    x, y : ndarray, shape (n_pins + 1,)
        Pin positions [m].
    n : int
        Number of pins (dimensionless).
    last : float
        Index at the last look (dimensionless); negative: take the cut nearest to the axle.
    """
    mx, my = wheel.middle_x, wheel.middle_y
    best = 1e30
    found = -1.0
    for e in range(near.count[0]):
        if near.wheel[e] != s:
            continue
        i = near.pin[e]
        ax, ay = x[i] - frames.cx[s], y[i] - frames.cy[s]
        bx, by = x[i + 1] - frames.cx[s], y[i + 1] - frames.cy[s]
        before = (mx * ay - my * ax) * wheel.side
        behind = (mx * by - my * bx) * wheel.side
        ahead = mx * ax + my * ay
        if before <= 0.0 < behind and ahead > 0.0:
            index = i + before / (before - behind)
            off = index - last
            apart = ahead if last < 0.0 else abs(off - n * math.floor(off / n + 0.5))
            if apart < best:
                best = apart
                found = index
    return found
