"""Writes one sample: instant places, and means and extremes of the interval that ends there."""

import math
from typing import NamedTuple

import numpy as np

from chainsim.kernels.balls import FREE, SEATED
from chainsim.kernels.drive import SUPPLY_ON, demanded_rate, motor_torque
from chainsim.kernels.energy import (
    ball_energy,
    chain_energy,
    guide_energy,
    mount_energy,
    wheel_contact_energy,
)
from chainsim.kernels.jit import kernel
from chainsim.kernels.layout import DROP, LEDGER, LOSS_JOINT, LOSS_LINK, PER_WHEEL, SPIN, TURN
from chainsim.kernels.march import march
from chainsim.kernels.mounts import place_wheels
from chainsim.kernels.seats import seat_place, seat_velocity
from chainsim.kernels.watch import watch_balls, watch_feed
from chainsim.kernels.wheels import chain_through

#: columns of the energy rows after the ledger
KINETIC, POTENTIAL, STORED = len(LEDGER), len(LEDGER) + 1, len(LEDGER) + 2


class Rows(NamedTuple):
    """Arrays of one block, a row per sample; see `chainsim.recording.channels`."""

    time: np.ndarray  # (m,) [s]
    pin: np.ndarray  # (m, n, 2) float32 [m]
    pin_velocity: np.ndarray  # (m, n, 2) float32 [m/s]
    tension: np.ndarray  # (m, n) float32 [N]
    wheel: np.ndarray  # (m, wheels, 15), see WHEEL_COLUMNS
    drive: np.ndarray  # (m, 5) torque, rate, power, current, set speed
    strand: np.ndarray  # (m, strands, 4) excursion, sag, tension at start and end
    ball: np.ndarray  # (m, balls, 12), see BALL_COLUMNS
    loaded: np.ndarray  # (m, carriers) int8
    energy: np.ndarray  # (m, 18) [J]
    depth: np.ndarray  # (m,) deepest pin contact [m]


#: columns of `Rows.wheel`
WHEEL_COLUMNS = (
    "angle rate torque center_x center_y force_x force_y skip ride engaged "
    "turn travel drop load stop"
).split()
#: columns of `Rows.ball`
BALL_COLUMNS = "x y vx vy lateral longitudinal angle reserve peak number pocket state".split()


class Memory(NamedTuple):
    """What sampling remembers between samples."""

    through: np.ndarray  # (wheels,) link index at mid-wrap at the last sample; negative: none
    travel: np.ndarray  # (wheels,) links that have passed since the start
    first_angle: np.ndarray  # (wheels,) [rad]
    ball_vx: np.ndarray  # (balls,) velocities at the last sample [m/s]
    ball_vy: np.ndarray
    number: np.ndarray  # (balls,) number of the ball in each slot
    strand: np.ndarray  # (strands, 8): wheels; tangent points from their axles; direction
    carrier_pull: np.ndarray  # (carriers, 2): complex moment of carrier and held ball, over p [kg]
    loaded: np.ndarray  # (carriers,) held balls
    link_peak: np.ndarray  # (4,) largest tension and its link, smallest and its link, of the block
    seat_low: np.ndarray  # (3,) smallest reserve of the block, its ball, its time


@kernel
def write_sample(row, t, steps, parts, state, work, memory, rows):
    """Write row `row` of a block and clear the sums and extremes of the interval.

    Parameters
    ----------
    row : int
        Row of the block (dimensionless).
    t : float
        Time [s].
    steps : int
        Inner steps of the interval (dimensionless).
    parts : Parts
    state : State
    work : Work
        Sums and extremes are cleared.
    memory : Memory
        Updated.
    rows : Rows
        Row `row` is overwritten.
    """
    n = parts.chain.n
    each = 1.0 / steps
    rows.time[row] = t
    place_wheels(parts.mounts, state.q, state.w, work.frames)
    for i in range(n):
        rows.pin[row, i, 0], rows.pin[row, i, 1] = state.x[i], state.y[i]
        rows.pin_velocity[row, i, 0], rows.pin_velocity[row, i, 1] = state.vx[i], state.vy[i]
    _write_tension(row, each, parts, work, memory, rows)
    _write_wheels(row, each, parts, state, work, memory, rows)
    _write_strands(row, n, parts.chain, state, work.frames, memory, rows)
    _write_drive(row, t, each, parts, state, work, rows)
    _write_balls(row, t, steps, parts, state, work, memory, rows)
    _write_energy(row, parts, state, work, rows)
    rows.depth[row] = work.watch.penetration[0]
    work.watch.penetration[0] = 0.0


