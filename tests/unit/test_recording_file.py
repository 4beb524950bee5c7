"""What only a recording in a file must stand: names, kills, damage, other programs."""

from __future__ import annotations

import importlib
import os
import signal
import subprocess
import sys
import zlib
from pathlib import Path

import h5py
import numpy as np
import pytest

from chainsim.errors import RecordingError
from chainsim.integration.samples import Block, Ending
from chainsim.recording import FileRecorder, MemoryRecorder, Static, open_recording
from chainsim.recording.channels import CHANNELS, channel
from chainsim.recording.packing import TRY_AGAIN, Packer
from chainsim.recording.places import recording_path
from chainsim.recording.tail import read_tail, tail_path, write_tail
from chainsim.scenario import parse_scenario
from tests.synthetic import TEXT, synthetic_recording

ROOT = Path(__file__).resolve().parents[2]


def begun(path, **options):
    recorder = FileRecorder(path, **options)
    text = TEXT.format(links=60, height=260, speed=0.15, duration=9, rate=250)
    recorder.begin(parse_scenario(text), {}, Static(("head", "tail"), (), {}))
    return recorder


def torques(first, samples):
    """A block in which the torque is the number of the sample."""
    values = np.arange(first, first + samples)
    return Block(values / 250, {"drive/torque": values.astype(float)})


def finished(recorder):
    recorder.finish([], [], [], [], Ending("reached the end", True))
    return recorder.close()


@pytest.fixture(scope="module")
def whole(tmp_path_factory):
    """Path of a whole recording; copy it before changing it."""
    recorder = FileRecorder(tmp_path_factory.mktemp("whole") / "foyer.lift.h5")
    synthetic_recording(duration=3, recorder=recorder)
    recorder.add_findings([])
    return recorder.close()


@pytest.fixture
def copy(whole, tmp_path):
    path = tmp_path / "copy.lift.h5"
    path.write_bytes(whole.read_bytes())
    return path


# Names


def test_appears_under_its_name_when_it_is_whole(tmp_path):
    recorder = begun(tmp_path / "foyer.lift.h5")
    recorder.append(torques(0, 10))
    assert sorted(p.name for p in tmp_path.iterdir()) == [
        "foyer.lift.h5.partial",
        "foyer.lift.h5.partial.tail",
    ]
    path = finished(recorder)
    assert [p.name for p in tmp_path.iterdir()] == ["foyer.lift.h5"]
    assert path == tmp_path / "foyer.lift.h5"


def test_counts_on_where_the_name_is_taken(tmp_path):
    paths = [finished(begun(tmp_path / "foyer.lift.h5")) for _ in range(3)]
    assert [p.name for p in paths] == ["foyer.lift.h5", "foyer-2.lift.h5", "foyer-3.lift.h5"]


def test_leaves_a_cut_off_recording_alone(tmp_path):
    cut_off = begun(tmp_path / "foyer.lift.h5")
    cut_off.append(torques(0, 300))
    assert cut_off.close().name == "foyer.lift.h5.partial"
    before = (tmp_path / "foyer.lift.h5.partial").read_bytes()
    assert finished(begun(tmp_path / "foyer.lift.h5")).name == "foyer-2.lift.h5"
    assert finished(begun(tmp_path / "foyer.lift.h5", force=True)).name == "foyer.lift.h5"
    assert (tmp_path / "foyer.lift.h5.partial").read_bytes() == before


def test_force_replaces_only_when_the_new_one_is_whole(tmp_path):
    path = tmp_path / "foyer.lift.h5"
    finished(begun(path))
    before = path.read_bytes()
    recorder = begun(path, force=True)
    recorder.append(torques(0, 7))
    assert path.read_bytes() == before
    assert finished(recorder) == path
    assert len(open_recording(path).time) == 7


def test_two_writers_never_share_a_file(tmp_path):
    one, two = begun(tmp_path / "foyer.lift.h5"), begun(tmp_path / "foyer.lift.h5")
    assert {finished(one).name, finished(two).name} == {"foyer.lift.h5", "foyer-2.lift.h5"}


def test_a_file_that_came_meanwhile_is_not_overwritten(tmp_path):
    recorder = begun(tmp_path / "foyer.lift.h5")
    (tmp_path / "foyer.lift.h5").write_text("of someone else")
    assert finished(recorder).name == "foyer-2.lift.h5"
    assert (tmp_path / "foyer.lift.h5").read_text() == "of someone else"


@pytest.mark.parametrize(
    ("stem", "name"),
    [("foyer", "foyer.lift.h5"), ("../up", "_up.lift.h5"), ("..", "recording.lift.h5")],
)
def test_a_stem_stays_in_its_folder(tmp_path, stem, name):
    assert recording_path(tmp_path, stem) == tmp_path / name


