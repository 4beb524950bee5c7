"""Plans: what they list, what they refuse, and that nothing about them depends on chance."""

from __future__ import annotations

import itertools
import json
from collections import Counter
from pathlib import Path

import numpy as np
import pytest

from chainsim.errors import CallError, ScenarioError
from chainsim.study.amounts import read_amount, spaced
from chainsim.study.axes import SpreadAxis
from chainsim.study.plan_checks import BaseScenarios, check_axes
from chainsim.study.plan_faults import key_lines
from chainsim.study.plan_reading import parse_plan, read_plan
from chainsim.study.points import number_of_points, points, run_id
from chainsim.study.sampling import index_design, point_seed, shares
from tests.unit.study_lift import LIFT

PLAN = """\
format = 1
title = "Head or tail"
scenario = "lift.toml"
seed = 7
set = { "run.duration" = "3 s" }

[[axis]]
key = "sprocket.tail.mount.mass"
values = ["0.1 kg", "0.2 kg", "0.4 kg"]

[[axis]]
key = "drive.chain_speed"
range = ["0.05 m/s", "0.4 m/s"]
count = 4
log = true

[[axis]]
together = { "sprocket.head.teeth" = [8, 10], "sprocket.tail.teeth" = [8, 10] }

[[axis]]
name = "drive"
[[axis.choice]]
name = "head"
set = { "drive.sprocket" = "head" }
[[axis.choice]]
name = "tail"
"""


@pytest.fixture
def folder(tmp_path):
    (tmp_path / "lift.toml").write_text(LIFT)
    return tmp_path


def plan_in(folder, text=PLAN):
    (folder / "plan.toml").write_text(text)
    return read_plan(folder / "plan.toml")


def faults(text):
    with pytest.raises(ScenarioError) as caught:
        parse_plan(text, "plan.toml")
    return caught.value.problems


def test_a_grid_takes_every_combination_once(folder):
    plan = plan_in(folder)
    listed = list(points(plan))
    assert number_of_points(plan) == len(listed) == 3 * 4 * 2 * 2
    assert len({point.id for point in listed}) == len(listed)
    first = listed[0]
    assert first.values["run.duration"] == "3 s"
    assert first.values["run.seed"] == 7
    assert first.values["drive.sprocket"] == "head"
    assert first.labels["drive"] == "head"


def test_a_log_range_rises_by_equal_ratios_in_its_own_unit(folder):
    choices = plan_in(folder).axes[1].choices
    numbers = [read_amount(c.values["drive.chain_speed"]).number for c in choices]
    assert numbers == pytest.approx([0.05, 0.1, 0.2, 0.4], rel=1e-9)
    assert choices[1].values["drive.chain_speed"].endswith(" m/s")


def test_values_that_move_together_stay_together(folder):
    rows = [choice.values for choice in plan_in(folder).axes[2].choices]
    assert rows == [
        {"sprocket.head.teeth": 8, "sprocket.tail.teeth": 8},
        {"sprocket.head.teeth": 10, "sprocket.tail.teeth": 10},
    ]


def test_a_run_id_follows_what_is_simulated_and_nothing_else(folder):
    ids = [p.id for p in points(plan_in(folder))]
    renamed = PLAN.replace('title = "Head or tail"', 'title = "Another title"')
    assert ids == [p.id for p in points(plan_in(folder, renamed))]
    other_seed = [p.id for p in points(plan_in(folder, PLAN.replace("seed = 7", "seed = 8")))]
    assert not set(ids) & set(other_seed)


def test_a_run_id_is_16_hexadecimal_digits_and_does_not_mind_the_order_of_keys():
    one, other = json.dumps({"a": 1, "b": 2}), json.dumps({"b": 2, "a": 1})
    assert run_id(one) == run_id(other)
    assert len(run_id(one)) == 16
    assert int(run_id(one), 16) >= 0


def test_parts_divide_a_plan_without_rest_or_overlap(folder):
    plan = plan_in(folder)
    parts = [[p.index for p in points(plan, (i, 5))] for i in range(1, 6)]
    assert sorted(itertools.chain(*parts)) == list(range(48))
    with pytest.raises(CallError, match="1 to 5"):
        list(points(plan, (6, 5)))


def test_a_refused_combination_is_a_point_with_its_reason(folder):
    text = PLAN.replace('"0.1 kg", "0.2 kg", "0.4 kg"', '"0.1 kg", "-2 kg", "0.4 kg"')
    refused = [p for p in points(plan_in(folder, text)) if p.refusal]
    assert len(refused) == 16
    assert "mount.mass" in refused[0].refusal


