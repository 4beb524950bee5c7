"""The right-hand side of the whole lift, and the inner step that advances it.

The inner step is the semi-implicit Euler scheme (symplectic for the conservative part): evaluate
the forces, kick the velocities, drift the positions.  Damping is evaluated at the velocity before
the kick.  First order in the step; stable for a damped oscillator below
``(2 / w) (sqrt(1 + zeta^2) - zeta)``.
"""

import math
from typing import NamedTuple

import numpy as np

from chainsim.kernels.balls import BallLaw, Touches, accelerate_balls, find_touches, press_balls
from chainsim.kernels.carriers import (
    Bands,
    Blocks,
    accelerate_bands,
    accelerate_pins,
)
from chainsim.kernels.contact import RELAXATION
from chainsim.kernels.drive import drive_wheel
from chainsim.kernels.guides import NearGuides, find_near_guides, press_guides
from chainsim.kernels.jit import kernel, woven
from chainsim.kernels.layout import (
    LOSS_AIR,
    LOSS_BALL,
    LOSS_BEARING,
    LOSS_CONTACT,
    LOSS_DRIVE,
    LOSS_GUIDE,
    LOSS_JOINT,
    LOSS_LINK,
    LOSS_MOUNT,
    LOSS_TOOTH,
    PER_WHEEL,
    WORK_DRIVE,
    WORK_KNOCK,
)
from chainsim.kernels.links import (
    Chain,
    ChainWork,
    apply_couples,
    drag_sideways,
    limit_bend,
    pull_links,
    rub_joints,
    sum_pin_forces,
    turn_links,
)
from chainsim.kernels.mounts import move_mounts, place_wheels
from chainsim.kernels.seats import Seats
from chainsim.kernels.wheels import Frames, Near, Watch, find_near, press_wheels

#: the one record of the surroundings
WORLD = np.dtype(
    [
        ("gx", np.float64),  # gravity in the frame [m/s2]
        ("gy", np.float64),
        ("knock_x", np.float64),  # peak acceleration of the frame [m/s2]
        ("knock_y", np.float64),
        ("knock_start", np.float64),  # [s]
        ("knock_time", np.float64),  # length of the half-sine pulse [s]; 0: none
        ("jam_on", np.int64),  # 1: a pocket is caught on the frame
        ("jam_link", np.int64),
        ("jam_re", np.float64),  # link map of the caught point
        ("jam_im", np.float64),
        ("jam_x", np.float64),  # where it is caught [m]
        ("jam_y", np.float64),
        ("jam_stiffness", np.float64),  # [N/m]
        ("jam_release", np.float64),  # [N]
        ("zone_x", np.float64),  # upward unit vector
        ("zone_y", np.float64),
        ("zone", np.float64),  # height where the discharge zone begins [m]
        ("per_window", np.float64),  # one over the averaging window [1/s]
        ("margin", np.float64),  # of the contact search [m]
    ]
)

#: inner steps between two contact searches, at most
SEARCH_STEPS = 32
#: speed that something at rest may gain before the next search [m/s]
SEARCH_SPEED = 1.0


class Parts(NamedTuple):
    """What the lift is made of."""

    chain: Chain
    wheels: np.ndarray
    mounts: np.ndarray
    drive: np.ndarray  # one record
    world: np.ndarray  # one record
    blocks: Blocks
    bands: Bands
    guides: np.ndarray
    features: np.ndarray
    law: BallLaw
    pockets: np.ndarray
    reach: np.ndarray  # (wheels,) outermost radius, for balls [m]
    carrier_links: np.ndarray  # (carriers,) link of each carrier


