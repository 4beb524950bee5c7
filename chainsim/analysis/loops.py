"""Compiled passes over every sample and pin of a recording, which numpy would do ten times over.

They take float32 trajectories as the recording stores them and write what they find into arrays
that the caller made. Nothing is checked here.
"""

from __future__ import annotations

import math

import numpy as np
from numba import njit

NONE = -1
"""Stands for "no pin" [dimensionless]."""


@njit(cache=True, error_model="numpy")
def find_wraps(position, center, reach, entry, leave):
    """Find the first and the last pin that lie on each sprocket.

    A pin counts while it is no farther from the axle than a reach. The longest run of pins that
    do not count is what hangs free; the pins beside it are the first and the last. So gaps on
    the wrap (a pin that rides up, a loop that hangs free of the teeth) belong to it.

    Parameters
    ----------
    position : ndarray of float32, shape (n_samples, n_pins, 2)
        Pin centers [m].
    center : ndarray, shape (n_samples, n_sprockets, 2)
        Axle positions [m].
    reach : ndarray, shape (n_sprockets,)
        Largest distance from the axle at which a pin counts [m].
    entry, leave : ndarray of int32, shape (n_samples, n_sprockets)
        First and last pin on each sprocket, in the direction of travel [dimensionless];
        `NONE` where no pin or every pin counts. Overwritten.
    """
    n_pins = position.shape[1]
    for i in range(position.shape[0]):
        for k in range(reach.size):
            x, y = np.float32(center[i, k, 0]), np.float32(center[i, k, 1])
            limit = np.float32(reach[k] * reach[k])
            first, last, widest = NONE, NONE, 0
            entry[i, k], leave[i, k] = NONE, NONE
            for j in range(n_pins):
                dx, dy = position[i, j, 0] - x, position[i, j, 1] - y
                if dx * dx + dy * dy <= limit:
                    if first == NONE:
                        first = j
                    elif j - last - 1 > widest:
                        widest = j - last - 1
                        entry[i, k], leave[i, k] = j, last
                    last = j
            if first != NONE and first + n_pins - last - 1 > widest:
                entry[i, k], leave[i, k] = first, last


@njit(cache=True, error_model="numpy")
def strand_speeds(position, velocity, first, n_links, speed):
    """Mean over the links of a strand of their speed along themselves.

    Parameters
    ----------
    position, velocity : ndarray of float32, shape (n_samples, n_pins, 2)
        Pin centers [m] and velocities [m/s].
    first, n_links : ndarray of int32, shape (n_samples,)
        First pin of the strand and number of its links [dimensionless]; 0 links where it is
        not known.
    speed : ndarray, shape (n_samples,)
        Mean speed, positive forward [m/s]; NaN where the strand is not known. Overwritten.
    """
    n_pins = position.shape[1]
    for i in range(position.shape[0]):
        total, a = 0.0, first[i]
        for _ in range(n_links[i]):
            b = a + 1 if a + 1 < n_pins else 0
            tx, ty = position[i, b, 0] - position[i, a, 0], position[i, b, 1] - position[i, a, 1]
            vx, vy = velocity[i, b, 0] + velocity[i, a, 0], velocity[i, b, 1] + velocity[i, a, 1]
            total += 0.5 * (tx * vx + ty * vy) / math.sqrt(tx * tx + ty * ty)
            a = b
        speed[i] = total / n_links[i] if n_links[i] > 0 else math.nan


