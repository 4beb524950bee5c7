"""Loads on the axles, travel of the take-ups, load of the teeth along a wrap."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.survey import Survey, survey

MOVABLE = frozenset({"sliding", "hung", "arm", "spring", "counterweight"})
"""Kinds of mount whose axle moves."""


class AxleLoad(NamedTuple):
    """Force of the chain on one axle.

    Attributes
    ----------
    sprocket : str
        Name of the sprocket.
    peak : float
        Largest magnitude of the sample means, whole run [N].
    time : float
        When it was reached [s].
    mean : float
        Mean magnitude in steady running [N]; NaN where there was none.
    """

    sprocket: str
    peak: float
    time: float
    mean: float


class Travel(NamedTuple):
    """Range that one take-up used.

    Attributes
    ----------
    sprocket : str
        Name of the sprocket.
    low, high : float
        Lowest and highest travel along its axis [m]; for an arm its angle [rad].
    low_time, high_time : float
        When they were reached [s].
    unit : str
        ``"m"`` or ``"rad"``.
    """

    sprocket: str
    low: float
    high: float
    low_time: float
    high_time: float
    unit: str


class WrapLoad(NamedTuple):
    """How the teeth of one sprocket share the pull, tooth by tooth, means of steady running.

    Attributes
    ----------
    tension : ndarray, shape (n_seats + 1,)
        Tension of the link before the first pin on the wrap, then behind each pin, in the
        direction of travel [N].
    tooth_force : ndarray, shape (n_seats,)
        Force of each pin on the sprocket [N], from the two link forces at it; weight and
        inertia of the pin are left out.
    """

    tension: np.ndarray
    tooth_force: np.ndarray


def axle_loads(rec: Any) -> list[AxleLoad]:
    """Load on each axle.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    list of AxleLoad
        In the order of travel; empty where no forces were recorded.
    """
    s = survey(rec)
    force = s.channel("sprockets/force")
    if force is None:
        return []
    size = np.hypot(force[..., 0], force[..., 1])
    peak = np.argmax(size, axis=0)
    steady = size[s.is_steady]
    return [
        AxleLoad(
            name,
            float(size[peak[k], k]),
            float(s.time[peak[k]]),
            float(steady[:, k].mean()) if len(steady) else float("nan"),
        )
        for k, name in enumerate(s.sprocket_names)
    ]


def takeup_travel(rec: Any) -> list[Travel]:
    """Range of travel of every take-up over the whole run.

    Extremes over every inner step where the run kept them, else those of the samples.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    list of Travel
        One for each movable mount, in the order of travel of the chain.
    """
    s = survey(rec)
    return [
        _travel(s, k)
        for k, sprocket in enumerate(s.scenario.sprocket)
        if sprocket.mount.kind in MOVABLE
    ]


def _travel(s: Survey, k: int) -> Travel:
    """Range of one take-up."""
    sprocket = s.scenario.sprocket[k]
    is_arm = sprocket.mount.kind == "arm"
    series = s["mounts/angle" if is_arm else "mounts/travel"][:, k]
    low, high = int(np.argmin(series)), int(np.argmax(series))
    travel = Travel(
        sprocket.name,
        float(series[low]),
        float(series[high]),
        float(s.time[low]),
        float(s.time[high]),
        "rad" if is_arm else "m",
    )
    least = s.extremes.get(f"takeup_low.{sprocket.name}")
    most = s.extremes.get(f"takeup_high.{sprocket.name}")
    if least is not None and least.value <= travel.low:
        travel = travel._replace(low=least.value, low_time=least.time)
    if most is not None and most.value >= travel.high:
        travel = travel._replace(high=most.value, high_time=most.time)
    return travel


def travel_per_length(rec: Any, sprocket: int) -> float:
    """Travel of a take-up that takes up one unit of chain length.

    Moving an axle by ``d`` changes the length of a taut loop by ``−(a + b) . d``, where ``a``
    and ``b`` are the unit vectors from it along its two strands; turning with the wrap changes
    nothing to first order.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    sprocket : int
        Index of the sprocket [dimensionless].

    Returns
    -------
    float
        Travel along the axis for a chain longer by one unit [dimensionless]; [rad/m] for an
        arm. NaN where travel takes up no length.
    """
    s = survey(rec)
    along = _strand_directions(s, sprocket).sum(axis=0)
    mount = s.scenario.sprocket[sprocket].mount
    if mount.kind == "arm":
        arm = s.center[0, sprocket] - np.asarray(mount.pivot)
        axis = np.array([-arm[1], arm[0]])
    elif mount.kind == "hung":
        axis = np.array([0.0, 1.0])
    else:
        axis = np.asarray(mount.axis, dtype=float)
        axis = axis / np.hypot(*axis)
    gain = -float(along @ axis)
    return 1.0 / gain if abs(gain) > 1e-6 else float("nan")


def _strand_directions(s: Survey, sprocket: int) -> np.ndarray:
    """Unit vectors from an axle along its two strands in the first sample, shape (2, 2)."""
    directions = []
    for k, strand in enumerate(s.strands):
        pins = s.strand_pins[k]
        first, last = s.position[0, pins.first[0]], s.position[0, pins.last[0]]
        along = (last - first) / max(float(np.hypot(*(last - first))), 1e-300)
        if strand.start == sprocket:
            directions.append(along)
        if strand.end == sprocket:
            directions.append(-along)
    return np.array(directions)


def wrap_load(rec: Any, sprocket: int) -> WrapLoad | None:
    """Load of the teeth of one sprocket, from entry to exit.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    sprocket : int
        Index of the sprocket [dimensionless].

    Returns
    -------
    WrapLoad or None
        Means over steady running, over the samples with the usual number of pins on the wrap;
        over the whole run where nothing ran steadily. None where no chain lies there.
    """
    s = survey(rec)
    entry, leave = s.wraps.entry[:, sprocket], s.wraps.leave[:, sprocket]
    count = (leave - entry) % s.n_pins + 1
    chosen = (entry >= 0) & (s.is_steady if s.steady else True)
    if not chosen.any():
        return None
    usual = int(np.bincount(count[chosen]).argmax())
    samples = np.flatnonzero(chosen & (count == usual))[:, None]
    before = (entry[samples[:, 0]] - 1)[:, None]
    link = (before + np.arange(usual + 1)) % s.n_pins
    pull = s.tension[samples, link].astype(float)
    along = s.position[samples, (link + 1) % s.n_pins] - s.position[samples, link]
    along = along / np.hypot(along[..., 0], along[..., 1])[..., None]
    force = pull[..., None] * along
    on_tooth = force[:, 1:] - force[:, :-1]
    return WrapLoad(pull.mean(axis=0), np.hypot(on_tooth[..., 0], on_tooth[..., 1]).mean(axis=0))
