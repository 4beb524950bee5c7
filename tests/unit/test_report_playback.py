"""Packing of the motion: what the browser gets is what was recorded, to a stated fineness."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from chainsim.findings import judge
from chainsim.report.moments import marks, place_target
from chainsim.report.playback import (
    chosen_samples,
    packed_angle,
    packed_counts,
    packed_range,
    squeezed,
    unsqueezed,
)
from chainsim.report.scene import build_scene
from tests.synthetic import synthetic_recording


@pytest.fixture(scope="module")
def recording():
    return synthetic_recording(duration=6.0, spilled_ball=2)


@given(st.integers(2, 2000), st.floats(20.0, 2000.0), st.lists(st.floats(-1.0, 5.0), max_size=6))
def test_chosen_samples_rise_keep_the_ends_and_every_moment(n, rate, keep):
    time = np.arange(n) / rate
    chosen = chosen_samples(time, keep)
    assert chosen[0] == 0
    assert chosen[-1] == n - 1
    assert (np.diff(chosen) > 0).all()
    for moment in keep:
        inside = min(max(moment, 0.0), time[-1])
        assert np.abs(time[chosen] - inside).min() <= 0.5 / rate + 1e-12
    assert len(chosen) <= 50.0 * time[-1] + 2 + len(keep)


def test_positions_come_back_to_half_a_step(recording):
    scene, frames = build_scene(recording, judge(recording))
    channels = scene["channels"]
    packed = [packed_counts(c["name"], np.zeros((1, c["series"]), int)) for c in channels]
    numbers = unsqueezed(frames, packed, len(scene["time"]))
    samples = np.searchsorted(recording.time, np.asarray(scene["time"]) - 1e-9)
    pins = channels[0]
    assert pins["name"] == "pins"
    low, step = (np.tile(pins[k], scene["pins"]) for k in ("low", "step"))
    shown = low + step * numbers[0].T
    expected = recording["pins/position"][samples].reshape(len(samples), -1)
    # A 16-bit step over the view with its margin: 0.5/65535 of about twice the lift's size.
    assert np.abs(shown - expected).max() <= 0.5 * step.max() * 1.001
    assert step.max() < 2e-5  # m: a fiftieth of a pixel on a drawing of 1 mm a pixel


def test_angles_pass_the_full_turn_without_a_jump():
    angle = np.linspace(-20.0, 20.0, 4001)[:, None]
    channel = packed_angle("a", angle)
    shown = unsqueezed(squeezed([channel]), [channel], len(angle))[0].T * channel.step[0]
    difference = (shown - angle + math.pi) % (2 * math.pi) - math.pi
    assert np.abs(difference).max() <= math.pi / 65536 + 1e-9


def test_values_outside_the_range_go_to_its_edge_and_nan_to_the_low_end():
    values = np.array([[-1.0], [0.5], [2.0], [np.nan]])
    channel = packed_range("x", values, np.array([0.0]), np.array([1.0]))
    assert channel.numbers[0].tolist() == [0, 32768, 65535, 0]


def test_twenty_seconds_of_a_long_lift_stay_small():
    long = synthetic_recording(duration=20.0, links=120, rate=100.0)
    scene, frames = build_scene(long, judge(long))
    assert scene["rate"] == 50.0
    assert len(frames) < 1_150_000


def test_too_much_motion_gets_fewer_moments(monkeypatch, recording):
    monkeypatch.setattr("chainsim.report.scene.MAX_BASE64", 40_000)
    scene, frames = build_scene(recording, judge(recording))
    assert scene["rate"] < 50.0
    assert len(frames) <= 40_000
    assert scene["time"][-1] == pytest.approx(6.0)


def test_the_loss_is_marked_while_the_ball_still_sits(recording):
    loss = next(m for m in marks(recording, []) if m.kind == "loss")
    sample = int(np.searchsorted(recording.time, loss.time - 1e-9))
    slot = int(np.flatnonzero(recording["balls/number"][sample] == 2)[0])
    assert recording["balls/state"][sample, slot] == 3
    assert recording["balls/state"][sample + 1, slot] != 3
    assert loss.target == {"kind": "ball", "index": 2}


@pytest.mark.parametrize(
    ("place", "target"),
    [
        ("link 37 at 0.31 m of strand tail-head", {"kind": "link", "index": 37}),
        ("pin 4 in strand tail-head", {"kind": "link", "index": 4}),
        ("ball 12", {"kind": "ball", "index": 12}),
        ("sprocket tail", {"kind": "sprocket", "index": 1}),
        ("take-up tail", {"kind": "sprocket", "index": 1}),
        ("carrying strand", None),
        ("0.31 m of strand tail-head", None),
        ("", None),
    ],
)
def test_places_in_words_point_at_parts(place, target):
    assert place_target(place, ["head", "tail"]) == target


def test_a_run_without_balls_and_take_up_plays(recording):
    text = recording.scenario.text
    assert "[balls]" in text
    from chainsim.report.parts import n_slots

    class Bare:
        """The same recording with its ball channels hidden."""

        def __getattr__(self, name):
            return [] if name == "balls" else getattr(recording, name)

        def __getitem__(self, name):
            return recording[name]

        def __contains__(self, name):
            return not name.startswith("balls/") and name in recording

    bare = Bare()
    assert n_slots(bare) == 0
    scene, _ = build_scene(bare, [])
    assert scene["slots"] == 0
    assert "balls" not in [c["name"] for c in scene["channels"]]
