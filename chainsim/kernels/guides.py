"""Pins, or the backs of links, on fixed guides: straight rails with rounded ends and arc shoes."""

import math
from typing import NamedTuple

import numpy as np

from chainsim.kernels.contact import hold, normal_force
from chainsim.kernels.jit import kernel, woven

#: one record per guide; a guide is a curve, touched at the distance `touch` from it
GUIDE = np.dtype(
    [
        ("arc", np.int64),  # 0: straight from (ax, ay) to (bx, by); 1: arc about (ax, ay)
        ("ax", np.float64),  # [m]
        ("ay", np.float64),
        ("bx", np.float64),
        ("by", np.float64),
        ("radius", np.float64),  # of the arc [m]
        ("middle_x", np.float64),  # unit vector to the arc's middle
        ("middle_y", np.float64),
        ("cos_half", np.float64),  # cosine of half the arc
        ("touch", np.float64),  # roller radius, or half the height of a link's back [m]
        ("stiffness", np.float64),
        ("dissipation", np.float64),
        ("friction", np.float64),
        ("grip_stiffness", np.float64),
        ("grip_damping", np.float64),
        ("inverse_mass", np.float64),  # of a pin [1/kg]
    ]
)


class NearGuides(NamedTuple):
    """Pins that may touch a guide until the next search."""

    pin: np.ndarray
    guide: np.ndarray
    count: np.ndarray  # type: ignore[assignment]  # (1,) int


@kernel
def closest_on_guide(guide, px, py):
    """Return the point of a guide closest to (px, py) [m].

    Parameters
    ----------
    guide : record of GUIDE
    px, py : float
        [m].
    """
    if guide.arc == 0:
        ex, ey = guide.bx - guide.ax, guide.by - guide.ay
        part = ((px - guide.ax) * ex + (py - guide.ay) * ey) / (ex * ex + ey * ey)
        part = min(max(part, 0.0), 1.0)
        return guide.ax + part * ex, guide.ay + part * ey
    dx, dy = px - guide.ax, py - guide.ay
    distance = math.sqrt(dx * dx + dy * dy)
    ux, uy = dx / distance, dy / distance
    if ux * guide.middle_x + uy * guide.middle_y < guide.cos_half:
        sin_half = math.sqrt(1.0 - guide.cos_half * guide.cos_half)
        side = 1.0 if guide.middle_x * uy - guide.middle_y * ux >= 0.0 else -1.0
        ux = guide.middle_x * guide.cos_half - side * guide.middle_y * sin_half
        uy = guide.middle_y * guide.cos_half + side * guide.middle_x * sin_half
    return guide.ax + guide.radius * ux, guide.ay + guide.radius * uy


@kernel
def find_near_guides(guides, x, y, n, margin, near):
    """List the pins that may touch a guide before the next search (overwrites `near`).

    Parameters
    ----------
    guides : ndarray of GUIDE, shape (n_guides,)
    x, y : ndarray, shape (n_pins,)
        [m].
    n : int
        Number of pins (dimensionless).
    margin : float
        How far a pin may move before the next search [m].
    near : NearGuides
    """
    count = 0
    for g in range(guides.shape[0]):
        reach = guides[g].touch + margin
        for i in range(n):
            px, py = closest_on_guide(guides[g], x[i], y[i])
            dx, dy = x[i] - px, y[i] - py
            if dx * dx + dy * dy < reach * reach and count < near.pin.shape[0]:
                near.pin[count] = i
                near.guide[count] = g
                count += 1
    near.count[0] = count


@woven
def press_guides(guides, near, state, slip_rate, fx, fy, dt):
    """Add what fixed guides do to the pins; returns the dissipated power [W].

    Parameters
    ----------
    guides : ndarray of GUIDE, shape (n_guides,)
    near : NearGuides
    state : State
        `guide` deflections [m] advance in place where ``dt > 0``.
    slip_rate : ndarray, shape (n_pins,)
        Their rates [m/s]; overwritten where ``dt == 0``.
    fx, fy : ndarray, shape (n_pins,)
        Force on the pins [N]; added to.
    dt : float
        Inner step [s] or 0.
    """
    lost = 0.0
    for e in range(near.count[0]):
        i = near.pin[e]
        guide = guides[near.guide[e]]
        px, py = closest_on_guide(guide, state.x[i], state.y[i])
        dx, dy = state.x[i] - px, state.y[i] - py
        distance = math.sqrt(dx * dx + dy * dy)
        gap = distance - guide.touch
        if gap >= 0.0 or distance == 0.0:
            if dt > 0.0:
                state.guide[i] = 0.0
            continue
        nx, ny = dx / distance, dy / distance
        opening = state.vx[i] * nx + state.vy[i] * ny
        sliding = state.vy[i] * nx - state.vx[i] * ny
        push, damped = normal_force(
            -gap, -opening, guide.stiffness, guide.dissipation, dt * guide.inverse_mass
        )
        limit = guide.friction * push
        rub, deflection, rate, power = hold(
            state.guide[i], sliding, -limit, limit, guide.grip_stiffness, guide.grip_damping, dt
        )
        if dt > 0.0:
            state.guide[i] = deflection
        else:
            slip_rate[i] = rate
        fx[i] += push * nx + rub * ny
        fy[i] += push * ny - rub * nx
        lost += power - damped * opening
    return lost
