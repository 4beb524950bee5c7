"""Ride, tilt, drive, stops, work, energy, losses, gaps, resonance."""

from types import SimpleNamespace

import numpy as np
import pytest

from chainsim.analysis import (
    axle_loads,
    ball_acceleration,
    carrier_tilts,
    chain_travel,
    droop,
    duty,
    efficiency,
    energy_audit,
    lift_height,
    losses,
    modes,
    nearness,
    overrun,
    ride,
    ride_spectrum,
    run_back,
    run_summary,
    smallest_gaps,
    stall,
    string_frequency_of_run,
    survey,
    takeup_travel,
    travel_per_length,
)
from chainsim.analysis.summary import UNITS
from chainsim.closed_forms import moving_strand_frequency
from chainsim.findings import judge
from tests.synthetic import BALL_MASS, GRAVITY, PITCH, SEAT_RADIUS, TEETH, synthetic_recording
from tests.unit.overlay import Overlay, bare_strand


@pytest.fixture(scope="module")
def rec():
    return synthetic_recording(noise=0.0)


def event(time, kind):
    return SimpleNamespace(time=time, kind=kind, subject="", value=np.nan, unit="", text="")


def test_ride_is_the_peak_and_rms_of_what_carried_balls_feel(rec):
    lateral, longitudinal = ride(rec)
    s = survey(rec)
    felt = rec["balls/acceleration"][s.is_steady][rec["balls/state"][s.is_steady] == 3]
    assert lateral.peak == pytest.approx(np.abs(felt[:, 0]).max())
    assert longitudinal.rms == pytest.approx(np.sqrt(np.mean(felt[:, 1] ** 2)), rel=1e-5)
    sample = int(np.argmin(np.abs(s.time - lateral.time)))
    assert lateral.ball in rec["balls/number"][sample]


def test_no_ride_without_a_carried_ball(rec):
    empty = np.zeros_like(rec["balls/state"])
    assert ride(Overlay(rec, {"balls/state": empty})) is None


def test_acceleration_turns_with_the_link_into_the_strand(rec):
    """A link that leans by 0.1 rad shows an acceleration along the strand partly across itself."""
    lean, s = 0.1, survey(rec)
    sample, slot = np.argwhere((rec["balls/state"] == 3) & s.is_steady[:, None])[200]
    position, acceleration = rec["pins/position"].copy(), rec["balls/acceleration"].copy()
    link = rec["geometry/carrier_link"][rec["balls/pocket"][sample, slot]]
    center = 0.5 * (position[sample, link] + position[sample, link + 1])
    half = 0.5 * PITCH * np.array([-np.sin(lean), np.cos(lean)])
    position[sample, link], position[sample, link + 1] = center - half, center + half
    acceleration[sample, slot] = 2 * np.sin(lean), 2 * np.cos(lean)  # 2 m/s² along the strand
    changed = {"pins/position": position, "balls/acceleration": acceleration}
    found = ball_acceleration(Overlay(rec, changed), "strand")[sample, slot]
    chord = position[sample, s.strand_pins[1].last[sample]]
    chord = chord - position[sample, s.strand_pins[1].first[sample]]
    lean_of_chord = np.arctan2(-chord[0], chord[1])
    assert found == pytest.approx(
        [-2 * np.sin(-lean_of_chord), 2 * np.cos(lean_of_chord)], abs=1e-3
    )


def test_spectrum_of_a_ride_reaches_half_of_the_sample_rate(rec):
    found = ride_spectrum(rec)
    assert found.frequency[-1] == pytest.approx(125.0, rel=0.02)
    assert np.isfinite(found.amplitude).all()


def test_tilt_of_a_leaning_carrier():
    """Two pins of one link set askew: its lean is read against the chord of the strand."""
    place = np.stack([np.zeros(21), 0.01 * np.arange(21)], axis=1)
    place[10, 0], place[11, 0] = 0.0005, -0.0005
    rec = bare_strand(place, 0.01, tension=3.0)
    pocket, state = np.zeros((2, 1), int), np.full((2, 1), 3)
    rec._channels |= {
        "balls/pocket": pocket,
        "balls/state": state,
        "geometry/carrier_link": np.array([10]),
    }
    (tilt,) = carrier_tilts(rec)
    assert tilt.tilt == pytest.approx(np.arctan(0.1), rel=1e-4)
    assert tilt.tension == pytest.approx(3.0)


def test_duty_of_a_constant_torque(rec):
    torque = np.full(len(rec.time), -0.02)
    torque[7] = 0.5
    found = duty(Overlay(rec, {"drive/torque": torque}))
    assert found.peak_torque == 0.5 and found.peak_time == pytest.approx(rec.time[7])
    assert found.rms_torque == pytest.approx(0.02)
    assert found.mean_torque == pytest.approx(-0.02)


def test_droop_is_the_loss_of_the_mean_speed(rec):
    rate = np.full((len(rec.time), 2), 0.985 * 0.15 / PITCH * 2 * np.pi / TEETH)
    found = droop(Overlay(rec, {"sprockets/rate": rate}))
    assert found.share == pytest.approx(0.015, abs=1e-5)


