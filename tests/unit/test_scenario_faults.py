"""Every kind of bad input ends in one clear message per fault, with its line."""

import pytest

from chainsim.errors import ScenarioError
from chainsim.scenario import parse_scenario, read_scenario

from .scenario_texts import BASE, edited


def problems(text: str, overrides=()) -> list[str]:
    """Messages of a scenario that must be refused."""
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(text, "lift.toml", overrides)
    return [str(problem) for problem in caught.value.problems]


BROKEN = [
    ("format = 1", "", ["lift.toml:1: format: required: version of this file format, such as 1"]),
    ("format = 1", "format = 2", ["lift.toml:1: format: found 2; must be 1"]),
    ("title = ", "titel = ", [
        "lift.toml:2: titel: found \"Test lift\"; unknown key 'titel'; did you mean 'title'?"]),
    ('"Test lift"', "3", ["lift.toml:2: title: found 3; text in quotes is due"]),
    ('"moulded_sturdy"', '"moulded_sturdi"', [
        "lift.toml:4: chain.kind: found \"moulded_sturdi\"; must be 'moulded_light' or "
        "'moulded_sturdy' or 'steel_bead' or 'steel_roller_small'; "
        "did you mean 'moulded_sturdy'?"]),
    ('pitch = "10 mm"', "pitch = 10", [
        'lift.toml:5: chain.pitch: found 10; a number without a unit; a length is due, such as '
        '"12.7 mm"']),
    ('pitch = "10 mm"', 'pitch = "-10 mm"', [
        'lift.toml:5: chain.pitch: found "-10 mm"; must be more than 0 m']),
    ('pitch = "10 mm"', 'pitch = "10,5 mm"', [
        'lift.toml:5: chain.pitch: found "10,5 mm"; \'10,5 mm\' has a comma in its number: write '
        "a decimal point, such as '10.5 mm', and no thousands separator"]),
    ('pitch = "10 mm"', 'pitch = ["10 mm"]', [
        'lift.toml:5: chain.pitch: found ["10 mm"]; a length is due, such as "12.7 mm"']),
    ('pitch = "10 mm"', 'pitch = "1e300 mm"', [
        'lift.toml:5: chain.pitch: found "1e300 mm"; no machine has a value of this size']),
    ('kind = "moulded_sturdy"\npitch = "10 mm"', "", [
        'lift.toml:3: chain.pitch: required without a kind of chain, such as "10 mm"']),
    ("links = 112", "links = 2", ["lift.toml:6: chain.links: found 2; must be at least 3"]),
    ("links = 112", "links = 90000", [
        "lift.toml:6: chain.links: found 90000; must be at most 20000"]),
    ("links = 112", 'links = "many"', [
        'lift.toml:6: chain.links: found "many"; a whole number without a unit is due']),
    ("links = 112", 'mass_per_length = "0.1 kg/m"\nlink_mass = "1 g"', [
        'lift.toml:6: chain.mass_per_length: found "0.1 kg/m"; state this or link_mass, not both']),
    ("links = 112", 'breaking_load = "200 N"', [
        'lift.toml:6: chain.breaking_load: found "200 N"; breaking_load and load_factor go '
        "together"]),
    ("links = 112", 'roller_diameter = "11 mm"', [
        'lift.toml:6: chain.roller_diameter: found "11 mm"; must be less than the pitch (10 mm)']),
    ('name = "head"\nteeth = 8', 'name = "head"\nteeth = 3', [
        "lift.toml:9: sprocket.head.teeth: found 3; a sprocket with 3 teeth cannot carry a "
        "chain: at least 6 are needed"]),
    ('name = "head"\nteeth = 8', 'name = "head"', [
        "lift.toml:7: sprocket.head.teeth: teeth or roller_radius is required"]),
    ('name = "head"\nteeth = 8', 'name = "head"\nteeth = 8.5', [
        "lift.toml:9: sprocket.head.teeth: found 8.5; a whole number is due"]),
    ('name = "head"', 'name = "head.1"', [
        'lift.toml:8: sprocket."head.1".name: found "head.1"; a name is a letter, then letters, '
        "digits and underscores, since it stands in dotted keys",
        'lift.toml:17: drive.sprocket: found "head"; no sprocket has this name (there is head.1, '
        "tail); did you mean 'head.1'?"]),
    ('name = "tail"', 'name = "head"', [
        'lift.toml:12: sprocket.head.name: found "head"; another sprocket has this name']),
    ('["0 mm", "520 mm"]', '["0 mm"]', [
        'lift.toml:10: sprocket.head.center: found ["0 mm"]; a list of values, such as '
        '["0 mm", "520 mm"] is due']),
    ('["0 mm", "520 mm"]', '["0 mm", "520"]', [
        "lift.toml:10: sprocket.head.center.1: found \"520\"; '520' has no unit: a length is a "
        "number with one of the units m, cm, mm, um, µm, in, ft"]),
    ('["0 mm", "520 mm"]', '["0 mm", "0 mm"]', [
        "lift.toml:14: sprocket.tail.center: found [\"0 mm\", \"0 mm\"]; sprocket 'head' stands "
        "there already",
        "lift.toml:22: balls.unload_at: must lie above load_at (0 mm)"]),
    ('free = "y"', 'free = "z"', [
        "lift.toml:15: sprocket.tail.mount.free: found \"z\"; must be 'y' or 'xy'"]),
    ('free = "y"', "axis = [0, 1]", [
        'lift.toml:15: sprocket.tail.mount.axis: found [0, 1]; not a key of kind = "hung" (it '
        "takes mass, free, friction, damping, stops); it belongs to screwed or sliding or spring "
        "or counterweight"]),
    ('kind = "hung", mass = "0.30 kg"', 'kind = "hung"', [
        'lift.toml:15: sprocket.tail.mount.mass: required with kind = "hung": mass of all that '
        'moves with the axle except the chain: unit, axle, sprocket, such as "0.30 kg"']),
    ('kind = "hung"', 'kind = "hanging"', [
        "lift.toml:15: sprocket.tail.mount.kind: found \"hanging\"; must be 'fixed' or 'screwed' "
        "or 'sliding' or 'hung' or 'arm' or 'spring' or 'counterweight'"]),
    ('free = "y"', 'stops = ["5 mm", "-5 mm"]', [
        'lift.toml:15: sprocket.tail.mount.stops: found ["5 mm", "-5 mm"]; the low stop must lie '
        "below the high one"]),
    ('sprocket = "head"', 'sprocket = "haed"', [
        'lift.toml:17: drive.sprocket: found "haed"; no sprocket has this name (there is head, '
        "tail); did you mean 'head'?"]),
    ('sprocket = "head"', 'sprocket = "head"\nreaction = "mount"', [
        "lift.toml:18: drive.reaction: found \"mount\"; the mount of 'head' is fixed, so the "
        'frame takes the torque: reaction = "frame"']),
    ('chain_speed = "0.1 m/s"', "", [
        'lift.toml:16: drive.chain_speed: required with kind = "speed", such as "0.15 m/s"']),
    ('chain_speed = "0.1 m/s"', 'chain_speed = "10 Hz"', [
        "lift.toml:18: drive.chain_speed: found \"10 Hz\"; '10 Hz' is a frequency, but a speed is "
        "due: a speed is a number with one of the units m/s, cm/s, mm/s, m/min, mm/min, km/h, "
        "in/s, ft/s, ft/min"]),
    ('chain_speed = "0.1 m/s"', 'kind = "motor"', [
        'lift.toml:16: drive.motor: required with kind = "motor"']),
    ('chain_speed = "0.1 m/s"', 'chain_speed = "0.1 m/s"\nbackstop = "yes"', [
        'lift.toml:19: drive.backstop: found "yes"; true or false is due']),
    ('chain_speed = "0.1 m/s"', 'chain_speed = "0.1 m/s"\nshaft.length = "1 m"', [
        'lift.toml:19: drive.shaft.length: found "1 m"; length and diameter of a shaft go '
        "together"]),
    ("every = 4", "every = 0.5", [
        "lift.toml:20: carriers.every: found 0.5; a whole number is due: a carrier sits on a "
        "whole link"]),
    ("every = 4", "every = 0", [
        "lift.toml:20: carriers.every: found 0; must be at least 1: a carrier sits on a whole "
        "link"]),
    ("every = 4", "every = 113", [
        "lift.toml:20: carriers.every: found 113; the chain has only 112 links"]),
    ('floor = "18 mm"', 'floor = "12 mm"', [
        'lift.toml:21: carriers.pocket.floor: found "12 mm"; the pocket is narrower than its ball '
        "(16 mm)"]),
    ('diameter = "16 mm"', "", [
        'lift.toml:22: balls.diameter: required: diameter of a ball, such as "16 mm"']),
    ('diameter = "16 mm"', 'diameter = "16 mm"\nrestitution = 1.5', [
        "lift.toml:24: balls.restitution: found 1.5; must be at most 1"]),
    ('diameter = "16 mm"', 'diameter = "16 mm"\nmass = "nan kg"', [
        "lift.toml:24: balls.mass: found \"nan kg\"; 'nan kg' is not a mass: a mass is a number "
        "with one of the units kg, g, mg, t, lb, oz"]),
    ('diameter = "16 mm"', 'diameter = "16 mm"\nfriction = inf', [
        "lift.toml:24: balls.friction: found Infinity; a finite number is due"]),
    ('kind = "set down", rate', "rates", [
        "lift.toml:24: balls.feed.rates: found \"1 /s\"; unknown key 'rates'; did you mean "
        "'rate'?"]),
    ('feed = { kind = "set down", rate = "1 /s" }', 'feed = "every bucket"', [
        "lift.toml:24: balls.feed.kind: found \"every bucket\"; must be 'set down' or 'chute' or "
        "'trough' or 'every pocket'; did you mean 'every pocket'?"]),
]  # fmt: skip


