"""Fitted values go into the user's own file: comments stay, intervals stand beside them."""

import json

import pytest

from chainsim.errors import CallError
from chainsim.scenario import parse_scenario
from chainsim.study.fit_claims import Fitted, Pair
from chainsim.study.fit_result import FitResult
from tests.unit.fit_bench import SCENARIO, scenario

STIFFNESS = Fitted(
    "chain.link_stiffness", "stiffness", "stiffness", 6.3e4, 6.1e4, 6.5e4, "", ("dir/pull.csv",)
)
FRICTION = Fitted(
    "chain.joint.friction", "friction", "fraction", 0.26, 0.24, 0.28, "", ("tilt.csv",)
)
DAMPING = Fitted(
    "chain.link_damping", "damping", "fraction", None, None, None, "too faint", ("pull.csv",)
)
SPEED = Fitted(
    "drive.motor.no_load_speed", "speed", "angular_speed", 600.0, 590.0, 610.0, "", ("motor.csv",)
)


def result(*parameters, text=SCENARIO) -> FitResult:
    pair = Pair("chain.joint.moment", "chain.joint.friction", -0.9)
    return FitResult(scenario(text), 0.95, parameters, (), (pair,), (), (), ("take care",))


def test_values_and_intervals_read_back_and_comments_stay():
    text = result(STIFFNESS, FRICTION, DAMPING, SPEED).scenario_text()
    assert 'link_stiffness = "63 kN/m"       # a guess from the shelf' in text
    assert 'title = "A lift to be matched to the bench"   # our own invention' in text
    read = parse_scenario(text)
    assert read.chain.link_stiffness == 6.3e4
    assert read.chain.joint.pin_radius == 1.2e-3
    assert read.drive.motor.no_load_speed == pytest.approx(600.0, rel=1e-3)
    origin = read.origin("chain.link_stiffness")
    assert (origin.source, origin.low, origin.high) == ("bench", 6.1e4, 6.5e4)
    assert "pull.csv" in origin.note and "95%" in origin.note
    assert read.origin("chain.joint.friction").source == "bench"
    assert read.origin("chain.link_damping").source == "kind"


def test_a_stated_stretch_gives_way_to_the_fitted_stiffness():
    stretch = 'stretch = { load = "5 N", length = "1 m", growth = "3 mm" }'
    text = SCENARIO.replace('link_stiffness = "40 kN/m"', stretch)
    read = parse_scenario(result(STIFFNESS, text=text).scenario_text())
    assert read.chain.link_stiffness == 6.3e4


def test_bench_entries_are_renewed():
    text = SCENARIO + '\n[bench]\n"chain.link_stiffness" = { low = "1 kN/m", high = "9 MN/m" }\n'
    read = parse_scenario(result(STIFFNESS, text=text).scenario_text())
    assert read.origin("chain.link_stiffness").low == 6.1e4


def test_a_missing_table_is_made():
    text = SCENARIO.replace('joint = { pin_radius = "1.2 mm" }\n', "")
    read = parse_scenario(result(FRICTION, text=text).scenario_text())
    assert read.chain.joint.friction == 0.26


def test_text_and_data_tell_claimed_from_unknown():
    found = result(STIFFNESS, DAMPING)
    text = found.text()
    assert "chain.link_stiffness = 63 kN/m, between 61 kN/m and 65 kN/m" in text
    assert "chain.link_damping: too faint" in text
    assert "chain.joint.moment and chain.joint.friction: -0.90" in text
    assert "note: take care" in text
    data = json.loads(json.dumps(found.as_json()))
    assert data["parameters"][0] == {
        "key": "chain.link_stiffness", "value": 6.3e4, "low": 6.1e4, "high": 6.5e4,
        "unit": "N/m", "claimed": True, "why": None, "files": ["dir/pull.csv"],
    }  # fmt: skip
    assert data["parameters"][1]["value"] is None
    assert data["parameters"][1]["why"] == "too faint"


def test_no_file_is_overwritten_unasked(tmp_path):
    path = tmp_path / "fitted.toml"
    assert result(STIFFNESS).write(path) == path
    with pytest.raises(CallError, match="is there already"):
        result(STIFFNESS).write(path)
    result(FRICTION).write(path, force=True)
    assert "joint" in path.read_text(encoding="utf-8")
    with pytest.raises(CallError, match="cannot be written"):
        result(STIFFNESS).write(tmp_path / "nowhere" / "fitted.toml")
