"""Measure what a sweep costs beside its runs, and work out what a million runs would take.

``python -m benchmarks.million_runs`` writes benchmarks/million-runs.md. It takes about five
minutes on two cores; measure on a machine that does nothing else.
"""

from __future__ import annotations

import os
import resource
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from chainsim.scenario import read_scenario
from chainsim.study.engines import SerialEngine, cores
from chainsim.study.forecast import duration_text, size_text
from chainsim.study.index import Index
from chainsim.study.jobs import SIMULATE, Job
from chainsim.study.plan_reading import parse_plan
from chainsim.study.points import Point, points
from chainsim.study.processes import ProcessEngine
from chainsim.study.store import (
    Store,
    rows_of,
)
from chainsim.study.sweep import run_points
from chainsim.study.sweep_parts import Settings

HERE = Path(__file__).parent
SCENARIO = HERE.parent / "scenarios" / "tail-driven.toml"
EMPTY = "benchmarks.million_runs:empty"
BUSY = "benchmarks.million_runs:busy"
BUSY_SECONDS = 0.5
WORKERS = (1, 100, 1000)
MILLION = 1_000_000


def empty(job: Job) -> dict:
    """A run that takes no time and gives a row of the usual size."""
    from chainsim.study.simulate import scenario_of

    scenario_of(job)
    return _result()


def busy(job: Job) -> dict:
    """A run that computes for half a second of processor time."""
    end = time.process_time() + BUSY_SECONDS
    while time.process_time() < end:
        sum(range(2000))
    return empty(job)


def _result() -> dict:
    findings = [
        {
            "name": f"finding_{i}", "group": "chain", "title": "A finding of usual length",
            "outcome": "holds", "value": 1.234567, "unit": "N", "limit": 40.0, "margin": 38.7,
            "scale": 40.0, "time": 12.345, "place": "carrying strand, 120 mm over its foot",
            "note": "averaged over one tooth passage", "why": "",
        }
        for i in range(13)
    ]  # fmt: skip
    return {
        "findings": findings,
        "summary": {f"value_{i}": 1.0 / (i + 3) for i in range(40)},
        "stop_reason": "reached the end",
    }


def plan_points(count: int) -> list[Point]:
    """Points of a plan over the chain speed."""
    text = (
        f'format = 1\nscenario = "{SCENARIO.name}"\n[[axis]]\nkey = "drive.chain_speed"\n'
        f'range = ["0.05 m/s", "0.5 m/s"]\ncount = {count}\n'
    )
    return list(points(parse_plan(text, "plan.toml", SCENARIO.parent)))


def processor_time() -> float:
    """Processor time of this process and of all its ended children [s]."""
    total = 0.0
    for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN):
        used = resource.getrusage(who)
        total += used.ru_utime + used.ru_stime
    return total


def timed(work: Callable[[], object]) -> tuple[float, float]:
    """Wall time and processor time of some work [s]."""
    wall, cpu = time.perf_counter(), processor_time()
    work()
    return time.perf_counter() - wall, processor_time() - cpu


def sweep(listed: list[Point], engine: object, task: str) -> tuple[float, float, Store, object]:
    """Run points into a fresh folder; wall and processor time [s], and the folder."""
    folder = tempfile.TemporaryDirectory(prefix="chainsim-million-")
    store = Store(Path(folder.name) / "out")
    settings = Settings(task=task, give_up_after=10)
    wall, cpu = timed(lambda: run_points(listed, store, engine, settings))  # type: ignore[arg-type]
    return wall, cpu, store, folder


