"""A scenario written with every value in place reads back to the identical one."""

import json
from dataclasses import dataclass

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chainsim.scenario import parse_scenario, read_scenario
from chainsim.scenario.write import si_text, toml_string
from chainsim.units import UNITS, to_si

from .scenario_texts import ALL_KEYS_FILE, BASE, SCENARIO_FILES


@pytest.mark.parametrize("file", [*SCENARIO_FILES, ALL_KEYS_FILE], ids=lambda file: file.stem)
def test_written_scenario_reads_back_identically(file):
    scenario = read_scenario(file)
    again = parse_scenario(scenario.resolved_toml())
    assert again.sha256 == scenario.sha256
    assert again.origins() == scenario.origins()
    assert again.resolved_toml() == scenario.resolved_toml()
    assert again.bench == scenario.bench


def test_a_change_to_a_written_scenario_is_given():
    again = parse_scenario(parse_scenario(BASE).resolved_toml())
    changed = again.with_values({"chain.link_damping": 0.15})
    assert again.origin("chain.link_damping").source == "kind"
    assert changed.origin("chain.link_damping") == ("given", 0.15, 0.15, 0.15, "")


def test_json_holds_values_in_si_and_origins():
    told = json.loads(parse_scenario(BASE).resolved_json())
    assert told["values"]["chain"]["pitch"] == 0.01
    assert told["values"]["sprocket"][1]["mount"]["mass"] == 0.3
    assert told["origins"]["chain.link_damping"]["source"] == "kind"


def test_hash_is_of_values_not_of_wording():
    text = BASE.replace('"10 mm"', '"1 cm"').replace("[drive]", "# comment\n[drive]")
    assert parse_scenario(text).sha256 == parse_scenario(BASE).sha256
    assert parse_scenario(BASE, overrides=["run.seed=2"]).sha256 != parse_scenario(BASE).sha256


KINDS = sorted(set(UNITS) - {"temperature", "fraction"})


@given(
    value=st.floats(allow_nan=False, allow_infinity=False, min_value=-1e9, max_value=1e9),
    kind=st.sampled_from(KINDS),
)
def test_a_written_number_is_the_same_float(value, kind):
    assert to_si(si_text(value, kind), kind) == value


@dataclass(frozen=True)
class Written:
    value: float
    kind: str
    text: str


@pytest.mark.parametrize(
    "case",
    [
        Written(0.018000000000000002, "length", "18 mm"),
        Written(0.15, "speed", "0.15 m/s"),
        Written(0.08726646259971647, "angle", "5 deg"),
        Written(0.1 + 0.2, "mass", "0.30000000000000004 kg"),
    ],
)
def test_written_numbers_are_short_where_they_can_be(case):
    assert si_text(case.value, case.kind) == case.text


@given(text=st.text())
def test_any_title_survives(text):
    title = text.encode("utf-8", "replace").decode()
    head = BASE.replace('"Test lift"', toml_string(title))
    assert parse_scenario(head).title == title
