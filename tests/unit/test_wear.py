"""Wear over time: growth, travel and ride follow their formulas, failures are bracketed."""

import math
from types import SimpleNamespace

import numpy as np
import pytest

from chainsim import closed_forms as cf
from chainsim.errors import CallError, RunError
from chainsim.study.wear import replaced_at, wear_over_time
from chainsim.study.wear_rule import GrowthRule, measured_growth, sliding_growth
from tests.unit.study_lift import lift

LOOP = 1.120  # 112 links of 10 mm


class Run:
    """A stand-in for a run: the tail sinks by half of the growth, and fails beyond a limit."""

    def __init__(self, limit: float, close: float = math.inf, stops_at: float = math.inf):
        self.limit, self.close, self.stops_at = limit, close, stops_at
        self.growths = []

    def __call__(self, scenario):
        growth = scenario.chain.growth
        self.growths.append(growth)
        if growth >= self.stops_at:
            raise RunError("the state is not finite")
        sunk = -0.5 * growth * LOOP
        travel = np.array([[0.0, sunk - 1e-3], [0.0, sunk + 1e-3]])
        outcome = "fails" if growth > self.limit else "close" if growth > self.close else "holds"
        return FakeRecording(
            scenario,
            {"mounts/travel": travel},
            [SimpleNamespace(name="chain_stays_on", outcome=outcome)],
            {"ride_height.tail": SimpleNamespace(value=2.0 * growth * 0.013, time=0.0)},
        )


class FakeRecording:
    """Just enough of a recording."""

    def __init__(self, scenario, channels, findings, extremes):
        self.scenario, self.channels = scenario, channels
        self.findings, self.extremes = findings, extremes
        self.time, self.stop_reason = np.array([0.0, 1.0]), "reached the end"

    def __contains__(self, name):
        return name in self.channels

    def __getitem__(self, name):
        return self.channels[name]


def test_chain_is_replaced_where_service_guides_say():
    # chain makers' service guides: 3 % with a take-up, 1.5 % at fixed centers
    assert replaced_at(lift()) == pytest.approx(0.03)
    fixed = lift().with_values({"sprocket.tail.mount": {"kind": "fixed"}})
    assert replaced_at(fixed) == pytest.approx(0.015)


def test_growth_goes_in_even_steps_from_new_to_replaced():
    run = Run(limit=1.0)
    study = wear_over_time(lift(), run=run)
    assert run.growths == pytest.approx([0.0, 0.006, 0.012, 0.018, 0.024, 0.03])
    assert study.first_failure is None
    assert "Nothing fails up to 3 %" in study.sentence


def test_wear_that_the_limits_ask_for_is_run_too():
    run = Run(limit=1.0)
    wear_over_time(lift().with_values({"limits.wear": 0.05}), run=run)
    assert run.growths[-1] == pytest.approx(0.05)


def test_travel_used_and_lengths_follow_the_growth():
    study = wear_over_time(lift(), growths=[0.0, 0.01, 0.02], run=Run(limit=1.0))
    assert [step.longer for step in study.steps] == pytest.approx([0.0, 0.0112, 0.0224])
    used = [step.travel_used["tail"] for step in study.steps]
    assert used == pytest.approx([0.0, -0.0056, -0.0112])
    assert study.steps[1].travel["tail"] == pytest.approx((-0.0066, -0.0046))


def test_ride_is_told_as_run_and_as_the_polygon_of_the_grown_chain():
    step = wear_over_time(lift(), growths=[0.02], run=Run(limit=1.0)).steps[0]
    # e p / (2 sin(π/z)): rise of the pins of a chain that has grown by e, all sharing
    assert step.ride_of_growth["head"] == pytest.approx(0.02 * 0.010 / (2 * math.sin(math.pi / 8)))
    assert step.ride_height == pytest.approx({"tail": 2.0 * 0.02 * 0.013})


def test_ride_of_growth_agrees_with_a_worked_value():
    # p = 12.7 mm, 25 teeth, 1 %: 0.506649339 mm (worked from PD = p/sin(180°/N), ASME B29.1-2011)
    assert cf.ride_height(12.7e-3, 25, 0.01) == pytest.approx(0.506649339e-3, rel=1e-8)


