"""When the lift ran steadily: after its settling time, at its set speed, undisturbed."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from chainsim.analysis.series import trailing_mean, true_runs

if TYPE_CHECKING:
    from chainsim.analysis.survey import Survey

SPEED_BAND = 0.02
"""Largest deviation of the drive from its set speed in steady running, as a share of it."""

LEAST_TEETH = 2.0
"""Shortest window that is used [tooth passages]."""

DISTURBANCES = frozenset(
    {
        "start", "stop", "restart", "supply_cut", "supply_restored", "supply_reversed", "jam",
        "jam_released", "knock", "takeup_blocked", "takeup_freed",
    }
)  # fmt: skip
"""Kinds of event after which the lift has to settle again."""


class Window(NamedTuple):
    """A stretch of samples.

    Attributes
    ----------
    start, stop : int
        First sample, and the one after the last [samples].
    """

    start: int
    stop: int


def kind_word(kind: str) -> str:
    """Kind of an event as one lower-case word, however its words were joined.

    Parameters
    ----------
    kind : str
        Such as ``"supply cut"`` or ``"take-up blocked"``.

    Returns
    -------
    str
        Such as ``"supply_cut"`` or ``"takeup_blocked"``.
    """
    return kind.strip().lower().replace("take-up", "takeup").replace(" ", "_").replace("-", "_")


def drive_chain_speed(s: Survey) -> np.ndarray:
    """Chain speed that the rate of the driven sprocket gives, the polygon evened out.

    ``v = rate z p/(2π)`` for ``z`` teeth of pitch ``p``; ``v = rate r`` for a smooth roller of
    radius ``r`` at the pins. Positive forward.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    ndarray, shape (n_samples,)
        Chain speed [m/s].
    """
    driven = s.sprocket_names.index(s.scenario.drive.sprocket)
    rate = np.asarray(s["sprockets/rate"], dtype=float)[:, driven]
    arc = s.teeth[driven] * s.pitch / (2.0 * np.pi) if s.teeth[driven] else s.seat_radius[driven]
    return s.side[driven] * rate * arc


def steady_windows(s: Survey) -> tuple[Window, ...]:
    """Stretches of steady running.

    Steady is: later than the settling time after the start and after every disturbance, and the
    drive, averaged over one tooth passage, within 2 % of its set speed. A motor's set speed is
    what it runs at under load: the median of its speed while it is switched on.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    tuple of Window
        In the order of time; none is shorter than two tooth passages.
    """
    target = _target_speed(s)
    with np.errstate(invalid="ignore", divide="ignore"):
        tooth = s.pitch / (np.nanmax(np.abs(target), initial=0.0) * s.interval)
    if not np.isfinite(tooth):
        return ()
    speed = trailing_mean(s.drive_speed, min(tooth, len(s.time)))
    is_steady = (target > 0.0) & (np.abs(speed - target) <= SPEED_BAND * target)
    for start, end in _disturbed_times(s):
        is_steady &= (s.time <= start) | (s.time >= end)
    shortest = LEAST_TEETH * tooth
    return tuple(Window(*run) for run in true_runs(is_steady) if run[1] - run[0] >= shortest)


def _target_speed(s: Survey) -> np.ndarray:
    """Chain speed that the drive should keep [m/s], 0 where it should stand."""
    speed = s.drive_speed
    set_speed = s.channel("drive/set_speed")
    if set_speed is None:
        wanted = s.scenario.drive.chain_speed
        set_speed = np.full(len(speed), np.nan if wanted is None else wanted)
    is_on = ~(np.nan_to_num(set_speed, nan=1.0) == 0.0)
    if s.scenario.drive.kind == "motor" or np.isnan(set_speed).any():
        settled = is_on & (s.time >= s.scenario.run.settle)
        loaded = float(np.median(speed[settled])) if settled.any() else 0.0
        return np.where(is_on, loaded, 0.0)
    return set_speed.astype(float)


def _disturbed_times(s: Survey) -> list[tuple[float, float]]:
    """Times at which steady running is not counted [s], each until the lift has settled again."""
    settle = s.scenario.run.settle
    times = [(-np.inf, settle)]
    for event in s.events:
        if kind_word(event.kind) in DISTURBANCES:
            times.append((event.time, event.time + settle))
    for event in s.scenario.event:
        if kind_word(event.kind) in DISTURBANCES:
            lasts = getattr(event, "duration", None) or 0.0
            times.append((event.at, event.at + lasts + settle))
    return times
