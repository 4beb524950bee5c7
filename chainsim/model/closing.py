"""Where movable axles stand when the loop closes taut with a whole number of links."""

from __future__ import annotations

import numpy as np
from scipy.optimize import brentq

from chainsim.errors import LayoutError
from chainsim.model.loop import Wheel
from chainsim.model.tangents import route
from chainsim.model.walk import walk_round

LEAST_SLOPE = 1e-3
"""Growth of the loop over travel of an axle (dimensionless) below which it closes nothing."""


def closing_travel(
    wheels: tuple[Wheel, ...], pitch: float, n_links: int, down: tuple[float, float]
) -> np.ndarray:
    """Find the shift of each movable axle at which the loop closes exactly taut.

    Parameters
    ----------
    wheels : tuple of Wheel
        As drawn; several movable axles share the shift as they lengthen the loop.
    pitch : float
        Pitch of the chain [m].
    n_links : int
        Number of links (dimensionless).
    down : tuple of float, shape (2,)
        Unit direction of gravity (dimensionless).

    Returns
    -------
    ndarray, shape (n_wheels,)
        Shift along the way of each axle [m], 0 for fixed ones.

    Raises
    ------
    LayoutError
        If the axles do not change the length of the loop, or no shift closes it.
    """
    slope = _length_slopes(wheels, pitch, down)
    largest = float(np.abs(slope).max())
    if largest < LEAST_SLOPE:
        raise LayoutError("the movable axles do not change the length of the loop")
    share = slope / largest

    def excess(shift: float) -> float:
        moved = tuple(w.moved(shift * part) for w, part in zip(wheels, share, strict=True))
        walk = walk_round(route(moved, pitch, down), n_links, 0, pitch)
        return walk.gap - walk.links_left * pitch

    rate = float((slope * share).sum())
    guess = (n_links - route(wheels, pitch, down).links) * pitch / rate
    try:
        for width in (0.25, 1.0, 3.0):
            low, high = guess - width * pitch, guess + width * pitch
            if excess(low) < 0.0 < excess(high):
                return float(brentq(excess, low, high, xtol=1e-15, rtol=8.9e-16)) * share
    except LayoutError as error:
        raise LayoutError(f"{n_links} links do not close this loop: {error}") from error
    raise LayoutError(f"no travel of the movable axles closes the loop taut with {n_links} links")


def _length_slopes(
    wheels: tuple[Wheel, ...], pitch: float, down: tuple[float, float]
) -> np.ndarray:
    """Return how fast the loop grows as each axle is shifted (dimensionless), 0 if fixed."""
    slope = np.zeros(len(wheels))
    small = 1e-4 * pitch
    for k, wheel in enumerate(wheels):
        if wheel.movable is not None:
            ends = [
                route((*wheels[:k], wheel.moved(shift), *wheels[k + 1 :]), pitch, down).links
                for shift in (-small, small)
            ]
            slope[k] = (ends[1] - ends[0]) * pitch / (2.0 * small)
    return slope
