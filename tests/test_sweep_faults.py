"""Sweeps under real faults: killed workers, killed drivers, Ctrl-C, a full disk.

Every fault is a real one: processes get SIGKILL or SIGINT, and the disk is a small file system
that is really full.
"""

from __future__ import annotations

import contextlib
import json
import os
import signal
import subprocess
import sys
import threading
import time
from pathlib import Path

import pytest

from chainsim.errors import RunError
from chainsim.study.engines import SerialEngine
from chainsim.study.index import Index
from chainsim.study.plan import Keep
from chainsim.study.processes import ProcessEngine
from chainsim.study.store import Store
from chainsim.study.sweep import run_points
from chainsim.study.sweep_parts import Settings
from tests.unit.study_tasks import done_in, points_of

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="signals of POSIX")

REPOSITORY = str(Path(__file__).parents[1])
TASKS = "tests.unit.study_tasks"
PATIENCE = 40.0  # longest wait for another process [s]

DRIVER = """
import json, sys
from chainsim.errors import ChainsimError
from chainsim.study.processes import ProcessEngine
from chainsim.study.store import Store
from chainsim.study.sweep import Settings, run_points
from tests.unit.study_tasks import points_of

values = [{"mass": float(i), "sleep": float(sys.argv[3])} for i in range(int(sys.argv[2]))]
try:
    tally = run_points(
        points_of(values), Store(sys.argv[1]), ProcessEngine(2), Settings(task=sys.argv[4])
    )
except ChainsimError as error:
    print(error)
    sys.exit(error.exit_status)
print(tally)
"""


@pytest.fixture(autouse=True)
def tasks_are_found_by_workers(monkeypatch):
    monkeypatch.setenv("PYTHONPATH", REPOSITORY)


@pytest.fixture
def store(tmp_path):
    return Store(tmp_path / "out")


def driver(store, count, sleep, task="cheap"):
    """Start a sweep in a process of its own, in its own process group."""
    return subprocess.Popen(
        [sys.executable, "-c", DRIVER, str(store.folder), str(count), str(sleep)]
        + [f"{TASKS}:{task}"],
        stdout=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )


def wait_until(what):
    end = time.monotonic() + PATIENCE
    while not what():
        assert time.monotonic() < end, "it took too long"
        time.sleep(0.01)


def values(count, sleep):
    return [{"mass": float(i), "sleep": sleep} for i in range(count)]


def is_running(process: int) -> bool:
    with contextlib.suppress(OSError):
        status = Path(f"/proc/{process}/stat").read_text().rpartition(")")[2].split()[0]
        return status not in "ZX"
    return False


def test_a_worker_that_kills_itself_costs_its_own_run_alone(store):
    made = [{"mass": float(i), "deadly": {3: "once", 7: "always"}.get(i)} for i in range(16)]
    points = points_of(made)
    tally = run_points(points, store, ProcessEngine(2), Settings(task=f"{TASKS}:killing"))
    assert (tally.computed, tally.failed) == (16, 1)
    failure = store.read(points[7].id).failure
    assert (failure.code, failure.tries) == ("killed", 2)
    assert "SIGKILL" in failure.text
    assert store.read(points[3].id).failure is None
    assert sorted(done_in(store)) == sorted(p.id for p in points if p is not points[7])


def test_workers_killed_from_outside_lose_nothing(store):
    points = points_of(values(40, 0.05))
    engine = ProcessEngine(2)
    killed = []

    def kill_some():
        for worker in (0, 1):  # not the same one twice: its run in hand would be given up
            wait_until(lambda: len(done_in(store)) > 5 * (len(killed) + 1))
            victim = engine.processes[worker]
            os.kill(victim, signal.SIGKILL)
            killed.append(victim)

    killer = threading.Thread(target=kill_some)
    killer.start()
    tally = run_points(points, store, engine, Settings(task=f"{TASKS}:cheap"))
    killer.join()
    assert len(killed) == 2
    assert (tally.computed, tally.failed) == (40, 0)
    assert set(done_in(store)) == {point.id for point in points}
    # Only the runs that were in hand when their worker died were started again.
    assert len(done_in(store, "started")) <= 40 + len(killed)


def test_a_killed_driver_loses_no_finished_run_and_does_none_twice(store):
    first = driver(store, 30, 0.1)
    wait_until(lambda: len(list(store.runs())) >= 8)
    workers = children_of(first.pid)
    os.kill(first.pid, signal.SIGKILL)
    first.wait()
    wait_until(lambda: not any(is_running(worker) for worker in workers))
    finished = set(store.runs())
    assert 8 <= len(finished) < 30
    stamps = {run: store.path(run).stat().st_mtime_ns for run in finished}
    second = driver(store, 30, 0.1)
    text, _ = second.communicate(timeout=PATIENCE)
    assert second.returncode == 0
    assert f"reused={len(finished)}, computed={30 - len(finished)}, failed=0" in text
    assert {run: store.path(run).stat().st_mtime_ns for run in finished} == stamps
    assert len(list(store.runs())) == 30
    assert not list(store.folder.rglob("*partial*"))


