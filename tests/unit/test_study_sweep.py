"""Sweeps: nothing twice, nothing lost, and the same numbers whoever computes them."""

from __future__ import annotations

import io
import time
from pathlib import Path

import pytest

from chainsim.errors import RunError
from chainsim.study.driver_lock import only_driver
from chainsim.study.engines import SerialEngine, engine_of
from chainsim.study.forecast import duration_text, size_text
from chainsim.study.plan import EngineChoice
from chainsim.study.plan_reading import read_plan
from chainsim.study.processes import ProcessEngine
from chainsim.study.progress import Pace, PlainProgress
from chainsim.study.store import Store, rows_of
from chainsim.study.sweep import run_points
from chainsim.study.sweep_parts import Settings
from chainsim.study.sweeping import open_sweep
from tests.unit.study_lift import LIFT
from tests.unit.study_tasks import done_in, points_of

TASKS = "tests.unit.study_tasks"
REPOSITORY = str(Path(__file__).parents[2])


@pytest.fixture(autouse=True)
def tasks_are_found_by_workers(monkeypatch):
    monkeypatch.setenv("PYTHONPATH", REPOSITORY)


@pytest.fixture
def store(tmp_path):
    return Store(tmp_path / "out")


GRID = [{"mass": m / 10, "speed": s / 10} for m in range(6) for s in range(5)]


def results(points, store):
    """What was computed, without what differs from try to try (clock, process)."""
    rows = rows_of(points, store)
    return [(row.id, row.findings, row.summary, row.stop_reason) for row in rows]


def test_results_do_not_depend_on_the_number_of_workers_or_the_order(tmp_path):
    settings = Settings(task=f"{TASKS}:cheap")
    points = points_of(GRID)
    found = []
    for i, (engine, order) in enumerate(
        [(SerialEngine(), 1), (ProcessEngine(1), 1), (ProcessEngine(3), -1)]
    ):
        store = Store(tmp_path / f"out{i}")
        run_points(points[::order], store, engine, settings)
        found.append(results(points, store))
    assert found[0] == found[1] == found[2]


def test_a_second_start_does_nothing_twice(store):
    points = points_of(GRID)
    settings = Settings(task=f"{TASKS}:cheap")
    first = run_points(points[:11], store, SerialEngine(), settings)
    second = run_points(points, store, SerialEngine(), settings)
    third = run_points(points, store, SerialEngine(), settings)
    assert (first.computed, first.reused) == (11, 0)
    assert (second.computed, second.reused) == (19, 11)
    assert (third.computed, third.reused) == (0, 30)
    assert sorted(done_in(store)) == sorted(point.id for point in points)


def test_equal_points_are_run_once(store):
    points = points_of([{"mass": 1.0}, {"mass": 1.0}, {"mass": 2.0}])
    tally = run_points(points, store, SerialEngine(), Settings(task=f"{TASKS}:cheap"))
    assert (tally.planned, tally.computed) == (2, 2)
    assert [row.id for row in rows_of(points, store)] == [point.id for point in points]


def test_a_lost_index_costs_no_run(store):
    points = points_of(GRID)
    settings = Settings(task=f"{TASKS}:cheap")
    run_points(points, store, SerialEngine(), settings)
    (store.folder / "index.sqlite").unlink()
    assert run_points(points, store, SerialEngine(), settings).computed == 0


def test_only_failed_tries_the_failed_and_nothing_else(store):
    points = points_of([{"mass": m / 10} for m in range(8)])
    settings = Settings(task=f"{TASKS}:failing")
    first = run_points(points[:7], store, SerialEngine(), settings)
    assert (first.computed, first.failed) == (7, 5)
    assert "residual 3 N" in store.read(points[0].id).failure.text
    again = run_points(points[:7], store, SerialEngine(), settings)
    assert (again.computed, again.failed) == (0, 5)
    (store.folder / "mended").touch()
    retried = run_points(
        points, store, SerialEngine(), Settings(task=f"{TASKS}:failing", only_failed=True)
    )
    assert (retried.computed, retried.failed) == (5, 0)
    assert store.read(points[7].id) is None


def test_the_same_failure_again_and_again_stops_the_sweep(store):
    points = points_of([{"mass": float(m)} for m in range(50)])
    with pytest.raises(RunError, match=r"last 4 runs.*division by zero"):
        run_points(points, store, SerialEngine(), Settings(task=f"{TASKS}:broken", give_up_after=4))
    assert len(list(store.runs())) == 4


