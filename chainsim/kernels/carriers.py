"""Carriers rigid on their links: the constant mass matrix of pins that carry something off-axis.

Place, velocity, force and mass of a point of a carrier come from one map of the link's two pins,
``z = (1 - c) z_i + c z_j`` with complex ``c = (a - i b) / p`` for the point ``a`` along the link
and ``b`` out of the loop, so that work is exact and the mass matrix has no velocity terms.
"""

from typing import NamedTuple

import numpy as np

from chainsim.kernels.jit import woven


class Blocks(NamedTuple):
    """Inverse mass of every pin, and its coupling to the next pin where a carrier joins the two.

    Carriers that share no pin make Hermitian 2 x 2 blocks; the inverse of each is written along the
    chain, with zeros between, so that one pass over all pins serves.
    """

    own: np.ndarray  # (n_pins,) [1/kg]
    next_re: np.ndarray  # (n_pins,) entry (pin i, pin i + 1) of the inverse [1/kg]
    next_im: np.ndarray


class Bands(NamedTuple):
    """Factored tridiagonal Hermitian mass matrices of runs of neighboring carriers."""

    start: np.ndarray  # (n_runs,) first pin of each run
    offset: np.ndarray  # (n_runs + 1,) where its rows begin in the arrays below
    cyclic: np.ndarray  # (n_runs,) 1: the run closes on itself
    inverse_pivot: np.ndarray  # (n_rows,) [1/kg]
    lower: np.ndarray  # (n_rows,) complex: row k's multiplier of row k - 1
    spike: np.ndarray  # (n_rows,) complex: response to the closing column
    closing: np.ndarray  # (n_runs, 2) complex: last entry of v, and 1 / (1 + v z)


@woven
def accelerate_pins(blocks, n, fx, fy, ax, ay):
    """Write the acceleration of every pin: inverse mass times force, carriers' couplings included.

    Parameters
    ----------
    blocks : Blocks
    n : int
        Number of pins (dimensionless).
    fx, fy : ndarray, shape (n_pins,)
        Force on the pins [N].
    ax, ay : ndarray, shape (n_pins,)
        Accelerations [m/s2]; overwritten.
    """
    own, re, im = blocks.own, blocks.next_re, blocks.next_im
    for i in range(1, n - 1):
        ax[i] = (
            own[i] * fx[i]
            + (re[i] * fx[i + 1] - im[i] * fy[i + 1])
            + (re[i - 1] * fx[i - 1] + im[i - 1] * fy[i - 1])
        )
        ay[i] = (
            own[i] * fy[i]
            + (re[i] * fy[i + 1] + im[i] * fx[i + 1])
            + (re[i - 1] * fy[i - 1] - im[i - 1] * fx[i - 1])
        )
    for i in (0, n - 1):
        ahead, behind = (i + 1) % n, (i - 1 + n) % n
        ax[i] = (
            own[i] * fx[i]
            + (re[i] * fx[ahead] - im[i] * fy[ahead])
            + (re[behind] * fx[behind] + im[behind] * fy[behind])
        )
        ay[i] = (
            own[i] * fy[i]
            + (re[i] * fy[ahead] + im[i] * fx[ahead])
            + (re[behind] * fy[behind] - im[behind] * fx[behind])
        )


@woven
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
