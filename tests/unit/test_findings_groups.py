"""Each finding: what it measures, and when it holds, fails and is not judged."""

from types import SimpleNamespace

import numpy as np
import pytest

from chainsim.closed_forms import failure_bound, whirl_speed
from chainsim.findings import judge
from chainsim.scenario import parse_scenario
from tests.synthetic import PITCH, SEAT_RADIUS, TEETH, synthetic_recording
from tests.unit.overlay import Overlay

GRAVITY = 9.80665


@pytest.fixture(scope="module")
def rec():
    return synthetic_recording(noise=0.0)


def found(rec, name):
    return next(finding for finding in judge(rec) if finding.name == name)


def changed(rec, **values):
    """Recording of a scenario with other values; `_` for the dots of keys."""
    keys = {key.replace("__", "."): value for key, value in values.items()}
    return Overlay(rec, scenario=rec.scenario.with_values(keys))


def extreme(value, time=3.0, place="somewhere"):
    return SimpleNamespace(value=value, unit="", time=time, place=place)


# Balls -------------------------------------------------------------------------------------


def test_seated_balls_show_their_least_reserve_against_g(rec):
    finding = found(rec, "balls_stay_seated")
    assert finding.value == pytest.approx(float(np.nanmin(rec["balls/seat_reserve"])))
    assert (finding.limit, finding.scale) == (0.0, pytest.approx(GRAVITY))
    ended = sum(ball.fate != "aboard" for ball in rec.balls)
    assert f"{failure_bound(ended):.2g}" in finding.note


@pytest.mark.parametrize(("value", "outcome"), [(2.0, "holds"), (1.9, "close"), (-0.1, "fails")])
def test_the_extreme_of_every_inner_step_goes_first(rec, value, outcome):
    finding = found(
        Overlay(rec, extremes={"seat_reserve": extreme(value, 3.0, "ball 4")}), "balls_stay_seated"
    )
    assert (finding.outcome, finding.place, finding.time) == (outcome, "ball 4", 3.0)


def test_a_lost_ball_fails_without_a_margin():
    finding = found(synthetic_recording(spilled_ball=3), "balls_stay_seated")
    assert finding.outcome == "fails" and finding.margin is None
    assert "ball 3 spilled" in finding.note and finding.place.startswith("ball 3 at")


@pytest.mark.parametrize("fate", ["missed the pocket", "carried over", "outside the mouth"])
def test_any_other_fate_is_a_loss(rec, fate):
    balls = [ball._replace(fate=fate) if ball.number == 2 else ball for ball in rec.balls]
    assert found(Overlay(rec, balls=balls), "balls_stay_seated").outcome == "fails"


def test_held_balls_never_hold(rec):
    held = changed(rec, balls__model="fixed")
    finding = found(held, "balls_stay_seated")
    assert (finding.outcome, finding.why) == ("not judged", "does not apply")
    assert finding.value > 0.0
    outside = Overlay(held, extremes={"seat_reserve": extreme(-0.3)})
    assert found(outside, "balls_stay_seated").outcome == "fails"


def test_rate_is_that_between_the_first_and_the_last_delivery(rec):
    times = [b.end_time for b in rec.balls if b.fate == "delivered" and b.end_time >= 2.0]
    finding = found(rec, "rate_met")
    assert finding.value == pytest.approx((len(times) - 1) / (times[-1] - times[0]))
    # One carrier in four links of 10 mm at 0.15 m/s: 3.75 pockets a second, one ball is asked.
    assert finding.margin == pytest.approx(3.75 - 1.0, rel=1e-3)
    assert (finding.outcome, finding.scale) == ("holds", 1.0)


def test_one_ball_short_is_forgiven_two_are_not(rec):
    delivered = [b.number for b in rec.balls if b.fate == "delivered" and b.end_time >= 2.0]
    for missing, outcome in ((1, "holds"), (2, "fails")):
        gone = delivered[3 : 3 + missing]
        balls = [b._replace(fate="aboard") if b.number in gone else b for b in rec.balls]
        finding = found(Overlay(rec, balls=balls), "rate_met")
        assert finding.outcome == outcome
        assert (finding.margin < 0.0) == (outcome == "fails")


def test_fewer_than_five_deliveries_are_not_judged(rec):
    balls = [b for b in rec.balls if b.number < 4]
    finding = found(Overlay(rec, balls=balls), "rate_met")
    assert (finding.outcome, finding.why) == ("not judged", "not enough data")


def test_without_a_demand_the_rate_is_only_measured(rec):
    scenario = parse_scenario(rec.scenario.text.replace('ball_rate = "1 /s"', ""))
    finding = found(Overlay(rec, scenario=scenario), "rate_met")
    assert (finding.outcome, finding.why) == ("not judged", "does not apply")
    assert finding.value == pytest.approx(1.0, rel=0.05)


