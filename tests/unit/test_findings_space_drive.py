"""Findings of space and of the drive: what they measure, when they hold and fail."""

from types import SimpleNamespace

import numpy as np
import pytest

from chainsim.closed_forms import whirl_speed
from chainsim.scenario import parse_scenario
from tests.synthetic import PITCH, SEAT_RADIUS, TEETH, synthetic_recording
from tests.unit.overlay import Overlay, changed, extreme, found


@pytest.fixture(scope="module")
def rec():
    return synthetic_recording(noise=0.0)


def test_excursion_inward_and_outward_have_limits_of_their_own(rec):
    finding = found(rec, "strand_in_clearance")
    swing = SEAT_RADIUS * (1 - np.cos(np.pi / TEETH))
    assert finding.value == pytest.approx(swing, rel=0.05) and finding.limit == 0.008
    tight = changed(rec, limits__clearance__inward="0.5 mm")
    assert found(tight, "strand_in_clearance").outcome == "fails"
    position = rec["pins/position"].copy()
    position[position[..., 0] < -0.9 * SEAT_RADIUS] -= [0.02, 0.0]  # the strand that goes down
    bowed = found(Overlay(rec, {"pins/position": position}), "strand_in_clearance")
    assert bowed.outcome == "holds" and "outward excursion of head-tail" in bowed.note


def test_parts_that_touch_fail_even_without_a_limit(rec):
    """A chute that reaches into the way of the pockets."""
    chute = np.array([[0.03, 0.26], [0.12, 0.24]])
    finding = found(Overlay(rec, {"geometry/chute": chute}), "parts_keep_clear")
    assert (finding.outcome, finding.limit) == ("fails", 0.0)
    assert finding.place == "carriers and chute"
    touch = Overlay(rec, extremes={"gap": extreme(-0.0002, 3.0, "carrier 2 and guard")})
    assert found(touch, "parts_keep_clear").place == "carrier 2 and guard"


@pytest.mark.parametrize(("gap", "outcome"), [("15 mm", "holds"), ("25 mm", "fails")])
def test_gaps_are_held_against_the_one_asked_for(rec, gap, outcome):
    clear = Overlay(rec, {"geometry/chute": None})
    assert found(clear, "parts_keep_clear").why == "does not apply"
    asked = Overlay(changed(rec, limits__gap=gap), {"geometry/chute": None})
    assert found(asked, "parts_keep_clear").outcome == outcome


@pytest.mark.parametrize(
    ("low", "outcome"), [(-0.005, "holds"), (-0.007, "close"), (-0.0101, "fails")]
)
def test_take_up_against_its_stops_by_the_whole_travel(rec, low, outcome):
    finding = found(Overlay(rec, extremes={"takeup_low.tail": extreme(low)}), "takeup_in_travel")
    assert (finding.outcome, finding.value) == (outcome, pytest.approx(low))
    assert (finding.limit, finding.scale) == (-0.010, pytest.approx(0.020))


def test_wear_and_warmth_take_up_travel(rec):
    # 60 links of 10 mm grow by 1 %: 6 mm, of which a tail on two strands takes 3 mm.
    finding = found(changed(rec, limits__wear="1 %"), "takeup_in_travel")
    assert finding.value == pytest.approx(-0.003 - 2e-5, rel=1e-3)
    text = rec.scenario.text.replace("[chain]", "[frame]\ntemperature = { built = '20 degC', "
                                     "low = '10 degC', high = '20 degC' }\n[chain]")  # fmt: skip
    cold = found(Overlay(rec, scenario=parse_scenario(text)), "takeup_in_travel")
    shorter = 10 * rec.scenario.chain.expansion * 60 * PITCH
    assert cold.value == pytest.approx(0.5 * shorter + 2e-5, rel=1e-3)


def test_a_touched_stop_fails(rec):
    touch = {"stop_touch.tail": extreme(3.0), "takeup_low.tail": extreme(-0.0099)}
    finding = found(Overlay(rec, extremes=touch), "takeup_in_travel")
    assert finding.outcome == "fails" and finding.limit == -0.010


def test_without_a_movable_axle_there_is_no_take_up(rec):
    text = rec.scenario.text.replace("mount = { kind", "# mount = { kind")
    finding = found(Overlay(rec, scenario=parse_scenario(text)), "takeup_in_travel")
    assert finding.why == "does not apply"


