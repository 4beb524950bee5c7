"""The stiffest mode of a lift, and the inner step that it allows."""

from __future__ import annotations

import numpy as np
from scipy.sparse import coo_matrix, diags

from chainsim.kernels.layout import PER_WHEEL, SPIN
from chainsim.model import constants


def stability_limit(rate: float, damping: float) -> float:
    """Return the largest stable inner step of a damped oscillator [s].

    Parameters
    ----------
    rate : float
        Angular frequency ``w`` [rad/s].
    damping : float
        Damping as a share of critical ``zeta`` (dimensionless).

    References
    ----------
    ``(2 / w) (sqrt(1 + zeta^2) - zeta)`` for the semi-implicit Euler scheme with damping at the old
    velocity; derived here from the scheme's characteristic equation, and confirmed in a test.
    """
    return 2.0 / rate * (np.sqrt(1.0 + damping**2) - damping)


def stiffest_rate(stiffness, inverse_mass, iterations: int = 200) -> float:
    """Return the highest angular frequency of ``M a = -K x`` by power iteration [rad/s].

    Parameters
    ----------
    stiffness : sparse matrix, shape (n, n)
        ``K``, symmetric (N/m and its like).
    inverse_mass : sparse matrix, shape (n, n)
        ``1/M`` (1/kg and its like).
    iterations : int
        Number of products (dimensionless); the result is raised by 2 % for what they leave.
    """
    vector = np.random.default_rng(1).standard_normal(stiffness.shape[0])
    value = 0.0
    for _ in range(iterations):
        vector = inverse_mass @ (stiffness @ vector)
        value = float(np.linalg.norm(vector))
        vector /= value
    return 1.02 * float(np.sqrt(value))


def assembled(parts, positions: np.ndarray, seats: np.ndarray, centers: np.ndarray):
    """Return the stiffness and inverse mass matrices with every wrapped pin in contact.

    Parameters
    ----------
    parts : Parts
    positions : ndarray, shape (n_pins, 2)
        Pins at rest [m].
    seats : ndarray of int, shape (n_pins,)
        Wheel on which each pin lies (dimensionless), -1 for none.
    centers : ndarray, shape (n_wheels, 2)
        Axles [m].

    Returns
    -------
    tuple of sparse matrices, shape (n, n)
        Stiffness (N/m and its like) and inverse mass (1/kg and its like).
    """
    chain = parts.chain
    n, n_wheels = chain.n, len(parts.wheels)
    size = 2 * n + PER_WHEEL * n_wheels + 1
    rows: list[int] = []
    columns: list[int] = []
    values: list[float] = []

    def add(entries, stiffness):
        """Add a spring that feels the given linear form of the coordinates."""
        for row, one in entries:
            for column, other in entries:
                rows.append(row)
                columns.append(column)
                values.append(stiffness * one * other)

    for i in range(n):
        j = (i + 1) % n
        along = positions[j] - positions[i]
        along = along / np.linalg.norm(along)
        form = [(i, -along[0]), (n + i, -along[1]), (j, along[0]), (n + j, along[1])]
        add(form, chain.stiffness)
        if chain.joint_stiffness > 0.0 or chain.bend_stiffness > 0.0:
            # a link's turn against its neighbors moves its ends across by 1/p; four such per pin
            across = 16.0 * max(chain.joint_stiffness, chain.bend_stiffness) / chain.pitch[i] ** 2
            add([(i, along[1]), (n + i, -along[0])], 0.25 * across)
    for i, s in enumerate(seats):
        if s < 0:
            continue
        wheel = parts.wheels[s]
        base = 2 * n + PER_WHEEL * int(s)
        mount = parts.mounts[s]
        arm = positions[i] - centers[s]
        for direction, stiffness in (
            (arm / np.linalg.norm(arm), wheel["stiffness"]),
            (np.array([-arm[1], arm[0]]) / np.linalg.norm(arm), wheel["stiffness"]),
        ):
            e0 = np.array([mount["axis_x"], mount["axis_y"]])
            e1 = np.array([-e0[1], e0[0]])
            torque = arm[0] * direction[1] - arm[1] * direction[0]
            add(
                [
                    (i, direction[0]),
                    (n + i, direction[1]),
                    (base, -direction @ e0),
                    (base + 1, -direction @ e1),
                    (base + SPIN, -torque),
                ],
                stiffness,
            )
    _add_mounts(parts, n, add)
    stiffness = coo_matrix((values, (rows, columns)), shape=(size, size)).tocsr()
    return stiffness, inverse_masses(parts, size)


