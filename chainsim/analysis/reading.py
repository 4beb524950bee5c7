"""A recording whose channels and names are each read once."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from typing import Any
from weakref import WeakKeyDictionary

import numpy as np

_KEPT: WeakKeyDictionary[Any, dict[tuple, Any]] = WeakKeyDictionary()
"""Results by recording. They must not hold on to the recording itself, so that it can go."""


class worked_once(cached_property):  # noqa: N801 - stands where `cached_property` would
    """Property that is worked out once for a recording, whoever asks."""

    def __get__(self, instance: Any, owner: type | None = None) -> Any:
        """Value of the property; the property itself, asked of the class."""
        if instance is None:
            return self
        return instance.once((self.attrname,), lambda: self.func(instance))


class Reading:
    """What is read from one recording, kept for the next question.

    Parameters
    ----------
    rec : Recording
        The recording; it is not changed. What was worked out is kept as long as it lives.

    Attributes
    ----------
    rec : Recording
        The recording itself.
    scenario : Scenario
        What was simulated.
    """

    def __init__(self, rec: Any) -> None:
        self.rec = rec
        self.scenario = rec.scenario
        self._kept = _KEPT.setdefault(rec, {})

    def once(self, key: tuple, work: Callable[[], Any]) -> Any:
        """Result of some work, done the first time it is asked for.

        Parameters
        ----------
        key : tuple
            Name of the result, and what it depends on.
        work : callable
            Works it out.

        Returns
        -------
        object
            The result.
        """
        if key not in self._kept:
            self._kept[key] = work()
        return self._kept[key]

    def has(self, *names: str) -> bool:
        """Whether all these channels were recorded.

        Parameters
        ----------
        *names : str
            Dataset paths, such as ``"pins/position"``.

        Returns
        -------
        bool
            True where none is missing.
        """
        return all(name in self.rec for name in names)

    def channel(self, name: str) -> np.ndarray | None:
        """One channel, or None where it was not recorded.

        Parameters
        ----------
        name : str
            Dataset path.

        Returns
        -------
        ndarray, shape (n_samples, ...), or None
            Its values, in the unit of the channel.
        """
        return self[name] if name in self.rec else None

    def __getitem__(self, name: str) -> np.ndarray:
        """Values of one channel, read once."""
        return self.once(("channel", name), lambda: np.asarray(self.rec[name]))

    @worked_once
    def events(self) -> list:
        """Events in the order of time."""
        return list(self.rec.events)

    @worked_once
    def balls(self) -> list:
        """One row per ball."""
        return list(self.rec.balls)

    @worked_once
    def extremes(self) -> dict:
        """Worst values over every inner step, by name."""
        return dict(self.rec.extremes)

    @worked_once
    def time(self) -> np.ndarray:
        """Times of the samples [s], shape (n_samples,)."""
        return np.asarray(self.rec.time, dtype=float)

    @worked_once
    def interval(self) -> float:
        """Time between samples [s]."""
        return float(np.median(np.diff(self.time))) if len(self.time) > 1 else float("nan")

    @worked_once
    def position(self) -> np.ndarray:
        """Pin centers [m], shape (n_samples, n_pins, 2)."""
        return np.ascontiguousarray(self.rec["pins/position"], dtype=np.float32)

    @worked_once
    def velocity(self) -> np.ndarray:
        """Pin velocities [m/s], shape (n_samples, n_pins, 2)."""
        return np.ascontiguousarray(self.rec["pins/velocity"], dtype=np.float32)

    @worked_once
    def tension(self) -> np.ndarray:
        """Link tensions [N], shape (n_samples, n_links), negative where a link pushes."""
        return np.ascontiguousarray(self.rec["links/tension"], dtype=np.float32)

    @worked_once
    def tension_range(self) -> tuple[float, float]:
        """Least and largest link tension of all samples [N]."""
        return float(self.tension.min()), float(self.tension.max())

    @worked_once
    def n_pins(self) -> int:
        """Pins in the chain [dimensionless]."""
        pitch = self.channel("geometry/pitch")
        return self.position.shape[1] if pitch is None else len(pitch)

    @worked_once
    def pitch(self) -> float:
        """Mean pitch of the chain as built and grown [m]."""
        pitch = self.channel("geometry/pitch")
        if pitch is not None and pitch.size:
            return float(np.mean(pitch))
        return float(self.scenario.chain.pitch * (1.0 + self.scenario.chain.growth))

    @worked_once
    def sprocket_names(self) -> tuple[str, ...]:
        """Names of the sprockets in the order of travel."""
        return tuple(sprocket.name for sprocket in self.scenario.sprocket)

    @worked_once
    def teeth(self) -> tuple[int, ...]:
        """Teeth of each sprocket [dimensionless], 0 for a smooth roller."""
        return tuple(int(sprocket.teeth) for sprocket in self.scenario.sprocket)

    @worked_once
    def side(self) -> np.ndarray:
        """+1 for a sprocket inside the loop, −1 outside [dimensionless], shape (n_sprockets,)."""
        return np.array([-1.0 if s.side == "outside" else 1.0 for s in self.scenario.sprocket])

    @worked_once
    def seat_radius(self) -> np.ndarray:
        """Radius of the circle through the seated pins [m], shape (n_sprockets,)."""
        return np.asarray(self["geometry/seat_radius"], dtype=float)

    @worked_once
    def center(self) -> np.ndarray:
        """Axle positions [m], shape (n_samples, n_sprockets, 2)."""
        return np.asarray(self["sprockets/center"], dtype=float)