def test_a_drive_that_stands_under_power_fails(rec):
    rate = rec["sprockets/rate"].copy()
    rate[1000:1100] = 0.0
    weak = changed(rec, drive__max_torque="1 N m")
    finding = found(Overlay(weak, {"sprockets/rate": rate}), "drive_copes")
    assert finding.outcome == "fails" and finding.time == pytest.approx(4.0, abs=0.01)


def test_a_set_speed_without_a_largest_torque_is_only_measured(rec):
    finding = found(rec, "drive_copes")
    assert (finding.outcome, finding.why) == ("not judged", "does not apply")
    assert finding.value == pytest.approx(float(np.abs(rec["drive/torque"]).max()))
    assert "efficiency" in finding.note


def test_torque_is_held_against_what_the_drive_can_give(rec):
    torque = np.full(len(rec.time), 0.09)
    strong = changed(rec, drive__max_torque="0.1 N m")
    finding = found(Overlay(strong, {"drive/torque": torque}), "drive_copes")
    assert (finding.outcome, finding.value) == ("close", pytest.approx(0.09))


def test_heating_torque_against_the_continuous_rating_behind_the_gearing(rec):
    motor = (
        'kind = "motor"\nmotor = { supply = "12 V", no_load_speed = "6000 rev/min", '
        'stall_torque = "20 mN m", gear_ratio = 50, gear_efficiency = 0.8, '
        'continuous_torque = "4 mN m" }'
    )
    text = rec.scenario.text.replace('kind = "speed"', motor)
    driven = Overlay(rec, {"drive/torque": np.full(len(rec.time), -0.2)})
    driven.scenario = parse_scenario(text)
    finding = found(driven, "drive_copes")
    # 4 mN m times 50 at 0.8: 0.16 N m at the sprocket.
    assert finding.outcome == "fails" and finding.limit == pytest.approx(0.16)
    assert "r.m.s." in finding.note


def test_running_back_by_more_than_a_pitch_fails(rec):
    angle = rec["sprockets/angle"].copy()
    angle[1500:] = angle[1500] - np.linspace(0, 1, len(angle) - 1500)[:, None]
    cut = [SimpleNamespace(time=6.0, kind="supply_cut", subject="", text="")]
    finding = found(Overlay(rec, {"sprockets/angle": angle}, events=cut), "drive_copes")
    assert finding.outcome == "fails" and "supply cut" in finding.note
    assert finding.value == pytest.approx(TEETH * PITCH / (2 * np.pi), rel=1e-6)


def test_droop_is_judged_where_it_is_limited(rec):
    rate = np.full((len(rec.time), 2), 0.985 * 0.15 / PITCH * 2 * np.pi / TEETH)
    slow = changed(rec, limits__droop="1 %")
    finding = found(Overlay(slow, {"sprockets/rate": rate}), "drive_copes")
    assert finding.outcome == "fails" and finding.value == pytest.approx(0.015, rel=1e-3)


@pytest.mark.parametrize(
    ("kind", "frequency", "outcome"),
    [
        ("take-up tail", 10.0, "holds"),
        ("take-up tail", 14.0, "fails"),
        ("take-up tail", 18.2, "close"),
        ("take-up tail", 7.5, "holds"),  # half the tooth rate shakes strands only
        ("strand tail-head 1", 7.4, "fails"),
        ("strand tail-head 1", 15.5, "fails"),
        ("strand tail-head 2", 15.0, "not judged"),
        ("other", 15.0, "not judged"),
    ],
)
def test_modes_near_the_tooth_rate_of_fifteen_hertz(rec, kind, frequency, outcome):
    modes = [SimpleNamespace(kind=kind, frequency=frequency)]
    assert found(Overlay(rec, modes=modes), "off_resonance").outcome == outcome


def test_no_modes_no_judgement(rec):
    assert found(Overlay(rec, modes=[]), "off_resonance").why == "not enough data"


@pytest.mark.parametrize(("supports", "outcome"), [(2, "fails"), (6, "holds")])
def test_whirl_of_the_longest_span(rec, supports, outcome):
    shaft = f'shaft = {{ length = "1.5 m", diameter = "2 mm", supports = {supports} }}'
    text = rec.scenario.text.replace('ramp = "0.5 s"', f'ramp = "0.5 s"\n{shaft}')
    fast = Overlay(rec, {"sprockets/rate": 4.0 * rec["sprockets/rate"]})
    fast.scenario = parse_scenario(text)
    finding = found(fast, "shaft_below_whirl")
    critical = whirl_speed(0.002, 1.5 / (supports - 1), 205e9, 7850.0)
    assert finding.limit == pytest.approx(0.8 * critical)
    assert finding.outcome == outcome and "not simulated" in finding.note
