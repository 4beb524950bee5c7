"""What every recorder promises, asked of the one in memory and of the one in a file."""

from __future__ import annotations

import numpy as np
import pytest

from chainsim.errors import RecordingError
from chainsim.integration.samples import BallRow, Block, Ending, Event, Extreme
from chainsim.recording import (
    FileRecorder,
    FindingRow,
    MemoryRecorder,
    ModeRow,
    Static,
    StrandRow,
)
from chainsim.scenario import parse_scenario
from tests.synthetic import TEXT, synthetic_recording

PINS, SLOTS = 12, 3
STRANDS = (
    StrandRow("head-tail", "head", "tail", False),
    StrandRow("tail-head", "tail", "head", True),
)
GEOMETRY = {
    "geometry/teeth": np.array([8, 8]),
    "geometry/tooth_outline": np.arange(2 * 5 * 2.0).reshape(2, 5, 2),
    "geometry/walls/guard": np.array([[0.0, 1.0], [2.0, 3.0]]),
    "geometry/ball_radius": np.array(0.008),
}
EVENTS = [
    Event(0.0, "start", "head", np.nan, "", "drive starts"),
    Event(1.5, "spill", "ball 3", 0.2, "m", "ball 3 fell, über die Kante"),
]
BALLS = [
    BallRow(0, 0.1, 0.2, 3.0, 0.01, 0.5, 4, "delivered", ""),
    BallRow(1, 1.1, 1.2, np.nan, np.nan, np.nan, 5, "aboard", ""),
]
EXTREMES = [Extreme("link_tension", 3.5, "N", 0.7, "link 17")]
MODES = [ModeRow(11.8, "take-up tail")]
FINDING = FindingRow(
    "rate_met",
    "balls",
    "Rate is met",
    "not judged",
    None,
    "1/s",
    1.0,
    None,
    1.0,
    None,
    "",
    "",
    "few",
)


@pytest.fixture(params=["memory", "file"])
def make(request, tmp_path):
    """Return a function that makes a recorder of either kind."""
    numbers = iter(range(100))

    def recorder(**options):
        if request.param == "memory":
            return MemoryRecorder(**options)
        return FileRecorder(tmp_path / f"run{next(numbers)}.lift.h5", **options)

    return recorder


def scenario():
    return parse_scenario(TEXT.format(links=60, height=260, speed=0.15, duration=9, rate=250))


def begin(recorder, **attributes):
    recorder.begin(scenario(), GEOMETRY, Static(("head", "tail"), STRANDS, attributes))
    return recorder


def blocks(samples, sizes=(256,), seed=3):
    """Blocks of the given sizes in turn, until there are so many samples."""
    rng = np.random.default_rng(seed)
    time = (1 + np.arange(samples)) / 250
    channels = {
        "pins/position": rng.standard_normal((samples, PINS, 2)),
        "links/tension": rng.standard_normal((samples, PINS)),
        "sprockets/angle": np.cumsum(rng.random((samples, 2)), axis=0),
        "balls/number": rng.integers(-1, 9, (samples, SLOTS)),
        "drive/torque": rng.standard_normal(samples),
        "energy/residual": 1e-9 * rng.standard_normal(samples),
        "energy/loss_joints": np.cumsum(rng.random(samples)),
    }
    start, turn = 0, 0
    while start < samples:
        window = slice(start, min(start + sizes[turn % len(sizes)], samples))
        yield Block(time[window], {name: values[window] for name, values in channels.items()})
        start, turn = window.stop, turn + 1


def finish(recorder, complete=True):
    ending = Ending("reached the end" if complete else "stopped by the user", complete)
    recorder.finish(EVENTS, BALLS, EXTREMES, MODES, ending, {"situations_run": ["steady", "stop"]})
    return recorder


def test_gives_back_what_it_took(make):
    recorder = begin(make())
    taken = list(blocks(700, sizes=(256, 256, 13, 175)))
    for block in taken:
        recorder.append(block)
    rec = finish(recorder).recording()
    np.testing.assert_array_equal(rec.time, np.concatenate([b.time for b in taken]))
    for name in taken[0].channels:
        given = np.concatenate([b.channels[name] for b in taken])
        np.testing.assert_array_equal(rec[name], given.astype(rec[name].dtype), err_msg=name)


