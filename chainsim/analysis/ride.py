"""How rough the ride is: accelerations at the carried balls, tilt of their carriers."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.series import Spectrum, spectrum, true_runs
from chainsim.analysis.survey import Survey, survey

SEATED = 3
"""Value of ``balls/state`` of a ball that sits in a pocket [dimensionless]."""


class Ride(NamedTuple):
    """Accelerations at the carried balls in steady running, along one direction.

    Attributes
    ----------
    peak : float
        Largest magnitude of the sample means [m s-2].
    rms : float
        Root mean square over all carried balls [m s-2].
    time : float
        When the peak was reached [s].
    ball : int
        Number of the ball that felt it [dimensionless].
    """

    peak: float
    rms: float
    time: float
    ball: int


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


def carried_balls(rec: Any) -> np.ndarray:
    """Which slots hold a ball that sits in a pocket.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    ndarray of bool, shape (n_samples, n_slots)
        True where a ball is carried; without ``balls/state``, where its seat reserve is known.
    """
    s = survey(rec)
    state = s.channel("balls/state")
    if state is not None:
        return state == SEATED
    reserve = s.channel("balls/seat_reserve")
    return np.isfinite(reserve) if reserve is not None else np.zeros((len(s.time), 0), bool)


def ball_acceleration(rec: Any, frame: str = "link") -> np.ndarray | None:
    """Acceleration of every carried ball.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    frame : str
        ``"link"``: across and along the link of its carrier. ``"strand"``: across and along the
        straight line between the ends of the carrying strand that the link is in.

    Returns
    -------
    ndarray, shape (n_samples, n_slots, 2), or None
        Lateral (positive outward) and longitudinal (positive forward) [m s-2], means over the
        sample intervals; NaN where the slot holds no carried ball, and in the strand's frame
        where the ball rides on no carrying strand. None where nothing was recorded.
    """
    s = survey(rec)
    acceleration = s.channel("balls/acceleration")
    if acceleration is None:
        return None
    acceleration = np.where(carried_balls(s)[..., None], acceleration, np.nan)
    if frame == "link":
        return acceleration
    lean = ball_link_lean(s)
    turn = np.exp(1j * lean)
    both = (acceleration[..., 1] - 1j * acceleration[..., 0]) * turn
    return np.stack((-both.imag, both.real), axis=-1)


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
    return s.once(("ball_link_lean",), lambda: _ball_link_lean(s))


def _ball_link_lean(s: Survey) -> np.ndarray:
    """Work out `ball_link_lean`."""
    pocket = np.asarray(s.rec["balls/pocket"])
    is_held = carried_balls(s) & (pocket >= 0)
    link = np.where(is_held, np.asarray(s.rec["geometry/carrier_link"])[pocket], 0)
    sample = np.arange(len(s.time))[:, None]
    along = s.position[sample, (link + 1) % s.n_pins] - s.position[sample, link]
    lean = np.full(link.shape, np.nan)
    for k in s.carrying:
        pins = s.strand_pins[k]
        chord = s.position[sample[:, 0], pins.pin[:, -1]] - s.position[sample[:, 0], pins.pin[:, 0]]
        turn = (along[..., 0] + 1j * along[..., 1]) * np.conj(chord[:, 0] + 1j * chord[:, 1])[
            :, None
        ]
        station = (link - pins.pin[:, 0:1]) % s.n_pins
        is_here = is_held & (station < pins.n_links[:, None]) & pins.is_known[:, None]
        lean[is_here] = np.angle(turn[is_here])
    return lean


def ride(rec: Any, frame: str = "link") -> tuple[Ride, Ride] | None:
    """Peak and root mean square of the acceleration at the carried balls in steady running.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    frame : str
        ``"link"`` or ``"strand"``, as in `ball_acceleration`.

    Returns
    -------
    (Ride, Ride) or None
        Lateral and longitudinal; None where no ball was carried in steady running.
    """
    s = survey(rec)
    acceleration = ball_acceleration(s, frame)
    if acceleration is None or not s.is_steady.any():
        return None
    samples = np.flatnonzero(s.is_steady)
    steady = acceleration[samples]
    if not np.isfinite(steady).any():
        return None
    number = np.asarray(s.rec["balls/number"])
    rides = []
    for axis in (0, 1):
        size = np.abs(np.nan_to_num(steady[..., axis], nan=0.0))
        at, slot = np.unravel_index(int(np.argmax(size)), size.shape)
        felt = steady[..., axis][np.isfinite(steady[..., axis])].astype(float)
        rides.append(
            Ride(
                float(size[at, slot]),
                float(np.sqrt(np.mean(felt**2))),
                float(s.time[samples[at]]),
                int(number[samples[at], slot]),
            )
        )
    return rides[0], rides[1]


def ride_spectrum(rec: Any, axis: int = 0, frame: str = "link") -> Spectrum | None:
    """Spectrum of the acceleration that one ball felt on its longest ride in steady running.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    axis : int
        0 lateral, 1 longitudinal [dimensionless].
    frame : str
        ``"link"`` or ``"strand"``, as in `ball_acceleration`.

    Returns
    -------
    Spectrum or None
        Amplitudes [m s-2]; None where no ball was carried in steady running.
    """
    s = survey(rec)
    acceleration = ball_acceleration(s, frame)
    if acceleration is None:
        return None
    is_felt = np.isfinite(acceleration[..., axis]) & s.is_steady[:, None]
    rides = [
        (stop - start, start, stop, slot)
        for slot in range(is_felt.shape[1])
        for start, stop in true_runs(is_felt[:, slot])
    ]
    if not rides:
        return None
    _, start, stop, slot = max(rides)
    return spectrum(acceleration[start:stop, slot, axis].astype(float), s.interval)


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
    if not s.has("balls/pocket", "geometry/carrier_link"):
        return []
    lean, pocket = ball_link_lean(s), np.asarray(s.rec["balls/pocket"])
    chosen = np.isfinite(lean) & (s.is_steady if s.steady else np.ones(len(s.time), bool))[:, None]
    below = (np.asarray(s.rec["geometry/carrier_link"])[pocket] - 1) % s.n_pins
    tension = np.take_along_axis(s.tension, np.where(chosen, below, 0), axis=1)
    tilts = []
    for carrier in np.unique(pocket[chosen]):
        here = chosen & (pocket == carrier)
        tilts.append(
            Tilt(
                int(carrier), float(lean[here].mean()), float(tension[here].mean()), int(here.sum())
            )
        )
    return tilts
