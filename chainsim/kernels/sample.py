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
from chainsim.kernels.jit import kernel, woven
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
    *("angle", "rate", "torque", "center_x", "center_y", "force_x", "force_y", "skip", "ride"),
    *("engaged", "turn", "travel", "drop", "load", "stop"),
)
#: columns of `Rows.ball`
BALL_COLUMNS = (
    *("x", "y", "vx", "vy", "lateral", "longitudinal", "angle", "reserve", "peak"),
    *("number", "pocket", "state"),
)


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


@woven
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
    _write_tension(rows.tension[row], each, n, work.links, memory.link_peak)
    if parts.carrier_links.shape[0] > 0:
        _correct_tension(
            rows.tension[row],
            rows.loaded[row],
            each,
            parts.world[0],
            parts.carrier_links,
            work.links.tx,
            work.links.ty,
            memory.carrier_pull,
            memory.loaded,
            work.touches.carrier_n,
        )
    _write_wheels(
        rows.wheel[row],
        each,
        parts.wheels,
        parts.mounts,
        n,
        state,
        work.frames,
        work.near,
        work.wheel_sums,
        work.watch,
        memory.through,
        memory.travel,
        memory.first_angle,
    )
    _write_mounts(rows.wheel[row], each, parts.mounts, state.q, work.wheel_sums)
    _write_strands(
        rows.strand[row],
        rows.tension[row],
        n,
        parts.chain,
        state.x,
        state.y,
        work.frames,
        memory.strand,
        memory.through,
    )
    _write_drive(rows.drive[row], t, each, parts.drive[0], state.w, work.drive_sums)
    _write_balls(
        rows.ball[row],
        t,
        steps * work.step[0],
        parts.law.mass > 0.0,
        parts.pockets,
        state,
        work.links.tx,
        work.links.ty,
        work.seats,
        work.touches,
        memory.ball_vx,
        memory.ball_vy,
        memory.number,
        memory.seat_low,
    )
    _write_losses(rows.energy[row], n, work.links.loss, work.links.loss_joint, state.ledger)
    _write_energy(row, parts, state, work, rows)
    rows.depth[row] = work.watch.penetration[0]
    work.watch.penetration[0] = 0.0


@kernel
def _write_tension(out, each, n, links, link_peak):
    """Write mean tensions, and keep the extremes of the block."""
    for i in range(n):
        out[i] = links.tension_sum[i] * each
        if links.tension_peak[i] > link_peak[0]:
            link_peak[0], link_peak[1] = links.tension_peak[i], i
        if links.tension_low[i] < link_peak[2]:
            link_peak[2], link_peak[3] = links.tension_low[i], i
        links.tension_sum[i] = 0.0
        links.tension_peak[i], links.tension_low[i] = -np.inf, np.inf


@kernel
def _correct_tension(out, out_loaded, each, world, links, tx, ty, pull, loaded, carrier_n):
    """Take out what an off-axis load puts into its own link's spring; write who is loaded."""
    for k in range(links.shape[0]):
        i = links[k]
        across = world.gx * ty[i] - world.gy * tx[i]
        own = pull[k, 0] + loaded[k] * pull[k, 1]
        out[i] -= own * across + carrier_n[k] * each
        carrier_n[k] = 0.0
        out_loaded[k] = loaded[k]


@kernel
def _write_wheels(
    out, each, wheels, mounts, n, state, frames, near, sums, watch, through, travel, first_angle
):
    """Write what wheels do; follows the chain through every wheel."""
    for s in range(wheels.shape[0]):
        base = PER_WHEEL * s
        wheel = wheels[s]
        out[s, 0], out[s, 1] = state.q[base + SPIN], state.w[base + SPIN]
        out[s, 2] = sums[s, 2] * each
        out[s, 3], out[s, 4] = frames.cx[s], frames.cy[s]
        out[s, 5], out[s, 6] = sums[s, 0] * each, sums[s, 1] * each
        now = chain_through(wheel, frames, s, near, state.x, state.y, n, through[s])
        if now >= 0.0 and through[s] >= 0.0:
            moved = through[s] - now
            travel[s] += moved - n * math.floor(moved / n + 0.5)
        if now >= 0.0:
            through[s] = now
        turned = (state.q[base + SPIN] - first_angle[s]) * wheel.side
        seats = wheel.teeth * turned / (2.0 * math.pi)
        out[s, 7] = travel[s] - seats if wheel.teeth > 0 else 0.0
        out[s, 8], out[s, 9] = watch.ride[s], watch.engaged[s]
        out[s, 13] = math.sqrt(watch.load[s])
        watch.ride[s] = watch.load[s] = 0.0


@kernel
def _write_mounts(out, each, mounts, q, sums):
    """Write where the mounts stand, and clear the sums of the wheels."""
    for s in range(mounts.shape[0]):
        base = PER_WHEEL * s
        out[s, 10] = q[base + TURN]
        out[s, 11] = q[base + TURN] if mounts[s].arm == 1 else q[base]
        out[s, 12] = q[base + DROP] if mounts[s].weight_mass > 0.0 else np.nan
        out[s, 14] = sums[s, 3]
        sums[s, :] = 0.0


