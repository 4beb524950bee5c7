"""Tension along a strand: means that stand still, slack, tight and slack side."""

import weakref
from types import SimpleNamespace

import numpy as np
import pytest

from chainsim.analysis import (
    resting_tension,
    run_summary,
    sides_of_drive,
    station_tension,
    strand_ends,
    survey,
    taut,
    wrap_load,
)
from chainsim.analysis.loops import least_level, station_means
from chainsim.analysis.series import amplitudes_at, longest_run, spectrum, trailing_mean
from chainsim.closed_forms import bisector_pin_force
from tests.synthetic import (
    CARRIER_MASS,
    EVERY,
    GRAVITY,
    HUNG_MASS,
    LINK_MASS,
    TEETH,
    synthetic_recording,
)
from tests.unit.overlay import Overlay, bare_strand

LINK_WEIGHT = (LINK_MASS + CARRIER_MASS / EVERY) * GRAVITY
FOOT = (HUNG_MASS * GRAVITY + TEETH / 2 * LINK_WEIGHT) / 2


@pytest.fixture(scope="module")
def empty():
    """A lift before its first ball: free-body tensions, see tests.synthetic."""
    rec = synthetic_recording(duration=4.0, noise=0.0)
    scenario = rec.scenario.with_values({"run.settle": "1 s"})
    return Overlay(rec, {"links/tension": _statics(rec)}, scenario=scenario)


def _statics(rec):
    """Half the hung weight at the foot, and all links that hang below (free body)."""
    middle = 0.5 * (rec["pins/position"] + np.roll(rec["pins/position"], -1, axis=1))
    return FOOT + LINK_WEIGHT * middle[..., 1] / 0.01


def test_station_means_are_the_free_body_sums(empty):
    s = survey(empty)
    for strand in (0, 1):
        mean = station_tension(s, strand).tension[s.is_steady].mean(axis=0)
        height = np.arange(len(mean)) if strand == 1 else len(mean) - 1 - np.arange(len(mean))
        # The last station is there for a part of a tooth passage only.
        assert np.allclose(mean[:-1], (FOOT + LINK_WEIGHT * height)[:-1], rtol=0.01)


def test_resting_tension_is_that_of_the_lowest_link(empty):
    assert resting_tension(empty, 1) == pytest.approx(FOOT + 0.5 * LINK_WEIGHT, rel=1e-3)


def test_ends_in_the_order_of_travel(empty):
    down, up = strand_ends(empty, 0), strand_ends(empty, 1)
    steady = survey(empty).is_steady
    assert up.end[steady].mean() > up.start[steady].mean()
    assert down.start[steady].mean() > down.end[steady].mean()


def test_tight_side_of_a_head_that_lifts_balls_is_the_carrying_one():
    sides = sides_of_drive(synthetic_recording(noise=0.0))
    assert sides.tight_strand == "tail-head"
    assert sides.ratio == pytest.approx(sides.tight / sides.slack)
    assert sides.tight > sides.slack > 0


def test_a_ripple_at_the_tooth_rate_averages_out():
    rate, interval, n = 14.7, 0.004, 2000
    time = interval * np.arange(n)
    place = np.stack([np.zeros(9), 0.01 * np.arange(9)], axis=1)
    tension = np.repeat(2 + 0.5 * np.sin(2 * np.pi * rate * time)[:, None], 12, axis=1)
    rec = bare_strand(place, 0.01, tension, n, speed=rate * 0.01, interval=interval)
    mean = station_tension(rec, 0).tension[100:]
    assert np.allclose(mean, 2.0, atol=0.01)  # the broken sample at the end is not exact


def test_level_and_slack_time_of_a_dip():
    n, interval = 1000, 0.002
    tension = np.full((n, 12), 3.0)
    tension[400:430] = -1.0  # 60 ms for every link, longer than the 50 ms allowed
    tension[600:610] = -2.0  # 20 ms, within it
    place = np.stack([np.zeros(9), 0.01 * np.arange(9)], axis=1)
    rec = bare_strand(place, 0.01, tension, n, speed=5.0, interval=interval)  # a tooth a sample
    found = taut(rec, 0)
    assert found.level == pytest.approx(-1.0)
    assert 0.79 < found.time < 0.87
    assert found.slack_time == pytest.approx(0.060)