def test_stall_counts_the_time_at_a_stand_under_power(rec):
    rate = rec["sprockets/rate"].copy()
    rate[1000:1100] = 0.0
    assert stall(Overlay(rec, {"sprockets/rate": rate}))[1] == pytest.approx(0.4, abs=0.01)
    wanted = rec["drive/set_speed"].copy()
    wanted[1000:1100] = 0.0
    off = Overlay(rec, {"sprockets/rate": rate, "drive/set_speed": wanted})
    assert stall(off)[1] < 0.05  # the ramp at the start


def stopping(rec, back):
    """Recording that is cut at 6 s, runs on for 12 mm, then runs back."""
    angle = rec["sprockets/angle"].copy()
    cut = int(np.searchsorted(rec.time, 6.0))
    turn = 2 * np.pi / TEETH / PITCH
    goes = np.concatenate([np.linspace(0, 0.012, 101), np.linspace(0.012, 0.012 - back, 200)])
    goes = np.pad(goes, (0, len(angle) - cut - len(goes)), mode="edge")
    angle[cut:] = angle[cut] + turn * goes[:, None]
    return Overlay(rec, {"sprockets/angle": angle}, events=[event(6.0, "supply_cut")])


def test_run_back_and_overrun_after_a_cut(rec):
    changed = stopping(rec, back=0.030)
    found = run_back(changed)
    assert found.distance == pytest.approx(0.030, abs=1e-6)
    assert found.cause == "supply_cut"
    assert overrun(changed).distance == pytest.approx(0.012, abs=1e-4)
    assert run_back(rec).distance == 0.0 and overrun(rec) is None


def test_chain_travel_is_a_pitch_per_tooth(rec):
    travel = chain_travel(rec)
    turns = (rec["sprockets/angle"][-1, 0] - rec["sprockets/angle"][0, 0]) / (2 * np.pi)
    assert travel[-1] == pytest.approx(turns * TEETH * PITCH)


def test_efficiency_is_lift_work_over_work(rec):
    work = 0.1 * rec.time  # 0.1 W
    found = efficiency(Overlay(rec, {"energy/work_drive": work}))
    delivered = [b for b in rec.balls if b.fate == "delivered" and b.end_time >= 2.0]
    span = delivered[-1].end_time - delivered[0].end_time
    assert found.n_balls == len(delivered) - 1
    assert found.work_per_ball == pytest.approx(0.1 * span / found.n_balls, rel=1e-3)
    rise = np.mean([lift_height(rec, ball) for ball in delivered[1:]])
    assert found.lift_work_per_ball == pytest.approx(BALL_MASS * GRAVITY * rise, rel=0.01)
    assert found.efficiency == pytest.approx(found.lift_work_per_ball / found.work_per_ball)


def test_audit_refers_the_residual_to_all_flows(rec):
    n = len(rec.time)
    flat, ramp = np.zeros(n), np.linspace(0.0, 4.0, n)
    audit = energy_audit(
        Overlay(
            rec,
            {
                "energy/work_drive": ramp,
                "energy/work_knock": flat,
                "energy/balls_in": flat,
                "energy/balls_out": 0.5 * ramp,
                "energy/loss_joints": 0.5 * ramp,
                "energy/residual": np.linspace(0.0, 0.004, n),
            },
        )
    )
    assert audit.work_in == 4.0 and audit.lifted == 2.0 and audit.losses["joints"] == 2.0
    assert audit.residual_of_flows == pytest.approx(0.004 / 8.0)
    assert audit.residual_of_work == pytest.approx(0.001)


def test_loss_tells_the_half_second_before():
    rec = synthetic_recording(spilled_ball=3, noise=0.0)
    (loss,) = losses(rec)
    assert (loss.ball, loss.fate) == (3, "spilled")
    assert loss.speed_least < 0.15 < loss.speed_most
    assert loss.reserve_least == pytest.approx(-1.0)
    assert loss.cause == "left over the lip"  # what the run itself said


@pytest.mark.parametrize(
    ("change", "says"),
    [
        ("knock", "knock"),
        ("slack", "went slack"),
        ("nothing", "too rough"),
    ],
)
def test_most_likely_cause(change, says):
    rec = synthetic_recording(spilled_ball=3, noise=0.0)
    balls = [ball._replace(cause="") for ball in rec.balls]
    when = next(ball.end_time for ball in balls if ball.fate == "spilled")
    tension = rec["links/tension"].copy()
    if change == "slack":
        tension[np.abs(rec.time - when) < 0.2] = -0.1
    events = [event(when - 0.1, "knock")] if change == "knock" else []
    changed = Overlay(rec, {"links/tension": tension}, balls=balls, events=events)
    assert says in losses(changed)[0].cause


def test_gap_between_two_straight_strands_is_their_distance_less_a_roller(rec):
    by_parts = {gap.parts: gap for gap in smallest_gaps(rec)}
    gap = by_parts["strand head-tail and strand tail-head"]
    nearest = 2 * SEAT_RADIUS * np.cos(np.pi / TEETH) - 0.005
    assert nearest - 1e-6 <= gap.size < nearest + 2e-4