@kernel
def _write_strands(out, tension, n, chain, x, y, frames, strands, through):
    """Write excursion, sag and end tensions of every strand, between its two mid-wraps."""
    for k in range(strands.shape[0]):
        a, b = int(strands[k, 0]), int(strands[k, 1])
        ax, ay = frames.cx[a] + strands[k, 2], frames.cy[a] + strands[k, 3]
        dx, dy = frames.cx[b] + strands[k, 4] - ax, frames.cy[b] + strands[k, 5] - ay
        length = math.sqrt(dx * dx + dy * dy)
        dx, dy = dx / length, dy / length
        out[k, 0], out[k, 1], out[k, 2], out[k, 3] = 0.0, 0.0, np.nan, np.nan
        if through[a] < 0.0 or through[b] < 0.0:
            continue
        first = math.ceil(through[a])
        last = math.floor(through[b])
        for m in range((last - first) % n + 1):
            i = (first + m) % n
            rx, ry = x[i] - ax, y[i] - ay
            along = rx * dx + ry * dy
            if along < 0.0 or along > length:
                continue
            outward = rx * dy - ry * dx
            if abs(outward) > abs(out[k, 0]):
                out[k, 0] = outward
            below = (rx - along * dx) * chain.gx + (ry - along * dy) * chain.gy
            out[k, 1] = max(out[k, 1], below / chain.gravity)
            if math.isnan(out[k, 2]):
                out[k, 2] = tension[i]
            if along + chain.pitch[i] <= length:
                out[k, 3] = tension[i]


@kernel
def _write_drive(out, t, each, drive, w, sums):
    """Write what the drive does."""
    base = PER_WHEEL * drive.wheel
    mount_rate = w[base + TURN] if drive.on_mount == 1 else 0.0
    out[0], out[2] = sums[0] * each, sums[1] * each
    out[3] = np.nan
    if drive.motor == 1:
        rotor = PER_WHEEL * drive.n_wheels
        rate = w[rotor] - mount_rate
        out[1] = w[rotor]
        share = motor_torque(drive, rate) / drive.stall_torque
        fed = drive.supply == SUPPLY_ON
        span = drive.stall_current - drive.no_load_current
        out[3] = drive.no_load_current + span * abs(share) if fed else 0.0
        out[4] = drive.set_speed * drive.level * drive.forward if fed else 0.0
    else:
        out[1] = demanded_rate(drive, t)
        out[4] = out[1] * drive.speed_per_rate * drive.forward
    sums[0] = sums[1] = sums[3] = 0.0


@kernel
def _write_balls(
    out, t, interval, rolling, pockets, state, tx, ty, seats, touches, last_vx, last_vy, number, low
):
    """Write the balls: rolling ones, or held ones where they ride."""
    for b in range(out.shape[0]):
        kind = touches.state[b]
        out[b, :] = np.nan
        out[b, 9], out[b, 10], out[b, 11] = -1.0, -1.0, kind
        if kind < FREE:
            continue
        k = seats.pocket[b]
        if rolling:
            x, y, vx, vy = state.bx[b], state.by[b], state.bvx[b], state.bvy[b]
        else:
            x, y = seat_place(pockets[k], state)
            vx, vy = seat_velocity(pockets[k], state)
        out[b, 0], out[b, 1], out[b, 2], out[b, 3] = x, y, vx, vy
        ax, ay = (vx - last_vx[b]) / interval, (vy - last_vy[b]) / interval
        last_vx[b], last_vy[b] = vx, vy
        out[b, 4], out[b, 5] = ax, ay
        if k >= 0:
            i = pockets[k].link
            out[b, 4], out[b, 5] = ax * ty[i] - ay * tx[i], ax * tx[i] + ay * ty[i]
        out[b, 6] = state.spin[b] if rolling else 0.0
        if kind == SEATED and seats.reserve[b] < np.inf:
            out[b, 7] = seats.reserve[b]
            if seats.reserve[b] < low[0]:
                low[0], low[1], low[2] = seats.reserve[b], number[b], t
        out[b, 8] = touches.peak[b] if rolling else math.sqrt(ax * ax + ay * ay)
        out[b, 9], out[b, 10] = number[b], k
        seats.reserve[b] = np.inf
        touches.peak[b] = 0.0


@kernel
def _write_losses(out, n, loss, loss_joint, ledger):
    """Write the ledger, with the losses that every link and joint keeps for itself."""
    lost_links, lost_joints = 0.0, 0.0
    for i in range(n):
        lost_links += loss[i]
        lost_joints += loss_joint[i]
    for k in range(KINETIC):
        out[k] = ledger[k]
    out[LOSS_LINK] += lost_links
    out[LOSS_JOINT] += lost_joints


@woven
def _write_energy(row, parts, state, work, rows):
    """Write the energies."""
    out = rows.energy[row]
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
