"""Every scenario does what its comments say: one shared run each, with pinned outcomes.

What is counted is pinned exactly where a lift holds, and within bounds where balls are lost: such
runs are chaotic, and a different processor may lose another ball.
"""

from __future__ import annotations

from collections import Counter
from functools import cache
from pathlib import Path

import numpy as np
import pytest

import chainsim as cs

SCENARIOS = Path(__file__).parents[1] / "scenarios"
GRAVITY = 9.80665

ALL_KEPT = dict.fromkeys(
    ("spilled", "missed the pocket", "outside the mouth", "carried over"), (0, 0)
)
"""Fates of balls where none is lost [dimensionless]."""

FATES: dict[str, dict[str, tuple[int, int]]] = {
    "head-driven": {"delivered": (13, 13), **ALL_KEPT},
    "tail-driven": {"delivered": (8, 8), **ALL_KEPT},
    "tail-driven-slack": {"delivered": (7, 11)},
    "counterweight-low": {"delivered": (10, 10), **ALL_KEPT},
    "counterweight-high": {"delivered": (6, 6), **ALL_KEPT},
    "inclined": {"delivered": (8, 8), **ALL_KEPT},
    "arm": {"delivered": (8, 8), **ALL_KEPT},
    "motor-jam": {"delivered": (13, 15), **ALL_KEPT},
    "too-fast": {"outside the mouth": (12, 24), "delivered": (0, 4)},
    "slack-strand": {"spilled": (5, 20), "delivered": (0, 6)},
    "fast-chute": {"delivered": (0, 0), "aboard": (0, 2)},
    "double-ball": {"delivered": (4, 4), **ALL_KEPT, "missed the pocket": (1, 1)},
    "trough-queue": {"delivered": (5, 5), **ALL_KEPT},
    "polarity-rectified": {"delivered": (12, 12), **ALL_KEPT},
    "polarity-backstop": {"delivered": (6, 6), **ALL_KEPT},
    "polarity-run-back": {"delivered": (6, 6), **ALL_KEPT},
}
"""Scenario -> fate -> fewest and most balls [dimensionless]."""

HOLDS = ("holds", "close")
JUDGED = ("no_tooth_skipped", "chain_stays_on", "carrying_strand_taut", "links_hold")
OUTCOMES = {
    "head-driven": dict.fromkeys(
        (
            "balls_stay_seated",
            "rate_met",
            "strand_in_clearance",
            "parts_keep_clear",
            "takeup_in_travel",
            "drive_copes",
            "off_resonance",
            *JUDGED,
        ),
        ("holds",),
    ),
    "tail-driven": {
        "balls_stay_seated": ("not judged",),
        "rate_met": ("holds",),
        "strand_in_clearance": HOLDS,
        **dict.fromkeys(JUDGED, ("holds",)),
    },
    "tail-driven-slack": {
        "no_tooth_skipped": ("fails",),
        "chain_stays_on": ("fails",),
        "carrying_strand_taut": ("fails",),
        "links_hold": HOLDS,
    },
    "counterweight-low": {"takeup_in_travel": HOLDS, **dict.fromkeys(JUDGED, HOLDS)},
    "counterweight-high": {"takeup_in_travel": HOLDS, **dict.fromkeys(JUDGED, HOLDS)},
    "inclined": {"takeup_in_travel": HOLDS, **dict.fromkeys(JUDGED, HOLDS)},
    "arm": {"takeup_in_travel": ("holds",), **dict.fromkeys(JUDGED, HOLDS)},
    "motor-jam": {
        "no_tooth_skipped": ("holds",),
        "chain_stays_on": HOLDS,
        "links_hold": HOLDS,
        "drive_copes": HOLDS,
        "off_resonance": ("fails",),
    },
    "too-fast": {"balls_stay_seated": ("fails",), "no_tooth_skipped": ("holds",)},
    "slack-strand": {
        "balls_stay_seated": ("fails",),
        "strand_in_clearance": ("fails",),
        "carrying_strand_taut": ("close", "fails"),
    },
    "fast-chute": {"balls_stay_seated": ("fails",), "no_tooth_skipped": ("holds",)},
    "double-ball": dict.fromkeys(JUDGED, HOLDS),
    "trough-queue": dict.fromkeys(JUDGED, HOLDS),
    "polarity-rectified": {"drive_copes": HOLDS, "no_tooth_skipped": ("holds",)},
    "polarity-backstop": {"drive_copes": ("fails",), "no_tooth_skipped": ("holds",)},
    "polarity-run-back": {"drive_copes": ("fails",), "no_tooth_skipped": ("holds",)},
}
"""Scenario -> finding -> outcomes that its comments promise."""


