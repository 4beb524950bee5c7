"""The embedded engine: worker processes of our own on this machine, one run each at a time."""

from __future__ import annotations

import queue
import signal
import time
from collections import deque
from collections.abc import Callable, Generator, Iterable, Iterator
from typing import Any

from chainsim.errors import RunError
from chainsim.study.jobs import NO_SPACE, Job, Outcome
from chainsim.study.performing import failed_row
from chainsim.study.rows import DONE, FAILED
from chainsim.study.store import DiskFull, Store
from chainsim.study.worker_process import WorkerProcess, log_of

TRIES = 2
_TICK = 0.25  # longest silence between two reports to the caller [s]
_STILLBORN = 3  # per worker, of processes that ended before they were ready


class ProcessEngine:
    """Does runs in worker processes; survives the death of any of them.

    Parameters
    ----------
    workers : int
        Number of worker processes (dimensionless).
    wall_limit : float or None
        Longest time for one run [s]; a run that takes longer is ended and recorded as failed.
    stay : bool
        True where the workers stay from one `run` to the next, until `close`.
    """

    def __init__(self, workers: int, wall_limit: float | None = None, stay: bool = False) -> None:
        self.workers = workers
        self._stay = stay
        self.wall_limit = wall_limit
        self._reports: queue.SimpleQueue[tuple[WorkerProcess, Any]] = queue.SimpleQueue()
        self._team: list[WorkerProcess] = []
        self._again: deque[Job] = deque()
        self._tries: dict[str, int] = {}
        self._warm = False
        self._stillborn = 0

    @property
    def processes(self) -> list[int]:
        """Process ids of the workers at this moment (dimensionless)."""
        return [worker.process.pid for worker in self._team]

    def run(
        self, jobs: Iterable[Job], stopping: Callable[[], bool]
    ) -> Generator[Outcome | None, None, None]:
        """Do jobs and yield their outcomes.

        Parameters
        ----------
        jobs : iterable of Job
            The jobs; taken one by one as workers become free.
        stopping : callable
            Turns true when no more jobs are to be taken.

        Yields
        ------
        Outcome or None
            An outcome; None at least four times a second.
        """
        waiting = iter(jobs)
        try:
            first = next(waiting, None)
            if first is None:
                return
            self._again.append(first)
            if not self._team:
                self._warm = False
                self._log = log_of(first)
                self._team = [WorkerProcess(self._reports, self._log) for _ in range(self.workers)]
                self._team[0].send({"warm": first.to_data()})
            while True:
                self._hand_out(waiting, stopping)
                if self._warm and not any(worker.job for worker in self._team):
                    return
                yield self._report()
        finally:
            if not self._stay or any(worker.job for worker in self._team):
                self.close()

    def close(self) -> None:
        """End all workers, those at once that are still at work."""
        for worker in self._team:
            worker.end(at_once=worker.job is not None)
        if self._team:
            self._log.close()
        self._team = []

    def _hand_out(self, waiting: Iterator[Job], stopping: Callable[[], bool]) -> None:
        """Give every idle worker a job, once the first of them has compiled what is needed."""
        if not self._warm and not stopping():
            return
        self._warm = True
        for worker in self._team:
            if worker.job is None and not stopping():
                job = self._again.popleft() if self._again else next(waiting, None)
                if job is None:
                    return
                worker.take(job)

    def _report(self) -> Outcome | None:
        self._end_the_late()
        try:
            worker, answer = self._reports.get(timeout=_TICK)
        except queue.Empty:
            return None
        if answer is None:
            return self._buried(worker)
        if "ready" in answer:
            worker.ready = True
            return None
        if "warm" in answer:
            self._warm = True
            return None
        worker.job = None
        return Outcome(**answer)

    def _end_the_late(self) -> None:
        if self.wall_limit is None:
            return
        for worker in self._team:
            if worker.job is not None and time.monotonic() - worker.since > self.wall_limit:
                worker.too_long = True
                worker.process.kill()

    def _buried(self, worker: WorkerProcess) -> Outcome | None:
        """Replace a worker that has died; its job is tried again or recorded as failed."""
        if worker not in self._team:
            return None
        job = worker.job
        self._team[self._team.index(worker)] = WorkerProcess(self._reports, self._log)
        self._warm = True  # if it died while compiling, the others compile for themselves
        if not worker.ready:
            self._count_stillbirth()
        if job is None:
            return None
        if not worker.ready:  # no fault of the job
            self._again.appendleft(job)
            return None
        store = Store(job.folder)
        row = store.read(job.id)
        if row is not None and row.state == DONE:  # it died between writing and reporting
            return Outcome(job.id, DONE)
        if worker.too_long:
            return self._failed(job, "too long", f"took longer than {self.wall_limit:g} s", 1)
        tries = self._tries[job.id] = self._tries.get(job.id, 0) + 1
        if tries < TRIES:
            self._again.appendleft(job)
            return None
        how = _ending(worker.process.returncode)
        return self._failed(job, "killed", f"its process {how}, {tries} times", tries)

    def _count_stillbirth(self) -> None:
        self._stillborn += 1
        if self._stillborn > _STILLBORN * self.workers:
            raise RunError(
                f"worker processes end as soon as they are started; see {self._log.name}"
            )

    def _failed(self, job: Job, code: str, text: str, tries: int) -> Outcome:
        try:
            Store(job.folder).write(failed_row(job, code, text, tries))
        except DiskFull as error:
            return Outcome(job.id, NO_SPACE, NO_SPACE, str(error))
        return Outcome(job.id, FAILED, code, text)


def _ending(code: int) -> str:
    """How a process ended, in words."""
    if code >= 0:
        return f"ended by itself with status {code}"
    try:
        name = signal.Signals(-code).name
    except ValueError:
        name = str(-code)
    hint = " (often: out of memory)" if name == "SIGKILL" else ""
    return f"was ended by {name}{hint}"
