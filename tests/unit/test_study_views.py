"""How studies are shown: terminal, plain data, map and page."""

from __future__ import annotations

import csv
import io
import json
import re

import numpy as np
import pytest
from rich.console import Console

from chainsim.report.study_tables import (
    drift_table,
    limit_sentences,
    limit_table,
    list_table,
    mend_table,
    proving_table,
    sweep_table,
    unsure_table,
)
from chainsim.report.sweep_map import line_in_cells, map_figure
from chainsim.report.sweep_page import closed_form_line, render_sweep, short_names
from chainsim.study.as_data import (
    drift_data,
    limit_data,
    mend_data,
    proving_data,
    sweep_data,
    unsure_data,
)
from chainsim.study.bench import Bench
from chainsim.study.engines import SerialEngine
from chainsim.study.export import export_csv, summary_unit
from chainsim.study.limit_estimates import estimate
from chainsim.study.limit_questions import question
from chainsim.study.limits import find_limit
from chainsim.study.maps import MapAxis
from chainsim.study.mend import mend
from chainsim.study.plan_reading import read_plan
from chainsim.study.proving import prove
from chainsim.study.step_check import Drift
from chainsim.study.sweeping import open_sweep
from chainsim.study.unsure import unsure
from tests.unit.study_lift import LIFT, lift

TASK = "tests.unit.study_lift:free_body"
PLAN = """\
format = 1
title = "Head or <tail>"
scenario = "lift.toml"
[[axis]]
name = "drive"
[[axis.choice]]
name = "head"
set = { "drive.sprocket" = "head" }
[[axis.choice]]
name = "tail"
[[axis]]
key = "sprocket.tail.mount.mass"
range = ["0.1 kg", "0.6 kg"]
count = 6
log = true
[[axis]]
key = "drive.chain_speed"
values = ["0.1 m/s", "0.4 m/s", "0.7 m/s"]
[engine]
kind = "serial"
"""


@pytest.fixture(scope="module")
def sweep(tmp_path_factory):
    folder = tmp_path_factory.mktemp("sweep")
    (folder / "lift.toml").write_text(LIFT)
    (folder / "plan.toml").write_text(PLAN)
    opened = open_sweep(read_plan(folder / "plan.toml"))
    opened.run(task=TASK)
    return opened


def shown(renderable) -> str:
    console = Console(file=io.StringIO(), width=200)
    console.print(renderable)
    return console.file.getvalue()


def bench(scenario=None, task=TASK):
    return Bench(scenario or lift(), engine=SerialEngine(), task=task)


def test_a_limit_is_told_in_sentences_and_as_data():
    with bench() as one:
        found = find_limit(question(lift(), "takeup"), one)
    beside = estimate(lift(), "takeup")
    said = limit_sentences(found, beside)
    assert re.match(r"It fails at 25\d(\.\d)? g and no longer at 25\d(\.\d)? g", said[0])
    assert said[1] == "What gives way: carrying strand taut."
    assert any(sentence.startswith("It holds with its reserve at 31") for sentence in said)
    assert any(sentence.startswith("Closed form: 254 g") for sentence in said)
    assert "fails" in shown(limit_table(found, beside))
    data = json.loads(json.dumps(limit_data(found, beside), allow_nan=False))
    assert data["unit"] == "kg"
    assert data["fails"]["bad"] < 0.254 < data["reserve"]["good"]
    assert data["gives_way"][0]["name"] == "carrying_strand_taut"


def test_a_limit_that_does_not_exist_is_told_as_such():
    scenario = lift().with_values({"drive.sprocket": "head"})
    with bench(scenario) as one:
        found = find_limit(question(scenario, "takeup"), one)
        nothing = limit_sentences(found, estimate(scenario, "takeup"))
        everywhere = find_limit(question(lift(), "takeup", "10 g", "100 g"), bench())
    assert nothing[0].startswith("Nothing gives way anywhere from")
    assert limit_sentences(everywhere, estimate(lift(), "takeup"))[0].startswith("It fails every")


def test_islands_are_told():
    with bench(task="tests.unit.study_lift:with_island") as one:
        found = find_limit(question(lift(), "speed"), one)
    assert any("islands" in s for s in limit_sentences(found, estimate(lift(), "speed")))


def test_a_mend_is_told_with_the_runs_that_prove_it():
    failing = lift().with_values({"sprocket.tail.mount.mass": "0.2 kg"})
    with bench(failing) as one:
        found = mend(failing, one, ("sprocket.tail.mount.mass",))
    text = shown(mend_table(found))
    assert "sprocket.tail.mount.mass: 200 g" in text
    assert found[0].proof[1].row.id in text
    assert mend_data(found)[0]["proof"][0]["outcome"] == "fails"
    assert "No single change" in shown(mend_table([]))


def test_unsure_values_are_told_with_what_to_measure_first():
    with bench(task="tests.unit.study_lift:link_mass_decides") as one:
        found = unsure(lift(), one, ["chain.link_mass", "chain.link_stiffness"])
    text = shown(unsure_table(found, {"chain.link_mass": "mass"}))
    assert "Measure first: chain.link_mass." in text
    assert "carrying strand taut fails at low (holds before)" in text
    assert json.dumps(unsure_data(found), allow_nan=False)


