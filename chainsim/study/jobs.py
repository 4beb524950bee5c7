"""One run of a study as a job: plain data that travels to a worker, and what comes back."""

from __future__ import annotations

import contextlib
import importlib
import os
import socket
import sys
import time
from collections.abc import Callable, Mapping
from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import Any

from chainsim.errors import CallError, ChainsimError
from chainsim.study.plan import Keep
from chainsim.study.rows import DONE, FAILED, Failure, Row
from chainsim.study.store import DiskFull, Store, is_full

SIMULATE = "chainsim.study.simulate:simulate"

ONE_THREAD = ("NUMBA_NUM_THREADS", "OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")
"""Environment variables that hold a library to one thread when they are 1."""

# States of an outcome beside those of a row: the sweep has to stop on these two.
NO_SPACE = "no space"
SET_UP = "set-up is wrong"


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


def task_of(name: str) -> Callable[[Job], Mapping[str, Any]]:
    """Function that does a run.

    Parameters
    ----------
    name : str
        ``module:function``.

    Returns
    -------
    callable
        The function.

    Raises
    ------
    CallError
        If there is none of that name.
    """
    module, _, function = name.partition(":")
    try:
        return getattr(importlib.import_module(module), function)
    except (ImportError, AttributeError) as error:
        raise CallError(f"the task {name!r} cannot be found here ({error})") from error


def warm(job: Job) -> None:
    """Import and compile what a job needs, where its task knows how to.

    Parameters
    ----------
    job : Job
        The first job of a sweep. If the module of its task has a function `warm`, that is
        called with the job.
    """
    task_of(job.task)
    prepare = getattr(sys.modules[job.task.partition(":")[0]], "warm", None)
    if prepare is not None:
        prepare(job)


def perform(job: Job) -> Outcome:
    """Do one run and write its run file, unless that file is there already.

    Parameters
    ----------
    job : Job
        The run.

    Returns
    -------
    Outcome
        What became of it. Nothing is raised: a fault of a run is recorded, not fatal.
    """
    store = Store(job.folder)
    earlier = store.read(job.id)
    if earlier is not None and earlier.state == DONE:
        return Outcome(job.id, DONE)
    try:
        row = _row(job)
        store.write(row)
    except CallError as error:
        return Outcome(job.id, SET_UP, "set-up", str(error))
    except DiskFull as error:
        return Outcome(job.id, NO_SPACE, "no space", str(error))
    except OSError as error:
        return Outcome(job.id, SET_UP, "set-up", f"{job.folder} cannot be written: {error}")
    failure = row.failure
    if failure is None:
        return Outcome(job.id, DONE)
    return Outcome(job.id, FAILED, failure.code, failure.text)


def failed_row(job: Job, code: str, text: str, tries: int = 1) -> Row:
    """Row of a run that could not be completed.

    Parameters
    ----------
    job : Job
        The run.
    code, text : str
        Kind of failure and what happened.
    tries : int
        How often it was tried (dimensionless).

    Returns
    -------
    Row
        The row.
    """
    how = {"host": socket.gethostname(), "finished": _now()}
    return Row(
        job.id, FAILED, job.values, job.scenario, failure=Failure(code, text, tries), how=how
    )


def _row(job: Job) -> Row:
    if job.refusal is not None:
        return failed_row(job, "refused", job.refusal)
    task = task_of(job.task)
    begin = time.perf_counter()
    try:
        result = task(job)
    except ChainsimError as error:
        return failed_row(job, "run", str(error))
    except Exception as error:
        if is_full(error):
            raise DiskFull(*error.args) from None
        return failed_row(job, "error", f"{type(error).__name__}: {error}")
    how = {
        "seconds": round(time.perf_counter() - begin, 6),
        "host": socket.gethostname(),
        "process": os.getpid(),
        "finished": _now(),
    }
    return _kept(job, result, how)


def _kept(job: Job, result: Mapping[str, Any], how: dict[str, Any]) -> Row:
    keep = job.keep
    findings = [f for f in result["findings"] if not keep.findings or f["name"] in keep.findings]
    summary = {
        key: value
        for key, value in result["summary"].items()
        if not keep.summary or key in keep.summary
    }
    return Row(
        id=job.id,
        state=DONE,
        values=job.values,
        scenario=job.scenario,
        findings=tuple(findings),
        summary=summary,
        stop_reason=str(result.get("stop_reason", "")),
        how=how,
    )


def _now() -> str:
    return time.strftime("%Y-%m-%dT%H:%M:%SZ", time.gmtime())


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
