"""Limits and mends on a stand-in lift whose answer is known in closed form."""

from __future__ import annotations

import numpy as np
import pytest

from chainsim.errors import CallError, RunError
from chainsim.scenario import parse_scenario
from chainsim.study.bench import Bench, Variant
from chainsim.study.engines import SerialEngine
from chainsim.study.heights import height_of, raised
from chainsim.study.limit_answer import Probe
from chainsim.study.limit_estimates import carried_mass, estimate, fullest_mass, wrapped_mass
from chainsim.study.limit_questions import question, questions
from chainsim.study.limits import find_limit
from chainsim.study.mend import mend, sensible_keys
from chainsim.study.portable import file_text
from chainsim.study.rows import Row
from chainsim.study.scenario_numbers import number_at
from tests.unit.study_lift import LIFT, lift
from tests.unit.study_tasks import finding

LIFT_TASKS = "tests.unit.study_lift"
# Free body: the hung weight (mount, and 4 links of the wrap with their carriers) equals that
# of 13 balls of 20 g on a strand of 520 mm with a pocket every 40 mm.
THRESHOLD = 13 * 20e-3


def bench(task="free_body", scenario=None):
    return Bench(scenario or lift(), engine=SerialEngine(), task=f"{LIFT_TASKS}:{task}")


def wrap(scenario):
    carried = scenario.chain.link_mass + scenario.carriers.mass / scenario.carriers.every
    return 4 * carried


def test_the_take_up_limit_is_the_closed_form_threshold():
    scenario = lift()
    with bench() as one:
        found = find_limit(question(scenario, "takeup"), one, tolerance=0.005)
    exact = THRESHOLD - wrap(scenario)
    assert found.fails.bad.value < exact <= found.fails.good.value
    assert found.fails.good.value == pytest.approx(exact, rel=0.01)
    assert found.limiting[0]["name"] == "carrying_strand_taut"
    assert found.confirmed
    assert estimate(scenario, "takeup").value == pytest.approx(exact, rel=1e-12)


def test_the_larger_value_that_keeps_its_reserve_is_named_beside_it():
    # Close below a fifth of the resting tension: (W - P) = 0.2 W, so W = P / 0.8.
    scenario = lift()
    with bench() as one:
        found = find_limit(question(scenario, "takeup"), one, tolerance=0.005)
    exact = THRESHOLD / 0.8 - wrap(scenario)
    assert found.reserve.bad.value < exact <= found.reserve.good.value
    assert found.reserve.good.value == pytest.approx(exact, rel=0.01)


def test_driven_at_the_head_nothing_limits_the_take_up_from_below():
    scenario = lift().with_values({"drive.sprocket": "head"})
    with bench(scenario=scenario) as one:
        found = find_limit(question(scenario, "takeup"), one)
    assert found.fails is None
    assert found.limiting == ()
    assert {stretch.outcome for stretch in found.stretches} == {"holds"}
    assert estimate(scenario, "takeup").value == 0.0


def test_the_speed_limit_names_what_gives_way():
    with bench() as one:
        found = find_limit(question(lift(), "speed", "0.1 m/s", "1 m/s"), one)
    assert found.fails.good.value <= 0.6 < found.fails.bad.value
    assert found.limiting[0]["name"] == "balls_stay_seated"


def test_an_island_is_reported_and_the_limit_is_the_near_edge_of_it():
    with bench("with_island") as one:
        found = find_limit(question(lift(), "speed"), one)
    assert found.fails.bad.value == pytest.approx(0.07, rel=0.02)
    assert found.limiting[0]["name"] == "off_resonance"
    words = [stretch.outcome for stretch in found.stretches]
    assert words == ["close", "fails", "close", "fails"]


def test_only_the_findings_that_are_asked_for_count():
    with bench("with_island") as one:
        found = find_limit(question(lift(), "speed"), one, names=("balls_stay_seated",))
    assert found.fails.good.value <= 0.6 < found.fails.bad.value


def test_where_everything_fails_there_is_no_bracket():
    with bench() as one:
        found = find_limit(question(lift(), "takeup", "10 g", "100 g"), one)
    assert found.fails is None and found.reserve is None
    assert {stretch.outcome for stretch in found.stretches} == {"fails"}


def test_a_scan_goes_on_beyond_its_range_while_nothing_fails():
    with bench() as one:
        found = find_limit(question(lift(), "takeup", "0.8 kg", "1.2 kg"), one)
    assert found.fails is not None or found.scan[0].value < 0.8


def test_a_count_is_only_tried_at_whole_numbers():
    asked = question(lift(), "carriers.every")
    assert asked.snapped(4.4) == 4.0
    assert asked.values(6.0) == {"carriers.every": 6}
    with bench() as one:
        found = find_limit(asked, one)
    assert all(probe.value == round(probe.value) for probe in found.scan)