class Work(NamedTuple):
    """Scratch arrays, lists and running sums."""

    links: ChainWork
    frames: Frames
    near: Near
    near_guides: NearGuides
    touches: Touches
    seats: Seats
    watch: Watch
    reaction: np.ndarray  # (wheels,) torque of the drive on the mounts [N m]
    stop_force: np.ndarray  # (wheels,) [N]
    chain_torque: np.ndarray  # (wheels,) of chain and balls on each wheel [N m]
    power: np.ndarray  # (16,) rates of the ledger [W]
    wheel_sums: np.ndarray  # (wheels, 4) sums of force x, y, torque; largest stop force
    drive_sums: np.ndarray  # (4,) sums of torque and power on the sprocket, last torque, largest
    search_in: np.ndarray  # (1,) inner steps until the next contact search
    step: np.ndarray  # (1,) inner step [s]


@kernel
def frame_gravity(world, t):
    """Return gravity less the acceleration of a knocked frame: gx, gy, and that acceleration.

    Parameters
    ----------
    world : record of WORLD
    t : float
        Time [s].
    """
    part = t - world.knock_start
    if world.knock_time <= 0.0 or part < 0.0 or part > world.knock_time:
        return world.gx, world.gy, 0.0, 0.0
    pulse = math.sin(math.pi * part / world.knock_time)
    ax, ay = pulse * world.knock_x, pulse * world.knock_y
    return world.gx - ax, world.gy - ay, ax, ay


@woven
def close_loop(state, n):
    """Copy pin 0 to the ghost behind the last pin (writes `state`).

    Parameters
    ----------
    state : State
    n : int
        Number of pins (dimensionless).
    """
    state.x[n], state.y[n] = state.x[0], state.y[0]
    state.vx[n], state.vy[n] = state.vx[0], state.vy[0]


@woven
def search(parts, state, work, dt):
    """List what may touch what, and say for how many inner steps the lists hold.

    Parameters
    ----------
    parts : Parts
    state : State
    work : Work
        Its lists, and the steps until the next search, are overwritten.
    dt : float
        Inner step [s].
    """
    n = parts.chain.n
    margin = parts.world[0].margin
    place_wheels(parts.mounts, state.q, state.w, work.frames)
    find_near(parts.wheels, work.frames, state.x, state.y, n, margin, work.near)
    if parts.guides.shape[0] > 0:
        find_near_guides(parts.guides, state.x, state.y, n, margin, work.near_guides)
    if parts.law.mass > 0.0:
        find_touches(
            parts.features, parts.law, state, work.frames, parts.reach, n, margin, work.touches
        )
    fastest = 0.0
    for i in range(n):
        fastest = max(fastest, state.vx[i] * state.vx[i] + state.vy[i] * state.vy[i])
    for b in range(work.touches.used[0]):
        fastest = max(fastest, state.bvx[b] * state.bvx[b] + state.bvy[b] * state.bvy[b])
    reach_time = margin / (2.0 * math.sqrt(fastest) + SEARCH_SPEED)
    work.search_in[0] = max(1, min(SEARCH_STEPS, int(reach_time / dt)))


