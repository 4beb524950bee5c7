"""Packs carriers: constant mass matrices of their pins, factored once, and mass moments."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from chainsim.kernels.carriers import Bands, Blocks
from chainsim.kernels.layout import aligned, padded
from chainsim.model.lift import Lift


class Hung(NamedTuple):
    """Point masses rigid on links: one row per mass.

    Attributes
    ----------
    link : ndarray of int, shape (n_masses,)
        Link that carries it (dimensionless).
    c : ndarray of complex, shape (n_masses,)
        Link map of its place (dimensionless).
    mass : ndarray, shape (n_masses,)
        [kg].
    inertia : ndarray, shape (n_masses,)
        About its own center [kg m2].
    """

    link: np.ndarray
    c: np.ndarray
    mass: np.ndarray
    inertia: np.ndarray


def link_map(a: float, b: float, pitch: float) -> complex:
    """Return the map of a point `a` [m] along its link and `b` [m] outward: ``(a - i b)/p``.

    Parameters
    ----------
    a, b, pitch : float
        [m].
    """
    return complex(a, -b) / pitch


def hung_masses(lift: Lift, loaded: np.ndarray) -> Hung:
    """Return every mass that is rigid on a link: carriers, and the balls held by loaded ones.

    Parameters
    ----------
    lift : Lift
    loaded : ndarray of bool, shape (n_carriers,)
        Carriers that hold a ball rigidly.
    """
    scenario = lift.scenario
    carriers = scenario.carriers
    if carriers is None or not len(lift.carrier_links):
        return Hung(np.zeros(0, np.int64), np.zeros(0, complex), np.zeros(0), np.zeros(0))
    pitch = scenario.chain.pitch
    pocket = carriers.pocket
    count = len(lift.carrier_links)
    out = pocket.offset + 0.5 * (pocket.floor or 0.0)
    center = link_map(0.5 * pitch, out, pitch)
    inertia = carriers.inertia or carriers.mass * (pocket.floor or pitch) ** 2 / 12.0
    link = list(lift.carrier_links)
    c = [center] * count
    mass = [carriers.mass] * count
    own = [inertia] * count
    if lift.pocket is not None and loaded.any():
        seat = link_map(*lift.pocket.seat, pitch)
        for k in np.flatnonzero(loaded):
            link.append(lift.carrier_links[k])
            c.append(seat)
            mass.append(scenario.balls.mass)
            own.append(0.0)
    return Hung(np.array(link, np.int64), np.array(c), np.array(mass), np.array(own))


def mass_matrix_terms(
    pin_mass: np.ndarray, pitch: float, hung: Hung
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return pin masses, the coupling of each link's pins, and the mass moments for gravity.

    Parameters
    ----------
    pin_mass : ndarray, shape (n_pins,)
        Mass of the bare chain on each pin [kg].
    pitch : float
        [m].
    hung : Hung

    Returns
    -------
    diagonal : ndarray, shape (n_pins,)
        [kg].
    coupling : ndarray of complex, shape (n_links,)
        Entry (pin i, pin i + 1) of the Hermitian mass matrix [kg].
    moment : ndarray of complex, shape (n_pins,)
        Weight on each pin per unit of complex gravity [kg].
    """
    n = len(pin_mass)
    diagonal = np.array(pin_mass, float)
    moment = diagonal.astype(complex)
    coupling = np.zeros(n, complex)
    for i, c, mass, inertia in zip(*hung, strict=True):
        j = (i + 1) % n
        turn = inertia / pitch**2
        diagonal[i] += mass * abs(1.0 - c) ** 2 + turn
        diagonal[j] += mass * abs(c) ** 2 + turn
        coupling[i] += mass * np.conj(1.0 - c) * c - turn
        moment[i] += mass * np.conj(1.0 - c)
        moment[j] += mass * np.conj(c)
    return diagonal, coupling, moment


class PinMasses(NamedTuple):
    """The mass matrix of the pins, factored, and what it is made of.

    Attributes
    ----------
    blocks : Blocks
    bands : Bands
    diagonal : ndarray, shape (n_pins,)
        [kg].
    coupling : ndarray of complex, shape (n_links,)
        Entry (pin i, pin i + 1) [kg].
    moment : ndarray of complex, shape (n_pins,)
        Weight on each pin per unit of complex gravity [kg].
    """

    blocks: Blocks
    bands: Bands
    diagonal: np.ndarray
    coupling: np.ndarray
    moment: np.ndarray


def pack_carriers(lift: Lift, loaded: np.ndarray) -> PinMasses:
    """Return the factored mass matrices and the mass moments of all pins.

    Parameters
    ----------
    lift : Lift
    loaded : ndarray of bool, shape (n_carriers,)

    Returns
    -------
    PinMasses
    """
    hung = hung_masses(lift, loaded)
    chain = lift.scenario.chain
    terms = mass_matrix_terms(np.full(lift.n_links, chain.link_mass), chain.pitch, hung)
    return factored(*terms, hung.link)