@pytest.mark.parametrize(
    ("name", "low", "rule"),
    [
        ("drive.chain_sped", None, "did you mean drive.chain_speed"),
        ("slack", None, "takes up its own slack"),
        ("takeup", "3 m", "kg"),
        ("takeup", "30 kg", "must rise"),
    ],
)
def test_a_question_that_makes_no_sense_is_refused(name, low, rule):
    with pytest.raises(CallError, match=rule):
        question(lift(), name, low)


def test_a_lift_at_a_fixed_distance_has_no_take_up():
    fixed = parse_scenario(
        LIFT.replace('{ kind = "hung", mass = "0.30 kg" }', '{ kind = "fixed" }')
    )
    with pytest.raises(CallError, match="slack"):
        question(fixed, "takeup")


def test_estimates_of_a_counterweight_that_lifts_the_head():
    # F = head + both strands + balls, driven at the head (free body; checks of the trade).
    text = LIFT.replace('mount = { kind = "hung", mass = "0.30 kg" }', "").replace(
        'center = ["0 mm", "520 mm"]',
        'center = ["0 mm", "520 mm"]\n'
        'mount = { kind = "counterweight", mass = "0.1 kg", weight = "1 kg" }',
    )
    scenario = parse_scenario(text.replace('sprocket = "tail"', 'sprocket = "head"'))
    strand = 52 * (scenario.chain.link_mass + scenario.carriers.mass / 4)
    by_hand = 0.1 + wrap(scenario) + 2 * strand + THRESHOLD
    assert estimate(scenario, "takeup").value == pytest.approx(by_hand, rel=1e-9)
    assert wrapped_mass(scenario, scenario.sprocket[0]) == pytest.approx(wrap(scenario))


def test_a_thin_feed_carries_fewer_balls():
    thin = lift().with_values({"balls.feed.kind": "set down", "balls.feed.rate": "0.5 /s"})
    # Pockets come by at 0.04 m/s / 40 mm = 1 /s, so every other one is filled.
    assert carried_mass(thin) == pytest.approx(0.5 * THRESHOLD)
    # 6.5 balls on average are 7 at the fullest moment; a loaded start fills all 13 pockets.
    assert fullest_mass(thin) == pytest.approx(7 * 20e-3)
    loaded = thin.with_values({"balls.start": "loaded"})
    assert fullest_mass(loaded) == pytest.approx(THRESHOLD)


def test_the_present_value_of_a_key_is_found_or_the_nearest_offered():
    assert number_at(lift(), "sprocket.tail.mount.mass").value == pytest.approx(0.3)
    with pytest.raises(CallError, match=r"sprocket\.tail\.mount\.mass"):
        number_at(lift(), "sprocket.tail.mount.mas")


def test_a_changed_scenario_travels_as_a_file():
    changed = lift().with_values({"sprocket.tail.mount.mass": 0.123, "chain.links": 120})
    again = parse_scenario(file_text(changed))
    assert again.sha256 == changed.sha256
    arm = 'mount = { kind = "arm", mass = "1 kg", pivot = ["60 mm", "0 mm"], friction = "0.1 N m" }'
    text = LIFT.replace('mount = { kind = "hung", mass = "0.30 kg" }', arm)
    turned = parse_scenario(text).with_values({"sprocket.tail.mount.friction": 0.25})
    assert "0.25 N m" in file_text(turned)


def test_a_mend_is_the_smallest_single_change_with_its_proof():
    failing = lift().with_values({"sprocket.tail.mount.mass": "0.2 kg"})
    with bench(scenario=failing) as one:
        found = mend(failing, one, ("sprocket.tail.mount.mass", "carriers.every", "drive.ramp"))
    # 27 % more mass; a carrier on every 6th link instead of every 4th; the ramp is idle.
    assert [change.key for change in found] == ["sprocket.tail.mount.mass", "carriers.every"]
    best, other = found
    assert best.value == pytest.approx(THRESHOLD - wrap(failing), rel=0.05)
    bad, good = best.proof
    assert (bad.outcome(()), good.outcome(())) == ("fails", "close")
    assert best.text.startswith("sprocket.tail.mount.mass: 200 g → ")
    assert other.value == 6.0
    assert best.outcome == "close"


def test_a_lift_that_does_not_fail_needs_no_mend():
    with bench() as one, pytest.raises(CallError, match="nothing to mend"):
        mend(lift(), one)


def test_the_users_free_keys_come_before_our_own():
    failing = lift().with_values(
        {"sprocket.tail.mount.mass": "0.2 kg", "study.free": ["carriers.every"]}
    )
    with bench(scenario=failing) as one:
        assert [change.key for change in mend(failing, one)] == ["carriers.every"]
    assert sensible_keys(failing)[0] == "sprocket.tail.mount.mass"


def test_a_bench_in_a_folder_finds_what_it_has_tried(tmp_path):
    variants = [
        Variant("a", {"drive.chain_speed": 0.03}),
        Variant("b", {"drive.chain_speed": 0.05}),
    ]
    rows = []
    for _ in range(2):
        with Bench(lift(), tmp_path, SerialEngine(), task=f"{LIFT_TASKS}:free_body") as one:
            rows.append(one.rows(variants))
    assert [row.how for row in rows[0]] == [row.how for row in rows[1]]