@pytest.mark.parametrize("seed", range(8))
def test_level_is_the_least_of_the_largest_in_every_window(seed):
    random = np.random.default_rng(seed)
    values = random.normal(size=(60, 4)).cumsum(axis=0).astype(np.float32)
    counted, allowed = np.array([True, True, False, True]), int(random.integers(0, 9))
    windows = np.lib.stride_tricks.sliding_window_view(values[:, counted], allowed + 1, axis=0)
    level, sample, column, longest = least_level(
        values, counted, allowed, 0.0, np.empty((2, 4), np.int32)
    )
    assert level == windows.max(axis=2).min()
    assert counted[column] and values[sample, column] <= level
    runs = [longest_run(values[:, k] < 0.0)[1] for k in np.flatnonzero(counted)]
    assert longest == max(runs)


def test_no_level_of_too_short_a_series():
    level, sample, *_ = least_level(
        np.ones((3, 1), np.float32), np.ones(1, bool), 5, 0.0, np.empty((2, 1), np.int32)
    )
    assert level == np.inf and sample == -1


def test_station_means_know_nothing_across_a_gap():
    mean = np.empty((12, 1), np.float32)
    known = np.ones(12, np.int32)
    known[5] = 0
    station_means(
        np.ones((12, 3), np.float32), np.zeros(12, np.int32), known, 2.5, np.empty(1), mean
    )
    assert np.isnan(mean[:, 0]).tolist() == [True] * 2 + [False] * 3 + [True] * 3 + [False] * 4
    assert np.allclose(mean[8:], 1.0)


@pytest.mark.parametrize("window", [1.0, 3.0, 4.25])
def test_trailing_mean_weighs_a_broken_sample(window):
    values = np.random.default_rng(3).normal(size=20)
    whole, part = int(window), window - int(window)
    k = 12
    expected = values[k - whole + 1 : k + 1].sum() + part * values[k - whole]
    assert trailing_mean(values, window)[k] == pytest.approx(expected / window)


def test_amplitudes_of_a_sum_of_sines_on_a_slope():
    time = 0.004 * np.arange(1500)
    values = 3 * np.sin(2 * np.pi * 7.3 * time) + 0.2 * np.cos(2 * np.pi * 14.6 * time) + 5 * time
    found = amplitudes_at(values, 0.004, np.array([7.3, 14.6, 21.9, 200.0]))
    assert found[:3] == pytest.approx([3.0, 0.2, 0.0], abs=1e-9)
    assert np.isnan(found[3])


def test_spectrum_shows_a_sine_at_its_height():
    time = 0.002 * np.arange(2000)
    found = spectrum(1.5 * np.sin(2 * np.pi * 20 * time), 0.002)
    top = int(np.argmax(found.amplitude))
    assert found.frequency[top] == pytest.approx(20.0, abs=0.3)
    assert found.amplitude[top] == pytest.approx(1.5, rel=0.01)


def test_wrap_load_of_an_even_pull_is_the_bisector_force(empty):
    rec = Overlay(empty, {"links/tension": np.full_like(empty["links/tension"], 4.0)})
    load = wrap_load(rec, 0)
    assert np.allclose(load.tension, 4.0)
    # Pins between two links of the polygon turn the pull by a full tooth angle; those near the
    # ends, beside a straight strand, by less.
    assert load.tooth_force[2:-2] == pytest.approx(bisector_pin_force(4.0, TEETH), rel=1e-3)


def test_only_between_feed_and_discharge():
    rec = synthetic_recording(noise=0.0)
    tension = rec["links/tension"].copy()
    low = 0.5 * (rec["pins/position"] + np.roll(rec["pins/position"], -1, axis=1))[..., 1] < 0.05
    tension[low] = -1.0
    rec = Overlay(rec, {"links/tension": tension})
    assert taut(rec, 1).level == pytest.approx(-1.0)
    scenario = rec.scenario.with_values({"balls.load_at": "100 mm"})
    assert taut(Overlay(rec, scenario=scenario), 1).level > 1.0


def test_disturbances_are_not_steady_running():
    rec = synthetic_recording(noise=0.0)
    s = survey(rec)
    assert len(s.steady) == 1 and s.time[s.steady[0].start] == pytest.approx(2.0, abs=0.01)
    knock = [SimpleNamespace(time=6.0, kind="knock", subject="", value=1.0, unit="", text="")]
    shaken = survey(Overlay(rec, events=knock))
    assert [round(float(shaken.time[w.start]), 1) for w in shaken.steady] == [2.0, 8.0]


def test_what_is_kept_of_a_recording_goes_with_it():
    rec = synthetic_recording(duration=3.0)
    assert survey(rec).position is survey(rec).position
    alive = weakref.ref(rec)
    run_summary(rec)
    del rec
    assert alive() is None
