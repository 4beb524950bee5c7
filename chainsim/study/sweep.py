"""The driver of a sweep: it knows what is done, hands out what is not, and never does both."""

from __future__ import annotations

import contextlib
from collections.abc import Iterable, Sequence

from chainsim.errors import Interrupted, RunError
from chainsim.study.driver_lock import only_driver
from chainsim.study.engines import Engine
from chainsim.study.index import Index
from chainsim.study.interrupts import StopRequest
from chainsim.study.jobs import NO_SPACE, SET_UP, Job, Outcome
from chainsim.study.points import Point
from chainsim.study.rows import FAILED
from chainsim.study.store import Store
from chainsim.study.sweep_parts import Settings, Tally, Watcher


def run_points(
    points: Sequence[Point],
    store: Store,
    engine: Engine,
    settings: Settings | None = None,
    watcher: Watcher | None = None,
) -> Tally:
    """Do every point that is not done yet.

    Parameters
    ----------
    points : sequence of Point
        The points.
    store : Store
        Run files; what is finished there is not done again.
    engine : Engine
        Does the runs.
    settings : Settings or None
        How; None takes the defaults.
    watcher : Watcher or None
        Follows the progress.

    Returns
    -------
    Tally
        What became of the points.

    Raises
    ------
    Interrupted
        If the user asked to stop; everything finished is kept.
    RunError
        If the disk is full, the set-up is wrong, or the same failure comes again and again.
    """
    settings = settings or Settings()
    store.folder.mkdir(parents=True, exist_ok=True)
    with only_driver(store.folder / f"{settings.index_name}.lock"), StopRequest() as request:
        index = Index(store, settings.index_name)
        try:
            store.remove_unfinished({point.id for point in points})
            index.catch_up()
            jobs = _jobs(points, store, index, settings)
            sweep = _Sweep(index, store, settings, request, watcher)
            unique = {point.id for point in points}
            return sweep.carry_out(jobs, engine, unique)
        finally:
            index.close()


def _jobs(points: Iterable[Point], store: Store, index: Index, settings: Settings) -> list[Job]:
    """Jobs for the points that are due, each run id once."""
    states = {run: entry.state for run, entry in index.entries().items()}
    jobs: dict[str, Job] = {}
    for point in points:
        state = states.get(point.id)
        due = state == FAILED if settings.only_failed else state is None
        if due and point.id not in jobs:
            jobs[point.id] = Job(
                id=point.id,
                scenario=point.scenario,
                text=point.text,
                values=point.values,
                folder=str(store.folder.resolve()),
                keep=settings.keep,
                task=settings.task,
                refusal=point.refusal,
            )
    return list(jobs.values())


class _Sweep:
    """One go at the jobs of a sweep."""

    def __init__(
        self,
        index: Index,
        store: Store,
        settings: Settings,
        request: StopRequest,
        watcher: Watcher | None,
    ) -> None:
        self._index = index
        self._store = store
        self._settings = settings
        self._request = request
        self._watcher = watcher
        self._computed = 0
        self._alike: tuple[str, int] = ("", 0)
        self._trouble: str | None = None
        self._told = False

    def carry_out(self, jobs: list[Job], engine: Engine, runs: set[str]) -> Tally:
        """Do the jobs; then say what became of all runs of the plan."""
        if self._watcher:
            self._watcher.begin(len(runs), len(runs) - len(jobs), engine)
        try:
            with contextlib.closing(engine.run(iter(jobs), self._stopping)) as outcomes:
                for outcome in outcomes:
                    self._note(outcome)
        except KeyboardInterrupt:
            raise Interrupted(
                "stopped at once: the runs in hand are lost, the others kept"
            ) from None
        finally:
            if self._watcher:
                self._watcher.end()
        if self._trouble:
            raise RunError(self._trouble)
        if self._request.asked:
            left = len(jobs) - self._computed
            raise Interrupted(f"stopped: {self._computed} runs finished now, {left} left to do")
        entries = self._index.entries()
        failed = sum(entries[run].state == FAILED for run in runs if run in entries)
        return Tally(len(runs), len(runs) - len(jobs), self._computed, failed)

    def _stopping(self) -> bool:
        if self._request.asked and self._watcher and not self._told:
            self._told = True
            self._watcher.stopping()
        return self._request.asked or self._trouble is not None

    def _note(self, outcome: Outcome | None) -> None:
        if outcome is not None:
            self._judge(outcome)
        if self._watcher:
            self._watcher.report(outcome)

    def _judge(self, outcome: Outcome) -> None:
        """Book an outcome, or see that the sweep cannot go on."""
        if outcome.state == NO_SPACE:
            self._trouble = f"the disk is full: {outcome.text}; all finished runs are kept"
        elif outcome.state == SET_UP:
            self._trouble = f"the set-up is wrong: {outcome.text}"
        else:
            self._computed += 1
            row = self._store.read(outcome.id)
            if row is None:
                self._trouble = (
                    f"the worker of run {outcome.id} has written no file that can be seen in "
                    f"{self._store.folder}: the output folder must be shared with all workers"
                )
                return
            self._index.add([row])
            self._count_alike(outcome)

    def _count_alike(self, outcome: Outcome) -> None:
        """Stop a sweep of which every run fails in the same way."""
        if outcome.state != FAILED or outcome.code == "refused":
            self._alike = ("", 0)
            return
        text, count = self._alike
        count = count + 1 if outcome.text == text else 1
        self._alike = (outcome.text, count)
        if count >= self._settings.give_up_after:
            self._trouble = f"the last {count} runs all failed in the same way: {outcome.text}"