def test_a_run_that_could_not_be_completed_counts_as_failing():
    with bench() as one:
        row = one.rows([Variant("impossible", {"sprocket.tail.mount.mass": -1.0})])[0]
    assert row.failure.code == "refused"
    assert Probe(-1.0, row).outcome(()) == "fails"


def test_the_speed_estimate_is_where_the_tooth_rate_meets_the_bounce():
    # 52 links of each strand side by side under 0.3 kg and the wrap: by hand
    # f = sqrt(2 k / (n (m + (2 strands + balls) / 3))) / 2 pi, v = f p (Rayleigh's rule).
    scenario = lift()
    link = scenario.chain.link_mass + scenario.carriers.mass / 4
    mass = 0.3 + 4 * link + (2 * 52 * link + THRESHOLD) / 3
    by_hand = (2 * scenario.chain.link_stiffness / 52 / mass) ** 0.5 / 6.283185307179586 * 0.01
    assert estimate(scenario, "speed").value == pytest.approx(by_hand, rel=1e-9)
    assert estimate(scenario, "drive.ramp").value is None


def test_the_height_estimate_is_where_the_balls_outweigh_what_hangs():
    scenario = lift()
    per_meter = 20e-3 / 40e-3
    by_hand = (0.3 + wrap(scenario)) / per_meter
    assert estimate(scenario, "height").value == pytest.approx(by_hand, rel=1e-9)
    head = scenario.with_values({"drive.sprocket": "head"})
    assert estimate(head, "height").value is None


def test_a_taller_lift_has_more_links_and_nothing_else_changed():
    text = LIFT + '[[wall]]\nname = "back"\npoints = [["60 mm", "-50 mm"], ["60 mm", "500 mm"]]\n'
    scenario = parse_scenario(text)
    taller = scenario.with_values(raised(scenario, 0.08, 112))
    assert taller.chain.links == 112 + 2 * 8
    assert height_of(taller) == pytest.approx(0.6)
    assert [point[1] for point in taller.wall[0].points] == pytest.approx([-0.05, 0.58])
    assert taller.balls.unload_at == pytest.approx(scenario.balls.unload_at + 0.08)
    assert taller.sprocket[1].mount.mass == scenario.sprocket[1].mount.mass


def test_a_key_is_asked_both_ways_and_its_scan_is_run_once():
    with bench() as one:
        up, down = (find_limit(q, one) for q in questions(lift(), "sprocket.tail.mount.mass"))
        runs = len(list(one.store.runs()))
    assert up.fails is None
    assert down.fails.good.value == pytest.approx(THRESHOLD - wrap(lift()), rel=0.011)
    # Nine of the scan, two beyond each end where nothing fails, and the bisections.
    assert runs < 9 + 2 + 2 * 8 + 2


def test_an_answer_never_rests_on_a_fault_of_the_program():
    with bench() as one, pytest.raises(RunError, match="division by zero"):
        broken = Bench(
            lift(), one.store.folder, SerialEngine(), task="tests.unit.study_tasks:broken"
        )
        find_limit(question(lift(), "takeup"), broken)


def test_the_drag_of_the_idle_head_adds_to_the_take_up():
    # By iteration of the free body: tensions at the head give the drag, which shifts them.
    rough = lift().with_values(
        {
            "chain.joint.friction": 0.2,
            "sprocket.head.bearing_friction": 0.1,
            "chain.joint.moment": 1e-5,
        }
    )
    head, joint, g = rough.sprocket[0], rough.chain.joint, rough.frame.gravity
    link = g * (rough.chain.link_mass + rough.carriers.mass / 4)
    payload, strand, lever = g * THRESHOLD, 52 * link, 8 * 0.01 / (2 * np.pi)
    hung = payload
    for _ in range(60):
        into, out = payload + strand, hung + strand
        bearing = 0.1 * 0.5 * head.axle_diameter * (into + out + 4 * link)
        joints = 2 * 1e-5 + joint.friction * joint.pin_radius * (into + out)
        hung = payload + (bearing + joints) / lever
    by_hand = hung / g - wrap(rough)
    assert estimate(rough, "takeup").value == pytest.approx(by_hand, rel=1e-9)
    assert estimate(rough, "takeup").value > 1.05 * estimate(lift(), "takeup").value


def test_a_lift_that_came_apart_does_not_hold_where_its_finding_was_not_judged():
    findings = (
        finding("carrying_strand_taut", 0.1, "not judged"),
        finding("chain_stays_on", -1.0, "fails"),
    )
    row = Row("a", "done", {}, "s", findings)
    assert Probe(1.0, row).outcome(("carrying_strand_taut",)) == "fails"
    calm = Row("b", "done", {}, "s", findings[:1])
    assert Probe(1.0, calm).outcome(("carrying_strand_taut",)) == "holds"
