"""Sizing sheet: free bodies against published closed forms, and advice on the real fault."""

import math

import numpy as np
import pytest

from chainsim import closed_forms as cf
from chainsim.analysis.advice import advice
from chainsim.analysis.free_body import free_body, load_of
from chainsim.analysis.sizing import size_up, sizing_sheet
from chainsim.model.tangents import route
from chainsim.model.wheels import chain_pitch, down_of, wheels_of
from chainsim.scenario import parse_scenario

LIFT = """
format = 1
title = "made up for a test"
[chain]
kind = "moulded_sturdy"
[[sprocket]]
name = "head"
teeth = 8
center = ["0 mm", "520 mm"]
[[sprocket]]
name = "tail"
teeth = 8
center = ["0 mm", "0 mm"]
mount = { kind = "hung", mass = "0.30 kg" }
[drive]
sprocket = "tail"
chain_speed = "0.12 m/s"
[carriers]
every = 4
mass = "2 g"
[balls]
diameter = "16 mm"
feed = "every pocket"
"""


def lift(**changes):
    """Return a scenario with dotted keys changed, dots written as double underscores."""
    scenario = parse_scenario(LIFT)
    if changes:
        scenario = scenario.with_values({k.replace("__", "."): v for k, v in changes.items()})
    path = route(wheels_of(scenario), chain_pitch(scenario), down_of(scenario))
    return scenario, path


def sheet(n_links=112, **changes):
    scenario, path = lift(**changes)
    return {row.name: row for row in sizing_sheet(scenario, path, n_links)}


@pytest.mark.parametrize("driven", ["head", "tail"])
@pytest.mark.parametrize("mass", ["0.05 kg", "0.30 kg", "1 kg"])
def test_free_body_agrees_with_the_closed_form_of_a_hung_loop(driven, mass):
    # checks D5 a, b: head-driven W/2 at both feet, tail-driven (W ∓ P)/2.
    scenario, path = lift(drive__sprocket=driven, sprocket__tail__mount__mass=mass)
    sized = size_up(scenario, path, 112)
    strand = sized.load.chain_weight * path.length[0]
    expected = cf.hung_loop(sized.running.hung_weight, strand, sized.payload, driven)
    running = sized.running
    assert running.start[1] == pytest.approx(expected.carrying_foot, abs=1e-12)
    assert running.end[1] == pytest.approx(expected.carrying_head, abs=1e-12)
    assert running.end[0] == pytest.approx(expected.return_foot, abs=1e-12)
    assert running.start[0] == pytest.approx(expected.return_head, abs=1e-12)
    assert -running.hub[0, 1] == pytest.approx(expected.head_hub, abs=1e-12)
    assert running.driven_pull == pytest.approx(sized.payload, abs=1e-12)


def test_hung_weight_holds_the_mount_and_the_chain_on_its_wrap():
    sized = size_up(*lift(), 112)
    on_wrap = 4 * (1.0e-3 + 2.0e-3 / 4)  # four links of the wrap, one carrier every four
    assert sized.running.hung_weight == pytest.approx((0.30 + on_wrap) * 9.80665)


def test_published_numbers_of_a_vertical_loop():
    # checks D5: H = 1 m, W = 20 N, P = 6 N, w H = 6.276256 N: 7, 13 and 19.276256 N.
    scenario, path = lift(
        sprocket__head__center=["0 mm", "1 m"],
        chain__link_mass=f"{6.276256 / 9.80665 * 10 - 0.5} g",
    )
    load = load_of(scenario, path)
    load = load._replace(balls=np.array([0.0, 6.0 / load.ball_weight]))
    assert load.chain_weight == pytest.approx(6.276256, rel=1e-6)
    on_wrap = 4 * path.pitch * load.chain_weight
    mass = (20.0 - on_wrap) / 9.80665
    scenario = scenario.with_values({"sprocket.tail.mount.mass": mass})
    body = free_body(scenario, path, load)
    found = (body.start[1], body.end[0], body.end[1], body.start[0])
    assert found == pytest.approx((7.0, 13.0, 19.276256, 19.276256), rel=1e-6)
    assert -body.hub[0, 1] == pytest.approx(38.552512, rel=1e-6)


def test_counterweight_that_lifts_the_head_carries_both_strands():
    # checks D5 c: F = 2 w H + P + 2 T_b + head and its wrap.
    text = LIFT.replace('mount = { kind = "hung", mass = "0.30 kg" }', "")
    text = text.replace(
        'center = ["0 mm", "520 mm"]',
        'center = ["0 mm", "520 mm"]\n'
        'mount = { kind = "counterweight", mass = "0.1 kg", weight = "0.8 kg" }',
    )
    scenario = parse_scenario(text)
    path = route(wheels_of(scenario), chain_pitch(scenario), down_of(scenario))
    sized = size_up(scenario, path, 112)
    feet = sized.running.start[1] + sized.running.end[0]
    strands = 2.0 * sized.load.chain_weight * path.length[0]
    head = 0.1 * 9.80665 + 4 * path.pitch * sized.load.chain_weight
    assert feet == pytest.approx(0.8 * 9.80665 - strands - sized.payload - head)
    expected = cf.lifted_loop(0.8 * 9.80665, head, strands / 2, sized.payload, "tail")
    assert sized.running.start[1] == pytest.approx(expected.carrying_foot)


