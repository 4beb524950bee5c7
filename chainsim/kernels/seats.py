"""Seat reserve: how much more sideways acceleration the seat of every carried ball would hold."""

from typing import NamedTuple

import numpy as np

from chainsim.kernels.balls import FREE, SEATED
from chainsim.kernels.jit import inlined, kernel, woven

#: one record per carrier; directions in the link's frame (along t, along n)
POCKET = np.dtype(
    [
        ("link", np.int64),
        ("seat_re", np.float64),  # link map of the center of a ball in its seat
        ("seat_im", np.float64),
        (
            "lip_t",
            np.float64,
        ),  # from that center toward the lip's edge, as for a ball that touches it
        ("lip_n", np.float64),
        ("back_t", np.float64),  # toward the edge of the back
        ("back_n", np.float64),
        ("low_t", np.float64),  # box in which a ball counts as being in the pocket [m]
        ("high_t", np.float64),
        ("low_n", np.float64),
        ("high_n", np.float64),
    ]
)

#: no reserve is shown above this many g
RESERVE_CAP = 10.0
STANDARD_GRAVITY = 9.80665


class Seats(NamedTuple):
    """What is kept for every ball slot."""

    pocket: np.ndarray  # (balls,) carrier it sits in; -1: none
    judged: np.ndarray  # (balls,) 1 while its reserve counts
    age: np.ndarray  # (balls,) inner steps since it was seated
    at: np.ndarray  # (1,) where the ring is written next
    ring_x: np.ndarray  # (window, balls) pocket velocities of the last window [m/s]
    ring_y: np.ndarray
    reserve: np.ndarray  # (balls,) smallest of the sample interval [m/s2]


@kernel
def seat_velocity(pocket, state):
    """Return the velocity of the seat of a pocket: vx, vy [m/s].

    Parameters
    ----------
    pocket : record of POCKET
    state : State
    """
    i = pocket.link
    ux, uy = state.vx[i + 1] - state.vx[i], state.vy[i + 1] - state.vy[i]
    return (
        state.vx[i] + pocket.seat_re * ux - pocket.seat_im * uy,
        state.vy[i] + pocket.seat_re * uy + pocket.seat_im * ux,
    )


@kernel
def seat_place(pocket, state):
    """Return where the center of a seated ball stands: x, y [m].

    Parameters
    ----------
    pocket : record of POCKET
    state : State
    """
    i = pocket.link
    dx, dy = state.x[i + 1] - state.x[i], state.y[i + 1] - state.y[i]
    return (
        state.x[i] + pocket.seat_re * dx - pocket.seat_im * dy,
        state.y[i] + pocket.seat_re * dy + pocket.seat_im * dx,
    )


@inlined
def reserve_of(pocket, along, across):
    """Return the seat reserve [m/s2] under an effective gravity given in the link's frame.

    It is the smallest extra acceleration along +-n that takes the effective gravity out of the cone
    of the pocket's edges; negative outside; capped.

    Parameters
    ----------
    pocket : record of POCKET
    along, across : float
        Effective gravity along t and n [m/s2].
    """
    cap = RESERVE_CAP * STANDARD_GRAVITY
    reserve = along * pocket.lip_n / pocket.lip_t - across if pocket.lip_t < 0.0 else cap
    if pocket.back_t < 0.0:
        reserve = min(reserve, across - along * pocket.back_n / pocket.back_t)
    if along > 0.0:
        reserve = min(reserve, -along)
    return min(reserve, cap)


@woven
def watch_seats(pockets, seats, touches, state, gx, gy, per_window, zone_x, zone_y, zone):
    """Keep the smallest seat reserve of every seated ball, on the pocket's mean acceleration.

    The mean over the window that ends now is the change of the pocket's velocity over it.

    Parameters
    ----------
    pockets : ndarray of POCKET, shape (n_carriers,)
    seats : Seats
        Overwritten.
    touches : Touches
        Ball states.
    state : State
    gx, gy : float
        Gravity, less the frame's acceleration [m/s2].
    per_window : float
        One over the window's length [1/s].
    zone_x, zone_y, zone : float
        Upward unit vector, and the height along it where the discharge zone begins [m].
    """
    at = seats.at[0]
    window = seats.ring_x.shape[0]
    states = touches.state
    for b in range(touches.used[0]):
        if states[b] < FREE or seats.pocket[b] < 0:
            continue
        pocket = pockets[seats.pocket[b]]
        vx, vy = seat_velocity(pocket, state)
        old_x, old_y = seats.ring_x[at, b], seats.ring_y[at, b]
        seats.ring_x[at, b], seats.ring_y[at, b] = vx, vy
        seats.age[b] += 1
        if seats.age[b] <= window or states[b] != SEATED:
            continue
        i = pocket.link
        # the zone begins where the pocket's link starts to turn: its leading pin meets the head
        if state.x[i + 1] * zone_x + state.y[i + 1] * zone_y > zone:
            seats.judged[b] = 0
        if seats.judged[b] == 0:
            continue
        ex, ey = gx - (vx - old_x) * per_window, gy - (vy - old_y) * per_window
        dx, dy = state.x[i + 1] - state.x[i], state.y[i + 1] - state.y[i]
        inverse = 1.0 / np.sqrt(dx * dx + dy * dy)
        tx, ty = dx * inverse, dy * inverse
        reserve = reserve_of(pocket, ex * tx + ey * ty, ex * ty - ey * tx)
        if reserve < seats.reserve[b]:
            seats.reserve[b] = reserve
    seats.at[0] = at + 1 if at + 1 < window else 0
