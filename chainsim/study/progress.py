"""How a sweep shows itself while it runs: a live table on a terminal, plain lines elsewhere."""

from __future__ import annotations

import sys
import time
from collections import deque
from typing import Any, TextIO

from chainsim.study.engines import Engine
from chainsim.study.forecast import duration_text
from chainsim.study.jobs import Outcome
from chainsim.study.rows import DONE, FAILED

_LINE_EVERY = 10.0  # between two plain lines [s]
_REMEMBERED = 200  # runs over which the pace is taken
_FAILURES_SHOWN = 5


class Pace:
    """How fast runs end, from the most recent ones.

    Parameters
    ----------
    now : float
        Time at the start, by any steady clock [s].
    """

    def __init__(self, now: float) -> None:
        self._times: deque[float] = deque([now], maxlen=_REMEMBERED)

    def tick(self, now: float) -> None:
        """A run has ended.

        Parameters
        ----------
        now : float
            Time by the same clock [s].
        """
        self._times.append(now)

    def left(self, runs: int) -> float | None:
        """Time for the runs that are left.

        Parameters
        ----------
        runs : int
            Number of runs (dimensionless).

        Returns
        -------
        float or None
            Time [s]; None before the first run has ended.
        """
        if len(self._times) < 2:
            return None
        return runs * (self._times[-1] - self._times[0]) / (len(self._times) - 1)


class PlainProgress:
    """Progress as one plain line every ten seconds, with no control codes.

    Parameters
    ----------
    stream : TextIO or None
        Where to write; None takes standard error.
    """

    def __init__(self, stream: TextIO | None = None) -> None:
        self._stream = stream or sys.stderr
        self._restart(0, 0)

    def begin(self, planned: int, reused: int, engine: Engine) -> None:
        """Say how much is ahead.

        Parameters
        ----------
        planned, reused : int
            Runs of the plan and those finished before (dimensionless).
        engine : Engine
            What does the runs.
        """
        self._restart(planned, reused)
        self._say(f"{planned} runs, {reused} reused, {engine.workers} workers")

    def _restart(self, planned: int, reused: int) -> None:
        """Count from nothing: a search watches one go after the other."""
        self._started = self._spoken = time.monotonic()
        self._pace = Pace(self._started)
        self.planned, self.reused = planned, reused
        self.done = self.failed = 0
        self.failures: deque[Outcome] = deque(maxlen=_FAILURES_SHOWN)

    def report(self, outcome: Outcome | None) -> None:
        """Count an outcome, and say where the sweep stands if it is time to.

        Parameters
        ----------
        outcome : Outcome or None
            The outcome; None when a moment has passed without one.
        """
        if outcome is not None:
            self._count(outcome)
        now = time.monotonic()
        if now - self._spoken >= _LINE_EVERY:
            self._spoken = now
            self._say(self.standing())

    def stopping(self) -> None:
        """Say that the runs in hand are being finished."""
        self._say("stopping: the runs in hand are being finished; once more to stop at once")

    def end(self) -> None:
        """Say where the sweep stands at its end."""
        self._say(self.standing())

    def standing(self) -> str:
        """Where the sweep stands, in one line."""
        ended = self.done + self.failed
        left = self.planned - self.reused - ended
        ahead = self._pace.left(left)
        share = (ended + self.reused) / max(self.planned, 1)
        passed = time.monotonic() - self._started
        rest = "" if ahead is None or not left else f", {duration_text(ahead)} left"
        if not ended and left and passed > _LINE_EVERY:
            rest = "; the first run of a new version compiles, which takes some minutes"
        return (
            f"{share:4.0%}  {self.done} done, {self.failed} failed, {self.reused} reused "
            f"of {self.planned}; {duration_text(passed)} passed{rest}"
        )

    def _count(self, outcome: Outcome) -> None:
        self._pace.tick(time.monotonic())
        if outcome.state == DONE:
            self.done += 1
        elif outcome.state == FAILED:
            self.failed += 1
            self.failures.append(outcome)

    def _say(self, text: str) -> None:
        print(text, file=self._stream, flush=True)


class LiveProgress(PlainProgress):
    """Progress as a table that is redrawn in place, for terminals."""

    def begin(self, planned: int, reused: int, engine: Engine) -> None:
        """Open the table.

        Parameters
        ----------
        planned, reused : int
            Runs of the plan and those finished before (dimensionless).
        engine : Engine
            What does the runs.
        """
        from rich.console import Console
        from rich.live import Live

        self._restart(planned, reused)
        self._note = f"{engine.workers} workers"
        self._live = Live(self._table(), console=Console(file=self._stream), refresh_per_second=4)
        self._live.start()

    def report(self, outcome: Outcome | None) -> None:
        """Count an outcome and redraw.

        Parameters
        ----------
        outcome : Outcome or None
            The outcome; None when a moment has passed without one.
        """
        if outcome is not None:
            self._count(outcome)
        self._live.update(self._table())

    def stopping(self) -> None:
        """Say that the runs in hand are being finished."""
        self._note = "stopping: finishing the runs in hand; once more to stop at once"

    def end(self) -> None:
        """Leave the table as it stands."""
        self._live.update(self._table())
        self._live.stop()

    def _table(self) -> Any:
        from rich.progress_bar import ProgressBar
        from rich.table import Table

        ended = self.reused + self.done + self.failed
        table = Table.grid(padding=(0, 2))
        table.add_row(ProgressBar(max(self.planned, 1), ended, width=40), self.standing())
        table.add_row("", self._note)
        for failure in self.failures:
            table.add_row(f"failed {failure.id}", failure.text.splitlines()[0][:90])
        return table


def progress(stream: TextIO | None = None) -> PlainProgress:
    """Progress that suits a stream.

    Parameters
    ----------
    stream : TextIO or None
        Where to write; None takes standard error.

    Returns
    -------
    PlainProgress
        A live table on a terminal, plain lines elsewhere.
    """
    stream = stream or sys.stderr
    return LiveProgress(stream) if stream.isatty() else PlainProgress(stream)