@pytest.mark.parametrize(("old", "new", "expected"), BROKEN, ids=lambda item: str(item)[:40])
def test_message_of_one_fault(old, new, expected):
    assert problems(edited(old, new)) == expected


EVENTS = [
    ('at = "1 s"\nkind = "jam"', [
        'lift.toml:25: event.0.height: required with kind = "jam": height at which a jam catches '
        'the next pocket, such as "200 mm"',
        'lift.toml:25: event.0.release_force: required with kind = "jam": force at which a jam '
        'lets go, such as "30 N"']),
    ('at = "1 s"\nkind = "takeup_blocked"\nsprocket = "head"\nduration = "1 s"', [
        'lift.toml:28: event.0.sprocket: found "head"; its mount does not move, so nothing can '
        "block it"]),
    ('at = "1 s"\nkind = "knock"\nacceleration = "1 m/s2"\nduration = "1 s"\nramp = "1 s"', [
        'lift.toml:30: event.0.ramp: found "1 s"; not a key of kind = "knock" (it takes '
        "acceleration, duration, direction); it belongs to start or stop"]),
    ('at = "-1 s"\nkind = "stop"', [
        'lift.toml:26: event.0.at: found "-1 s"; must be at least 0 s']),
]  # fmt: skip


@pytest.mark.parametrize(("event", "expected"), EVENTS)
def test_message_of_an_event(event, expected):
    assert problems(f"{BASE}[[event]]\n{event}\n") == expected


