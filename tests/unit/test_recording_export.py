"""Recordings leave as CSV, MAT, xarray and files of their own, and announce their size."""

from __future__ import annotations

import csv
import json

import numpy as np
import pytest

from chainsim.errors import CallError, RecordingError
from chainsim.recording import FileRecorder, MemoryRecorder, open_recording, save_recording
from chainsim.recording.sizes import Counts, expected_size
from tests.synthetic import synthetic_recording


@pytest.fixture(scope="module")
def rec():
    return synthetic_recording(duration=3)


def read_csv(path, **options):
    with open(path, newline="", encoding=options.pop("encoding", "utf-8")) as file:
        return list(csv.reader(file, **options))


def test_csv_has_units_in_its_headings(rec, tmp_path):
    rec.export_csv(tmp_path, names=["links/tension", "sprockets/force", "balls/number"])
    assert read_csv(tmp_path / "links_tension.csv")[0][:3] == [
        "time [s]",
        "tension link 0 [N]",
        "tension link 1 [N]",
    ]
    assert read_csv(tmp_path / "sprockets_force.csv")[0][1:4] == [
        "force head x [N]",
        "force head y [N]",
        "force tail x [N]",
    ]
    assert read_csv(tmp_path / "balls_number.csv")[0][1] == "number slot 0"


def test_csv_reads_back_to_the_digits_of_its_type(rec, tmp_path):
    rec.export_csv(tmp_path, names=["links/tension", "sprockets/angle"])
    tension = np.array(read_csv(tmp_path / "links_tension.csv")[1:], float)
    np.testing.assert_allclose(tension[:, 1:], rec["links/tension"], rtol=5e-7)  # 7 digits
    np.testing.assert_array_equal(tension[:, 0], rec.time)
    angle = np.array(read_csv(tmp_path / "sprockets_angle.csv")[1:], float)
    np.testing.assert_allclose(angle[:, 1:], rec["sprockets/angle"], rtol=1e-15)  # 16 digits


def test_csv_leaves_cells_of_missing_values_empty(rec, tmp_path):
    rec.export_csv(tmp_path, names=["drive/current", "balls/table"])
    assert {row[1] for row in read_csv(tmp_path / "drive_current.csv")[1:]} == {""}
    table = read_csv(tmp_path / "balls_table.csv")
    assert table[0][:4] == ["number", "fed time [s]", "seated time [s]", "end time [s]"]
    assert [row[7] for row in table[1:]] == [ball.fate for ball in rec.balls]
    assert table[-1][3] == ""


def test_csv_for_a_spreadsheet_with_decimal_commas(rec, tmp_path):
    rec.export_csv(tmp_path, names=["drive/rate", "events"], separator=";", decimal=",", excel=True)
    assert (tmp_path / "drive_rate.csv").read_bytes().startswith(b"\xef\xbb\xbf")
    rows = read_csv(tmp_path / "drive_rate.csv", delimiter=";", encoding="utf-8-sig")
    assert rows[2][0] == "0,004"
    assert float(rows[-1][1].replace(",", ".")) == pytest.approx(rec["drive/rate"][-1], rel=5e-7)
    events = read_csv(tmp_path / "events.csv", delimiter=";", encoding="utf-8-sig")
    assert events[1][-1] == rec.events[0].text


def test_csv_of_everything_with_what_is_known_about_it(rec, tmp_path):
    files = rec.export_csv(tmp_path / "out")
    assert len(files) == len(set(files)) > 40
    about = json.loads((tmp_path / "out" / "recording.json").read_text(encoding="utf-8"))
    assert about["attributes"]["scenario_sha256"] == rec.scenario.sha256
    assert about["channels"]["pins/position"] == {"unit": "m", "long_name": "positions of the pins"}


def test_csv_refuses_what_cannot_be_read_back(rec, tmp_path):
    with pytest.raises(CallError, match="separator ',' with decimal ','"):
        rec.export_csv(tmp_path, decimal=",")


def test_exports_say_what_they_cannot_write(rec, tmp_path):
    (tmp_path / "file").write_text("")
    with pytest.raises(RecordingError, match="cannot be written"):
        rec.export_csv(tmp_path / "file")
    with pytest.raises(RecordingError, match="cannot be written"):
        rec.export_mat(tmp_path / "none" / "run.mat")
    with pytest.raises(RecordingError, match="'pins/color' is not in the channel table"):
        rec.export_csv(tmp_path, names=["pins/color"])


def test_mat_reads_back_with_units_and_tables(rec, tmp_path):
    from scipy.io import loadmat

    found = loadmat(rec.export_mat(tmp_path / "run.mat"), simplify_cells=True)
    np.testing.assert_array_equal(found["links"]["tension"], rec["links/tension"])
    np.testing.assert_array_equal(found["time"], rec.time)
    assert found["units"]["links"]["tension"] == "N"
    assert list(found["balls"]["table"]["fate"]) == [ball.fate for ball in rec.balls]
    assert found["about"]["complete"] == 1


@pytest.mark.parametrize("kind", ["memory", "file", "cut off"])
def test_xarray_tree_has_units_and_labels(tmp_path, kind):
    pytest.importorskip("xarray")
    pytest.importorskip("h5netcdf")
    recorder = MemoryRecorder() if kind == "memory" else FileRecorder(tmp_path / "run.lift.h5")
    rec = synthetic_recording(duration=3, recorder=recorder)
    if kind == "file":
        rec = open_recording(recorder.close())
    tree = rec.to_xarray()
    np.testing.assert_array_equal(tree["links/tension"], rec["links/tension"])
    assert tree["links/tension"].attrs["units"] == "N"
    assert tree["sprockets/torque"].sel(sprocket="head").dims == ("time",)
    assert list(tree["pins"]["pin"].values[:3]) == [0, 1, 2]
    assert list(tree["balls/table/fate"].values) == [ball.fate for ball in rec.balls]
    assert list(tree["events/event_time"].values) == [event.time for event in rec.events]
    assert tree.attrs["format"] == "chainsim-recording"


def test_a_judged_recording_is_saved_as_a_summary(rec, tmp_path):
    path = save_recording(rec, tmp_path / "run.lift.h5", keep="summary")
    saved = open_recording(path)
    assert saved.complete
    assert "pins/position" not in saved
    assert "links/tension" not in saved
    np.testing.assert_array_equal(saved["drive/torque"], rec["drive/torque"])
    assert saved.events == rec.events or str(saved.events) == str(rec.events)
    assert str(saved.balls) == str(rec.balls)
    assert saved.attrs["situations_run"] == rec.attrs["situations_run"]
    assert saved.attrs["kept"] == "summary"
    assert path.stat().st_size < 0.5 * save_recording(rec, tmp_path / "all.lift.h5").stat().st_size


@pytest.mark.parametrize(("links", "duration", "rate"), [(60, 30, 250), (120, 12, 500)])
def test_size_is_announced_within_a_fifth(tmp_path, links, duration, rate):
    recorder = FileRecorder(tmp_path / "run.lift.h5")
    rec = synthetic_recording(links, duration, rate, jitter=3e-3, recorder=recorder)
    number = rec["balls/number"]
    counts = Counts(links, 2, 2, links // 4, number.shape[1], float((number >= 0).sum(1).mean()))
    assert expected_size(counts, duration, rate) == pytest.approx(
        recorder.close().stat().st_size, rel=0.2
    )


def test_a_summary_is_announced_as_smaller():
    counts = Counts(120, 2, 2, 30, 20, 10)
    assert expected_size(counts, 60, 250, "summary") < 0.3 * expected_size(counts, 60, 250)
