"""Relaxation to rest: the same forces, with all speed taken out at every peak of kinetic energy."""

import math

from chainsim.kernels.jit import kernel
from chainsim.kernels.layout import PER_WHEEL
from chainsim.kernels.motion import evaluate, kick_and_drift, search


@kernel
def residual(parts, state, rate, work):
    """Return the largest unbalanced force on anything that is free to move [N].

    Parameters
    ----------
    parts : Parts
    state : State
    rate : State
        Accelerations.
    work : Work
    """
    worst = 0.0
    links = work.links
    for i in range(parts.chain.n):
        worst = max(worst, math.sqrt(links.fx[i] ** 2 + links.fy[i] ** 2))
    for s in range(parts.mounts.shape[0]):
        mount = parts.mounts[s]
        base = PER_WHEEL * s
        radius = parts.wheels[s].seat_radius
        for k in range(2):
            worst = max(worst, abs(rate.w[base + k]) * mount.mass)
        lever = radius
        if mount.arm == 1:
            lever = math.sqrt(mount.arm_x**2 + mount.arm_y**2)
        worst = max(worst, abs(rate.w[base + 2]) * mount.inertia / lever)
        worst = max(worst, abs(rate.w[base + 3]) * mount.wheel_inertia / radius)
        worst = max(worst, abs(rate.w[base + 4]) * mount.weight_mass)
    for b in range(work.touches.state.shape[0]):
        if work.touches.state[b] >= 2:
            worst = max(worst, parts.law.mass * math.sqrt(rate.bvx[b] ** 2 + rate.bvy[b] ** 2))
    return worst


@kernel
def kinetic_energy(parts, state, work):
    """Return the kinetic energy, with carriers as masses on their pins [J].

    Parameters
    ----------
    parts : Parts
    state : State
    work : Work
    """
    total = 0.0
    for i in range(parts.chain.n):
        total += parts.chain.weight_re[i] * (state.vx[i] ** 2 + state.vy[i] ** 2)
    for s in range(parts.mounts.shape[0]):
        mount = parts.mounts[s]
        base = PER_WHEEL * s
        w = state.w
        total += mount.mass * (w[base] ** 2 + w[base + 1] ** 2) + mount.inertia * w[base + 2] ** 2
        total += mount.wheel_inertia * w[base + 3] ** 2 + mount.weight_mass * w[base + 4] ** 2
    for b in range(work.touches.state.shape[0]):
        if work.touches.state[b] >= 2:
            total += parts.law.mass * (state.bvx[b] ** 2 + state.bvy[b] ** 2)
            total += parts.law.inertia * state.bw[b] ** 2
    return 0.5 * total


@kernel
def relax(parts, state, rate, work, dt, target, most_steps):
    """Bring a lift to rest; returns the largest unbalanced force that is left [N].

    Parameters
    ----------
    parts : Parts
        Without friction.
    state, rate : State
        Overwritten.
    work : Work
        Overwritten.
    dt : float
        Inner step [s].
    target : float
        Unbalanced force to reach [N].
    most_steps : int
        Limit of the number of steps (dimensionless).
    """
    n = parts.chain.n
    left = math.inf
    moving = 0.0
    for step in range(most_steps):
        if work.search_in[0] <= 0:
            work.search_in[0] = min(8, search(parts, state, work, dt))
        work.search_in[0] -= 1
        evaluate(0.0, parts, state, rate, work, dt)
        if step % 64 == 0:
            left = residual(parts, state, rate, work)
            if left < target:
                return left
        kick_and_drift(state, rate, n, dt)
        energy = kinetic_energy(parts, state, work)
        if energy < moving:
            stop(state)
            energy = 0.0
        moving = energy
    return left


@kernel
def stop(state):
    """Take all speed out of a state (writes its velocities).

    Parameters
    ----------
    state : State
    """
    state.vx[:] = 0.0
    state.vy[:] = 0.0
    state.w[:] = 0.0
    state.bvx[:] = 0.0
    state.bvy[:] = 0.0
    state.bw[:] = 0.0