def children_of(process: int) -> list[int]:
    found = []
    for status in Path("/proc").glob("[0-9]*/stat"):
        with contextlib.suppress(OSError):
            fields = status.read_text().rpartition(")")[2].split()
            if int(fields[1]) == process:
                found.append(int(status.parent.name))
    return found


def test_ctrl_c_finishes_what_is_in_hand_and_the_next_start_goes_on(store):
    first = driver(store, 30, 0.2)
    wait_until(lambda: len(list(store.runs())) >= 4)
    os.kill(first.pid, signal.SIGINT)
    text, _ = first.communicate(timeout=PATIENCE)
    assert first.returncode == 130
    assert "left to do" in text
    assert sorted(done_in(store)) == sorted(done_in(store, "started"))  # none was cut off
    finished = len(list(store.runs()))
    assert finished < 30
    second = driver(store, 30, 0.0)
    text, _ = second.communicate(timeout=PATIENCE)
    # The second sweep sleeps less, so its runs have other ids: nothing may be taken over.
    assert "reused=0, computed=30" in text


def test_ctrl_c_twice_ends_at_once(store):
    first = driver(store, 8, 30.0)
    wait_until(lambda: len(done_in(store, "started")) == 2)
    begin = time.monotonic()
    os.kill(first.pid, signal.SIGINT)
    time.sleep(0.5)
    os.kill(first.pid, signal.SIGINT)
    text, _ = first.communicate(timeout=PATIENCE)
    assert first.returncode == 130
    assert "stopped at once" in text
    assert time.monotonic() - begin < 15.0
    assert not list(store.runs())


@pytest.fixture
def small_disk(tmp_path):
    """A file system of 400 kB, really mounted; skipped where that is not allowed."""
    place = tmp_path / "disk"
    place.mkdir()
    mounted = subprocess.run(
        ["mount", "-t", "tmpfs", "-o", "size=400k", "tmpfs", str(place)],
        capture_output=True,
        check=False,
    )
    if mounted.returncode:
        pytest.skip("mounting a small file system needs rights that are not given here")
    yield place
    subprocess.run(["umount", str(place)], check=True)


def test_a_full_disk_stops_the_sweep_and_loses_nothing(small_disk):
    store = Store(small_disk / "out")
    points = points_of(values(40, 0.0))
    settings = Settings(keep=Keep(trajectories=True), task=f"{TASKS}:recorded")
    with pytest.raises(RunError, match="the disk is full"):
        run_points(points, store, ProcessEngine(2), settings)
    finished = set(store.runs())
    assert 0 < len(finished) < 40
    for run in finished:
        assert store.read(run) is not None
        assert store.path(run, ".lift.h5").stat().st_size == 20_000
    subprocess.run(["mount", "-o", "remount,size=8m", str(small_disk)], check=True)
    stamps = {run: store.path(run).stat().st_mtime_ns for run in finished}
    tally = run_points(points, store, ProcessEngine(2), settings)
    assert (tally.reused, tally.computed) == (len(finished), 40 - len(finished))
    assert {run: store.path(run).stat().st_mtime_ns for run in finished} == stamps
    index = Index(store)
    assert len(index.entries()) == 40
    index.close()


def test_a_file_size_limit_is_told_as_a_full_disk(store):
    code = (
        "import json, resource, signal, sys; from chainsim.study.store import *; "
        "from chainsim.study.rows import Row\n"
        "signal.signal(signal.SIGXFSZ, signal.SIG_IGN)\n"
        "resource.setrlimit(resource.RLIMIT_FSIZE, (100, resource.RLIM_INFINITY))\n"
        "try: Store(sys.argv[1]).write(Row('ab', 'done', {}, 's', stop_reason='x' * 500))\n"
        "except DiskFull as error: print('full', error)"
    )
    told = subprocess.run(
        [sys.executable, "-c", code, str(store.folder)], capture_output=True, text=True, check=True
    )
    assert told.stdout.startswith("full")
    assert not list(store.runs())


def test_a_dask_cluster_with_a_killed_worker_loses_nothing(store, tmp_path):
    pytest.importorskip("distributed", reason="the extra [cluster] is not installed")
    from chainsim.study.cluster import DaskEngine

    made = [{"mass": float(i), "deadly": {2: "once", 5: "always"}.get(i)} for i in range(12)]
    points = points_of(made)
    tally = run_points(points, store, DaskEngine(2), Settings(task=f"{TASKS}:killing"))
    assert (tally.computed, tally.failed) == (12, 1)
    assert store.read(points[5].id).failure.code == "killed"
    unharmed = [point for point in points if point is not points[5]]
    assert sorted(done_in(store)) == sorted(point.id for point in unharmed)
    alone = Store(tmp_path / "alone")
    run_points(unharmed, alone, SerialEngine(), Settings(task=f"{TASKS}:cheap"))
    assert [results(store, p) for p in unharmed] == [results(alone, p) for p in unharmed]


def results(store, point):
    """A run file without what differs from try to try."""
    row = json.loads(store.path(point.id).read_text())
    return {key: value for key, value in row.items() if key != "how"}
