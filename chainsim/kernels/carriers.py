"""Carriers rigid on their links: the constant mass matrix of pins that carry something off-axis.

Place, velocity, force and mass of a point of a carrier come from one map of the link's two pins,
``z = (1 - c) z_i + c z_j`` with complex ``c = (a - i b) / p`` for the point ``a`` along the link and
``b`` out of the loop, so that work is exact and the mass matrix has no velocity terms.
"""

from typing import NamedTuple

import numpy as np

from chainsim.kernels.jit import kernel


class Blocks(NamedTuple):
    """Inverse mass matrices of carriers that share no pin: Hermitian 2 x 2 blocks."""

    first: np.ndarray  # (n_blocks,) pin i
    second: np.ndarray  # (n_blocks,) pin j
    ii: np.ndarray  # (n_blocks,) entries of the inverse [1/kg]
    jj: np.ndarray
    ij_re: np.ndarray
    ij_im: np.ndarray


class Bands(NamedTuple):
    """Factored tridiagonal Hermitian mass matrices of runs of neighboring carriers."""

    start: np.ndarray  # (n_runs,) first pin of each run
    offset: np.ndarray  # (n_runs + 1,) where its rows begin in the arrays below
    cyclic: np.ndarray  # (n_runs,) 1: the run closes on itself
    inverse_pivot: np.ndarray  # (n_rows,) [1/kg]
    lower: np.ndarray  # (n_rows,) complex: row k's multiplier of row k - 1
    spike: np.ndarray  # (n_rows,) complex: response to the closing column
    closing: np.ndarray  # (n_runs, 2) complex: last entry of v, and 1 / (1 + v z)


@kernel
def accelerate_pins(inverse_mass, n, fx, fy, ax, ay):
    """Write force over mass for all pins; those of carriers are overwritten after.

    Parameters
    ----------
    inverse_mass : ndarray, shape (n_pins,)
        [1/kg].
    n : int
        Number of pins (dimensionless).
    fx, fy : ndarray, shape (n_pins,)
        Force on the pins [N].
    ax, ay : ndarray, shape (n_pins,)
        Accelerations [m/s2]; overwritten.
    """
    for i in range(n):
        ax[i] = fx[i] * inverse_mass[i]
        ay[i] = fy[i] * inverse_mass[i]


@kernel
def accelerate_blocks(blocks, fx, fy, ax, ay):
    """Write the accelerations of the pins of carriers that share no pin.

    Parameters
    ----------
    blocks : Blocks
    fx, fy : ndarray, shape (n_pins,)
        Force on the pins [N].
    ax, ay : ndarray, shape (n_pins,)
        Accelerations [m/s2]; the carriers' entries are overwritten.
    """
    for b in range(blocks.first.shape[0]):
        i, j = blocks.first[b], blocks.second[b]
        re, im = blocks.ij_re[b], blocks.ij_im[b]
        fix, fiy, fjx, fjy = fx[i], fy[i], fx[j], fy[j]
        ax[i] = blocks.ii[b] * fix + re * fjx - im * fjy
        ay[i] = blocks.ii[b] * fiy + re * fjy + im * fjx
        ax[j] = blocks.jj[b] * fjx + re * fix + im * fiy
        ay[j] = blocks.jj[b] * fjy + re * fiy - im * fix


@kernel
def accelerate_bands(bands, n, fx, fy, ax, ay):
    """Write the accelerations of runs of neighboring carriers (Thomas, Sherman-Morrison).

    Parameters
    ----------
    bands : Bands
    n : int
        Number of pins (dimensionless).
    fx, fy : ndarray, shape (n_pins,)
        Force on the pins [N].
    ax, ay : ndarray, shape (n_pins,)
        Accelerations [m/s2]; the runs' entries are overwritten.

    References
    ----------
    Cyclic tridiagonal systems: W. H. Press et al., Numerical Recipes, sec. 2.7 (from memory).
    """
    for r in range(bands.start.shape[0]):
        first, rows = bands.offset[r], bands.offset[r + 1] - bands.offset[r]
        start = bands.start[r]
        pin = start
        last = complex(fx[pin], fy[pin])
        ax[pin], ay[pin] = last.real, last.imag
        for k in range(1, rows):
            pin = (start + k) % n
            last = complex(fx[pin], fy[pin]) - bands.lower[first + k] * last
            ax[pin], ay[pin] = last.real, last.imag
        last *= bands.inverse_pivot[first + rows - 1]
        ax[pin], ay[pin] = last.real, last.imag
        for k in range(rows - 2, -1, -1):
            pin = (start + k) % n
            last = (
                complex(ax[pin], ay[pin]) * bands.inverse_pivot[first + k]
                - np.conj(bands.lower[first + k + 1]) * last
            )
            ax[pin], ay[pin] = last.real, last.imag
        if bands.cyclic[r] == 1:
            end = (start + rows - 1) % n
            tail = complex(ax[end], ay[end])
            share = (complex(ax[start], ay[start]) + bands.closing[r, 0] * tail) * bands.closing[
                r, 1
            ]
            for k in range(rows):
                pin = (start + k) % n
                turn = bands.spike[first + k] * share
                ax[pin] -= turn.real
                ay[pin] -= turn.imag