def test_forces_on_the_whole_chain_balance_with_an_idler():
    text = LIFT.replace('center = ["0 mm", "520 mm"]', 'center = ["100 mm", "500 mm"]').replace(
        '[[sprocket]]\nname = "tail"',
        '[[sprocket]]\nname = "idler"\nteeth = 10\ncenter = ["25 mm", "250 mm"]\n'
        'side = "outside"\n[[sprocket]]\nname = "tail"',
    )
    scenario = parse_scenario(text)
    path = route(wheels_of(scenario), chain_pitch(scenario), down_of(scenario))
    sized = size_up(scenario, path, 112)
    path, load, body = sized.path, sized.load, sized.running
    # Moment of all forces on the chain about the origin: hub forces act at the axles but for the
    # drive's torque, so take moments as tension at the cuts instead: each strand on its own.
    for k in range(3):
        weight = load.chain_weight * path.length[k] + load.balls[k] * load.ball_weight
        assert body.end[k] - body.start[k] == pytest.approx(weight * path.direction[k, 1])
    # Idle wheels pass tension on, but for the height between their tangent points.
    driven = sized.driven
    for k in range(3):
        if k != driven:
            lift_weight = load.chain_weight * (path.start[k, 1] - path.end[k - 1, 1])
            assert body.start[k] - body.end[k - 1] == pytest.approx(lift_weight)
    tail = 2
    assert body.hub[tail, 1] == pytest.approx(body.hung_weight)


def test_threshold_is_where_the_least_tension_vanishes():
    scenario, path = lift()
    threshold = sheet()["hung mass at which a strand goes slack"].value
    at_threshold = scenario.with_values({"sprocket.tail.mount.mass": threshold})
    assert size_up(at_threshold, path, 112).running.least == pytest.approx(0.0, abs=1e-9)
    # job.md: slack comes when the hung weight falls to the weight of the balls on the strand.
    sized = size_up(scenario, path, 112)
    on_wrap = 4 * path.pitch * sized.load.chain_weight
    assert threshold * 9.80665 + on_wrap == pytest.approx(sized.payload)


def test_threshold_vanishes_driven_at_the_head():
    assert sheet(drive__sprocket="head")["hung mass at which a strand goes slack"].value == 0.0


def test_rates_and_chordal_rows_are_the_published_formulas():
    rows = sheet(sprocket__tail__teeth=6, n_links=111)
    assert rows["pocket rate"].value == pytest.approx(3.0)  # 0.12 m/s over 40 mm
    assert rows["tooth rate"].value == pytest.approx(12.0)
    # checks B1: 14.03 % at 6 teeth, 7.81 % at 8.
    assert rows["speed variation from tail"].value == pytest.approx(0.14029787)
    assert rows["speed variation from head"].value == pytest.approx(0.078112704)
    rate = 2 * math.pi * 0.12 / (6 * 0.010)
    assert rows["speed of a pin meeting its seat"].value == pytest.approx(rate * 0.010)


def test_torque_without_friction_is_the_work_of_lifting():
    # checks D5: mean torque × 2π = P N p.
    rows = sheet(sprocket__head__bearing_friction=0.0, sprocket__tail__bearing_friction=0.0)
    torque = rows["mean torque on the driven sprocket"].value
    payload = rows["their weight"].value
    assert torque * 2 * math.pi == pytest.approx(payload * 8 * 0.010)
    assert rows["power lost in bearings"].value == 0.0
    assert torque == pytest.approx(cf.lifting_torque(payload, 0.010, 8).mean)


def test_bearing_friction_adds_its_power():
    rows = sheet()
    hubs = [
        rows["tension of head-tail leaving head"].value
        + rows["tension of tail-head meeting head"].value,
        rows["tension of head-tail meeting tail"].value
        + rows["tension of tail-head leaving tail"].value,
    ]
    rate = 2 * math.pi * 0.12 / (8 * 0.010)
    expected = sum(0.1 * 0.5 * 0.004 * hub * rate for hub in hubs)
    assert rows["power lost in bearings"].value == pytest.approx(expected)


def test_motor_rows():
    rows = sheet(
        drive__kind="motor",
        drive__motor={
            "supply": "12 V",
            "no_load_speed": "6000 rev/min",
            "stall_torque": "20 mN m",
            "gear_ratio": 50,
            "gear_efficiency": 0.7,
            "continuous_torque": "5 mN m",
        },
    )
    torque = rows["mean torque on the driven sprocket"].value
    load = torque / (50 * 0.7)
    assert rows["torque at the motor"].value == pytest.approx(load)
    assert rows["over its continuous torque"].value == pytest.approx(load / 0.005)
    assert rows["speed of the motor under it"].value == pytest.approx(
        6000 * 2 * math.pi / 60 * (1 - load / 0.020)
    )
    radius = 0.010 / (2 * math.sin(math.pi / 8))
    assert rows["pull on the chain at stall"].value == pytest.approx(0.020 * 50 * 0.7 / radius)