@cache
def run_of(stem: str):
    """Return the recording of a scenario, run once for all tests of this file."""
    return cs.run(cs.read_scenario(SCENARIOS / f"{stem}.toml"))


def finding(stem: str, name: str):
    """Return one finding of a scenario's run."""
    return next(one for one in run_of(stem).findings if one.name == name)


def wheel(rec, name: str) -> int:
    """Return the number of a sprocket in the recording's arrays."""
    return [sprocket.name for sprocket in rec.scenario.sprocket].index(name)


def head_turn(rec, start: float, end: float) -> float:
    """Return by how many radians the head turned forward between two times [rad]."""
    angle = rec["sprockets/angle"][:, wheel(rec, "head")]
    first, last = np.searchsorted(rec.time, [start, end]).clip(0, len(angle) - 1)
    return float(angle[last] - angle[first])


def test_every_scenario_is_run():
    stems = {path.stem for path in SCENARIOS.glob("*.toml")}
    assert stems == set(FATES) == set(OUTCOMES)


@pytest.mark.parametrize("stem", sorted(FATES))
def test_fates_and_outcomes_are_those_of_the_comments(stem):
    rec = run_of(stem)
    assert rec.complete
    fates = Counter(ball.fate for ball in rec.balls)
    for fate, (fewest, most) in FATES[stem].items():
        assert fewest <= fates[fate] <= most, (fate, fates)
    found = {one.name: one.outcome for one in rec.findings}
    wrong = {n: found[n] for n, allowed in OUTCOMES[stem].items() if found[n] not in allowed}
    assert not wrong


@pytest.mark.parametrize("stem", ["head-driven", "tail-driven", "arm", "counterweight-low"])
def test_energy_of_a_lift_that_holds_is_accounted_for(stem):
    rec = run_of(stem)
    residual = np.abs(rec["energy/residual"]).max()
    # below 1 % of the work put in: the bound that the demo promises
    assert residual < 0.01 * rec["energy/work_drive"][-1]


def test_nothing_fails_in_the_demo_and_its_seats_keep_their_reserve():
    rec = run_of("head-driven")
    assert {one.outcome for one in rec.findings} <= {"holds", "not judged"}
    seats = finding("head-driven", "balls_stay_seated")
    # close would begin at 0.2 g; 15.7 m/s2 were measured, the spread over the run is some m/s2
    assert seats.value == pytest.approx(15.7, abs=3.0)
    assert finding("head-driven", "rate_met").value >= 1.0


def test_balls_of_the_demo_roll_out_into_the_mouth_on_the_falling_side():
    rec = run_of("head-driven")
    discharge = rec.scenario.balls.discharge
    ends = [(ball.end_x, ball.end_y) for ball in rec.balls if ball.fate == "delivered"]
    for x, y in ends:
        assert x == pytest.approx(discharge.at[0], abs=2e-3)  # one sample of a falling ball
        assert discharge.at[1] < y < discharge.at[1] + discharge.mouth


def test_driving_the_head_leaves_more_tension_at_the_foot_than_driving_the_tail():
    head = finding("head-driven", "carrying_strand_taut").value
    tail = finding("tail-driven", "carrying_strand_taut").value
    scenario = run_of("tail-driven").scenario
    height = scenario.sprocket[0].center[1] - scenario.sprocket[1].center[1]
    places = height / (scenario.carriers.every * scenario.chain.pitch)
    balls = places * scenario.balls.mass * GRAVITY
    # half of the balls' weight; a fifth for friction and for the beat of the least value
    assert head - tail == pytest.approx(0.5 * balls, rel=0.2)


