"""Measurement files are read with their units, and refused with file, line and column."""

import re

import numpy as np
import pytest

from chainsim.errors import ScenarioError
from chainsim.study.fit_reading import parse_measurement, read_measurements

STRETCH = """\
# our own invention; loads from the kitchen scale
# kind = stretch
# length = 1 m
load [g], growth [mm]
100, 0.2
200, 0.4
300, 0.6
"""
DECAY = "# kind = decay\n# length = 0.2 m\n# load = 1 N\n# motion = along\n"
DECAY += "time [ms], displacement [mm]\n"
DECAY += "".join(f"{2 * i}, {5 - 0.1 * i:.1f}\n" for i in range(25))
LOSSES = "# kind = losses\nspeed [mm/s], fed, lost\n100, 50, 1\n"


def problems(text: str):
    with pytest.raises(ScenarioError) as caught:
        parse_measurement(text, "bench.csv")
    return [str(problem) for problem in caught.value.problems]


def test_values_are_si_and_a_mass_is_a_load():
    read = parse_measurement(STRETCH)
    assert read.stated["length"] == 1.0
    assert read.columns["growth"] == pytest.approx([2e-4, 4e-4, 6e-4])
    assert read.force("load", 9.80665) == pytest.approx([0.980665, 1.96133, 2.941995])
    newtons = parse_measurement(STRETCH.replace("load [g]", "load [N]"))
    assert newtons.force("load", 9.80665) == pytest.approx([100.0, 200.0, 300.0])
    assert read.n_rows == 3


def test_columns_may_stand_in_any_order():
    swapped = DECAY.replace("time [ms], displacement [mm]", "displacement [m], time [s]")
    rows = [line.split(",") for line in DECAY.splitlines()[5:]]
    body = "".join(f"{float(d) / 1e3:g}, {float(t) / 1e3:g}\n" for t, d in rows)
    other = parse_measurement("\n".join(swapped.splitlines()[:5]) + "\n" + body)
    np.testing.assert_allclose(other.columns["time"], parse_measurement(DECAY).columns["time"])


@pytest.mark.parametrize(
    ("text", "says"),
    [
        (STRETCH.replace("[mm]", ""), r"bench.csv:4: growth: found 'growth'; a unit in square br"),
        (STRETCH.replace("[mm]", "[mN]"), r"bench.csv:4: growth: .*is a force, but a length is d"),
        (STRETCH.replace("[g]", "[gramm]"), r"bench.csv:4: load: .*unknown unit 'gramm'"),
        (STRETCH.replace("1 m\n", "1\n"), r"bench.csv:3: length: '1' has no unit"),
        (STRETCH.replace("# length = 1 m\n", ""), r"bench.csv: length: a comment line .* is due"),
        (STRETCH.replace("0.4", ""), r"bench.csv:6: growth: found an empty cell; a gap"),
        (STRETCH.replace("0.4", "0,4"), r"bench.csv:6: found 3 values; 2 values are due"),
        (STRETCH.replace("0.4", "few"), r"bench.csv:6: growth: found 'few'; a number is due"),
        (STRETCH.replace("0.4", "-0.4"), r"bench.csv:6: growth: .*must not be negative"),
        (STRETCH.replace("200,", "\n200,"), r"bench.csv:6: found an empty line; a gap"),
        (STRETCH.replace("growth [", "grwth ["), r"bench.csv:4: grwth: .*did you mean 'growth'"),
        (STRETCH.replace("growth [", "load ["), r"bench.csv:4: load: .*there twice"),
        (STRETCH.replace("stretch", "strech"), r"bench.csv:2: kind: .*did you mean 'stretch'"),
        (STRETCH.replace("# kind = stretch\n", ""), r"bench.csv: kind: a comment line"),
        (STRETCH.replace("# len", "# width = 3 mm\n# len"), r"bench.csv:3: width: .*unknown here"),
        (STRETCH.replace("300, 0.6\n", ""), r"bench.csv: found 2 rows; at least 3 rows"),
        (STRETCH.split("load [")[0], r"bench.csv: found no table"),
        (DECAY.replace("\n4,", "\n2,"), r"bench.csv:8: time: found 0.002 s; .*there twice"),
        (DECAY.replace("\n4,", "\n1,"), r"bench.csv:8: time: found 0.001 s; time runs backward"),
        (DECAY.replace("4, 4.8\n", ""), r"bench.csv:8: time: .*a gap of 0.004 s, where rows st"),
        (DECAY.replace("\n0,", "\n-2,"), r"bench.csv:6: time: .*counts from the letting go"),
        (DECAY.replace("along", "up"), r"bench.csv:4: motion: found 'up'; must be along or acr"),
        (LOSSES.replace("50", "50.5"), r"bench.csv:3: fed: found '50.5'; a whole number is due"),
        (LOSSES.replace("fed", "fed [g]"), r"bench.csv:2: fed: .*a count has no unit"),
        (LOSSES.replace(" 1\n", " 51\n"), r"bench.csv:3: lost: found 51 of 50; no more balls"),
    ],
)
def test_faults_name_file_line_and_column(text, says):
    found = problems(text)
    assert any(re.match(says, problem) for problem in found), found


def test_all_faults_of_all_files_come_at_one_time(tmp_path):
    first, second = tmp_path / "a.csv", tmp_path / "b.csv"
    first.write_text(STRETCH.replace("[mm]", "").replace("1 m\n", "1\n"), encoding="utf-8")
    second.write_bytes(b"# kind = stretch\n\xff\n")
    with pytest.raises(ScenarioError) as caught:
        read_measurements([first, second])
    lines = [(problem.file, problem.line) for problem in caught.value.problems]
    assert lines == [(str(first), 3), (str(first), 4), (str(second), 2)]


def test_a_byte_order_mark_is_passed_over(tmp_path):
    path = tmp_path / "marked.csv"
    path.write_text("\ufeff" + STRETCH, encoding="utf-8")
    assert read_measurements([path])[0].kind == "stretch"
