"""Chain speed, ripple, excursion, sag and wraps against closed forms."""

import numpy as np
import pytest

from chainsim.analysis import chain_speed, excursion, ripple, sag, survey
from chainsim.analysis.loops import NONE, find_wraps
from chainsim.analysis.wraps import tangent_line
from chainsim.closed_forms import link_catenary, speed_harmonic, speed_variation
from tests.synthetic import SEAT_RADIUS, TEETH, synthetic_recording
from tests.unit.overlay import Overlay, bare_strand


@pytest.fixture(scope="module")
def rec():
    return synthetic_recording(duration=6.0, rate=1500.0, noise=0.0)


def test_chain_speed_is_that_of_the_polygon(rec):
    angle = rec["sprockets/angle"][:, 0]
    lean = (angle + np.pi / TEETH) % (2 * np.pi / TEETH) - np.pi / TEETH
    exact = rec["sprockets/rate"][:, 0] * SEAT_RADIUS * np.cos(lean)
    assert np.allclose(chain_speed(rec), exact, atol=2e-6)  # float32 positions over a pitch


def test_ripple_of_eight_teeth_is_that_of_the_handbook(rec):
    found = ripple(rec)
    assert found.mean == pytest.approx(0.15, rel=1e-3)
    # A hundred samples per tooth reach the corners to within a hundredth of the swing.
    assert found.peak_to_peak == pytest.approx(speed_variation(TEETH), rel=0.02)


@pytest.mark.parametrize("order", [1, 2, 3, 4, 5])
def test_harmonics_of_the_tooth_rate_are_those_of_the_polygon(rec, order):
    # 2/((k z)² − 1), see chainsim.closed_forms.speed_harmonic.
    expected = abs(speed_harmonic(TEETH, order))
    assert ripple(rec).harmonic[order - 1] == pytest.approx(expected, rel=0.01)


def test_ripple_needs_steady_running():
    assert ripple(synthetic_recording(duration=1.5)) is None


def test_straight_strands_swing_inward_by_the_polygon_only(rec):
    for strand in (0, 1):
        found = excursion(rec, strand)
        deepest = SEAT_RADIUS * (1 - np.cos(np.pi / TEETH))
        assert found.inward.max() == pytest.approx(deepest, rel=0.01)
        assert found.outward.max() < 1e-7
        assert np.allclose(-found.inward, rec["strands/excursion"][:, strand], atol=1e-7)


def test_a_pin_that_bows_outward_is_found(rec):
    position = rec["pins/position"].copy()
    s = survey(rec)
    sample, strand = 4000, 1
    pin = s.strand_pins[strand].pins(np.array([sample]))[0, 10]
    position[sample, pin, 0] += 0.004
    found = excursion(Overlay(rec, {"pins/position": position}), strand)
    assert found.outward_pin[sample] == pin
    inward = s.rec["strands/excursion"][sample, strand]
    assert found.outward[sample] == pytest.approx(0.004 + inward, abs=1e-6)


def test_every_strand_has_its_links(rec):
    strand_links = (60 - TEETH) // 2
    for pins in survey(rec).strand_pins:
        assert pins.is_known.all()
        assert set(np.unique(pins.n_links)) <= {strand_links - 1, strand_links}


def test_no_strand_where_a_sprocket_carries_no_chain(rec):
    center = rec["sprockets/center"].copy()
    center[100:, 0] += 1.0
    s = survey(Overlay(rec, {"sprockets/center": center}))
    assert s.strand_pins[0].is_known[:100].all()
    assert not s.strand_pins[0].is_known[100:].any()
    assert np.isnan(chain_speed(s)[100:]).all()


def test_gaps_on_a_wrap_belong_to_it():
    angle = 2 * np.pi * np.arange(12) / 12
    ring = np.stack([np.cos(angle), np.sin(angle)], axis=1)
    ring[5:10] *= 3.0  # hangs free
    ring[1] *= 1.5  # rides up
    entry, leave = np.zeros((1, 1), np.int32), np.zeros((1, 1), np.int32)
    find_wraps(ring[None].astype(np.float32), np.zeros((1, 1, 2)), np.array([1.1]), entry, leave)
    assert (entry[0, 0], leave[0, 0]) == (10, 4)
    find_wraps(9 + ring[None].astype(np.float32), np.zeros((1, 1, 2)), np.ones(1), entry, leave)
    assert entry[0, 0] == leave[0, 0] == NONE


@pytest.mark.parametrize(("start", "end"), [(0.02, 0.05), (0.03, -0.02), (-0.02, -0.02)])
def test_tangent_line_touches_both_circles(start, end):
    a, b = np.array([[0.0, 0.0]]), np.array([[0.05, 0.3]])
    at, outward, length = tangent_line(a, start, b, end)
    along = np.array([-outward[0, 1], outward[0, 0]])
    far = at[0] + length[0] * along
    assert np.allclose(far, b[0] + end * outward[0])
    assert along @ (b[0] - a[0]) > 0


def test_one_sprocket_has_no_tangent_line():
    _, outward, _ = tangent_line(np.zeros((1, 2)), 0.02, np.zeros((1, 2)), 0.02)
    assert np.isnan(outward).all()


@pytest.mark.parametrize("n", [8, 20, 21])
def test_sag_of_a_hanging_chain(n):
    # Loaded string of n links, checked in tests of chainsim.closed_forms against its own statics.
    pitch, span = 0.0127, 0.8 * n * 0.0127
    expected = link_catenary(n, pitch, span, 6.276256)
    slope = 6.276256 * pitch / expected.horizontal_tension * (np.arange(n) - (n - 1) / 2)
    link = pitch * np.stack([np.cos(np.arctan(slope)), np.sin(np.arctan(slope))], axis=1)
    place = np.concatenate([[[0.0, 0.0]], np.cumsum(link, axis=0)])
    assert sag(bare_strand(place, pitch), 0)[0] == pytest.approx(expected.sag, rel=1e-5)