def test_shaft_rows_hold_the_handbook_margin():
    rows = sheet(
        drive__shaft__length="0.5 m", drive__shaft__diameter="8 mm", drive__shaft__material="steel"
    )
    # checks B7.6: 8 mm x 0.5 m, 200 GPa, pinned 398.538151 rad/s; modulus here 205 GPa.
    critical = 398.538151 * math.sqrt(205 / 200)
    assert rows["first critical speed of the shaft"].value == pytest.approx(critical, rel=1e-6)


def test_falling_ball():
    row = sheet()["energy of a ball that falls from the head"]
    mass = math.pi / 6 * 0.016**3 * 7800
    assert row.value == pytest.approx(mass * 9.80665 * 0.520)
    assert f"lands at {math.sqrt(2 * 9.80665 * 0.520):.1f} m/s" in row.note


def test_every_row_prints_and_says_where_it_comes_from():
    for row in sheet().values():
        assert row.text
        assert row.source


def test_slack_strand_is_marked():
    rows = sheet(sprocket__tail__mount__mass="0.05 kg")
    assert rows["tension of tail-head leaving tail"].note.startswith("SLACK")


def test_single_wheel_has_a_sheet():
    text = LIFT[: LIFT.index('[[sprocket]]\nname = "tail"')] + (
        '[drive]\nsprocket = "head"\nchain_speed = "0.12 m/s"\n'
    )
    scenario = parse_scenario(text)
    path = route(wheels_of(scenario), chain_pitch(scenario))
    names = [row.name for row in sizing_sheet(scenario, path, 60)]
    assert "tooth rate" in names
    assert not any("tension" in name for name in names)


ADVICE = {
    "light take-up": ({"sprocket__tail__mount__mass": "0.1 kg"}, "sprocket.tail.mount.mass"),
    "few teeth": (
        {"sprocket__tail__teeth": 6, "drive__chain_speed": "0.02 m/s",
         "sprocket__tail__mount__mass": "1 kg"},
        "sprocket.tail.teeth",
    ),
    "take-up bounce": (
        {"drive__chain_speed": "0.105 m/s", "sprocket__tail__mount__mass": "0.50 kg"},
        "drive.chain_speed",
    ),
    "overload": ({"sprocket__tail__mount__mass": "15 kg"}, "chain.kind"),
    "slow": (
        {"limits__ball_rate": "4 /s", "sprocket__tail__mount__mass": "1 kg"},
        "drive.chain_speed",
    ),
    "needlessly fast": (
        {"limits__ball_rate": "0.5 /s", "sprocket__tail__mount__mass": "1 kg"},
        "drive.chain_speed",
    ),
}  # fmt: skip


@pytest.mark.parametrize(("changes", "key"), ADVICE.values(), ids=ADVICE.keys())
def test_first_advice_names_the_fault(changes, key):
    scenario, path = lift(**changes)
    found = advice(scenario, path, 112)
    assert found[0].key == key
    assert any(letter.isdigit() for letter in found[0].text)


def test_following_the_advice_on_a_light_take_up_silences_it():
    scenario, path = lift(sprocket__tail__mount__mass="0.1 kg")
    first = advice(scenario, path, 112)[0]
    wanted = first.text.split("hang ")[1].split(" instead")[0]
    better = scenario.with_values({first.key: wanted})
    assert first.key not in [item.key for item in advice(better, path, 112)]


def test_fixed_axles_with_links_to_spare_are_told_how_far_to_move():
    text = LIFT.replace('mount = { kind = "hung", mass = "0.30 kg" }', "")
    scenario = parse_scenario(text)
    path = route(wheels_of(scenario), chain_pitch(scenario))
    texts = [item.text for item in advice(scenario, path, 113)]
    assert any("1.00 links to spare" in text and "5 mm further apart" in text for text in texts)
    assert any("nothing keeps the loop taut" in text for text in texts)


def test_a_weak_counterweight_is_told_how_much_is_missing():
    text = LIFT.replace('mount = { kind = "hung", mass = "0.30 kg" }', "").replace(
        'center = ["0 mm", "520 mm"]',
        'center = ["0 mm", "520 mm"]\n'
        'mount = { kind = "counterweight", mass = "0.1 kg", weight = "0.3 kg" }',
    )
    scenario = parse_scenario(text)
    path = route(wheels_of(scenario), chain_pitch(scenario))
    found = {item.key: item.text for item in advice(scenario, path, 112)}
    assert "leaves a strand slack by" in found["sprocket.head.mount"]


def test_backstop_and_whirl_are_volunteered():
    scenario, path = lift(
        drive__kind="motor",
        drive__motor={
            "supply": "12 V",
            "no_load_speed": "6000 rev/min",
            "stall_torque": "200 mN m",
        },
        drive__shaft__length="3 m",
        drive__shaft__diameter="4 mm",
        drive__chain_speed="0.12 m/s",
    )
    keys = [item.key for item in advice(scenario, path, 112)]
    assert "drive.backstop" in keys
    assert "drive.shaft.supports" in keys
