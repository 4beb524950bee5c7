"""A recording with what several measures need, each read or worked out once.

Every function of this package takes a recording or its survey. Nothing here changes the
recording.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.loops import find_wraps
from chainsim.analysis.reading import Reading, worked_once
from chainsim.analysis.steady import Window, drive_chain_speed, steady_windows
from chainsim.analysis.wraps import REACH, StrandPins, Wraps, strand_between


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


class Survey(Reading):
    """A recording with what several measures need, each worked out once.

    Parameters
    ----------
    rec : Recording
        The recording; it is not changed.
    """

    @worked_once
    def strands(self) -> tuple[Strand, ...]:
        """Strands in the order of travel."""
        names = self.sprocket_names

        def index(end: Any) -> int:
            return names.index(end) if isinstance(end, str) else int(end)

        return tuple(
            Strand(s.name, index(s.start), index(s.end), bool(s.carrying)) for s in self.rec.strands
        )

    @worked_once
    def carrying(self) -> tuple[int, ...]:
        """Indices of the carrying strands in `strands` [dimensionless]."""
        return tuple(k for k, strand in enumerate(self.strands) if strand.carrying)

    @worked_once
    def wraps(self) -> Wraps:
        """Pins on each sprocket."""
        shape = (len(self.time), len(self.sprocket_names))
        wraps = Wraps(np.empty(shape, np.int32), np.empty(shape, np.int32))
        reach = self.seat_radius + REACH * self.pitch
        find_wraps(self.position, self.center, reach, wraps.entry, wraps.leave)
        return wraps

    @worked_once
    def strand_pins(self) -> tuple[StrandPins, ...]:
        """Where each strand is in the chain, sample by sample."""
        return tuple(
            strand_between(self.wraps, strand.start, strand.end, self.n_pins)
            for strand in self.strands
        )

    @worked_once
    def drive_speed(self) -> np.ndarray:
        """Chain speed that the driven sprocket's rate gives [m/s], shape (n_samples,)."""
        return drive_chain_speed(self)

    @worked_once
    def steady(self) -> tuple[Window, ...]:
        """Windows of steady running (see `steady_windows`)."""
        return steady_windows(self)

    @worked_once
    def is_steady(self) -> np.ndarray:
        """Whether each sample lies in steady running, shape (n_samples,) [dimensionless]."""
        mask = np.zeros(len(self.time), dtype=bool)
        for window in self.steady:
            mask[window.start : window.stop] = True
        return mask

    @worked_once
    def steady_speed(self) -> float:
        """Mean chain speed in steady running [m/s]; NaN where there is none."""
        return float(np.mean(self.drive_speed[self.is_steady])) if self.steady else float("nan")

    @worked_once
    def tooth_rate(self) -> float:
        """Teeth that pass in a second of steady running [Hz], ``v/p``; NaN where there is none."""
        return abs(self.steady_speed) / self.pitch

    @worked_once
    def tooth_samples(self) -> float:
        """Samples in one tooth passage of steady running [samples]."""
        return 1.0 / (self.tooth_rate * self.interval) if self.steady else float("nan")


def survey(rec: Any) -> Survey:
    """Survey of a recording; what was worked out before is known to it.

    Parameters
    ----------
    rec : Recording or Survey
        The recording; a survey is handed back as it is.

    Returns
    -------
    Survey
        Its survey.
    """
    return rec if isinstance(rec, Survey) else Survey(rec)