@pytest.mark.parametrize("sizes", [(1,), (255,), (256, 1), (100, 256, 7)])
def test_cut_of_blocks_leaves_no_trace(make, sizes):
    recordings = []
    for cut in ((256,), sizes):
        recorder = begin(make())
        for block in blocks(600, cut):
            recorder.append(block)
        recordings.append(finish(recorder).recording())
    for name in recordings[0].names():
        assert recordings[0][name].tobytes() == recordings[1][name].tobytes(), name


def test_types_follow_the_table(make):
    recorder = begin(make())
    for block in blocks(10):
        recorder.append(block)
    rec = recorder.recording()
    types = {name: rec[name].dtype.str[1:] for name in rec.names()}
    assert types["time"] == types["sprockets/angle"] == types["energy/residual"] == "f8"
    assert types["pins/position"] == types["links/tension"] == "f4"
    assert types["balls/number"] == "i4"


def test_tables_come_back_as_rows(make):
    recorder = begin(make())
    rec = finish(recorder).recording()
    assert rec.events[1] == EVENTS[1]
    assert [event.kind for event in rec.events] == ["start", "spill"]
    assert rec.balls[0] == BALLS[0]
    assert rec.balls[1].fate == "aboard"
    assert np.isnan(rec.balls[1].end_time)
    assert rec.extremes == {"link_tension": EXTREMES[0]}
    assert rec.modes == MODES
    assert rec.strands == STRANDS
    assert rec.sprockets == ("head", "tail")


def test_findings_come_back_with_none_where_no_number_is(make):
    recorder = finish(begin(make()))
    recorder.add_findings(
        [FINDING, {**FINDING._asdict(), "name": "links_hold", "outcome": "holds"}]
    )
    rec = recorder.recording()
    assert rec.findings == [FINDING, FINDING._replace(name="links_hold", outcome="holds")]


def test_findings_may_be_replaced(make):
    recorder = finish(begin(make()))
    recorder.add_findings([FINDING, FINDING])
    recorder.add_findings([FINDING])
    assert recorder.recording().findings == [FINDING]


def test_tables_may_be_empty(make):
    recorder = begin(make())
    recorder.finish([], [], [], [], Ending("reached the end", True))
    recorder.add_findings([])
    rec = recorder.recording()
    assert (rec.events, rec.balls, rec.extremes, rec.modes, rec.findings) == ([], [], {}, [], [])
    assert len(rec.time) == 0


def test_attributes_tell_what_it_is(make):
    given = scenario()
    recorder = begin(make(), seed=7)
    assert recorder.recording().complete is False
    attrs = finish(recorder).recording().attrs
    assert attrs["format"] == "chainsim-recording"
    assert attrs["format_version"] == 1
    assert attrs["complete"] is True
    assert attrs["stop_reason"] == "reached the end"
    assert attrs["scenario_sha256"] == given.sha256
    assert attrs["seed"] == 7
    assert attrs["situations_run"] == ["steady", "stop"]
    assert {"created", "chainsim_version", "numpy_version", "h5py_version"} <= attrs.keys()


def test_scenario_comes_back_with_its_origins(make):
    rec = finish(begin(make())).recording()
    assert rec.scenario.sha256 == scenario().sha256
    assert dict(rec.scenario.origins()) == dict(scenario().origins())
    assert rec.scenario_texts["text"] == scenario().text


def test_geometry_units_and_axes(make):
    recorder = begin(make())
    for block in blocks(5):
        recorder.append(block)
    rec = recorder.recording()
    np.testing.assert_array_equal(rec["geometry/tooth_outline"], GEOMETRY["geometry/tooth_outline"])
    assert rec["geometry/ball_radius"] == 0.008
    assert rec.unit("pins/position") == "m"
    assert rec.unit("geometry/teeth") == "1"
    assert rec.dims("links/tension") == ("time", "link")
    assert rec.long_name("energy/loss_joints") == "energy lost to joints"
    assert rec.sprockets == ("head", "tail")
    assert rec.labels("axis") == ("x", "y")
    assert rec.labels("pin")[:2] == ("0", "1")


