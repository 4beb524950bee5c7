"""Watches the balls at every sample: who sits in which pocket, who leaves the lift and how."""

from typing import NamedTuple

import numpy as np

from chainsim.kernels.balls import FREE, SEATED
from chainsim.kernels.jit import kernel
from chainsim.kernels.seats import seat_place

#: what happened to a ball
NOTHING, SAT_DOWN, ROSE, DELIVERED, OUTSIDE_MOUTH, LEFT_BOX, CAME_TO_REST = range(7)
#: a ball that moves slower than this for `REST_SAMPLES` samples outside a pocket rests [m/s]
REST_SPEED = 2.0e-3
REST_SAMPLES = 250

#: the one record of the places where balls leave
EXITS = np.dtype(
    [
        ("has_mouth", np.int64),
        ("mouth_x", np.float64),  # the mouth is a vertical line here [m]
        ("mouth_low", np.float64),
        ("mouth_high", np.float64),
        ("mouth_side", np.float64),  # +1: balls pass it to the right
        ("box_left", np.float64),  # balls beyond the box are gone [m]
        ("box_right", np.float64),
        ("box_low", np.float64),
        ("box_high", np.float64),
    ]
)


class BallWatch(NamedTuple):
    """What is remembered of every ball slot between samples."""

    last_x: np.ndarray  # (balls,) place at the last sample [m]
    last_y: np.ndarray
    still: np.ndarray  # (balls,) samples at rest
    happened: np.ndarray  # (balls,) code
    cross_y: np.ndarray  # (balls,) height at which it crossed the mouth's line [m]
    exits: np.ndarray  # one record of EXITS
    feeding: np.ndarray  # one record of FEEDING
    last_heights: np.ndarray  # (carriers,) of the seats, along up [m]


@kernel
def watch_balls(pockets, exits, radius, touches, seats, state, watch):
    """Say what happened to the balls since the last sample.

    Parameters
    ----------
    pockets : ndarray of POCKET, shape (n_carriers,)
    exits : record of EXITS
    radius : float
        Of a ball [m].
    touches : Touches
        States change between free and seated.
    seats : Seats
        `pocket`, `judged` and `age` follow.
    state : State
    watch : BallWatch
        Overwritten.

    Returns
    -------
    int
        Number of balls for which the loop must act (dimensionless).
    """
    count = 0
    for b in range(touches.used[0]):
        watch.happened[b] = NOTHING
        if touches.state[b] < FREE:
            continue
        x, y = state.bx[b], state.by[b]
        _follow_pocket(pockets, radius, touches, seats, state, watch, b, x, y)
        if exits.has_mouth == 1:
            before = (watch.last_x[b] - exits.mouth_x) * exits.mouth_side
            after = (x - exits.mouth_x) * exits.mouth_side
            if before < 0.0 <= after:
                part = before / (before - after)
                height = watch.last_y[b] + part * (y - watch.last_y[b])
                watch.cross_y[b] = height
                inside = exits.mouth_low <= height <= exits.mouth_high
                watch.happened[b] = DELIVERED if inside else OUTSIDE_MOUTH
        if x < exits.box_left or x > exits.box_right or y < exits.box_low or y > exits.box_high:
            watch.happened[b] = LEFT_BOX
        speed2 = state.bvx[b] ** 2 + state.bvy[b] ** 2
        resting = touches.state[b] == FREE and speed2 < REST_SPEED * REST_SPEED
        watch.still[b] = watch.still[b] + 1 if resting else 0
        if watch.still[b] == REST_SAMPLES:
            watch.happened[b] = CAME_TO_REST
        watch.last_x[b], watch.last_y[b] = x, y
        if watch.happened[b] != NOTHING:
            count += 1
    return count