def test_gap_to_a_wall_counts_chain_and_carriers(rec):
    text = rec.scenario.text + (
        '[[wall]]\nname = "guard"\npoints = [["60 mm", "0 mm"], ["60 mm", "300 mm"]]\n'
    )
    from chainsim.scenario import parse_scenario

    walled = Overlay(rec, scenario=parse_scenario(text))
    by_parts = {gap.parts: gap for gap in smallest_gaps(walled)}
    chain = by_parts["chain and wall guard"]
    assert chain.size == pytest.approx(0.060 - SEAT_RADIUS - 0.0025, abs=1e-5)
    # The lip stands 22 mm out of the line of the pins, on the wrap a little farther.
    carriers = by_parts["carriers and wall guard"]
    assert 0.060 - 0.040 < carriers.size < 0.060 - SEAT_RADIUS * np.cos(np.pi / TEETH) - 0.0215


def test_take_up_travel_uses_the_extremes_of_the_run(rec):
    (travel,) = takeup_travel(rec)
    assert travel.sprocket == "tail" and travel.high == pytest.approx(2e-5, rel=1e-3)
    extremes = {"takeup_low.tail": SimpleNamespace(value=-0.004, time=1.5, unit="m", place="")}
    (travel,) = takeup_travel(Overlay(rec, extremes=extremes))
    assert (travel.low, travel.low_time) == (-0.004, 1.5)


def test_a_hung_tail_drops_by_half_of_what_the_chain_grows(rec):
    # Two upright strands: the loop is longer by twice the drop.
    assert travel_per_length(rec, 1) == pytest.approx(-0.5, rel=1e-4)


def test_axle_loads_of_a_vertical_lift(rec):
    head, tail = axle_loads(rec)
    force = np.linalg.norm(rec["sprockets/force"], axis=2)
    assert head.sprocket == "head" and head.peak == pytest.approx(force[:, 0].max())
    assert tail.mean == pytest.approx(force[survey(rec).is_steady, 1].mean())


def test_a_running_strand_is_slower_than_one_at_rest():
    # 10 N, 0.64 kg/m, 0.5 m: Archibald and Emslie, see chainsim.closed_forms.vibration.
    place = np.stack([np.zeros(51), 0.01 * np.arange(51)], axis=1)
    wave = np.sqrt(10 / 0.64)
    rec = bare_strand(place, 0.01, n_samples=200, speed=1.0)
    rec.modes = [SimpleNamespace(frequency=wave / (2 * 0.5), kind="strand a-b 1")]
    (mode,) = modes(rec)
    assert mode.frequency == pytest.approx(3.95284708)
    assert mode.running == pytest.approx(moving_strand_frequency(0.5, 10.0, 0.64, 1.0, 1))
    assert mode.running == pytest.approx(3.69986484, rel=1e-6)


def test_string_of_a_run_has_its_mean_tension_and_mass():
    place = np.stack([np.zeros(51), 0.01 * np.arange(51)], axis=1)
    rec = bare_strand(place, 0.01, tension=10.0, n_samples=200, speed=1.0)
    rec.scenario.chain.link_mass = 0.0064
    rec._channels["pins/velocity"] = np.broadcast_to([0.0, 1.0], rec["pins/position"].shape)
    assert string_frequency_of_run(rec, 0) == pytest.approx(3.69986484, rel=1e-6)


def test_strands_are_held_against_half_the_tooth_rate_too(rec):
    near = nearness(rec)
    assert {(n.mode.kind, n.is_half) for n in near} == {
        ("take-up tail", False),
        ("strand tail-head 1", False),
        ("strand tail-head 1", True),
        ("other", False),
    }
    assert near[0].mode.kind == "take-up tail"
    assert near[0].distance == pytest.approx((15 - 11.8) / 15, rel=1e-4)


def test_summary_is_flat_and_every_number_has_a_unit(rec):
    row = run_summary(rec, judge(rec))
    assert all(value is None or isinstance(value, str | int | float) for value in row.values())
    named = {
        name.split(".")[0] for name in row if not name.endswith(("outcome", "value", "margin"))
    }
    families = {"axle_load": "N", "takeup_low": "m", "takeup_high": "m"}
    assert named - {"stop_reason", "complete"} <= {*UNITS, *families}
    assert row["balls_delivered"] == sum(ball.fate == "delivered" for ball in rec.balls)
    assert row["off_resonance.outcome"] == "close"


def test_gap_to_a_chute_is_that_of_its_lip_too(rec):
    """A chute that points at the strand: its lip comes nearer a pocket's side than any corner."""
    chute = np.array([[0.20, 0.103], [0.0372, 0.103]])
    by_parts = {g.parts: g for g in smallest_gaps(Overlay(rec, {"geometry/chute": chute}))}
    # On the straight strand the lip of a pocket stands 22 mm out of the pins, which swing inward.
    nearest = 0.0372 - SEAT_RADIUS - 0.022 - 0.00075
    assert nearest - 1e-5 <= by_parts["carriers and chute"].size < nearest + 0.0011