def _add_mounts(parts, n, add) -> None:
    """Add stops, springs, cords, bearings, backstop and shaft."""
    n_wheels = len(parts.mounts)
    drive = parts.drive[0]
    for s, mount in enumerate(parts.mounts):
        base = 2 * n + PER_WHEEL * s
        guided = base + 2 if mount["arm"] else base
        held = mount["hold_stiffness"] if mount["friction"] > 0.0 else 0.0
        stops = mount["stop_stiffness"] if mount["has_stops"] else 0.0
        add([(guided, 1.0)], mount["spring_rate"] + held + stops + mount["block_stiffness"])
        if mount["weight_mass"] > 0.0:
            add([(base, -1.0), (base + 4, 1.0)], mount["cord_stiffness"])
            add([(base + 4, 1.0)], mount["pulley_stiffness"] if mount["pulley_drag"] > 0.0 else 0.0)
        if mount["bearing_drag"] + mount["bearing_radius"] > 0.0:
            add([(base + 3, 1.0)], mount["bearing_stiffness"])
    driven = 2 * n + PER_WHEEL * int(drive["wheel"]) + SPIN
    shaft = [(driven, 1.0)]
    if drive["motor"]:
        shaft.append((2 * n + PER_WHEEL * n_wheels, -1.0))
        add([(2 * n + PER_WHEEL * n_wheels, 1.0)], drive["gear_stiffness"])
    add(shaft, drive["stiffness"])
    if drive["backstop"]:
        add([(driven, 1.0)], drive["backstop_stiffness"])


def inverse_masses(parts, size: int):
    """Return the diagonal of inverse masses of pins, mounts and rotor (1/kg and its like).

    Carriers only add to the mass of their pins, so leaving them out is on the safe side.

    Parameters
    ----------
    parts : Parts
    size : int
        Number of coordinates (dimensionless).
    """
    n = parts.chain.n
    inverse = np.zeros(size)
    inverse[:n] = inverse[n : 2 * n] = parts.chain.inverse_mass[:n]
    for s, mount in enumerate(parts.mounts):
        base = 2 * n + PER_WHEEL * s
        if mount["arm"]:
            inverse[base + 2] = 1.0 / mount["inertia"]
        else:
            inverse[base] = mount["free_0"] / mount["mass"] if mount["free_0"] else 0.0
            inverse[base + 1] = mount["free_1"] / mount["mass"] if mount["free_1"] else 0.0
            inverse[base + 2] = 1.0 / mount["inertia"] if mount["free_turn"] else 0.0
        inverse[base + 3] = 1.0 / mount["wheel_inertia"]
        if mount["weight_mass"] > 0.0:
            inverse[base + 4] = 1.0 / mount["weight_mass"]
    if parts.drive[0]["motor"]:
        inverse[2 * n + PER_WHEEL * len(parts.mounts)] = 1.0 / parts.drive[0]["inertia"]
    return diags(inverse).tocsr()


def inner_step(parts, positions, seats, centers, damping: float) -> tuple[float, float]:
    """Return the inner step that the stiffest mode allows, and that mode's frequency.

    Parameters
    ----------
    parts : Parts
    positions : ndarray, shape (n_pins, 2)
        Pins at rest [m].
    seats : ndarray of int, shape (n_pins,)
        Wheel of each pin (dimensionless).
    centers : ndarray, shape (n_wheels, 2)
        Axles [m].
    damping : float
        Share of critical of the links (dimensionless).

    Returns
    -------
    tuple of float
        Largest inner step to use [s], `constants.STEP_SHARE` of the limit; frequency [rad/s].
    """
    stiffness, inverse = assembled(parts, positions, seats, centers)
    rate = stiffest_rate(stiffness, inverse)
    return constants.STEP_SHARE * stability_limit(rate, damping), rate
