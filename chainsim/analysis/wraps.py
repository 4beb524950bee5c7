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


class Wrap(NamedTuple):
    """The part of the chain that lies on one sprocket.

    Attributes
    ----------
    entry, exit : ndarray of int, shape (n_samples,)
        First and last pin on the sprocket, in the direction of travel [dimensionless]: a pin
        with a larger number is further along.
    is_wrapped : ndarray of bool, shape (n_samples,)
        Whether any pin lies there; where none does, `entry` and `exit` mean nothing.
    """

    entry: np.ndarray
    exit: np.ndarray
    is_wrapped: np.ndarray


class StrandPins(NamedTuple):
    """The pins and links of one strand, sample by sample.

    Attributes
    ----------
    pin : ndarray of int, shape (n_samples, n_stations + 1)
        Pin numbers from the start of the strand to its end [dimensionless]; where the strand
        has fewer links than stations, its last pin is repeated.
    link : ndarray of int, shape (n_samples, n_stations)
        Link numbers [dimensionless]; the last link is repeated in the same way.
    n_links : ndarray of int, shape (n_samples,)
        Links in the strand at each sample [dimensionless].
    is_known : ndarray of bool, shape (n_samples,)
        Whether both its sprockets carry chain; elsewhere the numbers mean nothing.
    """

    pin: np.ndarray
    link: np.ndarray
    n_links: np.ndarray
    is_known: np.ndarray


def wrap_on(position: np.ndarray, center: np.ndarray, reach: float) -> Wrap:
    """Find the pins that lie on one sprocket.

    Parameters
    ----------
    position : ndarray, shape (n_samples, n_pins, 2)
        Pin centers [m].
    center : ndarray, shape (n_samples, 2)
        Axle positions [m].
    reach : float
        Largest distance from the axle at which a pin counts as lying on the sprocket [m].

    Returns
    -------
    Wrap
        The first and last of them. Gaps in between (pins that ride up, a loop that hangs
        free of the teeth) belong to the wrap.
    """
    dx = position[:, :, 0] - center[:, 0:1].astype(position.dtype)
    dy = position[:, :, 1] - center[:, 1:2].astype(position.dtype)
    is_near = dx * dx + dy * dy <= reach * reach
    is_last = is_near & ~np.roll(is_near, -1, axis=1)
    is_first = is_near & ~np.roll(is_near, 1, axis=1)
    entry, leave = is_first.argmax(axis=1), is_last.argmax(axis=1)
    for sample in np.flatnonzero(is_last.sum(axis=1) > 1):
        entry[sample], leave[sample] = _ends_with_gaps(is_near[sample])
    return Wrap(entry, leave, is_near.any(axis=1) & ~is_near.all(axis=1))


def _ends_with_gaps(is_near: np.ndarray) -> tuple[int, int]:
    """First and last marked pin of a closed loop: those beside its longest unmarked run."""
    marked = np.flatnonzero(is_near)
    gaps = np.diff(np.append(marked, marked[0] + len(is_near)))
    widest = int(np.argmax(gaps))
    return int(marked[(widest + 1) % len(marked)]), int(marked[widest])


def strand_pins(start: Wrap, end: Wrap, n_pins: int) -> StrandPins:
    """List the pins between two wraps.

    Parameters
    ----------
    start, end : Wrap
        The sprockets at which the strand starts and ends.
    n_pins : int
        Pins in the closed chain [dimensionless].

    Returns
    -------
    StrandPins
        Its pins and links; the last pin on `start` is its station 0.
    """
    is_known = start.is_wrapped & end.is_wrapped
    n_links = np.where(is_known, (end.entry - start.exit) % n_pins, 1)
    n_links = np.maximum(n_links, 1)
    station = np.arange(int(n_links.max(initial=1)) + 1)
    first = start.exit[:, None]
    pin = (first + np.minimum(station, n_links[:, None])) % n_pins
    link = (first + np.minimum(station[:-1], n_links[:, None] - 1)) % n_pins
    return StrandPins(pin, link, n_links, is_known)


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