def test_reads_a_window(make):
    recorder = begin(make())
    for block in blocks(600):
        recorder.append(block)
    rec = recorder.recording()
    np.testing.assert_array_equal(
        rec.read("pins/position", slice(250, 260)), rec["pins/position"][250:260]
    )
    assert len(rec.read("time", slice(590, 900))) == 10


@pytest.mark.parametrize(
    ("keep", "kept"),
    [
        ("summary", ["balls/number", "drive/torque", "energy/loss_joints", "energy/residual"]),
        (["links/tension", "energy"], ["energy/loss_joints", "energy/residual", "links/tension"]),
    ],
)
def test_keeps_what_it_is_asked_to_keep(make, keep, kept):
    recorder = begin(make(keep=keep))
    for block in blocks(300):
        recorder.append(block)
    rec = finish(recorder).recording()
    names = [n for n in rec.names() if not n.startswith(("geometry/", "sprockets/"))]
    assert names == [*kept, "time"]


def test_refuses_an_unknown_way_of_keeping():
    with pytest.raises(RecordingError, match=r"keep is 'some'.*'all', 'summary' or a list"):
        MemoryRecorder(keep="some")


def test_axes_without_places_are_left_out(make):
    recorder = begin(make())
    recorder.append(Block(np.array([0.1]), {"balls/number": np.zeros((1, 0), int)}))
    assert "balls/number" not in recorder.recording()


@pytest.mark.parametrize(
    ("channels", "message"),
    [
        ({"pins/color": np.zeros((2, 4))}, "channel 'pins/color' is not in the channel table"),
        ({"pins/position": np.zeros((2, 4))}, r"'pins/position' has shape \(4,\) per sample"),
        ({"sprockets/rate": np.zeros((2, 3))}, "has 3 places along 'sprocket', not 2"),
    ],
)
def test_refuses_a_block_that_does_not_fit_the_table(make, channels, message):
    recorder = begin(make())
    with pytest.raises(RecordingError, match=message):
        recorder.append(Block(np.array([0.1, 0.2]), channels))


@pytest.mark.parametrize(
    ("channels", "message"),
    [
        ({}, "'drive/torque' is in one but not in the other"),
        ({"drive/torque": np.zeros((1, 2))}, r"'drive/torque' has shape \(2,\), not \(\)"),
        ({"drive/torque": np.zeros(3)}, "different numbers of samples"),
    ],
)
def test_refuses_a_block_that_differs_from_the_first(make, channels, message):
    recorder = begin(make())
    recorder.append(Block(np.array([0.1]), {"drive/torque": np.zeros(1)}))
    with pytest.raises(RecordingError, match=message):
        recorder.append(Block(np.array([0.2]), channels))


def test_refuses_unknown_geometry(make):
    with pytest.raises(RecordingError, match="geometry 'geometry/color' is not in the geometry"):
        make().begin(scenario(), {"geometry/color": np.zeros(2)}, Static((), (), {}))


def test_says_what_it_does_not_hold(make):
    rec = begin(make()).recording()
    assert "links/tension" not in rec
    with pytest.raises(RecordingError, match="holds no 'links/tension'"):
        rec["links/tension"]


def test_keeps_its_own_copy_of_a_block(make):
    recorder = begin(make())
    torque = np.ones(256, np.float32)
    recorder.append(Block(np.arange(256.0), {"drive/torque": torque}))
    torque[:] = 0
    assert recorder.recording()["drive/torque"].min() == 1


def test_synthetic_recording_is_the_same_in_both(make):
    one, two = (synthetic_recording(duration=2, recorder=r) for r in (make(), MemoryRecorder()))
    assert one.names() == two.names()
    for name in one.names():
        assert one[name].tobytes() == two[name].tobytes(), name
