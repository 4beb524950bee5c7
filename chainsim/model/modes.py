"""Natural modes of the whole lift, linearized at rest: strands, take-ups on the chain."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from scipy.linalg import eigh

from chainsim.kernels.layout import DROP, PER_WHEEL, SPIN, TURN
from chainsim.kernels.march import march
from chainsim.kernels.relax import stop
from chainsim.model.equilibrium import clear, frictionless
from chainsim.model.lift import Lift
from chainsim.model.packing import Packed

MOST_LINKS = 600
"""Links beyond which modes are not worked out [dimensionless]: the dense problem grows large."""

KEPT = 40
"""Number of modes that are kept, from the lowest on [dimensionless]."""

NUDGE = 1.0e-7
"""Displacement of the finite differences, in pitches [dimensionless]."""

BLINK = 1.0e-7
"""Step over which an acceleration is measured [s]; too short for anything to move."""

TAKE_UP_SHARE = 0.25
"""Share of the kinetic energy in a mount that makes a mode its own [dimensionless]."""

STRAND_SHARE = 0.6
"""Share of the kinetic energy in sideways motion of a strand that makes a mode its own."""


class Mode(NamedTuple):
    """One natural mode.

    Attributes
    ----------
    frequency : float
        [Hz].
    kind : str
        ``"take-up tail"``, ``"strand tail-head 1"`` or ``"other"``.
    """

    frequency: float
    kind: str


def natural_modes(lift: Lift, packed: Packed) -> list[Mode]:
    """Return the lowest natural modes of a lift at rest, driven sprocket held, without friction.

    Parameters
    ----------
    lift : Lift
    packed : Packed
        At rest; left as it was found.

    Returns
    -------
    list of Mode
        Rising; empty beyond `MOST_LINKS`.
    """
    if lift.n_links > MOST_LINKS:
        return []
    kept = packed.flat.copy()
    places = _free_coordinates(lift, packed)
    masses = _mass_matrix(packed, places)
    stiffness = -masses @ _acceleration_slopes(lift, packed, places)
    packed.flat[:] = kept
    clear_after(packed)
    stiffness = 0.5 * (stiffness + stiffness.T)
    count = min(KEPT, len(places))
    values, shapes = eigh(stiffness, masses, subset_by_index=(0, count - 1))
    frequencies = np.sqrt(np.maximum(values, 0.0)) / (2.0 * np.pi)
    kinds = _kinds(lift, packed, places, shapes, masses)
    return [Mode(float(f), kind) for f, kind in zip(frequencies, kinds, strict=True)]


def clear_after(packed: Packed) -> None:
    """Empty what the measurement has left in sums and ledgers.

    Parameters
    ----------
    packed : Packed
    """
    ledger = packed.state.ledger.copy()
    clear(packed)
    packed.state.ledger[:] = ledger


def _free_coordinates(lift: Lift, packed: Packed) -> list[int]:
    """Return the places in the flat vector of all coordinates that can move."""
    n, ends = lift.n_links, packed.ends
    mounts = packed.parts.mounts
    places = [*range(n), *range(int(ends[0]), int(ends[0]) + n)]
    start = int(ends[3])
    for s, mount in enumerate(mounts):
        base = start + PER_WHEEL * s
        free = {
            0: mount["free_0"] and not mount["arm"],
            1: mount["free_1"] and not mount["arm"],
            TURN: mount["free_turn"] or mount["arm"],
            SPIN: s != lift.driven,
            DROP: mount["weight_mass"] > 0.0,
        }
        places += [base + k for k, moves in free.items() if moves]
    return places


def _acceleration_slopes(lift: Lift, packed: Packed, places: list[int]) -> np.ndarray:
    """Return how the accelerations change with each coordinate, by central differences [1/s2]."""
    parts = frictionless(packed)
    mounts = parts.mounts.copy()
    mounts["wheel_inertia"][lift.driven] = 1.0e12
    parts = parts._replace(mounts=mounts, law=parts.law._replace(mass=0.0))
    size = NUDGE * lift.scenario.chain.pitch
    rest = packed.flat.copy()
    slopes = np.empty((len(places), len(places)))
    rates = _rate_places(packed, places)
    for column, place in enumerate(places):
        ends = []
        for sign in (1.0, -1.0):
            packed.flat[:] = rest
            stop(packed.state)
            packed.flat[place] += sign * size
            close_loop_of(packed)
            packed.work.search_in[0] = 1 if column else 0
            march(0.0, BLINK, 1, parts, packed.state, packed.rate, packed.work, 0.0)
            ends.append(packed.rate_flat[rates].copy())
        slopes[:, column] = (ends[0] - ends[1]) / (2.0 * size)
    return slopes


def close_loop_of(packed: Packed) -> None:
    """Copy pin 0 to the ghost pin.

    Parameters
    ----------
    packed : Packed
    """
    n = packed.parts.chain.n
    for array in (packed.state.x, packed.state.y, packed.state.vx, packed.state.vy):
        array[n] = array[0]


def _rate_places(packed: Packed, places: list[int]) -> np.ndarray:
    """Return where the accelerations of the coordinates stand in the flat derivative."""
    ends = packed.ends
    x_to_vx = int(ends[1])
    q_to_w = int(ends[4] - ends[3])
    return np.array([p + x_to_vx if p < ends[1] else p + q_to_w for p in places])


def _mass_matrix(packed: Packed, places: list[int]) -> np.ndarray:
    """Return the mass matrix of the free coordinates (kg and its like)."""
    chain, mounts, ends = packed.parts.chain, packed.parts.mounts, packed.ends
    n, start = chain.n, int(ends[3])
    full = np.zeros((2 * n + PER_WHEEL * len(mounts),) * 2)
    for i in range(n):
        j = (i + 1) % n
        full[i, i] = full[n + i, n + i] = chain.mass[i]
        re, im = chain.coupling_re[i], chain.coupling_im[i]
        for row, column, value in ((i, j, re), (n + i, n + j, re), (i, n + j, -im), (n + i, j, im)):
            full[row, column] += value
            full[column, row] += value
    for s, mount in enumerate(mounts):
        base = 2 * n + PER_WHEEL * s
        for k, mass in enumerate(
            (
                mount["mass"],
                mount["mass"],
                mount["inertia"],
                mount["wheel_inertia"],
                mount["weight_mass"],
            )
        ):
            full[base + k, base + k] = mass
        _couple_turn(full, base, mount, packed.state.q[PER_WHEEL * s + TURN])
    rows = [
        p if p < n else (p - int(ends[0]) + n if p < ends[1] else p - start + 2 * n) for p in places
    ]
    return full[np.ix_(rows, rows)]


def _couple_turn(full, base: int, mount, turn: float) -> None:
    """Add the coupling of shift and turn of a body whose center of mass is off the axle."""
    if mount["arm"]:
        return
    c, sn = np.cos(turn), np.sin(turn)
    mx = c * mount["center_x"] - sn * mount["center_y"]
    my = sn * mount["center_x"] + c * mount["center_y"]
    a, b = mount["axis_x"], mount["axis_y"]
    for k, value in enumerate((-my * a + mx * b, my * b + mx * a)):
        full[base + k, base + TURN] += mount["mass"] * value
        full[base + TURN, base + k] += mount["mass"] * value


def _kinds(lift: Lift, packed: Packed, places, shapes, masses) -> list[str]:
    """Name each mode by where its kinetic energy is."""
    n, ends = lift.n_links, packed.ends
    energy = shapes * (masses @ shapes)
    total = energy.sum(axis=0)
    where = np.array(places)
    across, strands = _strand_membership(lift, packed)
    counts: dict[str, int] = {}
    kinds = []
    for m in range(shapes.shape[1]):
        kind = _take_up_kind(lift, where, ends, energy[:, m] / total[m])
        if kind is None:
            ux, uy = shapes[:n, m], shapes[n : 2 * n, m]
            sideways = (ux * across[:, 0] + uy * across[:, 1]) ** 2 * packed.parts.chain.mass[:n]
            for k, strand in enumerate(lift.strands):
                if sideways[strands == k].sum() > STRAND_SHARE * total[m]:
                    counts[strand.name] = counts.get(strand.name, 0) + 1
                    kind = f"strand {strand.name} {counts[strand.name]}"
        kinds.append(kind or "other")
    return kinds


def _take_up_kind(lift: Lift, where, ends, share) -> str | None:
    """Return the name of the take-up that a mode belongs to."""
    start = int(ends[3])
    for s, name in enumerate(lift.wheel_names):
        base = start + PER_WHEEL * s
        own = np.isin(where, [base, base + 1, base + TURN, base + DROP])
        if share[own].sum() > TAKE_UP_SHARE:
            return f"take-up {name}"
    return None


def _strand_membership(lift: Lift, packed: Packed) -> tuple[np.ndarray, np.ndarray]:
    """Return for every pin the unit vector across its link, and its strand; -1 on a wheel."""
    n = lift.n_links
    x, y = packed.state.x, packed.state.y
    step = np.column_stack([x[1 : n + 1] - x[:n], y[1 : n + 1] - y[:n]])
    step /= np.linalg.norm(step, axis=1, keepdims=True)
    across = np.column_stack([step[:, 1], -step[:, 0]])
    strand = np.full(n, -1)
    seat = lift.laid.seat
    for i in range(n):
        if seat[i] >= 0:
            continue
        k = i
        while seat[k] < 0:
            k = (k - 1) % n
            if k == i:
                break
        strand[i] = seat[k]
    return across, strand