@kernel
def _write_tension(row, each, parts, work, memory, rows):
    """Write mean tensions, without what an off-axis load puts into its own link's spring."""
    links = work.links
    for i in range(parts.chain.n):
        rows.tension[row, i] = links.tension_sum[i] * each
        if links.tension_peak[i] > memory.link_peak[0]:
            memory.link_peak[0], memory.link_peak[1] = links.tension_peak[i], i
        if links.tension_low[i] < memory.link_peak[2]:
            memory.link_peak[2], memory.link_peak[3] = links.tension_low[i], i
        links.tension_sum[i] = 0.0
        links.tension_peak[i], links.tension_low[i] = -np.inf, np.inf
    world = parts.world[0]
    for k in range(parts.carrier_links.shape[0]):
        i = parts.carrier_links[k]
        across = world.gx * links.ty[i] - world.gy * links.tx[i]
        own = memory.carrier_pull[k, 0] + memory.loaded[k] * memory.carrier_pull[k, 1]
        rows.tension[row, i] -= own * across
        if parts.law.mass > 0.0:
            rows.tension[row, i] -= work.touches.carrier_n[k] * each
            work.touches.carrier_n[k] = 0.0
        rows.loaded[row, k] = memory.loaded[k]


@kernel
def _write_wheels(row, each, parts, state, work, memory, rows):
    """Write what wheels and mounts do; follows the chain through every wheel."""
    n = parts.chain.n
    for s in range(parts.wheels.shape[0]):
        base = PER_WHEEL * s
        wheel, out = parts.wheels[s], rows.wheel[row, s]
        sums = work.wheel_sums[s]
        out[0], out[1] = state.q[base + SPIN], state.w[base + SPIN]
        out[2] = sums[2] * each
        out[3], out[4] = work.frames.cx[s], work.frames.cy[s]
        out[5], out[6] = sums[0] * each, sums[1] * each
        now = chain_through(wheel, work.frames, s, work.near, state.x, state.y, n)
        if now >= 0.0 and memory.through[s] >= 0.0:
            moved = memory.through[s] - now
            moved -= n * math.floor(moved / n + 0.5)
            memory.travel[s] += moved
        if now >= 0.0:
            memory.through[s] = now
        turned = (state.q[base + SPIN] - memory.first_angle[s]) * wheel.side
        seats = wheel.teeth * turned / (2.0 * math.pi)
        out[7] = memory.travel[s] - seats if wheel.teeth > 0 else 0.0
        out[8], out[9] = work.watch.ride[s], work.watch.engaged[s]
        out[10] = state.q[base + TURN]
        out[11] = state.q[base + TURN] if parts.mounts[s].arm == 1 else state.q[base]
        out[12] = state.q[base + DROP] if parts.mounts[s].weight_mass > 0.0 else np.nan
        out[13], out[14] = math.sqrt(work.watch.load[s]), sums[3]
        work.watch.ride[s] = work.watch.load[s] = 0.0
        sums[:] = 0.0