def test_first_failure_and_first_close_are_found_in_order():
    study = wear_over_time(lift(), growths=[0.02, 0.0, 0.01], run=Run(limit=0.015, close=0.005))
    assert study.first_close.growth == pytest.approx(0.01)
    assert study.first_failure.growth == pytest.approx(0.02)
    assert study.last_good.growth == pytest.approx(0.01)
    assert "Between 1 % and 2 %" in study.sentence and "chain stays on" in study.sentence


def test_halvings_close_in_on_the_failure():
    run = Run(limit=0.0137)
    study = wear_over_time(lift(), growths=[0.0, 0.032], run=run, halvings=6)
    good, bad = study.last_good.growth, study.first_failure.growth
    assert good <= 0.0137 < bad
    assert bad - good == pytest.approx(0.032 / 2**6)
    assert [step.growth for step in study.steps] == sorted(run.growths)


def test_a_chain_that_fails_when_new_has_no_last_good_step():
    study = wear_over_time(lift(), growths=[0.0, 0.01], run=Run(limit=-1.0), halvings=4)
    assert study.last_good is None
    assert len(study.steps) == 2
    assert study.sentence.startswith("It fails with the chain at 0 %")


def test_a_run_that_breaks_off_counts_as_failure_with_its_reason():
    study = wear_over_time(lift(), growths=[0.0, 0.01], run=Run(limit=1.0, stops_at=0.005))
    assert study.first_failure.outcome == "not completed"
    assert "not finite" in study.first_failure.stop_reason
    assert "not finite" in study.sentence


@pytest.mark.parametrize("growths", [[], [-0.01], [math.nan]])
def test_growths_that_cannot_be_run_are_refused(growths):
    with pytest.raises(CallError, match="growth"):
        wear_over_time(lift(), growths=growths, run=Run(limit=1.0))


def test_without_a_rule_nothing_is_said_of_turns_or_hours():
    study = wear_over_time(lift(), growths=[0.01], run=Run(limit=1.0))
    assert study.steps[0].turns is None and study.steps[0].hours is None
    assert "not known" in study.rule


def test_a_measured_rule_gives_turns_and_hours():
    rule = measured_growth(0.002, turns=10_000, source="24 links with a caliper")
    step = wear_over_time(lift(), growths=[0.01], rule=rule, run=Run(limit=1.0)).steps[0]
    assert step.turns == pytest.approx(50_000)
    # one turn: 1.120 m at 0.04 m/s, 28 s
    assert step.hours == pytest.approx(50_000 * 28.0 / 3600.0)


def test_sliding_rule_is_that_of_the_free_body():
    # tensions of the tail-driven lift [N], hung 0.30 kg, chain 1.5 g a link, 13 balls of 20 g:
    scenario = lift()
    g = scenario.frame.gravity
    link = scenario.chain.link_mass + scenario.carriers.mass / 4
    hung, strand, balls = (0.30 + 4 * link) * g, 52 * link * g, 13 * 0.020 * g
    foot_empty, foot_full = 0.5 * (hung + balls), 0.5 * (hung - balls)
    bends = foot_empty + (foot_empty + strand) * 2 + foot_full
    rate, width = 1e-14, 4e-3
    rule = sliding_growth(scenario, rate, width, "pin on disk")
    expected = rate * bends * (math.pi / 4) / (2 * width * 0.010)
    assert rule.growth_per_turn == pytest.approx(expected, rel=1e-6)
    assert "pin on disk" in rule.text


def test_sliding_rule_scales_with_rate_and_width():
    one = sliding_growth(lift(), 1e-14, 4e-3, "a")
    other = sliding_growth(lift(), 3e-14, 2e-3, "a")
    assert other.growth_per_turn == pytest.approx(6.0 * one.growth_per_turn)


@pytest.mark.parametrize(
    "make",
    [
        lambda: GrowthRule(0.0, "bench"),
        lambda: GrowthRule(1e-6, "  "),
        lambda: measured_growth(0.01, 0.0, "bench"),
        lambda: sliding_growth(lift(), -1e-14, 4e-3, "bench"),
    ],
)
def test_a_rule_without_numbers_or_source_is_refused(make):
    with pytest.raises(CallError):
        make()