def test_slack_at_a_fixed_distance_skips_at_the_driven_tail_and_not_at_the_head():
    rec = run_of("tail-driven-slack")
    skips = [event for event in rec.events if event.kind == "skip"]
    assert {event.subject for event in skips} == {"tail"}
    assert skips[0].time < 1.0
    assert finding("tail-driven-slack", "no_tooth_skipped").value > 3.0


def test_a_counterweight_grows_with_the_height():
    for stem in ("counterweight-low", "counterweight-high"):
        assert finding(stem, "carrying_strand_taut").value > 0.5
    low, high = (run_of(f"counterweight-{k}").scenario.sprocket[0].mount for k in ("low", "high"))
    assert high.weight > 1.5 * low.weight


def test_the_inclined_strand_rests_on_its_guide():
    rec = run_of("inclined")
    assert rec["energy/loss_guide"][-1] > 0.005 * rec["energy/work_drive"][-1]


def test_the_chain_carries_arm_and_drive_torque():
    rec = run_of("arm")
    tail = wheel(rec, "tail")
    mount = rec.scenario.sprocket[tail].mount
    steady = rec.time > 1.5
    up = float(rec["sprockets/force"][steady, tail, 1].mean())
    torque = float(rec["sprockets/torque"][steady, tail].mean())
    length = -mount.pivot[0]
    weight = mount.mass * GRAVITY * (length + mount.center_of_mass[0])
    # about the pivot: pull of the chain, its torque on the sprocket, weight; the pivot's friction
    # of 2 mN m is the tolerance
    assert up * length + torque - weight == pytest.approx(0.0, abs=2e-3)
    assert up > 1.03 * weight / length


def test_the_motor_slows_down_in_the_jam_and_recovers():
    rec = run_of("motor-jam")
    gone = next(event.time for event in rec.events if event.kind == "jam_let_go")
    assert 2.5 < gone < 3.5
    current, rate = rec["drive/current"], np.abs(rec["drive/rate"])
    before = (rec.time > 2.0) & (rec.time < 2.5)
    jammed = (rec.time > 2.5) & (rec.time < gone)
    after = rec.time > 5.0
    assert current[jammed].max() > 1.5 * current[before].mean()
    assert rate[jammed].min() < 0.9 * rate[before].mean()
    assert rate[after].mean() == pytest.approx(rate[before].mean(), rel=0.03)


def test_balls_run_too_fast_are_lost_above_the_head():
    rec = run_of("too-fast")
    head = rec.scenario.sprocket[0].center[1]
    lost = [ball for ball in rec.balls if ball.fate not in ("delivered", "aboard")]
    # they fly off over the head: where they leave, most are still above it
    assert sum(ball.end_y > head for ball in lost) > 0.5 * len(lost)


def test_balls_of_a_slack_strand_spill_at_its_foot():
    rec = run_of("slack-strand")
    spilled = [ball for ball in rec.balls if ball.fate == "spilled"]
    assert np.median([ball.pocket for ball in spilled]) >= 0  # they had sat in a pocket
    assert all(ball.seated_time <= ball.end_time for ball in spilled)
    assert finding("slack-strand", "strand_in_clearance").value > 0.02  # it buckles


def test_the_trough_gives_every_pocket_one_ball():
    rec = run_of("trough-queue")
    scenario = rec.scenario
    fed = [ball for ball in rec.balls if ball.seated_time > 0.5]
    assert len(fed) >= 5
    assert len({ball.pocket for ball in fed}) == len(fed)
    period = scenario.carriers.every * scenario.chain.pitch / scenario.drive.chain_speed
    gaps = np.diff(sorted(ball.seated_time for ball in fed))
    assert np.mean(gaps) == pytest.approx(period, rel=0.15)


@pytest.mark.parametrize(
    ("stem", "low", "high"),
    [("rectified", 10.0, 30.0), ("backstop", -0.02, 0.5), ("run-back", -40.0, -10.0)],
)
def test_a_reversed_supply_runs_on_stands_or_runs_back(stem, low, high):
    rec = run_of(f"polarity-{stem}")
    # the head turned by about 7 rad/s forward before; 2.3 s are left after the reversal
    assert low < head_turn(rec, 2.6, 4.9) < high