TABLES = [
    ('[bench]\n"chain.pitsch" = { low = "9 mm" }', [
        "lift.toml:26: bench.\"chain.pitsch\": no value is called 'chain.pitsch'; did you mean "
        "'chain.pitch'?"]),
    ('[bench]\n"chain.pitch" = { low = "9 N", high = "11 mm" }', [
        "lift.toml:26: bench.\"chain.pitch\".low: found \"9 N\"; '9 N' is a force, but a length "
        "is due: a length is a number with one of the units m, cm, mm, um, µm, in, ft"]),
    ('[bench]\n"chain.pitch" = { low = "12 mm", high = "11 mm" }', [
        'lift.toml:26: bench."chain.pitch".low: found "12 mm"; low must not exceed high']),
    ('[study]\nfree = ["sprocket.tial.mount.mass"]', [
        'lift.toml:26: study.free.0: found "sprocket.tial.mount.mass"; no sprocket is called '
        "'tial'; did you mean 'tail'?"]),
    ('[run]\nstep = "1 s"', [
        'lift.toml:26: run.step: found "1 s"; must not exceed the time between samples']),
    ('[[wall]]\nname = "w"\npoints = [["0 mm", "0 mm"]]', [
        'lift.toml:27: wall.w.points: found [["0 mm", "0 mm"]]; at least two points are due, no '
        "two in a row alike"]),
    ('[[guide]]\nname = "g"\nfrom = ["0 mm", "0 mm"]', [
        'lift.toml:25: guide.g.to: required with kind = "straight": a list of values, such as '
        '["20 mm", "400 mm"]']),
    ("[frame]\ntemperature = 20", [
        "lift.toml:26: frame.temperature: found 20; a table, such as "
        '{"built": "20 degC", "low": "5 degC", "high": "40 degC"} is due']),
    ("[balls.discharge]\nat = [\"0 mm\", \"0 mm\"]\nmouth = \"10 mm\"", [
        'lift.toml:27: balls.discharge.mouth: found "10 mm"; the mouth is narrower than a ball '
        "(16 mm)"]),
    ("[lift]", [
        "lift.toml:25: lift: found a table; unknown key 'lift'; did you mean 'limits'?"]),
]  # fmt: skip