def test_a_wrong_set_up_stops_at_the_first_run(store):
    points = points_of([{"mass": float(m)} for m in range(5)])
    with pytest.raises(RunError, match=r"set-up is wrong.*nothing"):
        run_points(points, store, ProcessEngine(2), Settings(task=f"{TASKS}:nothing"))
    assert not list(store.runs())


def test_a_run_that_takes_too_long_is_ended_and_the_sweep_goes_on(store):
    points = points_of([{"mass": 1.0}, {"mass": 2.0, "sleep": 60.0}, {"mass": 3.0}])
    begin = time.monotonic()
    tally = run_points(
        points, store, ProcessEngine(2, wall_limit=1.0), Settings(task=f"{TASKS}:cheap")
    )
    assert time.monotonic() - begin < 30.0
    assert (tally.computed, tally.failed) == (3, 1)
    assert store.read(points[1].id).failure.code == "too long"


def test_two_drivers_keep_out_of_each_others_way(store):
    import subprocess
    import sys

    store.folder.mkdir()
    lock = store.folder / "index.sqlite.lock"
    code = (
        "import sys; from pathlib import Path; from chainsim.study.sweep import only_driver\n"
        "with only_driver(Path(sys.argv[1])): pass"
    )
    with only_driver(lock):
        other = subprocess.run(
            [sys.executable, "-c", code, str(lock)], capture_output=True, text=True, check=False
        )
    assert "another sweep is at work" in other.stderr
    with only_driver(lock):
        pass


def test_a_dry_run_runs_nothing_and_writes_nothing(tmp_path):
    (tmp_path / "lift.toml").write_text(LIFT)
    (tmp_path / "plan.toml").write_text(
        'format = 1\nscenario = "lift.toml"\n[[axis]]\nkey = "drive.chain_speed"\n'
        'range = ["0.05 m/s", "0.4 m/s"]\ncount = 6\n'
    )
    before = sorted(tmp_path.rglob("*"))
    sweep = open_sweep(read_plan(tmp_path / "plan.toml"))
    told = sweep.forecast()
    assert (told.planned, told.due, told.measured) == (6, 6, False)
    assert told.seconds > 0 and told.size > 0
    assert sweep.rows() == [None] * 6
    assert sorted(tmp_path.rglob("*")) == before


def test_a_sweep_of_a_plan_from_file_to_ranking_and_map(tmp_path):
    (tmp_path / "lift.toml").write_text(LIFT)
    (tmp_path / "plan.toml").write_text(
        'format = 1\nscenario = "lift.toml"\n'
        '[[axis]]\nkey = "sprocket.tail.mount.mass"\nvalues = ["0.1 kg", "0.3 kg", "0.5 kg"]\n'
        '[[axis]]\nkey = "drive.sprocket"\nvalues = ["head", "tail"]\n'
        '[engine]\nkind = "serial"\n'
    )
    sweep = open_sweep(read_plan(tmp_path / "plan.toml"), tmp_path / "out")
    tally = sweep.run(task="tests.unit.study_lift:free_body")
    assert (tally.computed, tally.failed) == (6, 0)
    told = sweep.forecast()
    assert (told.finished, told.due, told.measured) == (6, 0, True)
    ranked = sweep.ranking()
    assert ranked[0].outcome == "holds"
    assert ranked[-1].point.labels == {
        "sprocket.tail.mount.mass": "0.1 kg",
        "drive.sprocket": "tail",
    }
    (drawn,) = sweep.maps()
    assert drawn.across.numbers == (0.1, 0.3, 0.5)
    by_drive = dict(zip(drawn.up.labels, drawn.outcome.tolist(), strict=True))
    assert by_drive["tail"] == ["fails", "close", "holds"]
    assert by_drive["head"] == ["holds"] * 3
    assert all(entry is not None for _, entry in sweep.entries())