@woven
def evaluate(t, parts, state, rate, work, dt):
    """Write all accelerations and loss rates at time `t`.

    Parameters
    ----------
    t : float
        Time [s].
    parts : Parts
    state : State
        Read; friction deflections advance in place where ``dt > 0``.
    rate : State
        Derivatives: `vx`, `vy`, `w`, `bvx`, `bvy`, `bw` are overwritten, and the deflection rates
        where ``dt == 0``.
    work : Work
        Overwritten.
    dt : float
        Inner step [s] or 0.
    """
    chain, links, power = parts.chain, work.links, work.power
    n = chain.n
    gx, gy, ax, ay = frame_gravity(parts.world[0], t)
    pull_links(chain, state.x, state.y, state.vx, state.vy, links, 0.5 * dt)
    power[LOSS_JOINT] = 0.0
    bends = chain.front_bend > 0.0 or chain.back_bend > 0.0
    if chain.joint_stiffness > 0.0:
        turn_links(chain, state.vx, state.vy, links)
        power[LOSS_JOINT] = rub_joints(chain, state.joint, rate.joint, links, dt)
    elif bends:
        links.couple[:] = 0.0
    if bends:
        limit_bend(chain, links)
    if bends or chain.joint_stiffness > 0.0:
        apply_couples(chain, links)
    sum_pin_forces(chain, gx, gy, links)
    power[LOSS_AIR] = 0.0
    if chain.air > 0.0:
        power[LOSS_AIR] = drag_sideways(chain, state.vx, state.vy, links)
    place_wheels(parts.mounts, state.q, state.w, work.frames)
    if dt == 0.0:
        for i in range(n):
            rate.tooth[i] = -RELAXATION * state.tooth[i]
            rate.guide[i] = -RELAXATION * state.guide[i]
        for k in range(rate.grip.shape[0]):
            rate.grip[k] = -RELAXATION * state.grip[k]
    power[LOSS_CONTACT], power[LOSS_TOOTH] = press_wheels(
        parts.wheels, work.frames, work.near, state, rate.tooth, links.fx, links.fy, work.watch, dt
    )
    power[LOSS_GUIDE] = 0.0
    if parts.guides.shape[0] > 0:
        power[LOSS_GUIDE] = press_guides(
            parts.guides, work.near_guides, state, rate.guide, links.fx, links.fy, dt
        )
    power[LOSS_BALL] = 0.0
    if parts.law.mass > 0.0:
        power[LOSS_BALL] = press_balls(
            parts.features,
            parts.law,
            state,
            rate.grip,
            work.frames,
            links.fx,
            links.fy,
            work.touches,
            parts.reach,
            n,
            dt,
        )
        accelerate_balls(parts.law, gx, gy, work.touches, state, rate)
    if parts.world[0].jam_on == 1:
        hold_jam(parts.world[0], state, n, links.fx, links.fy)
    for s in range(work.chain_torque.shape[0]):
        work.chain_torque[s] = work.frames.torque[s]
    torque, power[WORK_DRIVE], power[LOSS_DRIVE] = drive_wheel(
        t,
        parts.drive[0],
        work.frames,
        state.q,
        state.w,
        state.held,
        rate.held,
        rate.w,
        work.reaction,
        dt,
    )
    work.drive_sums[2] = torque
    power[LOSS_BEARING], power[LOSS_MOUNT] = move_mounts(
        parts.mounts,
        work.frames,
        state.q,
        state.w,
        state.held,
        rate.held,
        gx,
        gy,
        work.reaction,
        rate.w,
        work.stop_force,
        dt,
    )
    accelerate_pins(parts.blocks, n, links.fx, links.fy, rate.vx, rate.vy)
    if parts.bands.start.shape[0] > 0:
        accelerate_bands(parts.bands, n, links.fx, links.fy, rate.vx, rate.vy)
    power[WORK_KNOCK] = 0.0
    if ax != 0.0 or ay != 0.0:
        power[WORK_KNOCK] = _knock_power(parts, state, work, ax, ay)


@woven
def _knock_power(parts, state, work, ax, ay):
    """Return the work rate of the inertia forces of a knocked frame [W]."""
    chain = parts.chain
    total = 0.0
    for i in range(chain.n):
        re, im = chain.weight_re[i], chain.weight_im[i]
        total -= (re * ax - im * ay) * state.vx[i] + (re * ay + im * ax) * state.vy[i]
    for s in range(parts.mounts.shape[0]):
        mount = parts.mounts[s]
        base = PER_WHEEL * s
        c, sn = math.cos(state.q[base + 2]), math.sin(state.q[base + 2])
        mx = c * mount.center_x - sn * mount.center_y
        my = sn * mount.center_x + c * mount.center_y
        if mount.arm == 1:
            vx, vy = 0.0, 0.0
        else:
            vx, vy = work.frames.vx[s], work.frames.vy[s]
        vx -= state.w[base + 2] * my
        vy += state.w[base + 2] * mx
        total -= mount.mass * (ax * vx + ay * vy)
    for b in range(work.touches.used[0]):
        if work.touches.state[b] >= 2:
            total -= parts.law.mass * (ax * state.bvx[b] + ay * state.bvy[b])
    return total


