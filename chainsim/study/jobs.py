"""One run of a study as a job: plain data that travels to a worker, and what comes back."""

from __future__ import annotations

import contextlib
import os
from collections.abc import Mapping
from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import Any

from chainsim.study.plan import Keep
from chainsim.study.store import Store

SIMULATE = "chainsim.study.simulate:simulate"

ONE_THREAD = ("NUMBA_NUM_THREADS", "OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")
"""Environment variables that hold a library to one thread when they are 1."""

# States of an outcome beside those of a row: the sweep has to stop on these two.
NO_SPACE = "no space"
SET_UP = "set-up is wrong"
PROGRAM_FAULT = "error"
"""Code of a failure that no scenario should be able to cause."""


@dataclass(frozen=True)
class Job:
    """A run to be done.

    Attributes
    ----------
    id : str
        Run id.
    scenario : str
        Name of the scenario file, for messages.
    text : str
        Text of the scenario before the values are set.
    values : mapping of str to object
        Values to set, by dotted key.
    folder : str
        Folder of the study's store.
    keep : Keep
        What to keep of the run.
    task : str
        What does the run, as ``module:function``; it takes the job and gives a dict with
        `findings`, `summary` and `stop_reason`.
    refusal : str or None
        Why the scenario is refused; such a job is recorded as failed and never run.
    """

    id: str
    scenario: str
    text: str
    values: Mapping[str, Any]
    folder: str
    keep: Keep = field(default_factory=Keep)
    task: str = SIMULATE
    refusal: str | None = None

    def to_data(self) -> dict[str, Any]:
        """The job as plain data for JSON."""
        return asdict(self)


def job_from_data(data: Mapping[str, Any]) -> Job:
    """Job from plain data.

    Parameters
    ----------
    data : mapping
        What `Job.to_data` gave, also after a journey through JSON.

    Returns
    -------
    Job
        The job.
    """
    keep = data["keep"]
    kept = Keep(tuple(keep["findings"]), tuple(keep["summary"]), keep["trajectories"])
    return Job(**{**data, "keep": kept})


@dataclass(frozen=True)
class Outcome:
    """What an engine reports of a job.

    Attributes
    ----------
    id : str
        Run id.
    state : str
        `done`, `failed`, `no space` or `set-up is wrong`.
    code, text : str
        Kind of failure and what happened; empty for `done`.
    """

    id: str
    state: str
    code: str = ""
    text: str = ""


@contextlib.contextmanager
def one_thread_each() -> Any:
    """Environment for worker processes: one thread per run, whatever library it uses.

    Yields
    ------
    None
        While the variables stand in this process' environment, for children to inherit.
    """
    before = {name: os.environ.get(name) for name in ONE_THREAD}
    os.environ.update(dict.fromkeys(ONE_THREAD, "1"))
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                del os.environ[name]
            else:
                os.environ[name] = value


def recording_path(job: Job) -> Path | None:
    """Where the whole recording of a run goes.

    Parameters
    ----------
    job : Job
        The run.

    Returns
    -------
    Path or None
        None where trajectories are not kept.
    """
    return Store(job.folder).path(job.id, ".lift.h5") if job.keep.trajectories else None
