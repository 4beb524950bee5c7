"""Engines: they take jobs, do them somewhere, and yield outcomes as they come.

The contract of an engine:

1. ``run(jobs, stopping)`` is a generator. It yields an `Outcome` for each job it has taken,
   in whatever order they finish, and None now and then so that the caller can show progress.
2. It takes a job from `jobs` only when there is a worker for it.
3. When `stopping()` turns true it takes no more jobs; those in hand are finished and reported.
4. A job whose worker dies is tried once more, then reported as failed with code `killed`.
5. Closing the generator ends all workers at once.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Generator, Iterable
from typing import Protocol

from chainsim.study.jobs import Job, Outcome
from chainsim.study.performing import perform
from chainsim.study.plan import EngineChoice


class Engine(Protocol):
    """What does the runs of a sweep (see the contract above)."""

    workers: int

    def run(
        self, jobs: Iterable[Job], stopping: Callable[[], bool]
    ) -> Generator[Outcome | None, None, None]:
        """Do jobs and yield their outcomes."""
        ...


class SerialEngine:
    """Does one run after the other in this very process.

    A run that takes the process down takes the sweep with it; the next start goes on.
    """

    workers = 1

    def run(
        self, jobs: Iterable[Job], stopping: Callable[[], bool]
    ) -> Generator[Outcome | None, None, None]:
        """Do jobs and yield their outcomes.

        Parameters
        ----------
        jobs : iterable of Job
            The jobs.
        stopping : callable
            Turns true when no more jobs are to be taken.

        Yields
        ------
        Outcome or None
            An outcome; None before each job.
        """
        for job in jobs:
            yield None
            if stopping():
                return
            yield perform(job)


def cores() -> int:
    """Cores that this process may use (dimensionless)."""
    try:
        return len(os.sched_getaffinity(0))
    except AttributeError:
        return os.cpu_count() or 1


def engine_of(choice: EngineChoice) -> Engine:
    """Engine that a plan asks for.

    Parameters
    ----------
    choice : EngineChoice
        The plan's choice.

    Returns
    -------
    Engine
        The engine; nothing is started yet.

    Raises
    ------
    CallError
        If it needs packages that are not installed.
    """
    if choice.kind == "serial":
        return SerialEngine()
    if choice.kind == "dask":
        from chainsim.study.cluster import DaskEngine

        return DaskEngine(choice.workers or cores(), choice.address, choice.slurm)
    from chainsim.study.processes import ProcessEngine

    return ProcessEngine(choice.workers or cores(), choice.wall_limit)
