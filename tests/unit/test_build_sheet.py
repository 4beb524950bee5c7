"""The build sheet: its figures agree with the closed forms and the recording it is made from."""

import csv
import io
import math
import re
from datetime import date
from html.parser import HTMLParser

import numpy as np
import pytest

from chainsim import closed_forms as cf
from chainsim.analysis.drive import duty
from chainsim.analysis.sized import bounce_frequency, starting_pull
from chainsim.errors import LayoutError
from chainsim.model.lift import build_lift
from chainsim.report.build import build_csv, render_build, sheet_parts
from chainsim.report.build_case import case_of
from chainsim.report.build_line import SIMULATED, UNKNOWN
from chainsim.report.build_setting import takeup_part
from chainsim.scenario import parse_scenario
from chainsim.study.wear import WearStep, WearStudy
from tests.synthetic import synthetic_recording

DAY = date(2026, 5, 4)

HUNG = """\
format = 1
title = "Foyer <wall> & stairs"

[chain]
kind = "moulded_sturdy"
pitch = "10 mm"
link_mass = "1 g"
link_stiffness = "50 kN/m"
allowable_tension = "40 N"
links = 112

[[sprocket]]
name = "head"
teeth = 8
center = ["10 mm", "520 mm"]

[[sprocket]]
name = "tail"
teeth = 8
center = ["10 mm", "0 mm"]
mount = { kind = "hung", mass = "0.30 kg" }

[drive]
sprocket = "tail"
kind = "speed"
chain_speed = "0.04 m/s"

[carriers]
every = 4
mass = "2 g"

[balls]
diameter = "16 mm"
mass = "20 g"
feed = "every pocket"
"""


def hung(text: str = HUNG, **values):
    scenario = parse_scenario(text, "foyer.toml")
    return scenario.with_values(values) if values else scenario


def lines_of(source) -> dict:
    """Every line of a sheet by its subject and item; ``tail: `` and the like are kept."""
    parts = sheet_parts(case_of(source))
    return {(line.subject, line.item): line for part in parts for line in part.lines}


@pytest.fixture(scope="module")
def recording():
    return synthetic_recording()


@pytest.fixture(scope="module")
def ran(recording):
    return lines_of(recording)


@pytest.fixture(scope="module")
def drawn():
    return lines_of(hung())


# --- parts to order -----------------------------------------------------------------------------


def test_links_carriers_and_their_spares_are_counted(drawn):
    assert drawn["", "links in the loop"].value == 112
    # a twentieth of 112 is 5.6: 6, and whole spacings of 4 make it 8
    assert drawn["", "spare links"].value == 8
    assert drawn["", "chain links"].value == 120
    assert drawn["", "carriers"].value == 28
    assert drawn["", "spare carriers"].value == 2
    assert drawn["", "length of the loop, new"].value == pytest.approx(1.120)


def test_sprocket_table_is_that_of_the_polygon(drawn):
    # pitch diameter p / sin(180°/z): ASME B29.1 (checked against its tables in tests/validation)
    diameter = 10e-3 / math.sin(math.pi / 8)
    for name in ("head", "tail"):
        assert drawn[name, "pitch circle, through the pins"].value == pytest.approx(diameter)
        assert drawn[name, "at the seats, across the root"].value == pytest.approx(diameter - 5e-3)


def test_sprockets_cut_alike_share_one_drawing_and_others_do_not():
    parts = {part.id: part for part in sheet_parts(case_of(hung()))}
    assert [caption for caption, _ in parts["sprockets"].drawings] == ["To cut: head and tail"]
    text = HUNG.replace(
        'teeth = 8\ncenter = ["10 mm", "0 mm"]', 'teeth = 9\ncenter = ["10 mm", "0 mm"]'
    )
    parts = {part.id: part for part in sheet_parts(case_of(hung(text)))}
    assert [caption for caption, _ in parts["sprockets"].drawings] == [
        "To cut: head",
        "To cut: tail",
    ]


def test_pocket_corners_are_those_that_are_simulated(drawn):
    outline = build_lift(hung()).pocket.outline
    for number, (a, b) in enumerate(outline, 1):
        told = drawn["", f"inner corner {number}, (a, b)"].value.replace("−", "-")
        numbers = [float(n) for n in re.findall(r"-?\d+\.\d+", told)]
        assert numbers == pytest.approx([1e3 * a, 1e3 * b], abs=0.006)


