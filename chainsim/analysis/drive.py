"""What the drive does: torque, power, speed under load, standing under power."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.series import longest_run, trailing_mean
from chainsim.analysis.survey import survey

STALLED_SHARE = 0.05
"""A drive slower than this share of its set speed stands still [dimensionless]."""

STALL_TIME = 0.25
"""How long it may stand before it counts as stalled [s]; longer than a jam's first shock."""


class Duty(NamedTuple):
    """Load on the drive, at the driven sprocket.

    Attributes
    ----------
    peak_torque : float
        Largest magnitude of the sample means, whole run [N m].
    peak_time : float
        When it was reached [s].
    rms_torque : float
        Root mean square in steady running [N m]; NaN where there was none.
    mean_torque : float
        Mean in steady running [N m]; NaN where there was none.
    mean_power : float
        Mean mechanical power in steady running [W]; NaN where there was none.
    """

    peak_torque: float
    peak_time: float
    rms_torque: float
    mean_torque: float
    mean_power: float


class Droop(NamedTuple):
    """Loss of speed under load in steady running.

    Attributes
    ----------
    share : float
        Largest loss of the speed averaged over a tooth passage, as a share of the set speed.
    time : float
        When it was reached [s].
    """

    share: float
    time: float


def duty(rec: Any) -> Duty:
    """Torque and power of the drive.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Duty
        At the driven sprocket; peaks between samples are missed.
    """
    s = survey(rec)
    torque = np.asarray(s["drive/torque"], dtype=float)
    peak = int(np.argmax(np.abs(torque)))
    steady = torque[s.is_steady]
    power = s.channel("drive/power")
    nothing = float("nan")
    return Duty(
        float(abs(torque[peak])),
        float(s.time[peak]),
        float(np.sqrt(np.mean(steady**2))) if steady.size else nothing,
        float(steady.mean()) if steady.size else nothing,
        float(power[s.is_steady].mean()) if steady.size and power is not None else nothing,
    )


def droop(rec: Any) -> Droop | None:
    """Loss of speed under load, against the recorded set speed.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Droop or None
        None where nothing ran steadily, or no set speed is known.
    """
    s = survey(rec)
    wanted = s.channel("drive/set_speed")
    if wanted is None or not s.steady:
        return None
    speed = trailing_mean(s.drive_speed, s.tooth_samples)
    with np.errstate(invalid="ignore", divide="ignore"):
        loss = np.where(s.is_steady & (wanted > 0.0), 1.0 - speed / wanted, np.nan)
    if not np.isfinite(loss).any():
        return None
    worst = int(np.nanargmax(loss))
    return Droop(float(loss[worst]), float(s.time[worst]))


def stall(rec: Any) -> tuple[float, float]:
    """Longest time that the drive stood although it should have turned.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    start, duration : float
        When it began and how long it lasted [s]; duration 0 where it never stood, and NaN for
        the start. A start from rest is not counted while its ramp lasts.
    """
    s = survey(rec)
    wanted = s.channel("drive/set_speed")
    if wanted is None:
        return float("nan"), 0.0
    full = float(np.nanmax(np.abs(wanted), initial=0.0))
    stands = np.abs(s.drive_speed) < STALLED_SHARE * full
    stands &= np.abs(np.nan_to_num(wanted)) > 2.0 * STALLED_SHARE * full
    start, length = longest_run(stands)
    return (float(s.time[start]), length * s.interval) if length else (float("nan"), 0.0)
