"""The same sweep on dask.distributed: a local cluster, a running scheduler, or a SLURM queue.

A worker that dies takes down the run that killed it and may be blamed for others that waited
on it (dask/distributed issues 2694 and 6078). The victims are therefore tried once more one by
one, each alone on the cluster, and only what dies alone is recorded as failed.
"""

from __future__ import annotations

import contextlib
import queue
import time
from collections import deque
from collections.abc import Callable, Generator, Iterable, Iterator, Mapping
from typing import Any

from chainsim.errors import CallError
from chainsim.study.jobs import NO_SPACE, Job, Outcome, job_from_data, one_thread_each
from chainsim.study.performing import failed_row, perform
from chainsim.study.rows import DONE, FAILED
from chainsim.study.slurm import _SLURM_DEFAULTS, slurm_cluster
from chainsim.study.store import DiskFull, Store

_TICK = 0.25  # longest silence between two reports to the caller [s]
_AHEAD = 2  # jobs handed to the scheduler per worker, so that none is ever idle
_COUNT_EVERY = 2.0  # between two counts of the workers [s]


class DaskEngine:
    """Does runs on a dask cluster (extra `[cluster]`).

    Parameters
    ----------
    workers : int
        Worker processes of a local cluster (dimensionless).
    address : str or None
        Address of a running scheduler; None starts a cluster.
    slurm : mapping of str to object or None
        Settings of a SLURM queue (`queue`, `account`, `walltime`, `jobs`, `memory`).

    Raises
    ------
    CallError
        If dask.distributed is not installed.
    """

    def __init__(
        self,
        workers: int,
        address: str | None = None,
        slurm: Mapping[str, Any] | None = None,
    ) -> None:
        self.workers = workers
        self.address = address
        self.slurm = slurm
        self.client: Any = None
        self._alone: deque[Job] = deque()
        self._tried: set[str] = set()
        self._ended: queue.SimpleQueue[Any] = queue.SimpleQueue()
        self._counted = -_COUNT_EVERY
        _distributed()

    def run(
        self, jobs: Iterable[Job], stopping: Callable[[], bool]
    ) -> Generator[Outcome | None, None, None]:
        """Do jobs and yield their outcomes.

        Parameters
        ----------
        jobs : iterable of Job
            The jobs; taken as the cluster becomes free.
        stopping : callable
            Turns true when no more jobs are to be taken.

        Yields
        ------
        Outcome or None
            An outcome; None at least four times a second.
        """
        waiting = iter(jobs)
        first = next(waiting, None)
        if first is None:
            return
        with self._cluster():
            self._alone.append(first)  # alone: it compiles for all that follow
            hand: dict[Any, Job] = {}
            while True:
                self._submit(waiting, hand, stopping)
                if not hand:
                    return
                yield None
                for future in self._finished():
                    outcome = self._outcome(future, hand.pop(future))
                    if outcome is not None:
                        yield outcome

    def _submit(
        self, waiting: Iterator[Job], hand: dict[Any, Job], stopping: Callable[[], bool]
    ) -> None:
        """Keep the cluster busy; a job that may kill its worker goes alone."""
        if stopping():
            return
        if self._alone:
            if not hand:
                self._hand_in(self._alone.popleft(), hand)
            return
        window = _AHEAD * self._team_size()
        while len(hand) < window:
            job = next(waiting, None)
            if job is None:
                return
            self._hand_in(job, hand)

    def _team_size(self) -> int:
        """Workers of the cluster, asked for once in a while: a queue adds them as it can."""
        now = time.monotonic()
        if now - self._counted > _COUNT_EVERY:
            self._counted = now
            self.workers = max(len(self.client.nthreads()), 1)
        return self.workers

    def _hand_in(self, job: Job, hand: dict[Any, Job]) -> None:
        key = f"{job.id}-{'again' if job.id in self._tried else 'first'}"
        future = self.client.submit(perform_data, job.to_data(), key=key, pure=False)
        hand[future] = job
        future.add_done_callback(self._ended.put)

    def _finished(self) -> list[Any]:
        """Futures that have ended, after waiting a moment for the first of them."""
        ended = []
        with contextlib.suppress(queue.Empty):
            ended.append(self._ended.get(timeout=_TICK))
            while True:
                ended.append(self._ended.get_nowait())
        return ended

    def _outcome(self, future: Any, job: Job) -> Outcome | None:
        """Outcome of a finished future; a victim of its worker's death is tried again."""
        error = future.exception()
        if error is None:
            return Outcome(**future.result())
        row = Store(job.folder).read(job.id)
        if row is not None and row.state == DONE:
            return Outcome(job.id, DONE)
        if job.id not in self._tried:
            self._tried.add(job.id)
            self._alone.append(job)
            return None
        reason = str(error).partition(". ")[0]
        text = f"its worker was lost twice, the second time with no other run at work: {reason}"
        try:
            Store(job.folder).write(failed_row(job, "killed", text, 2))
        except DiskFull as full:
            return Outcome(job.id, NO_SPACE, NO_SPACE, str(full))
        return Outcome(job.id, FAILED, "killed", text)

    @contextlib.contextmanager
    def _cluster(self) -> Iterator[None]:
        """Connect to the cluster, or start one and end it afterwards."""
        distributed = _distributed()
        with contextlib.ExitStack() as stack:
            if self.address:
                target: Any = self.address
            else:
                target = stack.enter_context(self._started())
            self.client = stack.enter_context(distributed.Client(target, set_as_default=False))
            self.client.wait_for_workers(1)
            yield

    def _started(self) -> Any:
        import dask

        # A task is put down after the first worker that dies under it; we try it again ourselves.
        dask.config.set({"distributed.scheduler.allowed-failures": 0})
        if self.slurm is not None:
            cluster = slurm_cluster(self.slurm)
            most = int(self.slurm.get("jobs", _SLURM_DEFAULTS["jobs"]))
            cluster.adapt(minimum_jobs=1, maximum_jobs=most)
            return cluster
        from distributed import LocalCluster

        with one_thread_each():
            return LocalCluster(
                n_workers=self.workers,
                threads_per_worker=1,
                processes=True,
                dashboard_address=None,
                silence_logs=50,
            )


def perform_data(data: Mapping[str, Any]) -> dict[str, str]:
    """Do one run on a dask worker.

    Parameters
    ----------
    data : mapping
        A job as plain data.

    Returns
    -------
    dict of str to str
        Its outcome as plain data.
    """
    outcome = perform(job_from_data(data))
    return {
        "id": outcome.id,
        "state": outcome.state,
        "code": outcome.code,
        "text": outcome.text,
    }


def _distributed() -> Any:
    try:
        import distributed
    except ImportError:
        raise CallError(
            "the dask engine needs packages that are not installed: pip install chainsim[cluster]"
        ) from None
    return distributed
