"""Unsure values, proving runs, step checks, rankings and maps, on stand-ins for a simulation."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
import pytest

from chainsim.errors import CallError, RunError
from chainsim.scenario import parse_scenario
from chainsim.scenario.schema_run import SITUATIONS
from chainsim.study.axes import Choice, ListedAxis
from chainsim.study.bench import Bench
from chainsim.study.engines import SerialEngine
from chainsim.study.maps import maps
from chainsim.study.proving import prove
from chainsim.study.ranking import rank, reason
from chainsim.study.rows import Failure, Row
from chainsim.study.situations import situation_values, timing
from chainsim.study.step_check import observed_order, verify_step
from chainsim.study.unsure import turns, unsure
from tests.unit.study_lift import LIFT, lift
from tests.unit.study_tasks import finding, points_of

LIFT_TASKS = "tests.unit.study_lift"


def bench(task="free_body", scenario=None):
    return Bench(scenario or lift(), engine=SerialEngine(), task=f"{LIFT_TASKS}:{task}")


# Unsure values


def test_the_value_that_turns_a_finding_is_to_be_measured_first():
    # The task holds while the link mass, which the kind of chain leaves open, is high enough.
    tried = ("chain.link_stiffness", "chain.link_damping", "chain.link_mass")
    with bench("link_mass_decides") as one:
        found = unsure(lift(), one, tried)
    assert found[0].key == "chain.link_mass"
    assert found[0].source == "kind"
    assert found[0].turns == 1
    (turn,) = found[0].at_low
    assert (turn.finding, turn.before, turn.after) == ("carrying_strand_taut", "holds", "fails")
    assert found[0].at_high == ()
    assert all(entry.turns == 0 for entry in found[1:])
    assert found[0].low < found[0].typical < found[0].high


def test_only_the_values_that_are_asked_for_are_tried():
    with bench() as one:
        found = unsure(lift(), one, ["chain.link_mass", "chain.link_stiffness"])
        assert one.n_runs == 5
    assert [entry.key for entry in found] == ["chain.link_mass", "chain.link_stiffness"]
    assert found[0].swing > 0 and found[0].swinging == "carrying_strand_taut"
    assert found[1].swing == 0.0


def test_a_given_value_is_not_uncertain():
    with bench() as one, pytest.raises(CallError, match=r"balls\.mass"):
        unsure(lift(), one, ["balls.mass"])


def test_turns_are_told_by_name():
    before = Row("a", "done", {}, "s", (finding("a", 1.0, "holds"), finding("b", 1.0, "holds")))
    after = Row("b", "done", {}, "s", (finding("b", 0.1, "close"), finding("a", 1.0, "holds")))
    (turn,) = turns(before, after)
    assert (turn.finding, turn.before, turn.after) == ("b", "holds", "close")


# Proving run


def test_every_situation_is_a_scenario_that_is_accepted():
    scenario = lift()
    for name in SITUATIONS:
        values = situation_values(scenario, name, timing(scenario))
        made = scenario.with_values(values)
        assert made.run.duration > scenario.drive.ramp + scenario.run.settle
        assert all(event.at < made.run.duration for event in made.event), name


def test_each_situation_has_the_events_that_its_name_says():
    scenario = lift()

    def kinds(name):
        values = situation_values(scenario, name, timing(scenario))
        return [event["kind"] for event in values["event"]], values["balls.start"]

    assert kinds("start empty") == ([], "empty")
    assert kinds("start loaded") == ([], "loaded")
    assert kinds("restart loaded") == (["stop", "start"], "loaded")
    assert kinds("supply reversed") == (["supply_reversed"], "loaded")
    assert kinds("take-up blocked") == (["takeup_blocked"], "loaded")


def test_the_steady_situation_lasts_a_turn_of_the_chain_and_sees_enough_balls():
    times = timing(lift())
    # 112 links of 10 mm at 0.04 m/s: 28 s a turn; a pocket every 40 mm: 1 s.
    assert times.turn == pytest.approx(28.0, rel=1e-9)
    assert times.pocket == pytest.approx(1.0)
    values = situation_values(lift(), "steady", times)
    assert float(values["run.duration"].split()[0]) >= times.ready + times.turn + 5 * times.pocket


def test_the_proving_run_gives_one_table_with_the_worst_situation_of_each_finding():
    with bench("frail_when_knocked") as one:
        proof = prove(lift(), one, ("start empty", "steady", "knock"))
    assert list(proof.rows) == ["start empty", "steady", "knock"]
    assert proof.findings == ["balls_stay_seated", "carrying_strand_taut"]
    assert proof.outcome("balls_stay_seated", "steady") == "holds"
    assert proof.outcome("balls_stay_seated", "knock") == "fails"
    situation, found = proof.worst("balls_stay_seated")
    assert (situation, found["outcome"]) == ("knock", "fails")
    assert proof.worst("nothing") is None


def test_what_cannot_be_run_is_told_with_its_reason():
    bare = parse_scenario(LIFT.partition("[balls]")[0] + '[run]\nduration = "2 s"\n')
    values = situation_values(bare, "double ball", timing(bare))
    assert values == "the lift carries no balls"
    fixed = parse_scenario(
        LIFT.replace('{ kind = "hung", mass = "0.30 kg" }', '{ kind = "fixed" }')
    )
    assert "can move" in situation_values(fixed, "take-up blocked", timing(fixed))
    with bench() as one, pytest.raises(CallError, match="start loaded"):
        prove(lift(), one, ("earthquake",))


# Step check


@dataclass
class MadeFinding:
    name: str
    value: float
    outcome: str = "holds"
    unit: str = "N"
    scale: float = 1.0


@dataclass
class MadeRecording:
    findings: list
    attrs: dict = field(default_factory=dict)


def second_order_run(scenario):
    step = scenario.run.step or 4e-5
    return MadeRecording(
        [MadeFinding("a", 1.0 + 3e5 * step**2), MadeFinding("b", 2.0)], {"inner_step": step}
    )


def test_the_order_of_a_second_order_value_is_two():
    first, second = verify_step(lift(), second_order_run)
    assert first.order == pytest.approx(2.0, abs=1e-6)
    assert first.moved == pytest.approx(3e5 * (16e-10 - 4e-10))
    assert second.order is None and second.moved == 0.0
    assert not first.turned


def test_an_outcome_that_turns_with_the_step_is_told():
    def run(scenario):
        coarse = scenario.run.step is None
        return MadeRecording(
            [MadeFinding("a", 1.0, "fails" if coarse else "holds")], {"inner_step": 1e-5}
        )

    assert verify_step(lift(), run)[0].turned


def test_a_recording_without_its_step_cannot_be_checked():
    with pytest.raises(RunError, match="step"):
        verify_step(lift(), lambda scenario: MadeRecording([]))


def test_no_order_is_claimed_from_rounding():
    assert observed_order(1.0, 1.0 + 1e-12, 1.0, 1.0) is None
    assert observed_order(1.0, 0.5, 0.25, 1.0) == pytest.approx(1.0)


# Ranking and maps


def row(point, *findings):
    return Row(point.id, "done", point.values, "s", findings)


def test_variants_are_ranked_by_outcome_then_by_their_weakest_finding():
    points = points_of([{"mass": m} for m in (1.0, 2.0, 3.0, 4.0)])
    rows = [
        row(points[0], finding("a", 0.5, "holds"), finding("b", 0.4, "holds")),
        row(points[1], finding("a", 0.1, "close"), finding("b", 9.0, "holds")),
        row(points[2], finding("a", 0.6, "holds"), finding("b", 0.3, "holds")),
        row(points[3], finding("a", -0.1, "fails")),
    ]
    ranked = rank(list(zip(points, rows, strict=True)))
    assert [entry.point.index for entry in ranked] == [0, 2, 1, 3]
    assert ranked[0].weakest == "b"
    said = reason(ranked)
    assert said.startswith(
        "mass = 1.0 comes first: it holds, and its weakest finding, b, keeps 40%"
    )
    assert "mass = 3.0, keeps 30% in b" in said
    assert "fails by the least" in reason(ranked[3:])
    assert reason([]).startswith("No run was completed")


def test_variants_without_a_judged_finding_come_after_those_that_fail():
    points = points_of([{"mass": 1.0}, {"mass": 2.0}])
    rows = [
        row(points[0], finding("a", 0.0, "not judged")),
        row(points[1], finding("a", -1, "fails")),
    ]
    assert [e.point.index for e in rank(list(zip(points, rows, strict=True)))] == [1, 0]


def test_a_map_shows_every_outcome_at_its_place():
    axes = [
        ListedAxis("mass", tuple(Choice(f"{m} kg", {"mass": f"{m} kg"}) for m in (1, 2, 3))),
        ListedAxis("speed", tuple(Choice(f"{s} m/s", {"speed": f"{s} m/s"}) for s in (4, 5))),
        ListedAxis("drive", (Choice("head"), Choice("tail"))),
    ]
    points, rows = [], []
    made = points_of([{"i": i} for i in range(12)])
    for i, point in enumerate(made):
        m, s, d = i // 4, i // 2 % 2, i % 2
        labels = {a.name: a.choices[k].label for a, k in zip(axes, (m, s, d), strict=True)}
        points.append(type(point)(i, point.id, labels, {}, "s", ""))
        word = "fails" if d else "holds"
        rows.append(row(points[-1], finding("a", m + 10.0 * s, word)))
    rows[0] = None
    rows[2] = Row("x", "failed", {}, "s", failure=Failure("run", "no"))
    head, tail = maps(axes, points, rows)
    assert (head.title, tail.title) == ("drive = head", "drive = tail")
    assert head.across.numbers == (1.0, 2.0, 3.0) and head.across.unit == "kg"
    assert head.outcome.tolist() == [["", "holds", "holds"], ["not completed", "holds", "holds"]]
    assert tail.reserve.tolist() == [[0.0, 1.0, 2.0], [10.0, 11.0, 12.0]]
    assert np.isnan(head.reserve[0, 0])
    assert maps(axes[:1], points, rows) == []