@kernel
def _write_strands(row, n, chain, state, frames, memory, rows):
    """Write excursion, sag and end tensions of every strand, between its two mid-wraps."""
    for k in range(memory.strand.shape[0]):
        strand, out = memory.strand[k], rows.strand[row, k]
        a, b = int(strand[0]), int(strand[1])
        ax, ay = frames.cx[a] + strand[2], frames.cy[a] + strand[3]
        dx, dy = frames.cx[b] + strand[4] - ax, frames.cy[b] + strand[5] - ay
        length = math.sqrt(dx * dx + dy * dy)
        dx, dy = dx / length, dy / length
        out[0], out[1], out[2], out[3] = 0.0, 0.0, np.nan, np.nan
        if memory.through[a] < 0.0 or memory.through[b] < 0.0:
            continue
        first = int(math.ceil(memory.through[a]))
        last = int(math.floor(memory.through[b]))
        count = (last - first) % n
        for m in range(count + 1):
            i = (first + m) % n
            rx, ry = state.x[i] - ax, state.y[i] - ay
            along = rx * dx + ry * dy
            if along < 0.0 or along > length:
                continue
            outward = rx * dy - ry * dx
            if abs(outward) > abs(out[0]):
                out[0] = outward
            below = (rx - along * dx) * chain.gx + (ry - along * dy) * chain.gy
            out[1] = max(out[1], below / chain.gravity)
            if math.isnan(out[2]):
                out[2] = rows.tension[row, i]
            if along + chain.pitch[i] <= length:
                out[3] = rows.tension[row, i]


@kernel
def _write_drive(row, t, each, parts, state, work, rows):
    """Write what the drive does."""
    drive, out = parts.drive[0], rows.drive[row]
    base = PER_WHEEL * drive.wheel
    rotor = PER_WHEEL * parts.mounts.shape[0]
    mount_rate = state.w[base + TURN] if drive.on_mount == 1 else 0.0
    out[0], out[2] = work.drive_sums[0] * each, work.drive_sums[1] * each
    out[3] = np.nan
    if drive.motor == 1:
        rate = state.w[rotor] - mount_rate
        out[1] = state.w[rotor]
        share = motor_torque(drive, rate) / drive.stall_torque
        if drive.supply == SUPPLY_ON:
            out[3] = drive.no_load_current + (drive.stall_current - drive.no_load_current) * abs(
                share
            )
        else:
            out[3] = 0.0
        out[4] = drive.set_speed * drive.level * drive.forward if drive.supply == SUPPLY_ON else 0.0
    else:
        out[1] = demanded_rate(drive, t)
        out[4] = out[1] * drive.speed_per_rate * drive.forward
    work.drive_sums[0] = work.drive_sums[1] = work.drive_sums[3] = 0.0


@kernel
def _write_balls(row, t, steps, parts, state, work, memory, rows):
    """Write the balls: rolling ones, or held ones where they ride."""
    seats, touches = work.seats, work.touches
    rolling = parts.law.mass > 0.0
    for b in range(rows.ball.shape[1]):
        out = rows.ball[row, b]
        kind = touches.state[b]
        out[:] = np.nan
        out[9], out[10], out[11] = -1.0, -1.0, kind
        if kind < FREE:
            continue
        k = seats.pocket[b]
        if rolling:
            x, y, vx, vy = state.bx[b], state.by[b], state.bvx[b], state.bvy[b]
        else:
            x, y = seat_place(parts.pockets[k], state)
            vx, vy = seat_velocity(parts.pockets[k], state)
        out[0], out[1], out[2], out[3] = x, y, vx, vy
        per = 1.0 / (steps * work.step[0])
        ax, ay = (vx - memory.ball_vx[b]) * per, (vy - memory.ball_vy[b]) * per
        memory.ball_vx[b], memory.ball_vy[b] = vx, vy
        if k >= 0:
            i = parts.pockets[k].link
            tx, ty = work.links.tx[i], work.links.ty[i]
            out[4], out[5] = ax * ty - ay * tx, ax * tx + ay * ty
        else:
            out[4], out[5] = ax, ay
        out[6] = state.spin[b] if rolling else 0.0
        if kind == SEATED and seats.reserve[b] < np.inf:
            out[7] = seats.reserve[b]
            if seats.reserve[b] < memory.seat_low[0]:
                memory.seat_low[0], memory.seat_low[1] = seats.reserve[b], memory.number[b]
                memory.seat_low[2] = t
        out[8] = touches.peak[b] if rolling else math.sqrt(ax * ax + ay * ay)
        out[9], out[10] = memory.number[b], k
        seats.reserve[b] = np.inf
        touches.peak[b] = 0.0


