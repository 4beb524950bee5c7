"""What a sweep will take before it starts: runs, time and disk, measured where possible."""

from __future__ import annotations

import statistics
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from chainsim.study.index import Index
from chainsim.study.points import Point
from chainsim.study.rows import FAILED
from chainsim.study.store import Store

# Where nothing has been run yet: 60 simulated seconds a second on a lift of 120 links (the
# least that the speed case must reach), cost in proportion to the links.
_ASSUMED_COST = 1.0 / (60.0 * 120.0)  # [s per simulated second and link]
_ASSUMED_START = 0.3  # reading, equilibrium, findings [s per run]
_ASSUMED_ROW = 8_000  # bytes of a run file
_BYTES_PER_LINK = 20.0  # pins (4 numbers) and tension in float32, as stored
_COMPRESSION = 0.6  # share that is left of them on the disk


@dataclass(frozen=True)
class Forecast:
    """What is ahead.

    Attributes
    ----------
    planned, finished, failed, due : int
        Points of the plan, done before, failed before, to be run now (dimensionless).
    seconds : float
        Time for what is due, on all workers together [s].
    size : float
        Disk for what is due [B].
    measured : bool
        True where time and disk come from runs of this very sweep, False where assumed.
    """

    planned: int
    finished: int
    failed: int
    due: int
    seconds: float
    size: float
    measured: bool

    def __str__(self) -> str:
        source = "measured on the finished ones" if self.measured else "assumed, nothing is run yet"
        return (
            f"{self.planned} runs: {self.finished} finished, {self.failed} failed, {self.due} due; "
            f"about {duration_text(self.seconds)} and {size_text(self.size)} ({source})"
        )


def forecast(
    points: Sequence[Point],
    store: Store,
    workers: int,
    trajectories: bool,
    only_failed: bool = False,
    index_name: str = "index.sqlite",
) -> Forecast:
    """Forecast a sweep. Nothing is run, and nothing but the index is written.

    Parameters
    ----------
    points : sequence of Point
        The points.
    store : Store
        Run files of earlier goes.
    workers : int
        Number of workers (dimensionless).
    trajectories : bool
        Whether whole recordings are kept.
    only_failed : bool
        True where only failed runs are tried again.
    index_name : str
        File name of the index.

    Returns
    -------
    Forecast
        Runs, time and disk.
    """
    entries = {}
    if store.folder.exists():
        index = Index(store, index_name)
        index.catch_up()
        entries = index.entries()
        index.close()
    ids = {point.id for point in points}
    known = {run: entry for run, entry in entries.items() if run in ids}
    failed = sum(entry.state == FAILED for entry in known.values())
    due = failed if only_failed else len(ids) - len(known)
    times = [e.seconds for e in known.values() if e.seconds is not None]
    if times:
        each, size = statistics.fmean(times), _measured_size(store, list(known))
    else:
        each, size = assumed_cost(points[0], trajectories) if points else (0.0, 0.0)
    finished = len(known) - failed
    seconds = due * each / max(workers, 1)
    return Forecast(len(ids), finished, failed, due, seconds, due * size, bool(times))


def assumed_cost(point: Point, trajectories: bool) -> tuple[float, float]:
    """Time and disk of one run by the size of its scenario, where nothing is measured.

    Parameters
    ----------
    point : Point
        A typical point.
    trajectories : bool
        Whether its whole recording is kept.

    Returns
    -------
    tuple of float
        Time on one core [s] and disk [B].
    """
    scenario = _scenario(point)
    if scenario is None:
        return _ASSUMED_START, float(_ASSUMED_ROW)
    duration, n_links = scenario.run.duration or 60.0, _links(scenario)
    seconds = _ASSUMED_START + _ASSUMED_COST * duration * n_links
    samples = duration * scenario.run.sample_rate
    recording = samples * n_links * _BYTES_PER_LINK * _COMPRESSION if trajectories else 0.0
    return seconds, _ASSUMED_ROW + recording


def _scenario(point: Point) -> Any:
    if point.refusal is not None or not point.text:
        return None
    from chainsim.scenario import parse_scenario

    return parse_scenario(point.text, file=point.scenario).with_values(point.values)


def _links(scenario: Any) -> float:
    """Links of a lift, or the number that its axles suggest (each strand there and back)."""
    if scenario.chain.links:
        return float(scenario.chain.links)
    heights = [sprocket.center[1] for sprocket in scenario.sprocket]
    teeth = sum(sprocket.teeth for sprocket in scenario.sprocket) / len(scenario.sprocket)
    return 2.0 * (max(heights) - min(heights)) / scenario.chain.pitch + teeth


def _measured_size(store: Store, runs: list[str]) -> float:
    sample = runs[:20]
    files = [p for run in sample for p in store.path(run).parent.glob(f"{run}.*")]
    return sum(Path(p).stat().st_size for p in files) / len(sample)


def duration_text(seconds: float) -> str:
    """A duration as people say it.

    Parameters
    ----------
    seconds : float
        Duration [s].

    Returns
    -------
    str
        Such as ``40 s``, ``12 min``, ``3 h 20 min`` or ``2.5 days``.
    """
    if seconds < 90:
        return f"{seconds:.0f} s"
    minutes = round(seconds / 60)
    if minutes < 90:
        return f"{minutes} min"
    if minutes < 36 * 60:
        return f"{minutes // 60} h {minutes % 60:02d} min"
    return f"{minutes / 1440:.1f} days"


def size_text(size: float) -> str:
    """An amount of disk as people say it.

    Parameters
    ----------
    size : float
        Amount [B].

    Returns
    -------
    str
        Such as ``12 kB`` or ``3.4 GB``.
    """
    for unit in ("B", "kB", "MB", "GB"):
        if size < 1000:
            return f"{size:.3g} {unit}"
        size /= 1000
    return f"{size:.3g} TB"
