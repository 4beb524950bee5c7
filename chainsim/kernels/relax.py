"""What relaxation to rest needs: kinetic energy, unbalanced forces, and a full stop."""

import math

from chainsim.kernels.jit import kernel
from chainsim.kernels.layout import PER_WHEEL


@kernel
def residual(mounts, wheels, law, used, n, fx, fy, w_rate, ax, ay):
    """Return the largest unbalanced force on anything that is free to move [N].

    Parameters
    ----------
    mounts, wheels : ndarray of MOUNT and of WHEEL, shape (n_wheels,)
    law : BallLaw
    used, n : int
        Ball slots in use, and pins (dimensionless).
    fx, fy : ndarray, shape (n_pins,)
        Force on the pins [N].
    w_rate : ndarray, shape (5 n_wheels + 1,)
        Generalized accelerations [m/s2, rad/s2].
    ax, ay : ndarray, shape (balls,)
        Accelerations of the balls [m/s2].
    """
    worst = 0.0
    for i in range(n):
        worst = max(worst, math.sqrt(fx[i] ** 2 + fy[i] ** 2))
    for s in range(mounts.shape[0]):
        mount = mounts[s]
        base = PER_WHEEL * s
        radius = wheels[s].seat_radius
        for k in range(2):
            worst = max(worst, abs(w_rate[base + k]) * mount.mass)
        lever = radius
        if mount.arm == 1:
            lever = math.sqrt(mount.arm_x**2 + mount.arm_y**2)
        worst = max(worst, abs(w_rate[base + 2]) * mount.inertia / lever)
        worst = max(worst, abs(w_rate[base + 3]) * mount.wheel_inertia / radius)
        worst = max(worst, abs(w_rate[base + 4]) * mount.weight_mass)
    for b in range(used):
        worst = max(worst, law.mass * math.sqrt(ax[b] ** 2 + ay[b] ** 2))
    return worst


@kernel
def kinetic_energy(mounts, law, used, n, weight, state):
    """Return the kinetic energy, with carriers as masses on their pins [J].

    Parameters
    ----------
    mounts : ndarray of MOUNT, shape (n_wheels,)
    law : BallLaw
    used, n : int
        Ball slots in use, and pins (dimensionless).
    weight : ndarray, shape (n_pins,)
        Mass that hangs on each pin [kg].
    state : State
        Empty ball slots are at rest.
    """
    total = 0.0
    for i in range(n):
        total += weight[i] * (state.vx[i] ** 2 + state.vy[i] ** 2)
    for s in range(mounts.shape[0]):
        mount = mounts[s]
        base = PER_WHEEL * s
        w = state.w
        total += mount.mass * (w[base] ** 2 + w[base + 1] ** 2) + mount.inertia * w[base + 2] ** 2
        total += mount.wheel_inertia * w[base + 3] ** 2 + mount.weight_mass * w[base + 4] ** 2
    for b in range(used):
        total += law.mass * (state.bvx[b] ** 2 + state.bvy[b] ** 2)
        total += law.inertia * state.bw[b] ** 2
    return 0.5 * total


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