def test_a_proving_run_is_one_table():
    with bench(task="tests.unit.study_lift:frail_when_knocked") as one:
        proof = prove(lift(), one, ("steady", "knock"))
    text = shown(proving_table(proof))
    assert "steady" in text and "knock" in text and "fails" in text
    data = proving_data(proof)
    assert data["situations"] == {"run": ["steady", "knock"], "not_run": {}}
    assert data["worst"]["balls_stay_seated"]["situation"] == "knock"


def test_a_step_check_tells_what_turns():
    drifts = [
        Drift("rate_met", "s-1", 1.0, 1.01, 1.0125, 0.01, 2.0, ("holds",) * 3),
        Drift("links_hold", "N", None, None, None, None, None, ("holds", "holds", "fails")),
    ]
    text = shown(drift_table(drifts))
    assert "1.00% of its scale" in text
    assert "holds → holds → fails" in text
    assert drift_data(drifts)[0]["order"] == 2.0


def test_a_sweep_is_told_with_its_winner_and_why(sweep):
    text = shown(sweep_table(sweep))
    assert "36 of 36 runs are completed" in text
    assert "comes first: it holds" in text
    assert len(shown(list_table(sweep)).splitlines()) >= 36
    data = json.loads(json.dumps(sweep_data(sweep), allow_nan=False))
    assert data["finished"] == 36 and data["variants"][0]["place"] == 1


def test_the_map_of_a_sweep_has_the_closed_form_on_its_boundary(sweep):
    head, tail = sweep.maps()
    assert not closed_form_line(sweep, head)
    line = closed_form_line(sweep, tail)
    # The free body fails where the hung weight is below that of the balls: the line runs
    # between the last cell that fails and the first that does not, in every row but the top
    # one, where the speed fails by itself.
    assert tail.up.labels == ("0.1 m/s", "0.4 m/s", "0.7 m/s")
    for row in range(2):
        failing = tail.outcome[row] == "fails"
        edge = np.flatnonzero(~failing)[0]
        assert edge - 0.5 <= line[2 * row][0] <= edge + 0.5
    figure = map_figure(tail, line, "closed form")
    assert figure.axes[0].get_xlabel() == "sprocket.tail.mount.mass [kg]"
    words = [text.get_text() for text in figure.legends[0].get_texts()]
    assert words == ["holds", "close", "fails", "closed form"]


def test_a_line_is_placed_between_cells_by_value():
    side = MapAxis("m", ("1", "2", "4"), (1.0, 2.0, 4.0), "kg", log=True)
    points = line_in_cells([2.0, None, 2.0**1.5], side)
    assert points == [(1.5, 0.0), (1.5, 1.0), (2.0, 2.0), (2.0, 3.0)]
    assert line_in_cells([1.0], MapAxis("drive", ("a", "b"), None)) == []


def test_the_page_of_a_sweep_stands_alone(sweep, tmp_path):
    text = render_sweep(sweep, tmp_path / "sweep.html").read_text()
    assert "Head or &lt;tail&gt;" in text
    assert text.count("<img") == 2
    assert "http://" not in text.replace("http://www.w3.org", "")
    assert "balls stay seated" in text
    assert "What the model cannot see" in text


def test_the_page_of_an_ensemble_tells_rates_and_influences(tmp_path):
    (tmp_path / "lift.toml").write_text(LIFT)
    (tmp_path / "plan.toml").write_text(
        'format = 1\nscenario = "lift.toml"\nseed = 4\n'
        '[[axis]]\nkey = "balls.mass"\n'
        'distribution = { kind = "normal", mean = "20 g", deviation = "0.5 g" }\n'
        '[[axis]]\nkey = "chain.link_mass"\n'
        'distribution = { kind = "uniform", low = "0.99 g", high = "1.01 g" }\n'
        '[sample]\nkind = "indices"\ncount = 16\n[engine]\nkind = "serial"\n'
    )
    opened = open_sweep(read_plan(tmp_path / "plan.toml"))
    assert opened.run(task=TASK).computed == 64
    text = render_sweep(opened, tmp_path / "page.html").read_text()
    assert "Balls lost: 0 of 3200" in text
    assert "29,956 balls" in text
    assert "Which tolerance matters" in text
    # The ball mass scatters by 2.5 %, the link mass by 1 % of a tenth of the weight.
    matters = text.partition("Which tolerance matters")[2]
    assert matters.index("balls.mass") < matters.index("chain.link_mass")


def test_short_names_tell_axes_apart():
    names = ["sprocket.head.teeth", "sprocket.tail.teeth", "drive.chain_speed"]
    assert short_names(names) == ["head teeth", "tail teeth", "chain speed"]


def test_a_sweep_leaves_as_a_table_with_units(sweep, tmp_path):
    path = export_csv(sweep, tmp_path / "sweep.csv")
    lines = list(csv.DictReader(path.open(encoding="utf-8")))
    assert len(lines) == 36
    first = lines[0]
    assert first["drive"] == "head" and first["sprocket.tail.mount.mass"] == "0.1 kg"
    assert first["balls_stay_seated outcome"] == "holds"
    assert float(first["balls_stay_seated margin [N]"]) == pytest.approx(0.5)
    assert float(first["balls_ended [1]"]) == 50
    assert summary_unit("axle_load.tail") == "N" and summary_unit("ripple.2") == "1"


def test_runs_that_could_not_be_completed_are_told_with_a_limit():
    with bench() as one:
        found = find_limit(question(lift(), "carriers.every", "1", "400"), one, n_scan=5)
    said = limit_sentences(found, estimate(lift(), "carriers.every"))
    assert any("could not be completed and count as failing" in sentence for sentence in said)
