"""Sprocket geometry, chain length, chordal action and wear, against tables and worked numbers."""

import math

import numpy as np
import pytest

from chainsim import closed_forms as cf
from chainsim.errors import CallError

PITCH = 0.0127

# Pitch diameters of sprockets for 1 inch pitch, in mm to two decimals: table "Pitch diameter of
# roller chain wheels", tandwiel.info; the same law as ISO 606:2015, annex A.
TABLE_INCH_PITCH = {
    8: 66.37, 9: 74.26, 10: 82.20, 11: 90.16, 12: 98.14, 13: 106.14, 15: 122.17, 16: 130.20,
    17: 138.23, 18: 146.27, 19: 154.32, 20: 162.37, 21: 170.42, 24: 194.60, 25: 202.66,
    30: 243.00, 37: 299.51, 63: 509.57, 100: 808.64, 152: 1229.02,
}  # fmt: skip

# N1, N2, C, handbook length, exact length: all in pitches. Handbook form: Machinery's Handbook
# (from memory); exact: tangent lines with the wraps counted in teeth.
LENGTHS = [
    (20, 63, 36, 114.8009921, 114.8049511),
    (17, 51, 40, 114.7320456, 114.7331655),
    (17, 34, 40, 105.6830114, 105.6830798),
    (10, 20, 20, 55.12665148, 55.12670949),
    (8, 16, 30, 72.05403796, 72.05403657),
    (12, 12, 40, 92, 92),
]


@pytest.mark.parametrize(("teeth", "diameter"), TABLE_INCH_PITCH.items())
def test_pitch_diameter_matches_the_printed_table(teeth, diameter):
    # The table prints two decimals; its worst rounding is 0.005 mm.
    assert 2e3 * cf.pitch_radius(0.0254, teeth) == pytest.approx(diameter, abs=0.0051)


@pytest.mark.parametrize(
    ("teeth", "unit_diameter"),
    [(6, 2.0), (10, 1 + math.sqrt(5)), (12, math.sqrt(6) + math.sqrt(2))],
)
def test_pitch_diameter_of_polygons_with_a_closed_form(teeth, unit_diameter):
    assert 2.0 * cf.pitch_radius(1.0, teeth) == pytest.approx(unit_diameter, rel=1e-14)


def test_pressure_angles_follow_both_published_rules():
    # ASME B29.1 (from memory): 35 − 120/z and 17 − 64/z degrees; 20 and 9 at eight teeth.
    angles = cf.pressure_angles(8)
    assert math.degrees(angles.most) == pytest.approx(20.0)
    assert math.degrees(angles.least) == pytest.approx(9.0)
    assert math.degrees(angles.mean) == pytest.approx(14.5)


def test_standard_tip_matches_a_printed_outside_diameter():
    # wheelsprocket.xyz article 299 (maker's rule): 25 teeth, unit outside diameter 8.516.
    assert 2.0 * cf.standard_tip_radius(1.0, 25) == pytest.approx(8.516, abs=5e-4)
    height = cf.standard_tip_height(PITCH, 8)
    assert height == pytest.approx(0.3 * PITCH - cf.polygon_rise(PITCH, 8))


@pytest.mark.parametrize(("few", "many", "distance", "handbook", "exact"), LENGTHS)
def test_chain_length_in_links(few, many, distance, handbook, exact):
    length = distance * PITCH
    assert cf.handbook_chain_length(few, many, length, PITCH) == pytest.approx(handbook, rel=1e-9)
    assert cf.chain_length(few, many, length, PITCH) == pytest.approx(exact, rel=1e-9)
    assert cf.chain_length(many, few, length, PITCH) == pytest.approx(exact, rel=1e-9)


def test_handbook_example_gives_its_printed_length():
    # Worked example with 20 and 63 teeth: 114.8 pitches printed. The pitch-circle arcs, which a
    # polygon does not follow, would give 114.86.
    assert round(cf.chain_length(20, 63, 36.0, 1.0), 1) == 114.8


@pytest.mark.parametrize(
    ("few", "many", "links", "distance"),
    [(20, 63, 114, 35.58996020), (17, 51, 116, 40.63920045), (10, 20, 56, 20.43800439)],
)
def test_center_distance_is_the_inverse_of_the_length(few, many, links, distance):
    found = cf.center_distance(few, many, links, PITCH)
    assert found / PITCH == pytest.approx(distance, abs=1e-7)
    assert cf.chain_length(few, many, found, PITCH) == pytest.approx(links, rel=1e-12)


def test_impossible_pairs_of_sprockets_are_refused():
    with pytest.raises(CallError, match="need more than"):
        cf.chain_length(8, 40, 4.0 * PITCH, PITCH)
    with pytest.raises(CallError, match="20 links are too few"):
        cf.center_distance(8, 40, 20, PITCH)


