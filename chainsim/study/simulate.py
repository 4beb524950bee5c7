"""The task of a study: simulate one scenario and give its findings and summary."""

from __future__ import annotations

import functools
import os
import shutil
from typing import Any

from chainsim.study.jobs import Job, recording_path

_GLANCE = "20 ms"  # of simulated time: enough to compile everything


def simulate(job: Job) -> dict[str, Any]:
    """Simulate the scenario of a job.

    Parameters
    ----------
    job : Job
        The run.

    Returns
    -------
    dict
        `findings`, `summary` and `stop_reason`.

    Raises
    ------
    ChainsimError
        If the scenario is refused or the run cannot be completed.
    """
    from chainsim.run import run

    scenario, kept = scenario_of(job), recording_path(job)
    if kept is None:
        return result_of(run(scenario, keep="summary"))
    # A folder of its own until the recording is whole: only then it takes its place.
    folder = kept.with_name(f"{job.id}.partial")
    shutil.rmtree(folder, ignore_errors=True)
    folder.mkdir(parents=True)
    recording = run(scenario, out=folder)
    result = result_of(recording)
    os.replace(str(recording.path), kept)
    shutil.rmtree(folder)
    return result


def warm(job: Job) -> None:
    """Compile everything that a job needs by a glance at its scenario.

    Parameters
    ----------
    job : Job
        Any job of the sweep.
    """
    from chainsim.run import run

    run(scenario_of(job).with_values({"run.duration": _GLANCE}), keep="summary")


def scenario_of(job: Job) -> Any:
    """Scenario of a job.

    Parameters
    ----------
    job : Job
        The run.

    Returns
    -------
    Scenario
        Its scenario with the job's values set.
    """
    return _base(job.text, job.scenario).with_values(job.values)


@functools.lru_cache(maxsize=4)
def _base(text: str, file: str) -> Any:
    """Scenario before a job's values are set; the jobs of a sweep share a few."""
    from chainsim.scenario import parse_scenario

    return parse_scenario(text, file=file)


def result_of(recording: Any) -> dict[str, Any]:
    """Findings and summary of a recording as plain data.

    Parameters
    ----------
    recording : Recording
        A finished run.

    Returns
    -------
    dict
        `findings` (list of dict), `summary` (dict) and `stop_reason` (str).
    """
    from chainsim.analysis import run_summary

    return {
        "findings": [finding._asdict() for finding in recording.findings],
        "summary": run_summary(recording, findings=()),
        "stop_reason": recording.stop_reason,
    }
