"""The loop of a run: marches between dated events, yields blocks, keeps tables and extremes."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from chainsim.errors import RunError
from chainsim.integration.blocks import block_of, geometry_of, new_rows
from chainsim.integration.feeding import Feeder
from chainsim.integration.samples import BLOCK_SAMPLES, Block, Ending, Event, Extreme
from chainsim.integration.start import Prepared, prepare
from chainsim.integration.timeline import Conductor, timeline
from chainsim.integration.worst import Worst
from chainsim.kernels.sample import march_samples
from chainsim.model.lift import Lift
from chainsim.model.modes import natural_modes
from chainsim.model.packing_balls import rolls

OFF_SAMPLES = 25
"""Samples in a row without a pin in contact after which a chain is off [dimensionless]."""

LOGGED_SKIPS = 50
"""Largest number of tooth skips that are logged one by one [dimensionless]."""


class Simulation:
    """One run of a lift: iterate over it for blocks, then read its tables.

    Parameters
    ----------
    lift : Lift
    step_scale : float
        Share of the usual inner step (dimensionless).

    Attributes
    ----------
    duration : float
        Simulated time that is asked for [s].
    time : float
        Simulated time so far [s].
    events : list of Event
    ending : Ending
    """

    def __init__(self, lift: Lift, step_scale: float = 1.0) -> None:
        self.lift = lift
        self.prepared: Prepared = prepare(lift, step_scale)
        self.modes = natural_modes(lift, self.prepared.packed)
        self.feeder = Feeder(self.prepared)
        self.conductor = Conductor(self.prepared, self.feeder)
        self.duration, self._actions = timeline(lift)
        self.interval = self.prepared.dt * self.prepared.steps
        self.time = 0.0
        self.ending = Ending("not finished", False)
        self._sample = 0
        self._rows = new_rows(self.prepared)
        self._filled = 0
        self._worst = Worst(self.prepared)
        self._skipped = np.zeros(len(lift.wheels))
        self._events: list[Event] = []
        self._energy_at_start: float | None = None

    @property
    def events(self) -> list[Event]:
        """Everything that was logged, in order of time."""
        everything = [*self._events, *self.conductor.events, *self.feeder.events]
        return sorted(everything, key=lambda event: event.time)

    @property
    def extremes(self) -> list[Extreme]:
        """Worst values over every inner step so far."""
        return self._worst.extremes()

    def geometry(self) -> dict[str, np.ndarray]:
        """Return outlines and sizes of the parts, by dataset path [m]."""
        return geometry_of(self.prepared)

    def __iter__(self) -> Iterator[Block]:
        """March to the end; yields blocks as they fill.

        Raises
        ------
        RunError
            If the state is not finite; what came before has been yielded.
        """
        total = max(1, round(self.duration / self.interval))
        while self._sample < total:
            self._act()
            taken = self._march(self._ahead(total))
            self._sample += taken
            self.time = self._sample * self.interval
            self._filled += taken
            self._look()
            if self._filled >= BLOCK_SAMPLES or self._sample >= total or self._reason:
                yield from self._flush()
            if self._reason:
                break
        self.ending = Ending(self._reason or "reached the end", True)

    _reason = ""

    def _act(self) -> None:
        """Carry out what is due at this sample."""
        due = self.time + 0.5 * self.interval
        while self._actions and self._actions[0].time < due:
            self.conductor.carry_out(self._actions.pop(0), self.time)
        while self.feeder.next_due < due:
            self.feeder.arrive(self.time)

    def _ahead(self, total: int) -> int:
        """Return for how many samples nothing dated happens (dimensionless)."""
        ahead = min(total - self._sample, BLOCK_SAMPLES - self._filled)
        dates = [self.feeder.next_due]
        if self._actions:
            dates.append(self._actions[0].time)
        soonest = min(dates)
        if math.isfinite(soonest):
            # an event is due at the first sample whose half interval passes it
            ahead = min(ahead, max(1, math.ceil((soonest - self.time) / self.interval - 0.5)))
        return ahead

    def _march(self, samples: int) -> int:
        """March over samples; returns how many were taken (dimensionless)."""
        prepared, packed = self.prepared, self.prepared.packed
        return march_samples(
            self.time,
            prepared.dt,
            prepared.steps,
            samples,
            self._filled,
            packed.parts,
            packed.state,
            packed.rate,
            packed.work,
            prepared.memory,
            self._rows,
            prepared.watch,
        )

    def _look(self) -> None:
        """Act on what the march saw: balls, pockets, jams, skips, a chain that comes off."""
        packed, feeding = self.prepared.packed, self.prepared.watch.feeding[0]
        if not np.isfinite(packed.state.x[0] + packed.state.vx[0]):
            raise RunError(
                f"the state is no longer finite at {self.time:.4g} s; the inner step was "
                f"{self.prepared.dt * 1e6:.3g} us, try run.step = "
                f'"{self.prepared.dt * 0.5e6:.3g} us"'
            )
        if self.lift.scenario.balls is not None:
            if rolls(self.lift):
                self.feeder.look(self.time)
            if feeding["leaving"] >= 0:
                self.feeder.unload_held(self.time, int(feeding["leaving"]))
            if feeding["found"] >= 0:
                self.feeder.set_down(self.time, int(feeding["found"]))
            feeding["found"] = feeding["leaving"] = -1
        if packed.parts.world[0]["jam_release"] > 0.0 and not packed.parts.world[0]["jam_on"]:
            packed.parts.world[0]["jam_release"] = 0.0
            self._events.append(
                Event(self.time, "jam_let_go", "jam", math.nan, "", "the jam lets go")
            )
        self._watch_wheels()

    def _watch_wheels(self) -> None:
        """Log tooth skips, and stop where the chain has left a sprocket."""
        last = self._rows.wheel[self._filled - 1]
        for s, name in enumerate(self.lift.wheel_names):
            whole = np.trunc(last[s, 7] + np.copysign(1e-3, last[s, 7]))
            if abs(whole) > abs(self._skipped[s]) and abs(whole) <= LOGGED_SKIPS:
                text = f"the chain has skipped {int(abs(whole))} teeth of {name}"
                self._events.append(Event(self.time, "skip", name, float(whole), "1", text))
            self._skipped[s] = whole if abs(whole) > abs(self._skipped[s]) else self._skipped[s]

    def _flush(self) -> Iterator[Block]:
        """Hand the filled rows on."""
        block, start = block_of(self.prepared, self._rows, self._filled, self._energy_at_start)
        self._energy_at_start = start
        self._worst.take(self._rows, self._filled)
        self._watch_off()
        self._filled = 0
        yield block

    def _watch_off(self) -> None:
        """End the run where no link has lain on a sprocket for some time."""
        engaged = self._rows.wheel[: self._filled, :, 9]
        for s, name in enumerate(self.lift.wheel_names):
            if self.lift.wheels[s].teeth == 0 or not len(self.lift.strands):
                continue
            bare = np.flatnonzero(engaged[:, s] == 0)
            if len(bare) == self._filled and self._filled >= OFF_SAMPLES:
                self._reason = f"chain left sprocket '{name}'"
                text = f"the chain has left {name}"
                self._events.append(Event(self.time, "chain_off", name, math.nan, "", text))