@kernel
def _write_energy(row, parts, state, work, rows):
    """Write ledger and energies."""
    out = rows.energy[row]
    lost_links, lost_joints = 0.0, 0.0
    for i in range(parts.chain.n):
        lost_links += work.links.loss[i]
        lost_joints += work.links.loss_joint[i]
    for k in range(KINETIC):
        out[k] = state.ledger[k]
    out[LOSS_LINK] += lost_links
    out[LOSS_JOINT] += lost_joints
    world = parts.world[0]
    kinetic, lifted, stored = chain_energy(parts.chain, state)
    more = mount_energy(parts.mounts, parts.drive[0], world.gx, world.gy, state)
    stored += wheel_contact_energy(parts.wheels, work.frames, work.near, state)
    if parts.guides.shape[0] > 0:
        stored += guide_energy(parts.guides, work.near_guides, state)
    out[KINETIC], out[POTENTIAL], out[STORED] = (
        kinetic + more[0],
        lifted + more[1],
        stored + more[2],
    )
    if parts.law.mass > 0.0:
        more = ball_energy(
            parts.features,
            parts.law,
            parts.reach,
            work.frames,
            work.touches,
            world.gx,
            world.gy,
            state,
        )
        out[KINETIC] += more[0]
        out[POTENTIAL] += more[1]
        out[STORED] += more[2]
    if world.jam_on == 1:
        i = world.jam_link
        dx, dy = state.x[i + 1] - state.x[i], state.y[i + 1] - state.y[i]
        px = state.x[i] + world.jam_re * dx - world.jam_im * dy - world.jam_x
        py = state.y[i] + world.jam_re * dy + world.jam_im * dx - world.jam_y
        out[STORED] += 0.5 * world.jam_stiffness * (px * px + py * py)


@kernel
def march_samples(t, dt, steps, samples, first, parts, state, rate, work, memory, rows, watch):
    """March over a number of samples; stop early where the loop must act on a ball or a jam.

    Parameters
    ----------
    t, dt : float
        Time at the start, inner step [s].
    steps, samples : int
        Inner steps per sample, samples to take (dimensionless).
    first : int
        Row of the first one (dimensionless).
    parts, state, rate, work
        See `march`.
    memory : Memory
        Updated.
    rows : Rows
        Rows from `first` on are overwritten.
    watch : BallWatch
        Overwritten.

    Returns
    -------
    int
        Samples taken (dimensionless).
    """
    interval = steps * dt
    work.step[0] = dt
    jammed = parts.world[0].jam_on
    for k in range(samples):
        march(t + k * interval, dt, steps, parts, state, rate, work, 0.0)
        acts = 0
        if parts.law.mass > 0.0:
            acts = watch_balls(
                parts.pockets,
                watch.exits[0],
                parts.law.radius,
                work.touches,
                work.seats,
                state,
                watch,
            )
        if watch.feeding[0].waiting == 1 or watch.feeding[0].held == 1:
            acts += watch_feed(
                parts.pockets,
                watch.feeding[0],
                work.seats,
                work.touches,
                state,
                watch.last_heights,
            )
        write_sample(first + k, t + (k + 1) * interval, steps, parts, state, work, memory, rows)
        if acts > 0 or parts.world[0].jam_on != jammed:
            return k + 1
        if not math.isfinite(state.x[0] + state.vx[0]):
            return k + 1
    return samples
