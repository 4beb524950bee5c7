"""A scenario's values, defaults, origins, remarks, changes."""

import math
import pickle

import pytest

from chainsim.errors import ScenarioError
from chainsim.scenario import parse_scenario, read_scenario

from .scenario_texts import ALL_KEYS_FILE, BASE, edited

DENSITY_OF_STEEL = 7800.0  # kg/m3, the typical value of our own table


@pytest.fixture(scope="module")
def lift():
    return parse_scenario(BASE, "shows/lift.toml")


def test_values_are_in_si(lift):
    assert lift.chain.pitch == 0.010
    assert lift.sprocket[0].center == (0.0, 0.52)
    assert lift.carriers.pocket.tilt == pytest.approx(math.radians(5.0), rel=1e-15)
    assert lift.sprocket[1].mount.mass == 0.30
    assert lift.balls.feed.rate == 1.0


def test_what_is_left_out_is_filled_in(lift):
    assert lift.frame.gravity == 9.80665
    assert lift.chain.link_stiffness == pytest.approx(50e3)
    assert lift.chain.joint.friction == 0.2
    assert lift.balls.mass == pytest.approx(DENSITY_OF_STEEL * math.pi / 6 * 0.016**3)
    assert (lift.balls.load_at, lift.balls.unload_at) == (0.0, 0.52)
    assert lift.sprocket[1].tooth.height is None
    assert lift.sprocket[0].mount.kind == "fixed"


def test_name_of_the_file_gives_the_stem(lift):
    assert (lift.stem, lift.file) == ("lift", "shows/lift.toml")
    assert parse_scenario(BASE).stem == "scenario"
    assert parse_scenario(BASE, "C:\\shows\\lift.toml").stem == "lift"


def test_a_guide_goes_from_start_to_end():
    text = BASE + '[[guide]]\nname = "g"\nfrom = ["1 mm", "2 mm"]\nto = ["1 mm", "9 mm"]\n'
    guide = parse_scenario(text).guide[0]
    assert guide.start == (0.001, 0.002)
    assert guide.end == pytest.approx((0.001, 0.009))


def test_every_key_of_the_full_scenario_is_read():
    full = read_scenario(ALL_KEYS_FILE)
    assert full.frame.temperature.low == 278.15
    assert full.frame.temperature.high == pytest.approx(313.15)
    assert full.sprocket[3].mount.friction == 0.002  # N m, of an arm
    assert full.sprocket[3].mount.stops == pytest.approx((-math.radians(5), math.radians(5)))
    assert full.sprocket[0].mount.stops == pytest.approx((-0.012, 0.012))
    assert full.drive.motor.table[1][0] == pytest.approx(50 * 2 * math.pi)
    assert full.drive.motor.gear_efficiency == pytest.approx(0.7)
    assert full.carriers.at == (1, 5, 9, 17)
    assert full.balls.feed.velocity == pytest.approx((-0.1, 0.0))


ALTERNATIVES = [
    ('mass_per_length = "0.12 kg/m"', "link_mass", 0.12 * 0.010),
    (
        'stretch = { load = "5 N", length = "1 m", growth = "2 mm" }',
        "link_stiffness",
        5.0 / (0.002 / 100),  # 100 links share the growth
    ),
    ('breaking_load = "200 N"\nload_factor = 5', "allowable_tension", 40.0),
]


@pytest.mark.parametrize(("stated", "name", "expected"), ALTERNATIVES)
def test_other_ways_to_state_a_value(stated, name, expected):
    lift = parse_scenario(edited("links = 112", stated))
    assert getattr(lift.chain, name) == pytest.approx(expected)
    assert lift.origin(f"chain.{name}").source == "given"


def test_values_stated_twice_in_a_change_follow_the_change():
    lift = parse_scenario(edited("links = 112", 'mass_per_length = "0.12 kg/m"'))
    assert lift.with_values({"chain.link_mass": "2 g"}).chain.link_mass == 0.002
    assert lift.with_values({"balls.load_at": "5 mm"}).balls.feed.load_at == 0.005


