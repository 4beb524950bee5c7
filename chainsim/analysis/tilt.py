"""How far loaded carriers lean against the straight line of their strand."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.carried import carried_balls
from chainsim.analysis.survey import Survey, survey

MOST_SAMPLES = 1000
"""Samples, evenly spread, that a mean tilt is taken from [dimensionless]."""


class Tilt(NamedTuple):
    """Tilt of one loaded carrier's link against the straight line of its strand.

    Attributes
    ----------
    carrier : int
        Index of the carrier [dimensionless].
    tilt : float
        Mean angle from the direction of the strand [rad], positive counterclockwise.
    tension : float
        Mean tension of the link below the carrier [N].
    n_samples : int
        Samples the means are taken over [samples].
    """

    carrier: int
    tilt: float
    tension: float
    n_samples: int


def ball_link_lean(rec: Any) -> np.ndarray:
    """Angle of each carried ball's link from the direction of its carrying strand.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    ndarray, shape (n_samples, n_slots)
        Angle [rad], positive counterclockwise; NaN where the ball rides on no carrying strand.
    """
    s = survey(rec)
    return s.once(("ball_link_lean",), lambda: _ball_link_lean(s, np.arange(len(s.time))))


def _ball_link_lean(s: Survey, samples: np.ndarray) -> np.ndarray:
    """Work out `ball_link_lean` for some samples."""
    pocket = s["balls/pocket"][samples]
    is_held = carried_balls(s)[samples] & (pocket >= 0)
    link = np.where(is_held, s["geometry/carrier_link"][pocket], 0)
    row = samples[:, None]
    along = s.position[row, (link + 1) % s.n_pins] - s.position[row, link]
    lean = np.full(link.shape, np.nan)
    for k in s.carrying:
        pins = s.strand_pins[k]
        first, last = pins.first[samples], pins.last[samples]
        chord = s.position[samples, last] - s.position[samples, first]
        back = np.conj(chord[:, 0] + 1j * chord[:, 1])[:, None]
        turn = (along[..., 0] + 1j * along[..., 1]) * back
        station = (link - first[:, None]) % s.n_pins
        is_here = is_held & (station < pins.n_links[samples, None])
        lean[is_here] = np.angle(turn[is_here])
    return lean


def carrier_tilts(rec: Any) -> list[Tilt]:
    """Mean tilt of each loaded carrier on the carrying strand, with the tension below it.

    In steady running; where nothing ran steadily, over the whole run (a lift at rest).

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    list of Tilt
        One for each carrier that rode loaded on a carrying strand.
    """
    s = survey(rec)
    if not s.has("balls/pocket", "geometry/carrier_link", "pins/position", "links/tension"):
        return []
    samples = np.flatnonzero(s.is_steady) if s.steady else np.arange(len(s.time))
    samples = samples[:: max(1, len(samples) // MOST_SAMPLES)]
    lean, pocket = _ball_link_lean(s, samples), s["balls/pocket"][samples]
    chosen = np.isfinite(lean)
    below = (s["geometry/carrier_link"][pocket] - 1) % s.n_pins
    tension = s.tension[samples[:, None], np.where(chosen, below, 0)]
    tilts = []
    for carrier in np.unique(pocket[chosen]):
        here = chosen & (pocket == carrier)
        tilts.append(
            Tilt(
                int(carrier), float(lean[here].mean()), float(tension[here].mean()), int(here.sum())
            )
        )
    return tilts
