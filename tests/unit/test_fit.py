"""A fit recovers what made synthetic bench data, as often as it says, and claims no more."""

from pathlib import Path

import numpy as np
import pytest

from chainsim.errors import CallError, ScenarioError
from chainsim.scenario import parse_scenario, read_scenario
from chainsim.study.fit import fit, fit_measurements
from chainsim.study.fit_forms import FORMS
from chainsim.study.fit_reading import parse_measurement, read_measurements
from tests.unit.fit_bench import (
    MOTOR,
    SCENARIO,
    TRUE,
    bounce_text,
    motor_text,
    pluck_text,
    scenario,
    stretch_text,
    table,
    tilt_text,
)

STIFF = SCENARIO.replace("40 kN/m", "63 kN/m")


def fitted(*texts, text=SCENARIO, **options):
    read = [parse_measurement(text, f"file{i}.csv") for i, text in enumerate(texts)]
    return fit_measurements(scenario(text), read, **options)


def covers(item, true: float) -> bool:
    return item.low <= true <= item.high


@pytest.mark.parametrize(("confidence", "least", "most"), [(0.95, 0.90, 0.99), (0.7, 0.58, 0.82)])
def test_motor_intervals_cover_at_their_stated_rate(confidence, least, most):
    # 40 sets of 4 intervals; a share of 160 at 70 % has a standard error of 3.6 %, and half as
    # much again since the four share their noise
    hits = []
    for seed in range(40):
        found = fitted(motor_text(np.random.default_rng(seed)), confidence=confidence).claimed
        hits += [covers(found[key], true) for key, true in MOTOR.items()]
    assert least <= np.mean(hits) <= most


def test_stiffness_from_a_stretch_is_covered_at_the_stated_rate():
    hits = 0
    for seed in range(10):
        text = stretch_text(np.random.default_rng(seed), length=0.1, noise=5e-6)
        result = fitted(text, confidence=0.8)
        hits += covers(result.claimed["chain.link_stiffness"], TRUE["chain.link_stiffness"])
    # of ten at 80 %, fewer than 5 come by chance once in 160, ten of ten once in 9
    assert 5 <= hits <= 10


@pytest.mark.parametrize("seed", [0, 1])
def test_a_let_go_load_tells_stiffness_and_damping(seed):
    found = fitted(bounce_text(np.random.default_rng(seed)), confidence=0.99).claimed
    for key in ("chain.link_stiffness", "chain.link_damping"):
        assert covers(found[key], TRUE[key]), key
    # a log of 20 um scatter over 1 mm of pull tells damping to better than 15 %
    assert found["chain.link_damping"].high < 1.3 * found["chain.link_damping"].low


def test_plucks_at_two_loads_tell_both_parts_of_joint_friction():
    rng = np.random.default_rng(3)
    result = fitted(
        pluck_text(rng, 1.0),
        pluck_text(rng, 4.0),
        text=STIFF,
        hold=["chain.link_stiffness"],
        confidence=0.99,
    )
    for key in ("chain.joint.moment", "chain.joint.friction", "chain.air_damping"):
        assert covers(result.claimed[key], TRUE[key]), key
    assert result.held == ("chain.link_stiffness",)


def test_tilts_under_one_load_do_not_tell_the_parts_of_joint_friction_apart():
    text = tilt_text(np.random.default_rng(1), loads=(2.0, 2.0, 2.0, 2.0))
    result = fitted(text)
    assert set(result.unknown) == {"chain.joint.moment", "chain.joint.friction"}
    assert "apart from chain.joint.friction" in result.unknown["chain.joint.moment"].why
    assert result.pairs[0].correlation < -0.99
    held = fitted(text, hold=["chain.joint.moment"])
    assert set(held.claimed) == {"chain.joint.friction"}


def test_torque_behind_a_gear_is_not_told_apart_from_its_efficiency():
    text = motor_text(np.random.default_rng(0), shaft="sprocket")
    result = fitted(text)
    keys = {"drive.motor.stall_torque", "drive.motor.gear_efficiency"}
    assert set(result.unknown) == keys
    assert (
        "apart from drive.motor.gear_efficiency" in result.unknown["drive.motor.stall_torque"].why
    )
    assert "drive.motor.gear_efficiency" not in result.scenario_text().split("[bench]")[1]
    held = fitted(text, hold=["drive.motor.gear_efficiency"], confidence=0.99)
    assert covers(held.claimed["drive.motor.stall_torque"], MOTOR["drive.motor.stall_torque"])


