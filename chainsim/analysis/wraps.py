"""Which pins lie on which sprocket, and which links hang between them.

Found from the positions alone: a pin lies on a wrap while its center is near the circle of the
seats. So a strand keeps its links in sight when it bows, buckles or has skipped a tooth.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

REACH = 0.2
"""How far above its seat circle a pin still counts as lying on the wrap [pitches]. A taut strand
leaves an 8-tooth sprocket by 0.34 pitches within the first pitch after the tangent point."""


class Wraps(NamedTuple):
    """The parts of the chain that lie on the sprockets.

    Attributes
    ----------
    entry, leave : ndarray of int32, shape (n_samples, n_sprockets)
        First and last pin on each sprocket, in the direction of travel [dimensionless]; −1
        where no pin lies on it.
    """

    entry: np.ndarray
    leave: np.ndarray


class StrandPins(NamedTuple):
    """Where one strand is in the chain, sample by sample.

    Attributes
    ----------
    first : ndarray of int32, shape (n_samples,)
        Its first pin, the last one on its start sprocket [dimensionless]. Its first link has
        the same number.
    n_links : ndarray of int32, shape (n_samples,)
        Its links [dimensionless]; 0 where one of its sprockets carries no chain.
    n_pins : int
        Pins in the whole chain [dimensionless].
    """

    first: np.ndarray
    n_links: np.ndarray
    n_pins: int

    @property
    def is_known(self) -> np.ndarray:
        """Whether the strand hangs between two sprockets, shape (n_samples,)."""
        return self.n_links > 0

    @property
    def last(self) -> np.ndarray:
        """Its last pin [dimensionless], shape (n_samples,)."""
        return (self.first + self.n_links) % self.n_pins

    def pins(self, samples: np.ndarray) -> np.ndarray:
        """List its pins from start to end.

        Parameters
        ----------
        samples : ndarray of int, shape (n,)
            Samples to list them for [dimensionless].

        Returns
        -------
        ndarray of int, shape (n, n_stations + 1)
            Pin numbers [dimensionless]; the last is repeated where the strand is shorter than
            at its longest.
        """
        n_links = self.n_links[samples, None]
        station = np.arange(int(n_links.max(initial=0)) + 1)
        return (self.first[samples, None] + np.minimum(station, n_links)) % self.n_pins


def strand_between(wraps: Wraps, start: int, end: int, n_pins: int) -> StrandPins:
    """Find the strand between two sprockets.

    Parameters
    ----------
    wraps : Wraps
        Pins on the sprockets.
    start, end : int
        Index of the sprocket at each end [dimensionless].
    n_pins : int
        Pins in the whole chain [dimensionless].

    Returns
    -------
    StrandPins
        Where it is.
    """
    first, last = wraps.leave[:, start], wraps.entry[:, end]
    n_links = np.where((first >= 0) & (last >= 0), (last - first) % n_pins, 0)
    return StrandPins(np.maximum(first, 0), n_links.astype(np.int32), n_pins)


def tangent_line(
    start_center: np.ndarray,
    start_radius: float,
    end_center: np.ndarray,
    end_radius: float,
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Straight line that touches two seat circles as a taut strand would.

    With ``D`` the vector between the axles and signed radii ``r`` (negative for a sprocket
    outside the loop), the outward normal ``n`` obeys ``D . n = r_start − r_end``.

    Parameters
    ----------
    start_center, end_center : ndarray, shape (n_samples, 2)
        Axle positions [m].
    start_radius, end_radius : float
        Seat radii [m], negative where the sprocket lies outside the loop.

    Returns
    -------
    start : ndarray, shape (n_samples, 2)
        Tangent point at the start [m].
    outward : ndarray, shape (n_samples, 2)
        Unit normal of the line, out of the loop [dimensionless]; the direction of travel
        turned by −90°. NaN where one sprocket is both ends, or no such line exists.
    length : ndarray, shape (n_samples,)
        Length of the line between the tangent points [m].
    """
    between = end_center - start_center
    distance = np.hypot(between[:, 0], between[:, 1])
    drop = start_radius - end_radius
    with np.errstate(divide="ignore", invalid="ignore"):
        angle = np.arctan2(between[:, 1], between[:, 0]) - np.arccos(drop / distance)
        length = np.sqrt(distance**2 - drop**2)
    angle = np.where(distance > 0.0, angle, np.nan)
    outward = np.stack((np.cos(angle), np.sin(angle)), axis=1)
    return start_center + start_radius * outward, outward, length