def test_a_place_that_cannot_be_written_is_said(tmp_path):
    (tmp_path / "file").write_text("")
    with pytest.raises(RecordingError, match=r"file/foyer.lift.h5.partial: cannot be written"):
        begun(tmp_path / "file" / "foyer.lift.h5")


# Kills

KILLED = """
import sys
sys.path.insert(0, {root!r})
from tests.unit.test_recording_file import begun, torques
recorder = begun({path!r})
first = 0
while True:
    recorder.append(torques(first, 100))
    first += 100
    print(first, flush=True)
"""


@pytest.mark.parametrize("lines", [1, 12, 60])
def test_a_killed_run_can_be_read_up_to_its_last_flush(tmp_path, lines):
    path = tmp_path / "foyer.lift.h5"
    code = KILLED.format(root=str(ROOT), path=str(path))
    with subprocess.Popen([sys.executable, "-c", code], stdout=subprocess.PIPE) as process:
        for _ in range(lines):
            assert process.stdout.readline()
        process.send_signal(signal.SIGKILL)
    assert process.returncode == -signal.SIGKILL
    rec = open_recording(path.with_name("foyer.lift.h5.partial"))
    assert not rec.complete
    assert rec.stop_reason == "not finished"
    assert len(rec.time) >= 100
    np.testing.assert_array_equal(rec["drive/torque"], np.arange(len(rec.time)))
    np.testing.assert_array_equal(rec.time, np.arange(len(rec.time)) / 250)
    assert rec.scenario.drive.sprocket == "head"
    assert (rec.events, rec.balls, rec.findings) == ([], [], [])


def test_flush_saves_what_does_not_fill_a_chunk(tmp_path):
    recorder = begun(tmp_path / "foyer.lift.h5")
    for first in range(0, 5000, 250):
        recorder.append(torques(first, 250))
    recorder.flush()
    partial = tmp_path / "copy.partial"
    partial.write_bytes(recorder.partial.read_bytes())
    assert len(open_recording(partial).time) == 4096
    tail_path(partial).write_bytes(tail_path(recorder.partial).read_bytes())
    np.testing.assert_array_equal(open_recording(partial)["drive/torque"], np.arange(5000))


@pytest.mark.parametrize("content", [b"", b"PK\x03\x04", b"nothing of ours"])
def test_a_damaged_tail_is_left_out(tmp_path, content):
    recorder = begun(tmp_path / "foyer.lift.h5")
    recorder.append(torques(0, 4500))
    partial = recorder.close()
    tail_path(partial).write_bytes(content)
    assert len(open_recording(partial).time) == 4096


def test_a_tail_that_does_not_fit_is_an_error(tmp_path):
    recorder = begun(tmp_path / "foyer.lift.h5")
    recorder.append(torques(0, 4500))
    partial = recorder.close()
    rests = read_tail(partial)
    wrong = rests["drive/torque"]._replace(values=np.zeros((404, 2), np.float32))
    write_tail(partial, rests | {"drive/torque": wrong})
    with pytest.raises(RecordingError, match="'drive/torque' cannot be read"):
        open_recording(partial)["drive/torque"]


# Damage


def test_no_file(tmp_path):
    with pytest.raises(RecordingError, match="there is no such file"):
        open_recording(tmp_path / "none.lift.h5")


@pytest.mark.parametrize("content", [b"", b"format = 1\n", b"\x89HDF\r\n\x1a", os.urandom(4096)])
def test_a_file_that_is_no_hdf5(tmp_path, content):
    path = tmp_path / "other.lift.h5"
    path.write_bytes(content)
    with pytest.raises(RecordingError, match="is not a recording"):
        open_recording(path)


def test_a_foreign_hdf5_file(tmp_path):
    with h5py.File(tmp_path / "other.h5", "w") as file:
        file["time"] = np.arange(3)
    with pytest.raises(RecordingError, match="is an HDF5 file, but not a recording of chainsim"):
        open_recording(tmp_path / "other.h5")


def test_a_newer_version_is_told_from_damage(copy):
    with h5py.File(copy, "r+") as file:
        file.attrs["format_version"] = 2
        file.attrs["chainsim_version"] = "9.1"
    with pytest.raises(
        RecordingError, match=r"format 2 \(written by chainsim 9.1\).*reads up to 1"
    ):
        open_recording(copy)


