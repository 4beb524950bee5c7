"""Cheap tasks that stand in for a simulation in the tests of studies.

Workers import this module by name, so it must not depend on pytest.
"""

from __future__ import annotations

import json
import math
import os
import signal
import time
from pathlib import Path

from chainsim.errors import RunError
from chainsim.study.jobs import Job, recording_path
from chainsim.study.points import Point, run_id
from chainsim.study.store import Store


def cheap(job: Job) -> dict:
    """A made-up lift: the margin of its strand grows with `mass` and falls with `speed`."""
    _log(job, "started")
    values = job.values
    time.sleep(values.get("sleep", 0.0))
    mass, speed = values.get("mass", 1.0), values.get("speed", 0.5)
    margin = mass - speed**2
    outcome = "fails" if margin < 0 else "close" if margin < 0.2 else "holds"
    _log(job, "finished")
    return {
        "findings": [
            finding("carrying_strand_taut", margin, outcome),
            finding("links_hold", 5.0, "holds"),
        ],
        "summary": {"tension": math.sin(mass) + speed, "odd": float("nan")},
        "stop_reason": "reached end",
    }


def killing(job: Job) -> dict:
    """Ends its own process with SIGKILL where `deadly` is set; always, or the first time."""
    deadly = job.values.get("deadly")
    if deadly == "always" or (deadly == "once" and not _log_has(job, "started")):
        _log(job, "started")
        os.kill(os.getpid(), signal.SIGKILL)
    return cheap(job)


def failing(job: Job) -> dict:
    """Fails as a run does where `mass` is below 0.5, until the file `mended` appears."""
    if job.values["mass"] < 0.5 and not (Path(job.folder) / "mended").exists():
        raise RunError("no equilibrium: residual 3 N")
    return cheap(job)


def broken(job: Job) -> dict:
    """Fails in the same way for every job."""
    raise ZeroDivisionError("division by zero")


def busy(job: Job) -> dict:
    """Computes for about `seconds` of processor time."""
    end = time.process_time() + job.values["seconds"]
    while time.process_time() < end:
        math.factorial(300)
    return cheap(job)


def chatty(job: Job) -> dict:
    """Prints, as compilers and libraries do."""
    print("hello from a run")
    return cheap(job)


def recorded(job: Job) -> dict:
    """Writes a recording of 20 kB beside its row, as a simulation would."""
    out = recording_path(job)
    assert out is not None
    out.parent.mkdir(parents=True, exist_ok=True)
    partial = out.with_name(out.name + ".partial")
    partial.write_bytes(b"x" * 20_000)
    partial.replace(out)
    return cheap(job)


def finding(name: str, margin: float, outcome: str) -> dict:
    """A finding as a run gives it, on a scale of 1."""
    return {
        "name": name,
        "outcome": outcome,
        "value": margin,
        "unit": "N",
        "limit": 0.0,
        "margin": margin,
        "scale": 1.0,
        "time": 1.0,
        "place": "tail-head",
        "note": "",
    }


def _log(job: Job, what: str) -> None:
    log = Path(job.folder).with_suffix(".log")
    with log.open("a") as file:
        file.write(f"{what} {job.id}\n")


def _log_has(job: Job, what: str) -> bool:
    log = Path(job.folder).with_suffix(".log")
    return log.exists() and f"{what} {job.id}" in log.read_text()


def points_of(values: list[dict]) -> list[Point]:
    """Points for values that need no scenario."""
    return [
        Point(i, run_id(json.dumps(v)), {k: str(x) for k, x in v.items()}, v, "made.toml", "")
        for i, v in enumerate(values)
    ]


def done_in(store: Store, what: str = "finished") -> list[str]:
    """Ids of the runs that the tasks have logged, one for each time."""
    log = store.folder.with_suffix(".log")
    lines = log.read_text().splitlines() if log.exists() else []
    return [line.split()[1] for line in lines if line.startswith(what)]
