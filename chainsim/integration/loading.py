"""Held balls come and go: the mass of a carrier changes in an event with a momentum balance."""

from __future__ import annotations

import numpy as np
from scipy.sparse import diags
from scipy.sparse.linalg import spsolve

from chainsim.integration.start import Prepared
from chainsim.kernels.balls import EMPTY, SEATED
from chainsim.kernels.layout import BALLS_IN, BALLS_OUT, LOSS_BALL
from chainsim.kernels.motion import close_loop
from chainsim.kernels.seats import seat_place, seat_velocity
from chainsim.model.packing_carriers import PinMasses, pack_carriers


def change_load(prepared: Prepared, carrier: int, load: int) -> tuple[float, float]:
    """Load or unload a carrier with a held ball.

    A ball that comes was at rest: the momentum of the pins stays what it was, and the impact takes
    energy, which is booked as lost.  A ball that goes takes its own momentum along.

    Parameters
    ----------
    prepared : Prepared
        Its mass matrix and state are overwritten.
    carrier : int
        (dimensionless)
    load : int
        1: a ball comes; 0: it goes (dimensionless).

    Returns
    -------
    tuple of float
        Where the ball's center is [m].
    """
    packed, lift = prepared.packed, prepared.lift
    parts, state, work = packed.parts, packed.state, packed.work
    pocket = parts.pockets[carrier]
    x, y = seat_place(pocket, state)
    mass = lift.scenario.balls.mass
    world = parts.world[0]
    potential = -mass * (world["gx"] * x + world["gy"] * y)
    before = pin_velocities(state, lift.n_links)
    old = pack_carriers(lift, prepared.memory.loaded.astype(bool))
    prepared.memory.loaded[carrier] = load
    new = pack_carriers(lift, prepared.memory.loaded.astype(bool))
    _copy(new, parts)
    if load:
        after = solve_masses(new, times_masses(old, before))
        lost = kinetic(old, before) - kinetic(new, after)
        n = lift.n_links
        state.vx[:n], state.vy[:n] = after.real, after.imag
        close_loop(state, n)
        state.ledger[LOSS_BALL] += lost
        state.ledger[BALLS_IN] += potential
        work.touches.state[carrier] = SEATED
        work.seats.age[carrier], work.seats.judged[carrier] = 0, 1
    else:
        vx, vy = seat_velocity(pocket, state)
        state.ledger[BALLS_OUT] += potential + 0.5 * mass * (vx * vx + vy * vy)
        work.touches.state[carrier] = EMPTY
        prepared.memory.number[carrier] = -1
    return float(x), float(y)


def pin_velocities(state, n: int) -> np.ndarray:
    """Return the velocities of the pins as complex numbers [m/s].

    Parameters
    ----------
    state : State
    n : int
        Number of pins (dimensionless).

    Returns
    -------
    ndarray of complex, shape (n_pins,)
        [m/s].
    """
    return state.vx[:n] + 1j * state.vy[:n]


def times_masses(masses: PinMasses, velocity: np.ndarray) -> np.ndarray:
    """Return the momentum of the pins [kg m/s].

    Parameters
    ----------
    masses : PinMasses
    velocity : ndarray of complex, shape (n_pins,)
        [m/s].

    Returns
    -------
    ndarray of complex, shape (n_pins,)
        [kg m/s].
    """
    ahead = masses.coupling * np.roll(velocity, -1)
    behind = np.conj(np.roll(masses.coupling, 1)) * np.roll(velocity, 1)
    return masses.diagonal * velocity + ahead + behind


def kinetic(masses: PinMasses, velocity: np.ndarray) -> float:
    """Return the kinetic energy of the pins [J].

    Parameters
    ----------
    masses : PinMasses
    velocity : ndarray of complex, shape (n_pins,)
        [m/s].
    """
    return 0.5 * float(np.real(np.vdot(velocity, times_masses(masses, velocity))))


def solve_masses(masses: PinMasses, momentum: np.ndarray) -> np.ndarray:
    """Return the velocities that carry a momentum [m/s]: a cyclic tridiagonal system.

    Parameters
    ----------
    masses : PinMasses
    momentum : ndarray of complex, shape (n_pins,)
        [kg m/s].

    Returns
    -------
    ndarray of complex, shape (n_pins,)
        [m/s].
    """
    n = len(momentum)
    matrix = diags([masses.diagonal.astype(complex)], [0], format="lil")
    for i in np.flatnonzero(masses.coupling):
        j = (i + 1) % n
        matrix[i, j] += masses.coupling[i]
        matrix[j, i] += np.conj(masses.coupling[i])
    return spsolve(matrix.tocsc(), momentum)


def _copy(masses: PinMasses, parts) -> None:
    """Write new masses over the arrays that the kernels hold."""
    n = parts.chain.n
    for ours, new in zip(parts.blocks, masses.blocks, strict=True):
        ours[:] = new
    for ours, new in zip(parts.bands, masses.bands, strict=True):
        ours[:] = new
    parts.chain.mass[:] = masses.diagonal
    parts.chain.coupling_re[:], parts.chain.coupling_im[:] = (
        masses.coupling.real,
        masses.coupling.imag,
    )
    parts.chain.weight_re[:n], parts.chain.weight_im[:n] = masses.moment.real, masses.moment.imag