def test_no_carrier_reaches_beyond_the_swept_radius():
    lift = build_lift(hung())
    told = lines_of(hung())["", "radius that carriers sweep round head"].value
    # laid on the wheel, link by link: every corner of the pocket's material stays inside it
    wheel, reach = lift.wheels[0], 0.0
    step = 2.0 * math.pi / wheel.teeth
    for seat in range(wheel.teeth):
        pins = [
            wheel.radius * np.array([math.cos(a), math.sin(a)])
            for a in (seat * step, (seat + 1) * step)
        ]
        along = (pins[1] - pins[0]) / np.linalg.norm(pins[1] - pins[0])
        outward = np.array([along[1], -along[0]])
        for a, b in lift.pocket.spine:
            reach = max(reach, float(np.hypot(*(pins[0] + a * along + b * outward))))
    assert reach <= told <= reach + 2.0 * lift.pocket.half_wall


# --- take-up ------------------------------------------------------------------------------------


def test_slack_mass_is_the_weight_of_the_balls_less_chain_on_the_wheel(drawn):
    # tail-driven: free body of the hung unit, T_carrying = (W − W_balls)/2 at the foot, where W is
    # what hangs and the chain on its wheel (8 half-wrapped links of 1.5 g: 4 links)
    balls = 0.520 / 0.040 * 0.020
    wheel = 4 * (1e-3 + 2e-3 / 4)
    slack = drawn["", "tail: a strand goes slack below"].value
    assert slack == pytest.approx(balls - wheel, rel=1e-6)
    setting = drawn["", "tail: hung mass"]
    assert setting.value == pytest.approx(0.300)
    assert setting.low == pytest.approx(2.0 * slack)
    assert "OUTSIDE ITS RANGE" in setting.note


def test_heaviest_mass_brings_links_to_four_fifths_of_their_strength():
    line = next(line for line in takeup_part(case_of(hung())).lines if "come near" in line.item)
    heavier = case_of(hung(**{"sprocket.tail.mount.mass": line.value})).closed
    assert heavier.running.most + starting_pull(heavier) == pytest.approx(0.8 * 40.0, rel=1e-6)


def test_masses_to_keep_away_from_bounce_at_the_ends_of_the_guard_band():
    scenario = hung(**{"drive.chain_speed": 0.09})
    told = lines_of(scenario)["", "tail: masses to keep away from"].value
    low, high = (float(n) * 1e-3 for n in re.findall(r"([\d.]+) g", told))
    for mass, share in ((low, 1.2), (high, 0.8)):
        sized = case_of(
            hung(**{"drive.chain_speed": 0.09, "sprocket.tail.mount.mass": mass})
        ).closed
        assert bounce_frequency(sized) == pytest.approx(share * 9.0, rel=3e-3)


def test_travel_for_wear_is_half_of_the_growth_of_the_loop(drawn):
    # two plumb strands: the axle goes down by half of what the loop grows
    assert drawn["", "tail: change by wear"].value == pytest.approx(-0.5 * 0.03 * 1.120)
    stated = lines_of(hung(**{"limits.wear": 0.02}))
    assert stated["", "tail: change by wear"].value == pytest.approx(-0.5 * 0.02 * 1.120)
    assert stated["", "tail: lowest travel to allow for"].value == pytest.approx(-0.0112)
    # and so does the chain that is laid out grown, but for the links that lie in their seats
    laid = build_lift(hung(**{"chain.growth": 0.02})).laid.wheel_center[1, 1]
    assert laid == pytest.approx(-0.5 * 0.02 * (1.120 - 0.080), rel=1e-6)


def test_travel_for_temperature_goes_both_ways():
    text = HUNG.replace(
        "[chain]",
        '[frame]\ntemperature = { built = "20 degC", low = "5 degC", high = "40 degC" }\n[chain]',
    )
    scenario = hung(text)
    found, alpha = lines_of(scenario), scenario.chain.expansion
    assert found["", "tail: change when warm"].value == pytest.approx(-0.5 * alpha * 1.12 * 20)
    assert found["", "tail: change when cold"].value == pytest.approx(0.5 * alpha * 1.12 * 15)


def test_a_stop_that_wear_reaches_is_called_short_with_its_growth():
    text = HUNG.replace('mass = "0.30 kg" }', 'mass = "0.30 kg", stops = ["-5.6 mm", "5 mm"] }')
    line = lines_of(hung(text))["", "tail: low stop"]
    # 3 % of growth take 16.8 mm; 5.6 mm are a third of it
    assert "11.2 mm SHORT" in line.note and "at 1 % growth" in line.note


def test_simulated_travel_is_the_recorded_one(recording, ran):
    travel = recording["mounts/travel"][:, 1]
    assert ran["", "tail: lowest travel in running"].value == pytest.approx(travel.min())
    assert ran["", "tail: highest travel in running"].value == pytest.approx(travel.max())
    assert ran["", "tail: lowest travel in running"].source == SIMULATED
    low = ran["", "tail: lowest travel to allow for"].value
    assert low == pytest.approx(min(travel.min(), 0.0) - 0.5 * 0.03 * 0.600)