def per_run(engine: object, count: int) -> float:
    """Wall time that an engine adds to a run [s], start-up left out."""
    short = sweep(plan_points(count // 4), engine, EMPTY)[0]
    long = sweep(plan_points(count), engine, EMPTY)[0]
    return (long - short) / (count - count // 4)


def measure() -> dict[str, float]:
    """Measure everything on this machine."""
    found: dict[str, float] = {}
    found["points"] = timed(lambda: plan_points(400))[1] / 400
    found["serial"] = per_run(SerialEngine(), 400)
    found["processes"] = per_run(ProcessEngine(cores()), 400)
    try:
        from chainsim.study.cluster import DaskEngine

        found["dask"] = per_run(DaskEngine(cores()), 200)
    except ImportError:
        found["dask"] = float("nan")
    listed = plan_points(500)
    wall, cpu, store, folder = sweep(listed, ProcessEngine(cores()), BUSY)
    rows = [row for row in rows_of(listed, store) if row is not None]
    found["busy_wall"] = wall
    found["busy_share"] = sum(row.how["seconds"] for row in rows) / (wall * cores())
    found["busy_overhead"] = (cpu - BUSY_SECONDS * len(rows)) / len(rows)
    index = store.folder / "index.sqlite"
    found["index"] = index.stat().st_size / len(rows)
    found["row"] = sum(store.path(row.id).stat().st_size for row in rows) / len(rows)
    found["block"] = sum(store.path(row.id).stat().st_blocks * 512 for row in rows) / len(rows)
    index.unlink()
    found["rebuild"] = timed(lambda: Index(store).catch_up())[0] / len(rows)
    folder.cleanup()  # type: ignore[attr-defined]
    wall, cpu, store, folder = sweep(plan_points(24), ProcessEngine(cores()), SIMULATE)
    runs = [row for row in rows_of(plan_points(24), store) if row is not None and row.how]
    found["run"] = sum(row.how["seconds"] for row in runs) / len(runs)
    found["simulated"] = read_scenario(SCENARIO).run.duration or runs[0].summary["duration"]
    folder.cleanup()  # type: ignore[attr-defined]
    return found


def measured_rows(found: dict[str, float]) -> list[tuple[str, str]]:
    """What was measured, and how much it is."""
    ms = {name: f"{1e3 * value:.2f} ms" for name, value in found.items()}
    team = f"{cores()} workers together"
    return [
        (
            f"one run of `scenarios/tail-driven.toml`, {found['simulated']:.0f} s simulated",
            f"{found['run']:.2f} s on one core",
        ),
        ("listing a point of a plan: scenario checked, run id worked out", ms["points"]),
        ("what the serial engine adds to a run: scenario, row, index", ms["serial"]),
        (f"what the embedded engine adds to a run, on {team}", ms["processes"]),
        (f"what dask adds to a run, on {team}", ms["dask"]),
        (
            f"share of the time in which {cores()} workers compute, over 500 runs of "
            f"{BUSY_SECONDS} s",
            f"{found['busy_share']:.1%}",
        ),
        (
            "processor time beside these runs, driver and workers together",
            f"{ms['busy_overhead']} a run: {found['busy_overhead']:.1%} of a run of 1 s",
        ),
        (
            "run file of a run",
            f"{size_text(found['row'])}, on the disk {size_text(found['block'])}",
        ),
        ("index, for each run", size_text(found["index"])),
        ("rebuilding a lost index, for each run", ms["rebuild"]),
    ]


def needed_rows(found: dict[str, float]) -> list[tuple[str, str]]:
    """What a million runs need beside their time."""
    listing = duration_text(MILLION * found["points"])
    return [
        (
            "run files, without trajectories",
            f"{size_text(MILLION * found['block'])} in 256 folders",
        ),
        ("index", size_text(MILLION * found["index"])),
        ("rebuilding a lost index", duration_text(MILLION * found["rebuild"])),
        (
            "listing the points, before the first run starts",
            f"{listing} on one core, divided by n with `--part i/n`",
        ),
    ]


def table(headings: tuple[str, ...], rows: list[tuple[str, ...]]) -> str:
    """A table as text."""
    lines = [headings, ("---",) * len(headings), *rows]
    return "\n".join(f"| {' | '.join(line)} |" for line in lines)


def page(found: dict[str, float]) -> str:
    """The page, with what is measured told from what is computed."""
    most = found["run"] / found["dask"]
    return f"""# A million runs

`python -m benchmarks.million_runs` writes this page. Measured on {cores()} cores of a shared
machine, Python {sys.version_info.major}.{sys.version_info.minor}; computed values follow from
the measured ones by the rules that stand beside them.

## Measured

{table(("what", "value"), measured_rows(found))}

## Computed from that: a million runs of this lift

{table(("workers", "time", "of that, waiting for the driver"), [_line(found, n) for n in WORKERS])}

The time is runs × time of a run / workers. A single driver hands out a run in the time that
the engine adds to it, so it keeps at most {most:.0f} workers of a dask cluster busy; beyond
that the plan is divided with `--part i/n` into job arrays, each with its own driver, its own
index and the same folder: nothing is shared but the run files. That number is a pessimist's:
what dask adds was measured with its scheduler and its workers on the same few cores, beside
other programs.

{table(("a million runs need", ""), needed_rows(found))}

## What limits it

* The driver lists all its points before it starts, since a run id needs the whole checked
  scenario. Beyond some ten thousand points, divide the plan.
* One run file each costs a block of the file system. On network folders with a slow directory
  service, keep the parts' folders apart and copy them together afterwards: a folder of run
  files is a sweep, wherever it came from.
* Trajectories are far larger than rows: the forecast that `chainsim sweep` prints first says
  how large.
"""


def _line(found: dict[str, float], workers: int) -> tuple[str, ...]:
    seconds = MILLION * found["run"] / workers
    whole = max(seconds, MILLION * found["dask"])
    return str(workers), duration_text(seconds), f"{1 - seconds / whole:.0%} with one driver"


if __name__ == "__main__":
    os.environ["PYTHONPATH"] = str(HERE.parent)  # workers find the tasks of this file by name
    text = page(measure())
    (HERE / "million-runs.md").write_text(text, encoding="utf-8")
    print(text)
