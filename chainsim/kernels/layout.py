"""Where each quantity stands in the flat state vector, and the arrays the kernels share.

The state is one flat float64 vector, so that `scipy.integrate.solve_ivp` can carry it; the kernels
see it as named views.  Each section starts on a 64-byte boundary relative to the vector's start.
"""

from typing import NamedTuple

import numpy as np

#: floats in one 64-byte cache line; sections are padded to it
LINE = 8
#: generalized coordinates of one wheel and its mount: two shifts, mount angle, wheel angle, weight
PER_WHEEL = 5
SHIFT_0, SHIFT_1, TURN, SPIN, DROP = range(PER_WHEEL)
#: friction elements of one wheel and its mount
HOLDS = 6
HOLD_BEARING, HOLD_SHIFT_0, HOLD_SHIFT_1, HOLD_TURN, HOLD_PULLEY, HOLD_BACKSTOP = range(HOLDS)
#: friction elements of the drive, after those of the wheels: shaft twist, gear
DRIVE_HOLDS = 2
HOLD_TWIST, HOLD_GEAR = range(DRIVE_HOLDS)
#: features a ball may touch at one time
TOUCHES = 8

#: ledger entries [J], in order
LEDGER = (
    "work_drive",
    "work_knock",
    "balls_in",
    "balls_out",
    "loss_link",
    "loss_contact",
    "loss_tooth",
    "loss_joint",
    "loss_bearing",
    "loss_mount",
    "loss_drive",
    "loss_air",
    "loss_ball",
    "loss_guide",
    "loss_jam",
)
(
    WORK_DRIVE,
    WORK_KNOCK,
    BALLS_IN,
    BALLS_OUT,
    LOSS_LINK,
    LOSS_CONTACT,
    LOSS_TOOTH,
    LOSS_JOINT,
    LOSS_BEARING,
    LOSS_MOUNT,
    LOSS_DRIVE,
    LOSS_AIR,
    LOSS_BALL,
    LOSS_GUIDE,
    LOSS_JAM,
) = range(len(LEDGER))


class State(NamedTuple):
    """Named views of one flat state vector (or of its time derivative).

    Pins have one ghost behind the last (index ``n``), a copy of pin 0 that closes the loop.
    """

    x: np.ndarray  # (n + ghost,) pin positions [m]
    y: np.ndarray
    vx: np.ndarray  # (n + ghost,) pin velocities [m/s]
    vy: np.ndarray
    q: np.ndarray  # (5 wheels + 1,) shifts [m], turn [rad], spin [rad], drop [m]; rotor [rad]
    w: np.ndarray  # their rates
    joint: np.ndarray  # (n + ghost,) joint friction deflection [rad]
    tooth: np.ndarray  # (n + ghost,) pin on tooth friction deflection [m]
    guide: np.ndarray  # (n + ghost,) pin on guide friction deflection [m]
    held: np.ndarray  # (6 wheels + 2,) friction deflections of mounts and drive [m or rad]
    bx: np.ndarray  # (balls,) ball centers [m]
    by: np.ndarray
    spin: np.ndarray  # (balls,) ball angles [rad]
    bvx: np.ndarray
    bvy: np.ndarray
    bw: np.ndarray
    grip: np.ndarray  # (balls * TOUCHES,) ball friction deflection [m]
    ledger: np.ndarray  # (15,) energies [J], see LEDGER


def padded(count):
    """Return a count rounded up to whole cache lines.

    Parameters
    ----------
    count : int
        (dimensionless)
    """
    return -(-count // LINE) * LINE


def section_sizes(n_pins, n_wheels, n_balls):
    """Return the padded length of every section of the state, in the order of `State`.

    Parameters
    ----------
    n_pins, n_wheels, n_balls : int
        Counts (dimensionless).
    """
    pins = padded(n_pins + 1)
    bodies = padded(PER_WHEEL * n_wheels + 1)
    holds = padded(HOLDS * n_wheels + DRIVE_HOLDS)
    balls = padded(max(n_balls, 1))
    grips = padded(max(n_balls, 1) * TOUCHES)
    return np.array([pins] * 4 + [bodies] * 2 + [pins] * 3 + [holds] + [balls] * 6 + [grips, 16])


def view(flat, ends):
    """Return the named views of a flat vector.

    Parameters
    ----------
    flat : ndarray, shape (n_state,)
        State vector, or its derivative (mixed SI units).
    ends : ndarray, shape (18,)
        Running sums of `section_sizes` (dimensionless).

    Returns
    -------
    State
        Views: writing to them writes to `flat`.
    """
    starts = [0, *ends[:-1]]
    return State(*(flat[a:b] for a, b in zip(starts, ends, strict=True)))


def aligned(count, dtype=np.float64):
    """Return zeros whose first element stands on a 64-byte boundary.

    Parameters
    ----------
    count : int
        Number of elements (dimensionless).
    dtype : dtype
        Element type.
    """
    size = np.dtype(dtype).itemsize
    raw = np.zeros(count * size + 64, dtype=np.uint8)
    start = -raw.ctypes.data % 64
    return raw[start : start + count * size].view(dtype)
