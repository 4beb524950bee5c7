"""Shares between 0 and 1 at which the axes of a plan are sampled."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

# Quantiles of a distribution without ends are infinite at 0 and 1, and the first
# unscrambled Sobol point is 0; scrambled points never touch the ends.
_LEAST_SHARE = 1e-12


def shares(kind: str, count: int, n_axes: int, seed: int) -> NDArray[np.float64]:
    """Points of a space-filling sample.

    Parameters
    ----------
    kind : str
        `sobol` (scrambled), `latin` (Latin hypercube) or `halton` (scrambled).
    count : int
        Number of points (dimensionless); a power of 2 for `sobol`.
    n_axes : int
        Number of axes (dimensionless).
    seed : int
        Seed of the scrambling (dimensionless); the same seed gives the same points.

    Returns
    -------
    ndarray, shape (count, n_axes)
        Shares, above 0 and below 1 (dimensionless).

    References
    ----------
    scipy.stats.qmc (direction numbers of S. Joe and F. Y. Kuo, 2008; scrambling of
    J. Matousek, 1998; from memory).
    """
    from scipy.stats import qmc

    engines = {"sobol": qmc.Sobol, "latin": qmc.LatinHypercube, "halton": qmc.Halton}
    points = engines[kind](n_axes, rng=np.random.default_rng(seed)).random(count)
    return np.clip(points, _LEAST_SHARE, 1.0 - _LEAST_SHARE)


def index_design(count: int, n_axes: int, seed: int) -> NDArray[np.float64]:
    """Points from which first-order and total Sobol indices are worked out.

    Two independent matrices A and B of `count` rows, then for every axis the matrix A with
    that axis' column taken from B.

    Parameters
    ----------
    count : int
        Number of rows of A (dimensionless), a power of 2.
    n_axes : int
        Number of axes (dimensionless).
    seed : int
        Seed of the scrambling (dimensionless).

    Returns
    -------
    ndarray, shape ((n_axes + 2) * count, n_axes)
        A, then B, then one block per axis (dimensionless).

    References
    ----------
    A. Saltelli, P. Annoni, I. Azzini, F. Campolongo, M. Ratto and S. Tarantola, "Variance
    based sensitivity analysis of model output", Computer Physics Communications 181 (2010),
    the radial design of table 2 (from memory).
    """
    both = shares("sobol", count, 2 * n_axes, seed)
    first, second = both[:, :n_axes], both[:, n_axes:]
    blocks = [first, second]
    for axis in range(n_axes):
        mixed = first.copy()
        mixed[:, axis] = second[:, axis]
        blocks.append(mixed)
    return np.vstack(blocks)


def point_seed(study_seed: int, index: int) -> int:
    """Seed of one point of a sample, the same whoever runs it and in whatever order.

    Parameters
    ----------
    study_seed : int
        Seed of the study (dimensionless).
    index : int
        Number of the point in the plan, from 0 (dimensionless).

    Returns
    -------
    int
        Seed below 2**31 (dimensionless).
    """
    sequence = np.random.SeedSequence(study_seed, spawn_key=(index,))
    return int(sequence.generate_state(1, np.uint32)[0] >> 1)