def test_ride_is_judged_by_what_the_user_limits(rec):
    assert found(rec, "ride_smooth").why == "does not apply"
    assert found(changed(rec, limits__ripple="10 %"), "ride_smooth").outcome == "holds"
    assert found(changed(rec, limits__ripple="5 %"), "ride_smooth").outcome == "fails"
    both = changed(rec, limits__ripple="10 %", limits__lateral_acceleration="1 m/s2")
    finding = found(both, "ride_smooth")
    assert finding.outcome == "fails" and finding.unit == "m s-2"
    assert finding.place.startswith("ball") and "ripple" in finding.note


# Chain -------------------------------------------------------------------------------------


@pytest.mark.parametrize(("seats", "outcome"), [(0.1, "holds"), (0.85, "close"), (1.0, "fails")])
def test_skip_is_counted_in_seats_either_way(rec, seats, outcome):
    skip = np.zeros((len(rec.time), 2))
    skip[800:, 1] = -seats
    finding = found(Overlay(rec, {"sprockets/skip": skip}), "no_tooth_skipped")
    assert (finding.outcome, finding.place) == (outcome, "sprocket tail")
    assert finding.time == pytest.approx(rec.time[800])
    assert (finding.value, finding.limit, finding.scale) == (pytest.approx(seats), 1.0, 1.0)


def test_ride_up_is_held_against_the_tooth_tip(rec):
    outline = rec["geometry/tooth_outline"]
    height = np.hypot(outline[0, :, 0], outline[0, :, 1]).max() - SEAT_RADIUS
    ride = rec["sprockets/ride_height"].copy()
    ride[50, 0] = 1.01 * height
    finding = found(Overlay(rec, {"sprockets/ride_height": ride}), "chain_stays_on")
    assert finding.outcome == "fails" and finding.limit == pytest.approx(height)
    assert found(rec, "chain_stays_on").outcome == "holds"


def test_smooth_rollers_cannot_skip(rec):
    sprockets = [SimpleNamespace(**{**dict(s), "teeth": 0}) for s in rec.scenario.sprocket]
    names = ("chain", "drive", "run", "limits", "frame", "balls", "carriers", "event", "wall")
    scenario = SimpleNamespace(
        sprocket=sprockets, **{name: getattr(rec.scenario, name) for name in names}
    )
    for name in ("no_tooth_skipped", "chain_stays_on"):
        assert found(Overlay(rec, scenario=scenario), name).why == "does not apply"


def test_taut_strand_shows_its_least_lasting_tension(rec):
    finding = found(rec, "carrying_strand_taut")
    assert finding.outcome == "holds" and finding.limit == 0.0
    assert finding.value == pytest.approx(finding.scale, rel=0.02)  # the foot, at rest too
    assert finding.place.endswith("of strand tail-head") and finding.place.startswith("link")


def test_slack_for_longer_than_allowed_fails(rec):
    tension = rec["links/tension"].copy()
    tension[1500:1540] = -0.5  # 160 ms, and a tooth passage of 67 ms to average over
    slack = Overlay(rec, {"links/tension": tension})
    finding = found(slack, "carrying_strand_taut")
    assert finding.outcome == "fails" and 6.0 < finding.time < 6.25
    patient = Overlay(changed(rec, limits__slack_time="0.5 s"), {"links/tension": tension})
    assert found(patient, "carrying_strand_taut").outcome == "holds"


def test_links_hold_by_the_peak_of_every_inner_step(rec):
    finding = found(
        Overlay(rec, extremes={"link_tension": extreme(33.0, 4.0, "link 7")}), "links_hold"
    )
    assert (finding.outcome, finding.place, finding.limit) == ("close", "link 7", 40.0)
    assert "peak of means" in finding.note and "axle head" in finding.note
    assert found(Overlay(rec, extremes={}), "links_hold").outcome == "holds"


def test_outside_the_validated_range_nothing_holds(rec):
    deep = np.full(len(rec.time), 1e-3)
    finding = found(Overlay(rec, {"contacts/penetration": deep}), "no_tooth_skipped")
    assert (finding.outcome, finding.why) == ("not judged", "outside validated range")
    skip = np.full((len(rec.time), 2), 3.0)
    failed = Overlay(rec, {"contacts/penetration": deep, "sprockets/skip": skip})
    assert found(failed, "no_tooth_skipped").outcome == "fails"  # a fault is never hidden


# Space -------------------------------------------------------------------------------------


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
    """The made-up chute of the recording reaches into the way of the pockets."""
    finding = found(rec, "parts_keep_clear")
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


# Drive -------------------------------------------------------------------------------------


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