@woven
def hold_jam(world, state, n, fx, fy):
    """Add the pull of a jam on the two pins of the caught link, and return its size [N].

    Parameters
    ----------
    world : record of WORLD
    state : State
    n : int
        Number of pins (dimensionless).
    fx, fy : ndarray, shape (n_pins,)
        Force on the pins [N]; added to.
    """
    i = world.jam_link
    j = i + 1 if i + 1 < n else 0
    dx, dy = state.x[i + 1] - state.x[i], state.y[i + 1] - state.y[i]
    px = state.x[i] + world.jam_re * dx - world.jam_im * dy
    py = state.y[i] + world.jam_re * dy + world.jam_im * dx
    pull_x = world.jam_stiffness * (world.jam_x - px)
    pull_y = world.jam_stiffness * (world.jam_y - py)
    jx = world.jam_re * pull_x + world.jam_im * pull_y
    jy = world.jam_re * pull_y - world.jam_im * pull_x
    fx[j] += jx
    fy[j] += jy
    fx[i] += pull_x - jx
    fy[i] += pull_y - jy
    return math.sqrt(pull_x * pull_x + pull_y * pull_y)


@woven
def kick_and_drift(state, rate, n, balls, dt):
    """Advance velocities by the accelerations, then positions by the new velocities.

    Parameters
    ----------
    state : State
        Overwritten.
    rate : State
        Accelerations.
    n, balls : int
        Number of pins, and of ball slots in use (dimensionless).
    dt : float
        Inner step [s].
    """
    x, y, vx, vy = state.x, state.y, state.vx, state.vy
    ax, ay = rate.vx, rate.vy
    for i in range(n):
        u = vx[i] + dt * ax[i]
        v = vy[i] + dt * ay[i]
        vx[i] = u
        vy[i] = v
        x[i] += dt * u
        y[i] += dt * v
    close_loop(state, n)
    for k in range(state.w.shape[0]):
        state.w[k] += dt * rate.w[k]
        state.q[k] += dt * state.w[k]
    for b in range(balls):
        state.bvx[b] += dt * rate.bvx[b]
        state.bvy[b] += dt * rate.bvy[b]
        state.bw[b] += dt * rate.bw[b]
        state.bx[b] += dt * state.bvx[b]
        state.by[b] += dt * state.bvy[b]
        state.spin[b] += dt * state.bw[b]


@kernel
def derivative(t, parts, state, rate, work):
    """Write the time derivative of a state, for general methods.

    Pins near wheels and guides are listed at every call, what balls may touch by `relist`.

    Parameters
    ----------
    t : float
        Time [s].
    parts : Parts
    state : State
        Only its ghost pin is written.
    rate : State
        Overwritten; zero where nothing is written.
    work : Work
        Overwritten.
    """
    n = parts.chain.n
    close_loop(state, n)
    margin = parts.world[0].margin
    place_wheels(parts.mounts, state.q, state.w, work.frames)
    find_near(parts.wheels, work.frames, state.x, state.y, n, margin, work.near)
    if parts.guides.shape[0] > 0:
        find_near_guides(parts.guides, state.x, state.y, n, margin, work.near_guides)
    evaluate(t, parts, state, rate, work, 0.0)
    lost = 0.0
    for i in range(n):
        lost += work.links.damper[i] * work.links.rate[i]
    work.power[LOSS_LINK] = lost
    for i in range(n):
        rate.x[i], rate.y[i] = state.vx[i], state.vy[i]
    for k in range(state.w.shape[0]):
        rate.q[k] = state.w[k]
    for b in range(work.touches.used[0]):
        rate.bx[b], rate.by[b], rate.spin[b] = state.bvx[b], state.bvy[b], state.bw[b]
    for k in range(work.power.shape[0]):
        rate.ledger[k] = work.power[k]


@kernel
def relist(parts, state, work):
    """List anew what may touch what; known touches of balls keep their friction.

    Parameters
    ----------
    parts : Parts
    state : State
        Ball friction deflections are rearranged.
    work : Work
        Its lists are overwritten.
    """
    close_loop(state, parts.chain.n)
    search(parts, state, work, 1.0e-4)
