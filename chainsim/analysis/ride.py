"""How rough the ride is: accelerations at the carried balls."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.carried import carried_balls
from chainsim.analysis.series import Spectrum, spectrum, true_runs
from chainsim.analysis.survey import survey
from chainsim.analysis.tilt import ball_link_lean


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
    number = s["balls/number"]
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