# --- drive and shaft ----------------------------------------------------------------------------


def test_torques_are_those_of_the_recording(recording, ran):
    load = duty(recording)
    assert ran["", "mean torque on it, running"].value == pytest.approx(abs(load.mean_torque))
    assert ran["", "r.m.s. torque, running"].value == pytest.approx(load.rms_torque)
    assert ran["", "peak torque"].value == pytest.approx(load.peak_torque)
    lasting = ran["", "gearmotor: continuous torque of at least"].value
    assert 0.8 * lasting == pytest.approx(load.rms_torque)


def test_without_a_run_torques_are_closed_forms_and_say_so(drawn):
    line = drawn["", "mean torque on it, running"]
    # T = P/ω: lifting 13 balls of 20 g a strand at 40 mm/s, and little for the bearings
    lifting = 0.520 / 0.040 * 0.020 * 9.80665 * (10e-3 * 8 / (2 * math.pi))
    assert lifting < line.value < 1.2 * lifting
    assert "NOT SIMULATED" in line.source
    assert drawn["", "r.m.s. torque, running"].source == UNKNOWN


SHAFT = (
    HUNG
    + """
[drive.shaft]
length = "1.2 m"
diameter = "6 mm"
material = "steel"
supports = 4
"""
)


def test_shaft_agrees_with_the_beam_formulas():
    found = lines_of(hung(SHAFT))
    rate = found["", "speed of the driven sprocket"].value
    span = found["", "shaft: distance of the supports"].value
    assert span == pytest.approx(0.4)
    whirl = cf.whirl_speed(6e-3, 0.4, 205e9, 7850.0)
    assert found["", "shaft: first critical speed over running speed"].value == pytest.approx(
        whirl / rate
    )
    # deflection of a beam under a center load F L³/(48 E I), Shigley 9th ed. table A-9 (from
    # memory): three supports 0.4 m apart, the middle one off by δ
    offset = found["", "shaft: each support in line within ±"].value
    inertia = math.pi * 6e-3**4 / 64
    force = 48 * 205e9 * inertia * offset / 0.8**3
    torque = found["", "mean torque on it, running"].value
    assert 2 * force * 0.1 * 3e-3 == pytest.approx(0.05 * torque)


def test_a_push_on_the_bearing_costs_friction_at_the_radius_of_the_shaft():
    line = lines_of(hung(SHAFT))["", "torque that a push of 10 N on the motor's bearing costs"]
    assert line.value == pytest.approx(0.1 * 10.0 * 3e-3)


@pytest.mark.parametrize(
    ("keys", "word"),
    [
        ('polarity = "rectified"', "forward"),
        ("backstop = true", "stands"),
        ("overrunning = true", "not driven"),
        ("", "BACKWARD"),
    ],
)
def test_reversed_supply_is_told_by_how_the_drive_is_built(keys, word):
    text = HUNG.replace('kind = "speed"\n', f'kind = "speed"\n{keys}\n')
    line = lines_of(hung(text))["", "with the supply reversed"]
    assert word in line.value
    assert line.source == UNKNOWN


# --- checks -------------------------------------------------------------------------------------


def test_a_turn_of_the_chain_takes_its_length_by_its_speed(ran):
    line = ran["", "time of one turn of the chain, one carrier watched"]
    assert line.value == pytest.approx(0.600 / 0.15, rel=1e-3)
    assert line.low < line.value < line.high


def test_a_marked_link_returns_to_its_tooth_after_whole_turns():
    # 112 links on 9 teeth: the least common multiple is 1008 links, nine turns
    text = HUNG.replace(
        'teeth = 8\ncenter = ["10 mm", "0 mm"]', 'teeth = 9\ncenter = ["10 mm", "0 mm"]'
    )
    item = "turns of the chain until a marked link is on its marked tooth again"
    assert lines_of(hung(text))["", item].value == 9


def test_proving_count_is_the_exact_rule_for_no_failure(drawn):
    # 0.99^299 = 0.0495: rule of three, exact form
    assert drawn["", "balls to run in a row with none lost"].value == 299


def test_every_expected_value_lies_in_its_band(ran, drawn):
    for line in (*ran.values(), *drawn.values()):
        if isinstance(line.value, str) or not line.is_known:
            continue
        if line.low is not None and "hung mass" not in line.item:
            assert line.low <= line.value * (1 + 1e-9) + 1e-12, line.item
        if line.high is not None and "hung mass" not in line.item:
            assert line.value <= line.high * (1 + 1e-9) + 1e-12, line.item


# --- head, stamps, files ------------------------------------------------------------------------


