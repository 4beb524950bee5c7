"""The mass matrix of pins that carry something, against dense linear algebra."""

import numpy as np
import pytest

from chainsim.kernels.carriers import accelerate_bands, accelerate_pins
from chainsim.model.packing_carriers import (
    Hung,
    factored,
    link_map,
    mass_matrix_terms,
    runs_of_links,
)

PITCH = 0.01


def riding(links, rng):
    """Masses off the pin line on the given links."""
    count = len(links)
    places = rng.uniform(-0.5, 1.5, count) * PITCH + 1j * rng.uniform(-1, 2, count) * PITCH
    c = np.array([link_map(place.real, place.imag, PITCH) for place in places])
    return Hung(
        np.array(links, np.int64), c, rng.uniform(1e-3, 5e-2, count), rng.uniform(0, 1e-5, count)
    )


def dense(n, hung, mass):
    """Mass matrix by adding up every mass through its own map of the pins [kg]."""
    matrix = np.diag(mass).astype(complex)
    for i, c, weight, inertia in zip(*hung, strict=True):
        place = np.zeros(n, complex)
        place[i] += 1 - c
        place[(i + 1) % n] += c
        turn = np.zeros(n, complex)
        turn[i], turn[(i + 1) % n] = -1 / PITCH, 1 / PITCH
        matrix += weight * np.outer(place.conj(), place) + inertia * np.outer(turn.conj(), turn)
    return matrix


def accelerations(masses, force):
    n = len(force)
    ax, ay = np.zeros(n), np.zeros(n)
    accelerate_pins.py_func(masses.blocks, n, force.real, force.imag, ax, ay)
    accelerate_bands.py_func(masses.bands, n, force.real, force.imag, ax, ay)
    return ax + 1j * ay


@pytest.mark.parametrize(
    "links",
    [
        [],
        [3],
        [0, 4, 8],
        [11],  # between the last pin and the first
        [3, 4],
        [2, 3, 4, 5, 9],
        [10, 11, 0, 5],  # a run over the closing link
        [5, 5],  # a carrier and the ball that it holds
        list(range(11)),
        list(range(12)),  # closes on itself
    ],
)
def test_accelerations_are_those_of_the_dense_matrix(links):
    n = 12
    rng = np.random.default_rng(len(links))
    hung = riding(links, rng)
    mass = rng.uniform(0.5e-3, 2e-3, n)
    terms = mass_matrix_terms(mass, PITCH, hung)
    masses = factored(*terms, hung.link)
    force = rng.standard_normal(n) + 1j * rng.standard_normal(n)
    expected = np.linalg.solve(dense(n, hung, mass), force)
    got = accelerations(masses, force)
    np.testing.assert_allclose(got, expected, rtol=1e-10, atol=1e-10 * np.abs(expected).max())


def test_weight_is_shared_by_the_levers_of_the_map():
    """A mass at the middle of a link, 12 mm out: half on each pin, and a pair of forces."""
    hung = Hung(
        np.array([1]), np.array([link_map(5e-3, 12e-3, PITCH)]), np.array([0.02]), np.array([0.0])
    )
    _, _, moment = mass_matrix_terms(np.zeros(4), PITCH, hung)
    # conj(1 - c) = 0.5 - 1.2i, conj(c) = 0.5 + 1.2i
    np.testing.assert_allclose(moment, [0, 0.01 - 0.024j, 0.01 + 0.024j, 0], atol=1e-15)


def test_runs_of_links_close_over_the_last():
    assert runs_of_links(np.array([0, 1, 4, 7]), 8) == [[4], [7, 0, 1]]
    assert runs_of_links(np.arange(5), 5) == [[0, 1, 2, 3, 4]]
    assert runs_of_links(np.array([], int), 5) == []