def test_parts_share_a_folder_and_make_up_the_whole(tmp_path):
    (tmp_path / "lift.toml").write_text(LIFT)
    (tmp_path / "plan.toml").write_text(
        'format = 1\nscenario = "lift.toml"\n[[axis]]\nkey = "drive.chain_speed"\n'
        'range = ["0.05 m/s", "0.4 m/s"]\ncount = 7\n[engine]\nkind = "serial"\n'
    )
    plan = read_plan(tmp_path / "plan.toml")
    task = "tests.unit.study_lift:free_body"
    for part in ("1/3", "2/3", "3/3"):
        open_sweep(plan, tmp_path / "out", part).run(task=task)
    whole = open_sweep(plan, tmp_path / "out")
    assert whole.run(task=task).computed == 0
    assert None not in whole.rows()


def test_plain_progress_is_lines_without_control_codes(store):
    stream = io.StringIO()
    points = points_of(GRID)
    run_points(
        points, store, SerialEngine(), Settings(task=f"{TASKS}:cheap"), PlainProgress(stream)
    )
    text = stream.getvalue()
    assert text.startswith("30 runs, 0 reused, 1 workers\n")
    assert "100%  30 done, 0 failed, 0 reused of 30" in text
    assert "\x1b" not in text and "\r" not in text


def test_progress_counts_each_go_from_nothing(store):
    stream = io.StringIO()
    watcher = PlainProgress(stream)
    settings = Settings(task=f"{TASKS}:cheap")
    for i in range(3):
        run_points(points_of([{"mass": float(i)}]), store, SerialEngine(), settings, watcher)
    assert stream.getvalue().count("100%  1 done, 0 failed, 0 reused of 1") == 3


def test_pace_tells_the_time_left():
    pace = Pace(10.0)
    assert pace.left(5) is None
    for now in (12.0, 14.0, 16.0):
        pace.tick(now)
    assert pace.left(5) == pytest.approx(10.0)


def test_durations_and_sizes_as_people_say_them():
    assert [duration_text(s) for s in (40, 720, 12_000, 300_000)] == [
        "40 s", "12 min", "3 h 20 min", "3.5 days",
    ]  # fmt: skip
    assert [size_text(s) for s in (800, 12_000, 3.4e9)] == ["800 B", "12 kB", "3.4 GB"]


def test_engines_are_chosen_by_the_plan():
    assert isinstance(engine_of(EngineChoice(kind="serial")), SerialEngine)
    assert engine_of(EngineChoice(workers=3)).workers == 3


def test_a_slurm_job_has_one_core_one_thread_and_leaves_before_it_is_ended():
    pytest.importorskip("dask_jobqueue", reason="the extra [cluster] is not installed")
    from chainsim.errors import CallError
    from chainsim.study.slurm import slurm_cluster

    with slurm_cluster({"queue": "short", "walltime": "00:50:00", "memory": "3 GB"}) as cluster:
        script = cluster.job_script()
    for line in ("-p short", "--cpus-per-task=1", "-t 00:50:00", "export NUMBA_NUM_THREADS=1"):
        assert line in script
    assert "--lifetime 2700s" in script and "--nthreads 1" in script
    with pytest.raises(CallError, match="hours, minutes and seconds"):
        slurm_cluster({"walltime": "50 min"})


def test_live_progress_draws_a_table(store):
    from chainsim.study.progress import LiveProgress, progress

    stream = io.StringIO()
    points = points_of([{"mass": float(m)} for m in range(4)])
    settings = Settings(task=f"{TASKS}:broken")
    run_points(points, store, SerialEngine(), settings, LiveProgress(stream))
    text = stream.getvalue()
    assert "0 done, 4 failed" in text
    assert "division by zero" in text
    assert type(progress(io.StringIO())) is PlainProgress


def test_what_runs_print_goes_to_a_file_and_not_into_the_answers(store, capfd):
    points = points_of([{"mass": float(m)} for m in range(3)])
    tally = run_points(points, store, ProcessEngine(1), Settings(task=f"{TASKS}:chatty"))
    assert tally.computed == 3
    assert (store.folder / "workers.log").read_text().count("hello from a run") == 3
    assert "hello" not in "".join(capfd.readouterr())


def test_workers_that_never_start_stop_the_sweep_with_a_hint(store, monkeypatch):
    monkeypatch.setenv("PYTHONHOME", "/nowhere")
    points = points_of([{"mass": 1.0}])
    with pytest.raises(RunError, match=r"workers\.log"):
        run_points(points, store, ProcessEngine(1), Settings(task=f"{TASKS}:cheap"))
