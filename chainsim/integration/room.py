"""Whether a pocket has room for a ball: nothing else may stand where the ball would be set down."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from chainsim.integration.start import Prepared
from chainsim.kernels.seats import seat_place

STRAIGHT = 0.98
"""Share of a seat's distance from the pin line at which the chain counts as straight
[dimensionless]."""


def has_room(prepared: Prepared, carrier: int, slots: Iterable[int]) -> bool:
    """Say whether no other ball, neighboring carrier or bent chain is in a ball's way.

    A ball that is set down into something would gain the energy of the overlap.

    Parameters
    ----------
    prepared : Prepared
    carrier : int
        The pocket (dimensionless).
    slots : iterable of int
        Balls that may be in the way (dimensionless).
    """
    lift, state = prepared.lift, prepared.packed.state
    place = np.array(seat_place(prepared.packed.parts.pockets[carrier], state))
    reach = 2.0 * lift.ball_radius
    if any(np.hypot(state.bx[b] - place[0], state.by[b] - place[1]) < reach for b in slots):
        return False
    if lift.pocket is None:
        return True
    # a straight chain is as far from a seated ball as the pocket puts it
    roller = 0.5 * lift.scenario.chain.roller_diameter
    reach = min(lift.ball_radius + roller, STRAIGHT * lift.pocket.seat[1])
    around = lift.n_links + 1  # pin 0 follows the last one again
    if _distance(place, np.column_stack([state.x[:around], state.y[:around]])) < reach:
        return False
    reach = lift.ball_radius + lift.pocket.half_wall
    beside = {(carrier + side) % len(lift.carrier_links) for side in (-1, 1)} - {carrier}
    return all(_distance(place, _spine(prepared, k, lift.pocket.spine)) >= reach for k in beside)


def _spine(prepared: Prepared, carrier: int, spine: np.ndarray) -> np.ndarray:
    """Return the middle line of a carrier's pocket where it stands now [m]."""
    lift, state = prepared.lift, prepared.packed.state
    i = int(lift.carrier_links[carrier])
    start = np.array([state.x[i], state.y[i]])
    along = np.array([state.x[i + 1], state.y[i + 1]]) - start
    along /= np.hypot(*along)
    normal = np.array([along[1], -along[0]])
    return start + spine[:, :1] * along + spine[:, 1:] * normal


def _distance(place: np.ndarray, line: np.ndarray) -> float:
    """Return the least distance of a point from a polyline [m]."""
    steps = np.diff(line, axis=0)
    along = np.sum((place - line[:-1]) * steps, axis=1) / np.sum(steps**2, axis=1)
    nearest = line[:-1] + np.clip(along, 0.0, 1.0)[:, None] * steps
    return float(np.min(np.hypot(*(place - nearest).T)))
