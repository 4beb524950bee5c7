"""What the checks of a bare chain share: marching a strand, its slopes, its frequencies."""

import numpy as np
from scipy.linalg import eigvals
from scipy.optimize import minimize_scalar

from chainsim.kernels.march import march
from chainsim.model.strand import strand_step

GRAVITY = 9.80665
#: the chain of the worked values: No. 40, mass of the catalogs
PITCH, MASS_PER_LENGTH = 0.0127, 0.64
LINK_MASS = MASS_PER_LENGTH * PITCH
WEIGHT = MASS_PER_LENGTH * GRAVITY
AXIAL = 2.0e5
#: step so short that nothing moves while an acceleration is measured [s]
BLINK = 1.0e-12


def line(n_links, pitch=PITCH, along=(0.0, -1.0), stretch=1.0):
    """Pins on a straight line from the origin [m]."""
    return np.outer(np.arange(n_links + 1) * pitch * stretch, along)


def advance(packed, seconds, dt=None, t=0.0):
    """March for some time, in whole steps of about `dt`; returns the time that has passed [s]."""
    dt = strand_step(packed) if dt is None else dt
    steps = max(1, round(seconds / dt))
    march(t, seconds / steps, steps, packed.parts, packed.state, packed.rate, packed.work, 0.0)
    return seconds


def follow(packed, seconds, samples, look, dt=None, act=None):
    """March and look at the state at even times.

    Returns times [s] and what `look(packed)` returned, a row per sample; `act(packed, t)` is
    called before each of the marches.
    """
    dt = strand_step(packed) if dt is None else dt
    interval = seconds / samples
    rows = []
    for k in range(samples):
        if act is not None:
            act(packed, k * interval)
        advance(packed, interval, dt, k * interval)
        rows.append(look(packed))
    return interval * np.arange(1, samples + 1), np.array(rows)


def forces(packed):
    """Accelerations of all pins where they stand [m/s2]: x of all, then y of all."""
    kept = packed.flat.copy()
    packed.work.search_in[0] = 0
    march(0.0, BLINK, 1, packed.parts, packed.state, packed.rate, packed.work, 0.0)
    n = packed.parts.chain.n
    result = np.concatenate([packed.rate.vx[:n], packed.rate.vy[:n]])
    packed.flat[:] = kept
    return result


def slopes(packed, places, size=1e-8):
    """Slopes of the accelerations with the coordinates `places`: x of all pins, then y [1/s2]."""
    n = packed.parts.chain.n
    result = np.empty((len(places), len(places)))
    for column, place in enumerate(places):
        array, i = (packed.state.x, place) if place < n else (packed.state.y, place - n)
        home = array[i]
        ends = []
        for sign in (1.0, -1.0):
            array[i] = home + sign * size
            packed.state.x[n], packed.state.y[n] = packed.state.x[0], packed.state.y[0]
            ends.append(forces(packed)[places])
        array[i] = home
        packed.state.x[n], packed.state.y[n] = packed.state.x[0], packed.state.y[0]
        result[:, column] = (ends[0] - ends[1]) / (2.0 * size)
    return result


def frequencies(packed, places):
    """Natural angular frequencies of the linearized strand, rising [rad/s]."""
    return np.sqrt(np.sort(np.abs(eigvals(-slopes(packed, places)).real)))


def fitted_rate(t, signal, guess, spread=0.05):
    """Angular frequency of the sine that fits a signal best, near a guess [rad/s]."""

    def misfit(rate):
        base = np.column_stack([np.cos(rate * t), np.sin(rate * t), np.ones_like(t)])
        left = signal - base @ np.linalg.lstsq(base, signal, rcond=None)[0]
        return float(left @ left)

    tries = guess * np.linspace(1.0 - spread, 1.0 + spread, 201)
    best = tries[int(np.argmin([misfit(rate) for rate in tries]))]
    gap = tries[1] - tries[0]
    found = minimize_scalar(
        misfit, bounds=(best - gap, best + gap), method="bounded", options={"xatol": 1e-9 * guess}
    )
    return float(found.x)