def test_currents_and_speed_of_a_motor_follow_from_its_figures():
    motor = 'kind = "motor"\nmotor = { supply = "12 V", no_load_speed = "6000 rev/min", '
    text = edited(
        'chain_speed = "0.1 m/s"',
        motor + 'stall_torque = "20 mN m", no_load_current = "0.1 A", gear_ratio = 60 }',
    )
    drive = parse_scenario(text).drive
    # torque constant k = V/w: the current of the stall torque is T/k, the idle current comes on top
    assert drive.motor.stall_current == pytest.approx(0.02 * 200 * math.pi / 12 + 0.1)
    # 6000/60 turns a minute, 8 links of 10 mm a turn, 80 % of that
    assert drive.chain_speed == pytest.approx(0.8 * 100 / 60 * 0.08)


def test_a_shaft_twists_as_its_size_says():
    shaft = 'chain_speed = "0.1 m/s"\nshaft = { length = "0.5 m", diameter = "6 mm" }'
    found = parse_scenario(edited('chain_speed = "0.1 m/s"', shaft)).drive.shaft.stiffness
    polar = math.pi * 0.003**4 / 2  # of a round section of 3 mm radius
    assert found == pytest.approx(80e9 * polar / 0.5)


def test_origins(lift):
    assert lift.origin("chain.pitch") == ("given", 0.01, 0.01, 0.01, "")
    stiffness = lift.origin("chain.link_stiffness")
    assert (stiffness.source, stiffness.note) == ("kind", "moulded_sturdy")
    assert stiffness.low < stiffness.typical < stiffness.high
    assert lift.origin("run.settle").source == "assumed"
    assert lift.origin("sprocket.tail.mount.mass").typical == 0.30
    with pytest.raises(KeyError, match=r"did you mean 'chain\.pitch'"):
        lift.origin("chain.pich")


def test_without_a_kind_of_chain_its_values_are_assumed():
    lift = parse_scenario(edited('kind = "moulded_sturdy"\n', ""))
    assert lift.origin("chain.link_mass").source == "assumed"


def test_bench_values_keep_their_source():
    bench = '[bench]\n"chain.pitch" = { low = "9.98 mm", high = "10.02 mm", source = "caliper" }\n'
    origin = parse_scenario(BASE + bench).origin("chain.pitch")
    assert origin == ("bench", pytest.approx(9.98e-3), 0.01, pytest.approx(10.02e-3), "caliper")


def test_uncertain_values_have_a_range_and_belong_to_the_layout(lift):
    uncertain = dict(lift.uncertain())
    assert "chain.link_stiffness" in uncertain
    assert "sprocket.head.tooth.friction" in uncertain
    assert all(origin.low < origin.high for origin in uncertain.values())
    assert not any("cord_stiffness" in key or "motor" in key for key in uncertain)
    assert "chain.pitch" not in uncertain


def test_with_values_makes_a_new_scenario(lift):
    heavier = lift.with_values({"sprocket.tail.mount.mass": 0.5, "chain.pitch": "12 mm"})
    assert heavier.sprocket[1].mount.mass == 0.5
    assert lift.sprocket[1].mount.mass == 0.30
    # what comes from the kind of chain grows with the pitch
    assert heavier.chain.link_mass == pytest.approx(lift.chain.link_mass * 1.2**3)
    assert heavier.sha256 != lift.sha256
    assert "# changed: chain.pitch=12 mm" in heavier.text


def test_with_values_refuses_what_a_file_could_not_hold(lift):
    with pytest.raises(ScenarioError, match=r"lift.toml \(changed\): sprocket.tail.teeth: found 4"):
        lift.with_values({"sprocket.tail.teeth": 4})
    with pytest.raises(ScenarioError, match="did you mean 'tail'"):
        lift.with_values({"sprocket.tale.teeth": 8})