def stamps_of(source) -> dict:
    rows = csv.reader(io.StringIO(build_csv(source, day=DAY)))
    found: dict = {}
    for row in rows:
        if row[0] == "stamp":
            found.setdefault(row[2], []).append(row[-1])
    return found


def test_what_was_not_run_is_not_for_building():
    assert set(stamps_of(hung())) == {"NOT FOR BUILDING", "NOT SIMULATED"}


def test_a_run_that_holds_is_stamped_by_the_situations_it_lacks(recording):
    found = stamps_of(recording)
    assert set(found) == {"NOT SIMULATED"}
    assert "jam" in found["NOT SIMULATED"][0] and "steady" not in found["NOT SIMULATED"][0]


def test_a_failing_ball_finding_is_not_for_building():
    found = stamps_of(synthetic_recording(spilled_ball=3))
    assert any("Balls stay seated: fails" in reason for reason in found["NOT FOR BUILDING"])


class Page(HTMLParser):
    """Collects the texts of a page, and what it would load from elsewhere."""

    def __init__(self):
        super().__init__()
        self.words, self.loaded = [], []

    def handle_data(self, data):
        self.words.append(data.replace("\u00a0", " ").strip())

    def handle_starttag(self, tag, attrs):
        names = dict(attrs)
        for name in ("src", "href", "xlink:href"):
            value = names.get(name) or ""
            if value and not value.startswith(("#", "data:")):
                self.loaded.append(value)


def test_page_and_csv_tell_the_same_numbers(recording, tmp_path):
    page, table = render_build(recording, tmp_path / "sheet.html", revision="B", day=DAY)
    parser = Page()
    parser.feed(page.read_text(encoding="utf-8"))
    assert not parser.loaded
    words = set(parser.words)
    rows = list(csv.reader(io.StringIO(table.read_text(encoding="utf-8"))))
    assert {len(row) for row in rows} == {9}
    for _part, _of, item, value, unit, *_ in rows[1:]:
        if item and unit and value != "–" and not value.startswith("NOT"):
            assert f"{value} {unit}".replace("-", "−") in {w.replace("-", "−") for w in words}, item
    assert "B" in words and "2026-05-04" in words


def test_head_has_hash_view_and_blanks(tmp_path):
    scenario = hung()
    page, _ = render_build(scenario, tmp_path / "sheet.html", day=DAY)
    text = page.read_text(encoding="utf-8")
    assert scenario.sha256 in text
    assert "Foyer &lt;wall&gt; &amp; stairs" in text and "<wall>" not in text
    for who in ("drawn by", "checked by", "released by", "built by", "commissioned by"):
        assert who in text


def test_seen_from_behind_places_and_turning_are_mirrored():
    front, back = (
        lines_of(hung()),
        lines_of(hung(HUNG.replace("title", 'view = "back"\ntitle', 1))),
    )
    assert front["head", "place on the drawing"].value == "10.0, 520.0 mm"
    assert back["head", "place on the drawing"].value == "−10.0, 520.0 mm"
    item = "tail, driven, turns"
    assert front["", item].value == "counterclockwise, seen from the front"
    assert back["", item].value == "clockwise, seen from behind"


def test_hours_of_life_are_nowhere(drawn):
    words = " ".join(f"{line.item} {line.text} {line.note}" for line in drawn.values())
    assert not re.search(r"\bhours?\b", words)


def test_an_impossible_layout_is_refused():
    with pytest.raises(LayoutError):
        case_of(hung(**{"chain.links": 60, "sprocket.tail.mount.kind": "fixed"}))


def test_growth_of_first_failure_is_taken_from_a_wear_study():
    item = "growth at which a finding first fails"
    blank = {"travel": {}, "travel_used": {}, "ride_height": {}, "ride_of_growth": {}}
    steps = tuple(
        WearStep(
            growth, 1.12 * growth, **blank, fails=fails, close=(), outcome=outcome, stop_reason=""
        )
        for growth, fails, outcome in ((0.01, (), "holds"), (0.02, ("links_hold",), "fails"))
    )
    for study, value in (
        (WearStudy(steps, "", 0.03), 0.02),
        (WearStudy(steps[:1], "", 0.03), None),
    ):
        parts = sheet_parts(case_of(hung(), study))
        line = next(line for part in parts for line in part.lines if line.item == item)
        assert line.source == SIMULATED
        assert line.value == (value if value is not None else "none that was run")
    assert lines_of(hung())["", item].source == UNKNOWN


def test_a_ramp_is_asked_of_the_controller_of_a_set_speed():
    line = lines_of(hung(**{"drive.ramp": 0.8}))["", "starts and stops on a ramp of"]
    assert line.value == pytest.approx(0.8) and "controller" in line.note