@kernel
def _follow_pocket(pockets, radius, touches, seats, state, watch, b, x, y):
    """Find the pocket a ball is in, and change its state when it sits down or rises."""
    held = seats.pocket[b]
    if held >= 0 and touches.state[b] == SEATED:
        if not _inside(pockets[held], state, x, y):
            touches.state[b] = FREE
            seats.judged[b] = 0
            watch.happened[b] = ROSE
        return
    if held >= 0 and not _inside(pockets[held], state, x, y):
        seats.pocket[b] = -1
    if seats.pocket[b] < 0:
        for k in range(pockets.shape[0]):
            if _inside(pockets[k], state, x, y):
                seats.pocket[b] = k
                seats.age[b] = 0
                break
    if seats.pocket[b] < 0:
        return
    pocket = pockets[seats.pocket[b]]
    sx, sy = seat_place(pocket, state)
    i = pocket.link
    if (x - sx) ** 2 + (y - sy) ** 2 < (1.2 * radius) ** 2:
        ux, uy = state.bvx[b] - state.vx[i], state.bvy[b] - state.vy[i]
        speed2 = state.vx[i] ** 2 + state.vy[i] ** 2
        if ux * ux + uy * uy < 0.01 + 0.25 * speed2:
            touches.state[b] = SEATED
            seats.judged[b] = 1
            seats.age[b] = 0
            watch.happened[b] = SAT_DOWN


@kernel
def _inside(pocket, state, x, y):
    """Say whether a point lies in the box of a pocket."""
    i = pocket.link
    dx, dy = state.x[i + 1] - state.x[i], state.y[i + 1] - state.y[i]
    rx, ry = x - state.x[i], y - state.y[i]
    length = np.sqrt(dx * dx + dy * dy)
    along = (rx * dx + ry * dy) / length
    across = (rx * dy - ry * dx) / length
    return pocket.low_t < along < pocket.high_t and pocket.low_n < across < pocket.high_n


#: the one record of feeding and of the unloading of held balls
FEEDING = np.dtype(
    [
        ("waiting", np.int64),  # 1: a ball waits for the next free pocket
        ("held", np.int64),  # 1: balls are held by their carriers
        ("up_x", np.float64),
        ("up_y", np.float64),
        ("load", np.float64),  # heights along up [m]
        ("unload", np.float64),
        ("found", np.int64),  # free rising pocket that has just passed the loading height; -1: none
        ("leaving", np.int64),  # loaded pocket that has just passed the unloading height; -1: none
    ]
)


@kernel
def watch_feed(pockets, feeding, seats, touches, state, last_heights):
    """Look for a free pocket at the loading height, and for a held ball at the unloading height.

    Parameters
    ----------
    pockets : ndarray of POCKET, shape (n_carriers,)
    feeding : record of FEEDING
        `found` and `leaving` are overwritten.
    seats : Seats
    touches : Touches
    state : State
    last_heights : ndarray, shape (n_carriers,)
        Heights of the seats at the last sample [m]; overwritten.

    Returns
    -------
    int
        1 where the loop must act (dimensionless).
    """
    feeding.found, feeding.leaving = -1, -1
    for k in range(pockets.shape[0]):
        sx, sy = seat_place(pockets[k], state)
        now = sx * feeding.up_x + sy * feeding.up_y
        before = last_heights[k]
        last_heights[k] = now
        i = pockets[k].link
        rise = (state.x[i + 1] - state.x[i]) * feeding.up_x
        rise += (state.y[i + 1] - state.y[i]) * feeding.up_y
        # a pocket that shakes as it sinks past the loading height is not loaded
        passing = before < feeding.load <= now and rise > 0.0
        if passing and feeding.waiting == 1 and feeding.found < 0:
            taken = False
            for b in range(touches.used[0]):
                taken = taken or (touches.state[b] >= FREE and seats.pocket[b] == k)
            if not taken:
                feeding.found = k
        if feeding.held == 1 and before < feeding.unload <= now and touches.state[k] == SEATED:
            feeding.leaving = k
    return 1 if feeding.found >= 0 or feeding.leaving >= 0 else 0
