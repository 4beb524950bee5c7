"""Doing one run: the task is called, its result becomes a run file, a fault becomes a record."""

from __future__ import annotations

import importlib
import os
import socket
import sys
import time
from collections.abc import Callable, Mapping
from typing import Any

from chainsim.errors import CallError, ChainsimError
from chainsim.study.jobs import NO_SPACE, PROGRAM_FAULT, SET_UP, Job, Outcome
from chainsim.study.rows import DONE, FAILED, Failure, Row
from chainsim.study.store import DiskFull, Store, is_full


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
        return failed_row(job, PROGRAM_FAULT, f"{type(error).__name__}: {error}")
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