@pytest.mark.parametrize(
    ("old", "new", "key", "rule"),
    [
        ("sprocket.tail.mount.mass", "sprocket.tail.mount.mas", "mas", "mass"),
        ("sprocket.tail.mount.mass", "sprocket.tial.mount.mass", "tial", "tail"),
        ('"0.1 kg", "0.2 kg", "0.4 kg"', '"0.1 m", "0.2 m"', "mass", "kg"),
        ('"0.1 kg", "0.2 kg", "0.4 kg"', "0.1, 0.2", "mass", "unit"),
    ],
)
def test_a_wrong_key_or_unit_is_told_at_its_axis(folder, old, new, key, rule):
    plan = plan_in(folder, PLAN.replace(old, new))
    with pytest.raises(ScenarioError) as caught:
        list(points(plan))
    problem = caught.value.problems[0]
    assert problem.file.endswith("plan.toml")
    assert problem.line == 7
    assert key in str(problem)
    assert rule in str(problem)


def test_all_faults_of_a_plan_are_told_at_once_with_their_lines():
    text = """\
format = 2
scenario = 5
colour = "red"

[[axis]]
key = "chain.pitch"
vals = ["8 mm"]

[[axis]]
key = "chain.pitch"
range = ["8 mm", "1 in"]

[sample]
kind = "sobol"
count = 48

[keep]
findings = ["links_hold", "balls_fall"]
summary = ["peak_tenson"]

[engine]
kind = "many"
workers = 0
"""
    found = {(p.key, p.line) for p in faults(text)}
    assert found == {
        ("format", 1),
        ("scenario", 2),
        ("colour", 3),
        ("axis.1.vals", 7),
        ("axis.1", 5),
        ("axis.2.range", 11),
        ("sample.count", 15),
        ("keep.findings", 18),
        ("keep.summary", 19),
        ("engine.kind", 22),
        ("engine.workers", 23),
    }


@pytest.mark.parametrize(
    ("axis", "rule"),
    [
        ('key = "a"\nvalues = []', "at least one value"),
        ('key = "a"\nrange = ["2 mm", "1 mm"]\ncount = 3', "lower end first"),
        ('key = "a"\nrange = ["0 mm", "1 mm"]\ncount = 3\nlog = true', "above zero"),
        ('key = "a"\nrange = ["0 mm", "1 mm"]', "number of values"),
        ('key = "a"\nrange = [6, 20]\ncount = 4', "divide evenly"),
        ("together = { a = [1, 2], b = [1] }", "equal length"),
        ('key = "a"\ndistribution = { kind = "normal", mean = "1 g" }', "deviation"),
        ('key = "a"\ndistribution = { kind = "even" }', "uniform, triangular, normal"),
        ('key = "a"\ndistribution = { kind = "uniform", low = "2 g", high = "1 g" }', "rise"),
        ('key = "a"\ndistribution = { kind = "uniform", low = "1 g", high = "2 g" }', "sample"),
        ("values = [1]", "dotted scenario key"),
        ('key = "a"\nvalues = [1]\nrange = [1, 2]', "exactly one of"),
    ],
)
def test_an_axis_that_makes_no_sense_is_refused_with_its_rule(axis, rule):
    problems = faults(f'format = 1\nscenario = "a.toml"\n[[axis]]\n{axis}\n')
    assert len(problems) == 1
    assert rule in problems[0].rule


def test_a_syntax_error_names_its_line():
    assert faults("format = 1\ntitle = = 2\nseed = 1\n")[0].line == 2


def test_a_plan_that_is_not_there_is_a_call_error(tmp_path):
    with pytest.raises(CallError, match=r"none\.toml"):
        read_plan(tmp_path / "none.toml")


def test_lines_of_nested_arrays_of_tables():
    lines = key_lines(PLAN)
    assert lines["axis.4.choice.2.name"] == 26
    assert lines["axis.2.log"] == 15


def test_whole_numbers_are_listed_one_by_one():
    plan = parse_plan('format = 1\nscenario = "a"\n[[axis]]\nkey = "n"\nrange = [6, 9]\n')
    assert [c.values["n"] for c in plan.axes[0].choices] == [6, 7, 8, 9]


def test_spacing_keeps_both_ends():
    assert spaced(1.0, 8.0, 4, True) == pytest.approx([1, 2, 4, 8])
    assert spaced(1.0, 4.0, 4, False) == pytest.approx([1, 2, 3, 4])


def test_first_unscrambled_properties_hold_for_our_sobol_points():
    # Each of n equal bins in each dimension holds exactly one of n = 2^m points (a property
    # of Sobol sequences that scrambling keeps; scipy.stats.qmc documentation).
    drawn = shares("sobol", 64, 3, seed=1)
    for column in drawn.T:
        assert sorted(Counter((column * 64).astype(int)).values()) == [1] * 64
    assert drawn.min() > 0 and drawn.max() < 1


