"""A recording with what several measures need, each read or worked out once.

Every function of this package takes a recording or its survey. Nothing here changes the
recording.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from typing import Any, NamedTuple
from weakref import WeakKeyDictionary

import numpy as np

from chainsim.analysis.loops import find_wraps
from chainsim.analysis.steady import Window, drive_chain_speed, steady_windows
from chainsim.analysis.wraps import REACH, StrandPins, Wraps, strand_between

_SURVEYS: WeakKeyDictionary[Any, Survey] = WeakKeyDictionary()


class Strand(NamedTuple):
    """One strand of a recorded lift.

    Attributes
    ----------
    name : str
        Names of its two sprockets in the order of travel, such as ``"tail-head"``.
    start, end : int
        Index of the sprocket at each end [dimensionless].
    carrying : bool
        Whether it rises with balls.
    """

    name: str
    start: int
    end: int
    carrying: bool


class Survey:
    """What is read from one recording, kept for the next question.

    Parameters
    ----------
    rec : Recording
        The recording; it is not changed.

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
        self._kept: dict[tuple, Any] = {}

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

    @cached_property
    def events(self) -> list:
        """Events in the order of time."""
        return list(self.rec.events)

    @cached_property
    def balls(self) -> list:
        """One row per ball."""
        return list(self.rec.balls)

    @cached_property
    def extremes(self) -> dict:
        """Worst values over every inner step, by name."""
        return dict(self.rec.extremes)

    @cached_property
    def time(self) -> np.ndarray:
        """Times of the samples [s], shape (n_samples,)."""
        return np.asarray(self.rec.time, dtype=float)

    @cached_property
    def interval(self) -> float:
        """Time between samples [s]."""
        return float(np.median(np.diff(self.time))) if len(self.time) > 1 else float("nan")

    @cached_property
    def position(self) -> np.ndarray:
        """Pin centers [m], shape (n_samples, n_pins, 2)."""
        return np.ascontiguousarray(self.rec["pins/position"], dtype=np.float32)

    @cached_property
    def velocity(self) -> np.ndarray:
        """Pin velocities [m/s], shape (n_samples, n_pins, 2)."""
        return np.ascontiguousarray(self.rec["pins/velocity"], dtype=np.float32)

    @cached_property
    def tension(self) -> np.ndarray:
        """Link tensions [N], shape (n_samples, n_links), negative where a link pushes."""
        return np.ascontiguousarray(self.rec["links/tension"], dtype=np.float32)

    @cached_property
    def tension_range(self) -> tuple[float, float]:
        """Least and largest link tension of all samples [N]."""
        return float(self.tension.min()), float(self.tension.max())

    @cached_property
    def n_pins(self) -> int:
        """Pins in the chain [dimensionless]."""
        return int(self.position.shape[1])

    @cached_property
    def pitch(self) -> float:
        """Mean pitch of the chain as built and grown [m]."""
        pitch = self.channel("geometry/pitch")
        if pitch is not None and pitch.size:
            return float(np.mean(pitch))
        return float(self.scenario.chain.pitch * (1.0 + self.scenario.chain.growth))

    @cached_property
    def sprocket_names(self) -> tuple[str, ...]:
        """Names of the sprockets in the order of travel."""
        return tuple(sprocket.name for sprocket in self.scenario.sprocket)

    @cached_property
    def teeth(self) -> tuple[int, ...]:
        """Teeth of each sprocket [dimensionless], 0 for a smooth roller."""
        return tuple(int(sprocket.teeth) for sprocket in self.scenario.sprocket)

    @cached_property
    def side(self) -> np.ndarray:
        """+1 for a sprocket inside the loop, −1 outside [dimensionless], shape (n_sprockets,)."""
        return np.array([-1.0 if s.side == "outside" else 1.0 for s in self.scenario.sprocket])

    @cached_property
    def seat_radius(self) -> np.ndarray:
        """Radius of the circle through the seated pins [m], shape (n_sprockets,)."""
        return np.asarray(self["geometry/seat_radius"], dtype=float)

    @cached_property
    def center(self) -> np.ndarray:
        """Axle positions [m], shape (n_samples, n_sprockets, 2)."""
        return np.asarray(self["sprockets/center"], dtype=float)

    @cached_property
    def strands(self) -> tuple[Strand, ...]:
        """Strands in the order of travel."""
        names = self.sprocket_names

        def index(end: Any) -> int:
            return names.index(end) if isinstance(end, str) else int(end)

        return tuple(
            Strand(s.name, index(s.start), index(s.end), bool(s.carrying)) for s in self.rec.strands
        )

    @cached_property
    def carrying(self) -> tuple[int, ...]:
        """Indices of the carrying strands in `strands` [dimensionless]."""
        return tuple(k for k, strand in enumerate(self.strands) if strand.carrying)

    @cached_property
    def wraps(self) -> Wraps:
        """Pins on each sprocket."""
        shape = (len(self.time), len(self.sprocket_names))
        wraps = Wraps(np.empty(shape, np.int32), np.empty(shape, np.int32))
        reach = self.seat_radius + REACH * self.pitch
        find_wraps(self.position, self.center, reach, wraps.entry, wraps.leave)
        return wraps

    @cached_property
    def strand_pins(self) -> tuple[StrandPins, ...]:
        """Where each strand is in the chain, sample by sample."""
        return tuple(
            strand_between(self.wraps, strand.start, strand.end, self.n_pins)
            for strand in self.strands
        )

    @cached_property
    def drive_speed(self) -> np.ndarray:
        """Chain speed that the driven sprocket's rate gives [m/s], shape (n_samples,)."""
        return drive_chain_speed(self)

    @cached_property
    def steady(self) -> tuple[Window, ...]:
        """Windows of steady running (see `steady_windows`)."""
        return steady_windows(self)

    @cached_property
    def is_steady(self) -> np.ndarray:
        """Whether each sample lies in steady running, shape (n_samples,) [dimensionless]."""
        mask = np.zeros(len(self.time), dtype=bool)
        for window in self.steady:
            mask[window.start : window.stop] = True
        return mask

    @cached_property
    def steady_speed(self) -> float:
        """Mean chain speed in steady running [m/s]; NaN where there is none."""
        return float(np.mean(self.drive_speed[self.is_steady])) if self.steady else float("nan")

    @cached_property
    def tooth_rate(self) -> float:
        """Teeth that pass in a second of steady running [Hz], ``v/p``; NaN where there is none."""
        return abs(self.steady_speed) / self.pitch

    @cached_property
    def tooth_samples(self) -> float:
        """Samples in one tooth passage of steady running [samples]."""
        return 1.0 / (self.tooth_rate * self.interval) if self.steady else float("nan")


def survey(rec: Any) -> Survey:
    """Survey of a recording, the same one each time it is asked for.

    Parameters
    ----------
    rec : Recording or Survey
        The recording; a survey is handed back as it is.

    Returns
    -------
    Survey
        Its survey, kept as long as the recording lives.
    """
    if isinstance(rec, Survey):
        return rec
    known = _SURVEYS.get(rec)
    if known is None:
        known = _SURVEYS[rec] = Survey(rec)
    return known