@njit(cache=True, error_model="numpy")
def strand_excursions(position, first, n_links, normal, offset, size, pin):
    """Largest distances of a strand's pins from a line, to both of its sides.

    Parameters
    ----------
    position : ndarray of float32, shape (n_samples, n_pins, 2)
        Pin centers [m].
    first, n_links : ndarray of int32, shape (n_samples,)
        First pin of the strand and number of its links [dimensionless]; 0 links where it is
        not known.
    normal : ndarray, shape (n_samples, 2)
        Unit normal of the line [dimensionless].
    offset : ndarray, shape (n_samples,)
        Distance of the line from the origin along its normal [m].
    size : ndarray, shape (n_samples, 2)
        Largest distance along the normal and against it [m], zero or more; NaN where the
        strand is not known. Overwritten.
    pin : ndarray of int32, shape (n_samples, 2)
        The pins that reach them [dimensionless]. Overwritten.
    """
    n_pins = position.shape[1]
    for i in range(position.shape[0]):
        most, least = -math.inf, math.inf
        j = first[i]
        pin[i, 0], pin[i, 1] = j, j
        if n_links[i] == 0:
            size[i, 0], size[i, 1] = math.nan, math.nan
            continue
        for _ in range(n_links[i] + 1):
            away = position[i, j, 0] * normal[i, 0] + position[i, j, 1] * normal[i, 1] - offset[i]
            if away > most:
                most, pin[i, 0] = away, j
            if away < least:
                least, pin[i, 1] = away, j
            j = j + 1 if j + 1 < n_pins else 0
        size[i, 0], size[i, 1] = max(most, 0.0), max(-least, 0.0)


@njit(cache=True, error_model="numpy")
def station_means(tension, first, n_links, window, total, mean):
    """Tension at each station of a strand, averaged over the time that ends with each sample.

    Parameters
    ----------
    tension : ndarray of float32, shape (n_samples, n_links_of_chain)
        Link tensions, means over the sample intervals [N].
    first, n_links : ndarray of int32, shape (n_samples,)
        First link of the strand and number of its links [dimensionless]; 0 links where it is
        not known.
    window : float
        Length of the average [samples], 1 or more; a fraction counts as such.
    total : ndarray, shape (n_stations,)
        Running sums [N]. Overwritten.
    mean : ndarray of float32, shape (n_samples, n_stations)
        Averages [N]; NaN where the strand was not known throughout the window. Beyond the end
        of the strand its last link is repeated. Overwritten.
    """
    n, whole = tension.shape[1], int(window)
    part = window - whole
    needed = whole if part == 0.0 else whole + 1
    known = 0
    total[:] = 0.0
    for i in range(tension.shape[0]):
        known = known + 1 if n_links[i] > 0 else 0
        if known <= 1:
            total[:] = 0.0
        for k in range(total.size):
            if known == 0:
                mean[i, k] = math.nan
                continue
            total[k] += tension[i, (first[i] + min(k, n_links[i] - 1)) % n]
            old = 0.0
            if known > whole:
                j = i - whole
                old = tension[j, (first[j] + min(k, n_links[j] - 1)) % n]
                total[k] -= old
            mean[i, k] = (total[k] + part * old) / window if known >= needed else math.nan


@njit(cache=True, error_model="numpy")
def least_level(values, counted, allowed, limit, below):
    """Highest level that no column undercuts for longer than a time, and the longest undercut.

    The level starts high; wherever a column lies below it for one sample too many, it is
    lowered to the largest of those samples.

    Parameters
    ----------
    values : ndarray of float32, shape (n_samples, n_columns)
        Values by sample and column [any unit].
    counted : ndarray of bool, shape (n_columns,)
        Columns that count (dimensionless).
    allowed : int
        Longest time that a column may lie below the level [samples].
    limit : float
        Limit below which the longest time is measured [same unit].
    below : ndarray of int32, shape (2, n_columns)
        How long each column has lain below level and limit [samples]. Overwritten.

    Returns
    -------
    level : float
        The level [same unit]; infinite with fewer samples than needed.
    sample, column : int
        Middle of the time that sets it, and its column [dimensionless]; −1 where none.
    longest : int
        Longest time below the limit [samples].
    """
    level, at, which, longest = math.inf, NONE, NONE, 0
    below[:] = 0
    for i in range(values.shape[0]):
        for k in range(values.shape[1]):
            if not counted[k]:
                continue
            below[1, k] = below[1, k] + 1 if values[i, k] < limit else 0
            longest = max(longest, below[1, k])
            below[0, k] = below[0, k] + 1 if values[i, k] < level else 0
            if below[0, k] <= allowed:
                continue
            largest = values[i, k]
            for j in range(i - allowed, i):
                largest = max(largest, values[j, k])
            level, at, which = largest, i - allowed // 2, k
            run = 0
            while run <= allowed and values[i - run, k] < level:
                run += 1
            below[0, k] = run
    return level, at, which, longest