@pytest.mark.parametrize(("table", "expected"), TABLES)
def test_message_of_a_table(table, expected):
    assert problems(f"{BASE}{table}\n") == expected


SYNTAX = [
    ("a = ]", 1, "not valid TOML at column 5: invalid value"),
    ('format = 1\nb = "x', 2, "not valid TOML at the end: unterminated string"),
    ("a = 1\na = 2", 2, "not valid TOML at the end: cannot overwrite a value"),
    ("a = " + "[" * 3000, None, "tables or lists are nested too deeply"),
    ("a = " + "9" * 5000, 1, "not valid TOML"),
]


@pytest.mark.parametrize(("text", "line", "start"), SYNTAX, ids=range(len(SYNTAX)))
def test_syntax_error_names_its_line(text, line, start):
    with pytest.raises(ScenarioError) as caught:
        parse_scenario(text, "lift.toml")
    (problem,) = caught.value.problems
    assert problem.line == line
    assert problem.rule.startswith(start)


def test_all_faults_come_at_once_in_the_order_of_the_file():
    text = BASE.replace("teeth = 8", "teeth = 4").replace("10 mm", "10").replace("every", "evry")
    found = problems(text.replace('"0.30 kg"', '"0.30 N"'))
    lines = [int(message.split(":")[1]) for message in found]
    assert lines == [5, 9, 13, 15, 19, 20]


def test_a_value_that_cannot_be_worked_out_is_refused_with_what_it_came_to():
    found = problems(edited('diameter = "16 mm"', 'diameter = "1e-9 mm"'))
    assert (
        "lift.toml:22: balls.mass: found 4.08407e-33 in SI; no machine has a value of this size"
        in (found)
    )


def test_a_refused_value_causes_no_second_message():
    text = edited('diameter = "16 mm"', 'diameter = "160"').replace('"18 mm"', '"12 mm"')
    (message,) = problems(text)
    assert message.startswith("lift.toml:23: balls.diameter:")


@pytest.mark.parametrize("text", ["", "chain = 3", "sprocket = {}", "balls = []", "run = [1, 2]"])
def test_wrong_shapes_give_messages_only(text):
    assert all(message.startswith("lift.toml:1: ") for message in problems(text))


OVERRIDES = [
    ("chain.pitch", "--set: found 'chain.pitch'; KEY=VALUE is due, such as "
     "sprocket.tail.mount.mass=0.3 kg"),
    ("chain.pitch=3", '--set: chain.pitch: found 3; a number without a unit; a length is due, such '
     'as "12.7 mm"'),
    ("chain.pitsch=3 mm", "--set: chain.pitsch: unknown key 'pitsch'; did you mean 'pitch'?"),
    ("sprocket.foot.teeth=8", "--set: sprocket.foot.teeth: no sprocket is called 'foot'; there is "
     "head, tail"),
    ("chain.pitch.x=1", "--set: chain.pitch.x: 'chain.pitch' is a value and has no key 'x'"),
    ("event.0.at=1 s", "--set: event.0.at: no event is called '0'; there is none"),
    ("sprocket.tail.teeth=5", "--set: sprocket.tail.teeth: found 5; a sprocket with 5 teeth cannot "
     "carry a chain: at least 6 are needed"),
]  # fmt: skip


@pytest.mark.parametrize(("override", "expected"), OVERRIDES)
def test_message_of_a_bad_override(override, expected):
    assert problems(BASE, [override]) == [expected]


def test_a_file_that_cannot_be_read(tmp_path):
    missing = tmp_path / "no such lift.toml"
    with pytest.raises(ScenarioError, match=r"no such lift\.toml: cannot be read: No such file"):
        read_scenario(missing)
    with pytest.raises(ScenarioError, match="cannot be read"):
        read_scenario(tmp_path)
    latin = tmp_path / "latin.toml"
    latin.write_bytes('format = 1\ntitle = "Säule"'.encode("latin-1"))
    with pytest.raises(ScenarioError, match=r"latin\.toml:2: found byte 0xe4; text in UTF-8"):
        read_scenario(latin)
    huge = tmp_path / "huge.toml"
    huge.write_text("#" * 1_000_001, encoding="utf-8")
    with pytest.raises(ScenarioError, match="too long"):
        read_scenario(huge)
