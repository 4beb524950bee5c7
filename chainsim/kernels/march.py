"""The inner loop: many steps in one compiled call, in time or toward rest."""

import math

from chainsim.kernels.jit import kernel, woven
from chainsim.kernels.layout import LOSS_JAM
from chainsim.kernels.motion import evaluate, frame_gravity, hold_jam, kick_and_drift, search
from chainsim.kernels.relax import kinetic_energy, residual, stop
from chainsim.kernels.seats import watch_seats

#: steps of relaxation between two looks at the unbalanced force
LOOK_STEPS = 64


@kernel
def march(t, dt, steps, parts, state, rate, work, rest):
    """Take inner steps: in time, keeping sums and extremes, or toward rest.

    Toward rest all speed is taken out at every peak of the kinetic energy (dynamic relaxation with
    kinetic damping: A. S. Day, The Engineer 219 (1965) 218; P. A. Cundall, 1976, from memory).

    Parameters
    ----------
    t : float
        Time at the start [s].
    dt : float
        Inner step [s].
    steps : int
        How many, at most (dimensionless).
    parts : Parts
    state, rate : State
        Overwritten.
    work : Work
        Overwritten.
    rest : float
        Unbalanced force to reach [N]; 0 to march in time.

    Returns
    -------
    float
        Largest unbalanced force that is left [N]; 0 when marching in time.
    """
    n = parts.chain.n
    left = math.inf
    moving = 0.0
    for step in range(steps):
        if work.search_in[0] <= 0:
            search(parts, state, work, dt)
        work.search_in[0] -= 1
        now = t + step * dt if rest == 0.0 else 0.0
        evaluate(now, parts, state, rate, work, dt)
        if rest > 0.0 and step % LOOK_STEPS == 0:
            left = residual(
                parts.mounts,
                parts.wheels,
                parts.law,
                work.touches.used[0],
                n,
                work.links.fx,
                work.links.fy,
                rate.w,
                rate.bvx,
                rate.bvy,
            )
            if left < rest:
                return left
        kick_and_drift(state, rate, n, work.touches.used[0], dt)
        if rest > 0.0:
            energy = kinetic_energy(
                parts.mounts,
                parts.law,
                work.touches.used[0],
                n,
                parts.chain.weight_re,
                state,
            )
            if energy < moving:
                stop(state)
                energy = 0.0
            moving = energy
        else:
            keep_sums(now, dt, parts, state, work)
    return left if rest > 0.0 else 0.0


@woven
def keep_sums(now, dt, parts, state, work):
    """Add to the sums and extremes of the sample interval, and watch seats and jams.

    Parameters
    ----------
    now : float
        Time [s].
    dt : float
        Inner step [s].
    parts : Parts
    state : State
        Its ledger [J] is added to.
    work : Work
        Sums and extremes are updated.
    """
    frames = work.frames
    for k in range(work.power.shape[0]):
        state.ledger[k] += dt * work.power[k]
    for s in range(work.reaction.shape[0]):
        fx, fy = frames.fx[s], frames.fy[s]
        work.wheel_sums[s, 0] += fx
        work.wheel_sums[s, 1] += fy
        work.wheel_sums[s, 2] += work.chain_torque[s]
        work.wheel_sums[s, 3] = max(work.wheel_sums[s, 3], abs(work.stop_force[s]))
        work.watch.load[s] = max(work.watch.load[s], fx * fx + fy * fy)
    torque = work.drive_sums[2]
    work.drive_sums[0] += torque
    work.drive_sums[1] += torque * frames.rate[parts.drive[0].wheel]
    work.drive_sums[3] = max(work.drive_sums[3], abs(torque))
    if parts.pockets.shape[0] > 0:
        world = parts.world[0]
        gx, gy, _, _ = frame_gravity(world, now)
        watch_seats(
            parts.pockets,
            work.seats,
            work.touches,
            state,
            gx,
            gy,
            world.per_window,
            world.zone_x,
            world.zone_y,
            world.zone,
        )
    if parts.world[0].jam_on == 1:
        release_jam(parts.world, state, parts.chain.n, work.links.fx, work.links.fy)


@kernel
def release_jam(world, state, n, fx, fy):
    """Let a jam go when its pull passes its release force; what it had stored is lost.

    Parameters
    ----------
    world : ndarray of WORLD, shape (1,)
        `jam_on` is cleared.
    state : State
        The ledger is added to.
    n : int
        Number of pins (dimensionless).
    fx, fy : ndarray, shape (n_pins,)
        Scratch: forces of a step that is over [N].
    """
    pull = hold_jam(world[0], state, n, fx, fy)
    if pull > world[0].jam_release:
        world[0].jam_on = 0
        state.ledger[LOSS_JAM] += 0.5 * pull * pull / world[0].jam_stiffness