# Chordal action. Bases: handbook form over the mean speed, (1 − cos) over the largest.
@pytest.mark.parametrize(
    ("teeth", "percent"),
    [(6, 14.029787), (8, 7.8112704), (10, 4.9757939), (12, 3.4466543), (20, 1.2362435)],
)
def test_speed_variation_by_the_polygon(teeth, percent):
    assert 100.0 * cf.speed_variation(teeth) == pytest.approx(percent, rel=1e-7)


def test_speed_variation_matches_printed_values():
    # bs-wiki.de, "polygon effect": 2 % at 16 teeth, 1.2 % at 20, to the printed digits.
    assert 100.0 * cf.speed_variation(16) == pytest.approx(2.0, abs=0.07)
    assert round(100.0 * cf.speed_variation(20), 1) == 1.2


def test_speeds_of_eight_teeth_at_30_rpm():
    rate = math.pi
    degrees = [0.0, 5.0, 10.0, 15.0, 20.0, 22.5]
    expected = [52.1295454, 51.9311767, 51.3375804, 50.3532742, 48.9857491, 48.1614200]
    speeds = [1e3 * cf.strand_speed(math.radians(a), rate, PITCH, 8) for a in degrees]
    assert speeds == pytest.approx(expected, rel=1e-8)
    assert cf.sprocket_speed(0.0508, PITCH, 8) == pytest.approx(rate)
    assert cf.tooth_rate(0.0508, PITCH) == pytest.approx(4.0)
    kick = cf.engagement_kick(rate, PITCH)
    assert kick.transverse_speed == pytest.approx(19.9491134e-3, rel=1e-8)
    assert kick.relative_speed == pytest.approx(39.8982267e-3, rel=1e-8)
    assert kick.acceleration_jump == pytest.approx(125.343976e-3, rel=1e-8)


@pytest.mark.parametrize("teeth", [6, 8, 10, 16])
def test_harmonics_are_the_fourier_series_of_the_strand_speed(teeth):
    half = math.pi / teeth
    angles = (np.arange(4096) + 0.5) / 4096 * 2 * half - half
    speeds = np.array([cf.strand_speed(a, 1.0, 1.0, teeth) for a in angles])
    assert speeds.mean() == pytest.approx(teeth / (2 * math.pi), rel=1e-7)
    for order in (1, 2, 3):
        wave = np.cos(order * teeth * angles)
        amplitude = 2.0 * np.mean(speeds * wave) / speeds.mean()
        assert cf.speed_harmonic(teeth, order) == pytest.approx(amplitude, rel=1e-4)


def test_first_harmonics_of_eight_teeth():
    harmonics = [cf.speed_harmonic(8, order) for order in (1, 2, 3)]
    assert harmonics == pytest.approx([2 / 63, -2 / 255, 2 / 575], rel=1e-12)


def test_polygon_rise_of_six_teeth():
    assert 1e3 * cf.polygon_rise(PITCH, 6) == pytest.approx(1.701477, rel=1e-6)


def test_worn_chain_rides_up():
    # 25 teeth, 12.7 mm: pitch radius 50.6649339 mm; rise at 1 % is 1 % of it.
    assert 1e3 * cf.pitch_radius(PITCH, 25) == pytest.approx(50.6649339, rel=1e-8)
    assert 1e3 * cf.ride_height(PITCH, 25, 0.01) == pytest.approx(0.506649339, rel=1e-8)
    assert 1e3 * cf.ride_height(PITCH, 25, 0.03) == pytest.approx(1.51994802, rel=1e-8)


@pytest.mark.parametrize(
    ("teeth", "percent"),
    [(12, 12.1217253), (17, 9.32228104), (25, 6.73146415), (67, 2.70242490), (100, 1.83530158)],
)
def test_growth_at_which_a_pin_reaches_the_tip(teeth, percent):
    assert 100.0 * cf.growth_at_tip(teeth) == pytest.approx(percent, rel=1e-7)


@pytest.mark.parametrize(
    ("teeth", "fixed", "percent"),
    [(17, False, 3.0), (60, False, 3.0), (67, False, 2.98507463), (100, False, 2.0),
     (17, True, 1.5), (200, True, 1.0)],
)  # fmt: skip
def test_wear_limit_of_the_service_guides(teeth, fixed, percent):
    assert 100.0 * cf.wear_limit(teeth, fixed) == pytest.approx(percent, rel=1e-8)


def test_sag_from_wear_at_fixed_centers():
    # C = 0.4 m, 25 teeth twice, growth 1.5 %: ΔL = 16.7625 mm; shallow 50.1 mm, exact 50.9 mm.
    links = cf.chain_length(25, 25, 0.4, PITCH)
    slack = cf.slack_of_growth(links, PITCH, 0.015)
    assert slack == pytest.approx(0.0167625, rel=1e-9)
    assert cf.sag_of_slack(0.4, slack) == pytest.approx(0.0501435440, rel=1e-8)
    assert cf.catenary(0.4, 0.4 + slack, 1.0).sag == pytest.approx(0.0508731463, rel=1e-8)
