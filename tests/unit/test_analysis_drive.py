"""Drive, stops, work, energy, take-up, resonance, and the summary of a run."""

from types import SimpleNamespace

import numpy as np
import pytest

from chainsim.analysis import (
    axle_loads,
    chain_travel,
    droop,
    duty,
    efficiency,
    energy_audit,
    lift_height,
    modes,
    nearness,
    overrun,
    run_back,
    run_summary,
    stall,
    string_frequency_of_run,
    survey,
    takeup_travel,
    travel_per_length,
)
from chainsim.analysis.summary import UNITS
from chainsim.closed_forms import moving_strand_frequency
from chainsim.findings import judge
from tests.synthetic import BALL_MASS, GRAVITY, PITCH, TEETH, synthetic_recording
from tests.unit.overlay import Overlay, bare_strand, event


@pytest.fixture(scope="module")
def rec():
    return synthetic_recording(noise=0.0)


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