def everything(path):
    """Read all there is in a recording."""
    with open_recording(path) as rec:
        for name in rec.names():
            rec[name]
        tables = (rec.events, rec.balls, rec.extremes, rec.modes, rec.findings, rec.strands)
        return rec.scenario, rec.attrs, tables, rec.sprockets, rec.time


def test_the_undamaged_copy_can_be_read(copy):
    assert len(everything(copy)[-1]) == 751


def change(action):
    def changed(path):
        with h5py.File(path, "r+") as file:
            action(file)

    return changed


def replace(file, name, **options):
    del file[name]
    return file.create_dataset(name, **options)


DAMAGES = {
    "format is a number": change(lambda f: f.attrs.__setitem__("format", 3)),
    "version is a text": change(lambda f: f.attrs.__setitem__("format_version", "one")),
    "version is a list": change(lambda f: f.attrs.__setitem__("format_version", [1, 2])),
    "version is nought": change(lambda f: f.attrs.__setitem__("format_version", 0)),
    "no time": change(lambda f: f.__delitem__("time")),
    "time is a text": change(lambda f: replace(f, "time", data="noon")),
    "time has two axes": change(lambda f: replace(f, "time", data=np.zeros((3, 3)))),
    "scenario is gone": change(lambda f: f.__delitem__("scenario")),
    "scenario is nonsense": change(lambda f: replace(f, "scenario/resolved", data="= = =")),
    "scenario is a number": change(lambda f: replace(f, "scenario/resolved", data=4)),
    "a column is gone": change(lambda f: f.__delitem__("events/kind")),
    "a column is long": change(lambda f: replace(f, "events/time", data=np.zeros(99))),
    "a table is a dataset": change(lambda f: replace(f, "extremes", data=np.zeros(3))),
    "a fate without text": change(
        lambda f: f["balls/table/fate"].write_direct(np.array([77] * 3, "i2"))
    ),
    "a channel of texts": change(lambda f: replace(f, "links/tension", data=[["a"]])),
    "a channel elsewhere": change(
        lambda f: (
            f.__delitem__("links/tension"),
            f["links"].__setitem__("tension", h5py.ExternalLink("/etc/passwd", "/x")),
        )
    ),
    "a channel of a petabyte": change(
        lambda f: replace(f, "links/tension", shape=(10**9, 10**6), chunks=(1, 1000), dtype="f4")
    ),
}


@pytest.mark.parametrize("damage", DAMAGES)
def test_damage_is_said_in_one_sentence(copy, damage):
    DAMAGES[damage](copy)
    with pytest.raises(RecordingError) as caught:
        everything(copy)
    message = str(caught.value)
    assert message.startswith(str(copy))
    assert len(message.splitlines()) == 1 or damage == "scenario is nonsense"


def test_missing_groups_are_no_damage(copy):
    with h5py.File(copy, "r+") as file:
        for name in ("events", "findings", "extremes", "balls", "geometry", "energy"):
            del file[name]
    rec = open_recording(copy)
    assert (rec.events, rec.findings, rec.balls, rec.strands) == ([], [], [], ())
    assert "energy/kinetic" not in rec


@pytest.mark.parametrize("part", [0.02, 0.3, 0.6, 0.9, 0.999])
def test_a_cut_off_copy_is_said(copy, part):
    with open(copy, "r+b") as file:
        file.truncate(int(copy.stat().st_size * part))
    with pytest.raises(RecordingError, match=r"cut off or damaged|is not a recording"):
        everything(copy)


def test_random_damage_never_ends_in_another_error(copy):
    """Also not in a crash of the library: headers have checksums (see `LIBRARY_VERSIONS`)."""
    content, rng = bytearray(copy.read_bytes()), np.random.default_rng(5)
    for _ in range(60):
        hurt = content.copy()
        for place in rng.integers(0, len(content), 40):
            hurt[place] = int(rng.integers(256))
        for place in rng.integers(0, min(8192, len(content)), 4):
            hurt[place] = int(rng.integers(256))
        copy.write_bytes(hurt)
        try:
            everything(copy)
        except RecordingError as error:
            assert str(copy) in str(error)


# Other programs


def test_xarray_opens_each_group(whole):
    xarray = pytest.importorskip("xarray")
    pytest.importorskip("h5netcdf")
    with h5py.File(whole) as file:
        groups = [None, *(name for name in file if isinstance(file[name], h5py.Group))]
    for group in [*groups, "balls/table", "geometry/walls"]:
        with xarray.open_dataset(whole, group=group, engine="h5netcdf") as data:
            for name, values in data.variables.items():
                assert values.attrs.get("long_name"), f"{group}/{name}"
                assert not any(dim.startswith("phony") for dim in values.dims), f"{group}/{name}"
    with xarray.open_dataset(whole, group="links", engine="h5netcdf") as data:
        assert data["tension"].dims == ("time", "link")
        assert data["tension"].attrs["units"] == "N"
        assert float(data["time"][-1]) == 3.0
    with xarray.open_dataset(whole, group="sprockets", engine="h5netcdf") as data:
        assert data["force"].sel(sprocket="tail", axis="y").dims == ("time",)


