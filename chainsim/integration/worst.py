"""Worst values over every inner step of a run, with time and place."""

from __future__ import annotations

import numpy as np

from chainsim.integration.samples import Extreme
from chainsim.integration.start import Prepared
from chainsim.kernels.sample import WHEEL_COLUMNS, Rows

COLUMN = {name: k for k, name in enumerate(WHEEL_COLUMNS)}


class Worst:
    """Keeps the worst values, block by block.

    Parameters
    ----------
    prepared : Prepared
        Its memory holds the extremes of the links and seats, and is cleared at each block.
    """

    def __init__(self, prepared: Prepared) -> None:
        self._memory = prepared.memory
        self._names = prepared.lift.wheel_names
        self._found: dict[str, Extreme] = {}

    def extremes(self) -> list[Extreme]:
        """Return what was found so far."""
        return list(self._found.values())

    def take(self, rows: Rows, filled: int) -> None:
        """Look through the filled rows of a block.

        Parameters
        ----------
        rows : Rows
        filled : int
            Rows in use (dimensionless).
        """
        peak, at, low, low_at = self._memory.link_peak
        when = self._time_of(rows, filled, int(at), largest=True)
        self._keep("link_tension", float(peak), "N", when, f"link {int(at)}", 1.0)
        when = self._time_of(rows, filled, int(low_at), largest=False)
        self._keep("link_push", float(-low), "N", when, f"link {int(low_at)}", 1.0)
        self._memory.link_peak[:] = (-np.inf, -1.0, np.inf, -1.0)
        reserve, ball, seen = self._memory.seat_low
        if np.isfinite(reserve):
            self._keep(
                "seat_reserve", float(reserve), "m s-2", float(seen), f"ball {int(ball)}", -1
            )
        self._memory.seat_low[0] = np.inf
        self._column("penetration", rows.depth[:filled], "m", rows, "contact", 1.0)
        for s, name in enumerate(self._names):
            wheel = rows.wheel[:filled, s]
            self._column(f"ride_height.{name}", wheel[:, COLUMN["ride"]], "m", rows, name, 1.0)
            self._column(f"axle_load.{name}", wheel[:, COLUMN["load"]], "N", rows, name, 1.0)
            travel = wheel[:, COLUMN["travel"]]
            self._column(f"takeup_low.{name}", travel, "m", rows, name, -1.0)
            self._column(f"takeup_high.{name}", travel, "m", rows, name, 1.0)
            self._column(f"stop_touch.{name}", wheel[:, COLUMN["stop"]], "N", rows, name, 1.0)
            skip = wheel[:, COLUMN["skip"]]
            worst = int(np.argmax(np.abs(skip)))
            signed = float(skip[worst])
            known = self._found.get(f"skip.{name}")
            if known is None or abs(signed) > abs(known.value):
                at_time = float(rows.time[worst])
                self._found[f"skip.{name}"] = Extreme(f"skip.{name}", signed, "1", at_time, name)

    def _column(self, name, values, unit, rows, place, sign) -> None:
        """Keep the worst of one column."""
        worst = int(np.argmax(sign * values))
        self._keep(name, float(values[worst]), unit, float(rows.time[worst]), place, sign)

    def _keep(self, name, value, unit, time, place, sign) -> None:
        """Keep a value if it is worse than what is known."""
        known = self._found.get(name)
        if np.isfinite(value) and (known is None or sign * value > sign * known.value):
            self._found[name] = Extreme(name, value, unit, time, place)

    @staticmethod
    def _time_of(rows: Rows, filled: int, link: int, largest: bool) -> float:
        """Return when a link's mean tension was at its extreme in the block [s]."""
        tension = rows.tension[:filled, link]
        return float(rows.time[int(np.argmax(tension) if largest else np.argmin(tension))])