def test_readings_without_a_pattern_are_not_claimed():
    rng = np.random.default_rng(5)
    noise = table(
        "motor", {"shaft": "motor"}, "torque [mN m], speed [rad/s]",
        np.linspace(0.0, 20.0, 9), rng.uniform(100.0, 600.0, 9),
    )  # fmt: skip
    result = fitted(noise)
    assert not result.claimed
    assert "not follow" in result.unknown["drive.motor.stall_torque"].why
    assert result.scenario_text() == SCENARIO


def test_one_wild_reading_does_not_carry_the_fit_away():
    lines = motor_text(np.random.default_rng(0)).splitlines()
    cells = lines[6].split(",")
    lines[6] = ",".join([cells[0], str(float(cells[1]) * 0.5), cells[2]])
    found = fitted("\n".join(lines), confidence=0.99).claimed
    assert covers(found["drive.motor.no_load_speed"], MOTOR["drive.motor.no_load_speed"])
    # plain least squares would be 5 % off
    assert found["drive.motor.no_load_speed"].value == pytest.approx(600.0, rel=0.02)


def test_counted_losses_are_compared_by_exact_intervals():
    text = table("losses", {}, "speed [m/s], fed, lost", [0.1, 0.4], [100, 100], [1, 98])

    def counter(lift):
        return (40, 0) if lift.drive.chain_speed < 0.3 else (40, 20)

    result = fitted(text, counter=counter)
    slow, fast = result.counts
    # 1 of 100 and 98 of 100 at 95 %: scipy.stats.binomtest(...).proportion_ci("exact")
    assert (slow.low, slow.high) == pytest.approx((0.000253146033, 0.0544593854), rel=1e-6)
    assert (fast.low, fast.high) == pytest.approx((0.929616068, 0.997568663), rel=1e-6)
    assert slow.agrees
    assert not fast.agrees
    assert not result.parameters
    assert "contradict" in result.text()
    assert [row["agrees"] for row in result.as_json()["losses"]] == [True, False]


def test_losses_need_balls():
    without = SCENARIO.split("[carriers]")[0]
    text = table("losses", {}, "speed [m/s], fed, lost", [0.1], [100], [1])
    with pytest.raises(ScenarioError, match="no balls"):
        fitted(text, text=without, counter=lambda lift: (1, 0))


def test_a_motor_file_needs_a_motor():
    head, tail = SCENARIO.split('kind = "motor"\n')
    tail = tail[tail.index("\n") :]
    without = f'{head}chain_speed = "0.1 m/s"\n{tail}'
    with pytest.raises(ScenarioError, match=r"file0.csv: kind: found motor; .*no drive.motor"):
        fitted(motor_text(np.random.default_rng(0)), text=without)


def test_a_piece_shorter_than_three_links_is_refused():
    text = table("stretch", {"length": "18 mm"}, "load [N], growth [mm]", [1, 2, 3], [1, 2, 3])
    with pytest.raises(ScenarioError, match=r"length: found 18 mm; at least 3 links"):
        fitted(text)


def test_calls_that_cannot_work_are_refused(tmp_path):
    with pytest.raises(CallError, match="one file"):
        fit(scenario(), [])
    with pytest.raises(CallError, match=r"confidence is 1\.5"):
        fit(scenario(), ["a.csv"], confidence=1.5)
    with pytest.raises(CallError, match=r"'chain\.pitch' cannot be held"):
        fit(scenario(), ["a.csv"], hold=["chain.pitch"])
    with pytest.raises(ScenarioError, match=r"missing.csv: cannot be read"):
        fit(scenario(), [tmp_path / "missing.csv"])


def test_the_examples_are_read_and_tell_their_motor():
    folder = Path(__file__).parents[2] / "scenarios"
    measurements = read_measurements(sorted((folder / "bench").glob("*.csv")))
    assert {measurement.kind for measurement in measurements} == set(FORMS)
    result = fit(read_scenario(folder / "motor-jam.toml"), [folder / "bench" / "motor.csv"])
    # made with 18.6 mN m, beside the 20 mN m that the scenario states
    assert covers(result.claimed["drive.motor.stall_torque"], 18.6e-3)
    read = parse_scenario(result.scenario_text())
    assert read.origin("drive.motor.stall_torque").source == "bench"