def test_enumerations_carry_their_texts(whole):
    with h5py.File(whole) as file:
        fate = file["balls/table/fate"]
        texts = {code: text for text, code in h5py.check_enum_dtype(fate.dtype).items()}
        assert texts[0] == "delivered"
        assert fate.attrs["flag_meanings"].split()[2] == "missed_the_pocket"
        fates = [texts[int(code)] for code in fate[:]]
    assert fates == [ball.fate for ball in open_recording(whole).balls]


def test_every_dataset_has_scales_and_units(whole):
    rec = open_recording(whole)
    with h5py.File(whole) as file:
        for path in rec.names():
            dataset = file[path]
            assert dataset.attrs["units"] == rec.unit(path), path
            assert dataset.attrs["long_name"] == rec.long_name(path), path
            assert path == "time" or all(len(axis) == 1 for axis in dataset.dims), path


class FlushingRecorder(FileRecorder):
    """Flushes after every block."""

    def append(self, block):
        super().append(block)
        self.flush()


def test_same_data_gives_same_datasets(tmp_path):
    recordings = []
    for kind in (FileRecorder, FlushingRecorder):
        recorder = kind(tmp_path / "run.lift.h5")
        recordings.append(synthetic_recording(duration=5, recorder=recorder))
        recorder.close()
    for name in recordings[0].names():
        assert recordings[0][name].tobytes() == recordings[1][name].tobytes(), name


def test_stays_usable_when_its_recorder_is_closed(tmp_path):
    recorder = begun(tmp_path / "foyer.lift.h5")
    recorder.append(torques(0, 300))
    recorder.finish([], [], [], [], Ending("reached the end", True))
    rec = recorder.recording()
    assert rec.path.name == "foyer.lift.h5.partial"
    recorder.close()
    assert rec.path.name == "foyer.lift.h5"
    np.testing.assert_array_equal(rec["drive/torque"], np.arange(300))
    rec.close()
    assert len(rec["drive/torque"]) == 300


def test_a_closed_recorder_says_so(tmp_path):
    recorder = begun(tmp_path / "foyer.lift.h5")
    finished(recorder)
    with pytest.raises(RecordingError, match="the recorder is not open"):
        recorder.append(torques(0, 3))


def test_recorder_keeps_no_more_than_a_chunk_per_channel(tmp_path):
    recorder = begun(tmp_path / "foyer.lift.h5")
    for first in range(0, 40 * 256, 256):
        recorder.append(torques(first, 256))
    assert sum(len(lane.buffer) for lane in recorder._lanes.values()) == 2 * 4096


# Packing


def unpacked(stream, dtype):
    octets = np.frombuffer(zlib.decompress(stream), np.uint8)
    return np.ascontiguousarray(octets.reshape(np.dtype(dtype).itemsize, -1).T).view(dtype).ravel()


@pytest.mark.parametrize("module", ["isal.isal_zlib", "zlib"])
@pytest.mark.parametrize("samples", [3, 256, 9000, 70000])
def test_any_inflater_unpacks_what_is_packed(monkeypatch, module, samples):
    pytest.importorskip(module)
    deflater = importlib.import_module(module)
    monkeypatch.setattr("chainsim.recording.packing._deflater", deflater)
    packer, rng = Packer(), np.random.default_rng(2)
    for _ in range(3):
        chunk = rng.standard_normal(samples).astype("f4")
        np.testing.assert_array_equal(unpacked(packer.pack(chunk), "f4"), chunk)


def test_a_plane_that_gets_worth_deflating_is_tried_again():
    packer, rng = Packer(), np.random.default_rng(2)
    noise, calm = rng.random(70000).astype("f4"), np.zeros(70000, "f4")
    packer.pack(noise)
    sizes = [len(packer.pack(calm)) for _ in range(TRY_AGAIN + 1)]
    assert sizes[0] > 100_000
    assert sizes[-1] < 5_000


def test_table_rows_are_sound():
    for path, row in CHANNELS.items():
        assert channel(path) is row
        assert row.path == path
        assert row.unit
        assert row.long_name
        assert 0 < row.share <= 1
        assert "angle" not in path or row.dtype == "f8"
    assert MemoryRecorder(keep="summary") is not None
