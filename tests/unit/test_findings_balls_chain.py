"""Findings of the balls and of the chain: what they measure, when they hold and fail."""

from types import SimpleNamespace

import numpy as np
import pytest

from chainsim.closed_forms import failure_bound
from chainsim.scenario import parse_scenario
from tests.synthetic import SEAT_RADIUS, synthetic_recording
from tests.unit.overlay import Overlay, changed, extreme, found

GRAVITY = 9.80665


@pytest.fixture(scope="module")
def rec():
    return synthetic_recording(noise=0.0)


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
