"""Run files and their index: whole or not there, and rebuilt from each other."""

from __future__ import annotations

import errno
import math
import os

import numpy as np
import pytest

from chainsim.errors import RecordingError
from chainsim.study.index import Index
from chainsim.study.jobs import Job
from chainsim.study.performing import perform
from chainsim.study.plan import Keep
from chainsim.study.rows import Failure, Row, outcome, relative_margin, weakest
from chainsim.study.store import DiskFull, Store, is_full, read_row
from tests.unit.study_tasks import finding

TASKS = "tests.unit.study_tasks"


def row(run="ab12", outcome="holds", margin=1.0, **others):
    found = (finding("links_hold", margin, outcome),)
    return Row(run, "done", {"mass": "1 kg"}, "lift.toml", found, {"tension": 2.0}, **others)


@pytest.fixture
def store(tmp_path):
    return Store(tmp_path / "out")


def test_a_row_comes_back_as_it_was_written(store):
    written = row(stop_reason="reached end", how={"seconds": 1.5})
    path = store.write(written)
    assert path.relative_to(store.folder).as_posix() == "runs/ab/ab12.json"
    assert store.read("ab12") == written
    assert list(store.runs()) == ["ab12"]


def test_numbers_that_do_not_exist_are_null_and_numpy_is_plain(store):
    store.write(row(how={}, stop_reason="x"))
    odd = Row("cd", "done", {}, "s", summary={"a": math.nan, "b": np.float64(2), "c": np.int64(3)})
    store.write(odd)
    assert store.read("cd").summary == {"a": None, "b": 2.0, "c": 3}


def test_a_failure_keeps_its_reason(store):
    store.write(Row("ef", "failed", {}, "s", failure=Failure("run", "residual 3 N", 2)))
    assert store.read("ef").failure == Failure("run", "residual 3 N", 2)


@pytest.mark.parametrize("text", ["", "{", '{"format": 99}', "[]", '{"format": 1, "id": "ab12"}'])
def test_a_damaged_or_foreign_run_file_is_not_a_row(store, text):
    path = store.write(row())
    path.write_text(text)
    assert store.read("ab12") is None
    with pytest.raises(RecordingError, match=r"ab12\.json"):
        read_row(path)


def test_a_full_disk_leaves_nothing_behind(store, monkeypatch):
    def no_room(descriptor):
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(os, "fsync", no_room)
    with pytest.raises(DiskFull):
        store.write(row())
    assert not [path for path in store.folder.rglob("*") if path.is_file()]


def test_a_full_disk_is_told_from_other_faults():
    assert is_full(OSError("Can't write data (No space left on device)"))  # as HDF5 tells it
    assert is_full(OSError(errno.EDQUOT, "quota"))
    assert not is_full(OSError(errno.EACCES, "denied"))
    assert not is_full(ValueError("No space left on device"))


def test_leftovers_of_killed_workers_are_removed_but_not_those_of_others(store):
    path = store.write(row())
    mine = path.with_name("ab12.json.77.partial")
    other = path.with_name("ab99.lift.h5.partial")
    for left in (mine, other):
        left.write_text("half")
    folder = path.with_name("ab12.partial")
    folder.mkdir()
    (folder / "lift.lift.h5.partial").write_text("half")
    assert store.remove_unfinished({"ab12"}) == 2
    assert not mine.exists() and not folder.exists() and other.exists()
    assert list(store.runs()) == ["ab12"]


def test_an_index_is_rebuilt_from_the_run_files(store):
    store.write(row("aa01", "close", 0.1))
    store.write(row("bb02", "fails", -1.0))
    index = Index(store)
    assert index.catch_up() == 2
    lines = index.entries()
    assert (lines["aa01"].outcome, lines["bb02"].outcome) == ("close", "fails")
    assert lines["bb02"].weakest == "links_hold"
    index.close()
    index.path.write_bytes(b"no database at all, but long enough to be taken for one" * 20)
    rebuilt = Index(store)
    rebuilt.catch_up()
    assert rebuilt.entries() == lines
    store.path("aa01").unlink()
    rebuilt.catch_up()
    assert set(rebuilt.entries()) == {"bb02"}
    rebuilt.close()


def test_an_index_notices_that_a_failed_run_was_mended_behind_its_back(store):
    store.write(Row("ef", "failed", {}, "s", failure=Failure("killed", "gone", 2)))
    index = Index(store)
    index.catch_up()
    store.write(row("ef"))
    index.catch_up()
    assert index.entries()["ef"].state == "done"
    index.close()


def test_outcome_and_weakest_finding_of_a_row():
    mixed = Row(
        "a", "done", {}, "s",
        findings=(
            finding("rate_met", 0.9, "holds"),
            finding("links_hold", 0.1, "close"),
            finding("ride_smooth", 0.0, "not judged"),
        ),
    )  # fmt: skip
    assert outcome(mixed) == "close"
    assert outcome(mixed, ("rate_met",)) == "holds"
    assert outcome(mixed, ("ride_smooth",)) == "not judged"
    assert [f["name"] for f in weakest(mixed)] == ["links_hold", "rate_met"]
    assert outcome(Row("b", "failed", {}, "s", failure=Failure("run", "x"))) == "not completed"
    lost = finding("balls_stay_seated", 0.0, "fails") | {"margin": None}
    assert relative_margin(lost) == -math.inf


def job(store, task, keep=None, **values):
    return Job("ab12", "s", "", values, str(store.folder), keep or Keep(), f"{TASKS}:{task}")


def test_a_job_keeps_what_the_plan_asks_for(store):
    keep = Keep(findings=("links_hold",), summary=("odd",))
    assert perform(job(store, "cheap", keep, mass=1.0)).state == "done"
    kept = store.read("ab12")
    assert [f["name"] for f in kept.findings] == ["links_hold"]
    assert kept.summary == {"odd": None}


def test_a_job_that_is_done_is_not_done_again(store):
    assert perform(job(store, "cheap", mass=1.0)).state == "done"
    before = store.path("ab12").read_bytes()
    assert perform(job(store, "broken", mass=1.0)).state == "done"
    assert store.path("ab12").read_bytes() == before


def test_a_fault_of_a_run_is_recorded_and_not_raised(store):
    told = perform(job(store, "broken"))
    assert (told.state, told.code) == ("failed", "error")
    assert store.read("ab12").failure.text == "ZeroDivisionError: division by zero"


def test_a_task_that_is_not_there_is_a_fault_of_the_set_up(store):
    assert perform(job(store, "nothing")).state == "set-up is wrong"
    assert store.read("ab12") is None