OVERRIDES = [
    ("sprocket.tail.mount.mass=0.4 kg", lambda s: s.sprocket[1].mount.mass == 0.4),
    ('sprocket.tail.mount.mass="0.4 kg"', lambda s: s.sprocket[1].mount.mass == 0.4),
    ("sprocket.1.teeth = 10", lambda s: s.sprocket[1].teeth == 10),
    ('sprocket.tail.mount={kind = "fixed"}', lambda s: s.sprocket[1].mount.kind == "fixed"),
    ("balls.feed=every pocket", lambda s: s.balls.feed.kind == "every pocket"),
    ("run.duration=1 min", lambda s: s.run.duration == 60.0),
    ("drive.backstop=true", lambda s: s.drive.backstop is True),
    ('sprocket.head.center=["1 mm", "530 mm"]', lambda s: s.sprocket[0].center == (1e-3, 0.53)),
    ("run.situations=all", lambda s: "jam" in s.run.situations),
]


@pytest.mark.parametrize(("override", "holds"), OVERRIDES, ids=[text for text, _ in OVERRIDES])
def test_overrides(override, holds):
    lift = parse_scenario(BASE, overrides=[override])
    assert holds(lift)
    assert lift.text.endswith(f"# changed: {override}\n")


def test_short_form_of_the_feed_takes_changes():
    text = edited('{ kind = "set down", rate = "1 /s" }', '"every pocket"')
    lift = parse_scenario(text)
    assert lift.balls.feed.rate is None
    assert lift.origin("balls.feed.kind").source == "given"
    assert lift.with_values({"balls.feed.kind": "set down"}).balls.feed.rate == 1.0


def test_byte_order_mark_is_skipped_with_a_note(tmp_path):
    file = tmp_path / "lift.toml"
    file.write_text(BASE, encoding="utf-8-sig")
    lift = read_scenario(file)
    assert "byte order mark" in lift.remarks[0].text
    assert lift.sha256 == parse_scenario(BASE).sha256


def test_a_scenario_does_not_change_and_travels(lift):
    with pytest.raises(ValueError, match="frozen"):
        lift.chain.pitch = 0.02
    other = pickle.loads(pickle.dumps(lift))
    assert (other, other.text, other.stem) == (lift, lift.text, lift.stem)


REMARKS = [
    (
        'diameter = "16 mm"',
        'diameter = "16 mm"\nmass = "1000 kg"',
        "mass: 1000 kg is unusual",
    ),
    (
        'lip = "5 mm"',
        'lip = "9 mm"',
        "the lip is as high as the ball's center",
    ),
    ('lip = "5 mm", tilt = "5 deg"', 'lip = "0 mm", tilt = "0 deg"', "neither lip nor tilt holds"),
    ('floor = "18 mm"', 'floor = "30 mm"', "carriers.pocket.floor: the floor is much wider"),
    ("every = 4", "every = 1", "carriers stand 10 mm apart"),
    ("every = 4", "every = 5", "112 links are no multiple of 5"),
    ('rate = "1 /s"', 'rate = "4 /s"', "only 2.5 pockets come by in a second, 4 balls arrive"),
    ('"0.1 m/s"', '"5 m/s"', "drive.chain_speed: 5 m/s is unusual"),
    ('free = "y"', 'stops = ["1 mm", "5 mm"]', "the place on the drawing lies beyond a stop"),
]


@pytest.mark.parametrize(("old", "new", "expected"), REMARKS)
def test_absurd_but_legal_values_earn_a_remark(old, new, expected):
    remarks = [str(remark) for remark in parse_scenario(edited(old, new)).remarks]
    assert any(expected in remark for remark in remarks), remarks


def test_the_plain_lift_earns_no_remark(lift):
    assert lift.remarks == ()


def test_late_events_and_short_runs_earn_remarks():
    tail = '[[event]]\nat = "9 s"\nkind = "stop"\n[run]\nduration = "4 s"\n'
    keys = [remark.key for remark in parse_scenario(BASE + tail).remarks]
    assert keys == ["run.settle", "event.0.at"]


def test_a_unit_that_hangs_from_its_axle_cannot_take_the_torque():
    text = edited('sprocket = "head"', 'sprocket = "tail"\nreaction = "mount"')
    (remark,) = parse_scenario(text).remarks
    assert remark.key == "sprocket.tail.mount.center_of_mass"