def test_the_same_seed_gives_the_same_sample():
    for kind in ("sobol", "latin", "halton"):
        assert np.array_equal(shares(kind, 16, 2, 5), shares(kind, 16, 2, 5))
        assert not np.array_equal(shares(kind, 16, 2, 5), shares(kind, 16, 2, 6))


def test_seeds_of_points_follow_numpy_and_never_the_worker():
    # SeedSequence(s, spawn_key=(i,)) equals spawn(n)[i] (NumPy documentation).
    spawned = np.random.SeedSequence(7).spawn(5)[3]
    assert point_seed(7, 3) == int(spawned.generate_state(1, np.uint32)[0] >> 1)
    assert len({point_seed(7, i) for i in range(1000)}) == 1000


def test_the_index_design_swaps_one_column_at_a_time():
    design = index_design(8, 3, seed=2).reshape(5, 8, 3)
    first, second = design[0], design[1]
    for axis in range(3):
        mixed = design[2 + axis]
        assert np.array_equal(mixed[:, axis], second[:, axis])
        others = [k for k in range(3) if k != axis]
        assert np.array_equal(mixed[:, others], first[:, others])


def test_quantiles_of_distributions():
    def at(kind, share, **numbers):
        amounts = {name: read_amount(f"{value} g") for name, value in numbers.items()}
        text = SpreadAxis("m", "m", kind, amounts).at(share).values["m"]
        return read_amount(text).number

    assert at("uniform", 0.25, low=1.0, high=5.0) == pytest.approx(2.0)
    assert at("normal", 0.975, mean=0.0, deviation=1.0) == pytest.approx(1.959964, rel=1e-6)
    assert at("triangular", 0.5, low=0.0, typical=0.0, high=1.0) == pytest.approx(1 - 0.5**0.5)
    cut = {"mean": 0.0, "deviation": 1.0, "low": -1.0, "high": 1.0}
    assert at("normal", 0.5, **cut) == pytest.approx(0.0, abs=1e-9)
    assert -1.0 < at("normal", 1e-6, **cut) < at("normal", 1 - 1e-6, **cut) < 1.0


def test_a_sample_of_distributions_is_the_same_for_the_same_seed(folder):
    text = """\
format = 1
scenario = "lift.toml"
seed = 3
[[axis]]
key = "balls.mass"
distribution = { kind = "normal", mean = "20 g", deviation = "0.5 g" }
[[axis]]
key = "drive.chain_speed"
distribution = { kind = "uniform", low = "35 mm/s", high = "45 mm/s" }
[sample]
kind = "sobol"
count = 32
"""
    one = list(points(plan_in(folder, text)))
    two = list(points(plan_in(folder, text)))
    assert [p.id for p in one] == [p.id for p in two]
    masses = [read_amount(p.values["balls.mass"]).number for p in one]
    assert np.mean(masses) == pytest.approx(20.0, abs=0.05)
    assert len({p.values["run.seed"] for p in one}) == 32


def test_an_alternative_may_bring_its_own_scenario(folder):
    (folder / "other.toml").write_text(LIFT.replace('"0.30 kg"', '"0.55 kg"'))
    text = PLAN.replace('name = "tail"\n', 'name = "other"\nscenario = "other.toml"\n')
    found = {p.scenario for p in points(plan_in(folder, text))}
    assert found == {"lift.toml", "other.toml"}


def test_a_missing_scenario_is_told_by_name(folder):
    plan = plan_in(folder, PLAN.replace('"lift.toml"', '"gone.toml"'))
    with pytest.raises(ScenarioError, match=r"gone\.toml"):
        check_axes(plan, BaseScenarios(folder))


def test_a_plan_that_could_never_be_listed_is_refused_at_once(folder):
    wide = PLAN.replace("count = 4", "count = 90000")
    with pytest.raises(CallError, match=r"1,080,000 runs.*--part"):
        next(points(plan_in(folder, wide)))
    assert next(points(plan_in(folder, wide), (1, 1000))).index == 0
    assert "2 to 100000" in faults(wide.replace("90000", "1000000000"))[0].rule


@pytest.mark.parametrize(
    "text",
    [
        "",
        "\x00",
        "axis = 3",
        "[[axis]]\n[[axis.choice]]",
        "a = " + "[" * 5000,
        "sample = 1\nkeep = []",
    ],
)
def test_nonsense_is_a_fault_and_nothing_worse(text):
    assert faults(text)


def test_the_demo_plan_is_accepted_point_by_point():
    demo = Path(__file__).parents[2] / "scenarios" / "plans" / "head-or-tail.toml"
    plan = read_plan(demo)
    listed = list(points(plan))
    assert len(listed) == number_of_points(plan) == 90
    assert [point.refusal for point in listed] == [None] * 90