def factored(
    diagonal: np.ndarray, coupling: np.ndarray, moment: np.ndarray, links: np.ndarray
) -> PinMasses:
    """Return the mass matrix of the pins, factored.

    Parameters
    ----------
    diagonal : ndarray, shape (n_pins,)
        [kg].
    coupling : ndarray of complex, shape (n_links,)
        Entry (pin i, pin i + 1) [kg].
    moment : ndarray of complex, shape (n_pins,)
        Weight on each pin per unit of complex gravity [kg].
    links : ndarray of int, shape (n_masses,)
        Links that carry something (dimensionless).
    """
    n = len(diagonal)
    runs = runs_of_links(np.unique(links), n)
    return PinMasses(
        _blocks([run for run in runs if len(run) == 1], diagonal, coupling, n),
        _bands([run for run in runs if len(run) > 1], diagonal, coupling, n),
        diagonal,
        coupling,
        moment,
    )


def runs_of_links(links: np.ndarray, n: int) -> list[list[int]]:
    """Group links into runs of neighbors on a closed chain.

    Parameters
    ----------
    links : ndarray of int, shape (n_links,)
        Links that carry something, rising (dimensionless).
    n : int
        Links of the chain (dimensionless).

    Returns
    -------
    list of list of int
        A run that closes on itself holds all `n` links.
    """
    carried = {int(link) for link in links}
    if len(carried) == n:
        return [list(range(n))]
    runs = []
    for first in sorted(carried):
        if (first - 1) % n in carried:
            continue
        run = [first]
        while (run[-1] + 1) % n in carried:
            run.append((run[-1] + 1) % n)
        runs.append(run)
    return runs


def _blocks(runs, diagonal, coupling, n: int) -> Blocks:
    """Invert the 2 x 2 Hermitian blocks of single carriers, along the whole chain."""
    own, re, im = aligned(padded(n + 1)), aligned(padded(n + 1)), aligned(padded(n + 1))
    own[:n] = 1.0 / diagonal
    first = np.array([run[0] for run in runs], np.int64)
    second = (first + 1) % n
    ii, jj, ij = diagonal[first], diagonal[second], coupling[first]
    determinant = ii * jj - np.abs(ij) ** 2
    own[first], own[second] = jj / determinant, ii / determinant
    re[first], im[first] = (-ij / determinant).real, (-ij / determinant).imag
    return Blocks(own, re, im)


def _bands(runs, diagonal, coupling, n: int) -> Bands:
    """Factor the tridiagonal Hermitian matrices of runs of carriers (L D L^H)."""
    offsets: list[int] = [0]
    cyclic: list[int] = []
    pivots: list[float] = []
    lowers: list[complex] = []
    spikes: list[complex] = []
    closings: list[tuple[complex, complex]] = []
    for run in runs:
        closes = len(run) == n
        pins = run if closes else [*run, (run[-1] + 1) % n]
        d = diagonal[pins].astype(complex)
        e = np.array([coupling[link] for link in run[: len(pins) - 1]])
        spike, closing = np.zeros(len(pins), complex), (0j, 0j)
        if closes:
            # the entry (last, first) of the mass matrix, and the usual rank-one split
            corner = coupling[run[-1]]
            gamma = -d[0]
            d[0] -= gamma
            d[-1] -= abs(corner) ** 2 / gamma
            u = np.zeros(len(pins), complex)
            u[0], u[-1] = gamma, corner
            pivot, lower = _factor(d, e)
            spike = _solve(pivot, lower, u)
            last = np.conj(corner) / gamma
            closing = (last, 1.0 / (1.0 + spike[0] + last * spike[-1]))
        else:
            pivot, lower = _factor(d, e)
        offsets.append(offsets[-1] + len(pins))
        cyclic.append(int(closes))
        pivots.extend(1.0 / pivot.real)
        lowers.extend(lower)
        spikes.extend(spike)
        closings.append(closing)
    return Bands(
        np.array([run[0] for run in runs], np.int64),
        np.array(offsets, np.int64),
        np.array(cyclic, np.int64),
        np.array(pivots, float),
        np.array(lowers, complex),
        np.array(spikes, complex),
        np.array(closings, complex).reshape(-1, 2),
    )


def _factor(d, e):
    """Return pivots and row multipliers of a Hermitian tridiagonal matrix."""
    pivot, lower = d.copy(), np.zeros(len(d), complex)
    for k in range(1, len(d)):
        lower[k] = np.conj(e[k - 1]) / pivot[k - 1]
        pivot[k] = d[k] - lower[k] * e[k - 1]
    return pivot, lower


def _solve(pivot, lower, right):
    """Solve with the factors of `_factor`."""
    x = right.astype(complex).copy()
    for k in range(1, len(x)):
        x[k] -= lower[k] * x[k - 1]
    x /= pivot
    for k in range(len(x) - 2, -1, -1):
        x[k] -= np.conj(lower[k + 1]) * x[k + 1]
    return x
