"""The JSON Schema accepts what the reader accepts, and says what every key means."""

import json
import tomllib

import jsonschema
import pytest

from chainsim.errors import CallError
from chainsim.scenario import LAYOUTS, json_schema, parse_scenario, read_scenario, starter
from chainsim.scenario.json_schema import all_tables
from chainsim.scenario.quantity import PLAIN_NUMBER
from chainsim.scenario.table import fields_of, hints, leaves, quantity_of, table_in
from chainsim.units import to_si

from .scenario_texts import ALL_KEYS_FILE, BASE, SCENARIO_FILES, edited

# What one scenario cannot hold beside the keys of the full one.
VARIANTS = [
    {"chain.mass_per_length": "0.1 kg/m"},
    {"chain.stretch": {"load": "5 N", "length": "1 m", "growth": "3 mm"}},
    {"balls.feed": {"kind": "trough", "at": ["20 mm", "20 mm"], "slope": "5 deg", "queue": 4}},
]
# These two go together, so they cannot be set one after the other.
BREAKING_LOAD = edited("links = 112", 'breaking_load = "200 N"\nload_factor = 5')


@pytest.fixture(scope="module")
def validator():
    schema = json_schema()
    jsonschema.Draft202012Validator.check_schema(schema)
    return jsonschema.Draft202012Validator(schema)


@pytest.mark.parametrize("file", [*SCENARIO_FILES, ALL_KEYS_FILE], ids=lambda file: file.stem)
def test_schema_accepts_every_scenario(validator, file):
    tables = tomllib.loads(file.read_text(encoding="utf-8"))
    assert [error.message for error in validator.iter_errors(tables)] == []


def test_schema_accepts_a_written_scenario(validator):
    text = read_scenario(ALL_KEYS_FILE).resolved_toml()
    assert [error.message for error in validator.iter_errors(tomllib.loads(text))] == []


REFUSED = [
    ("title = ", "titel = "),
    ('pitch = "10 mm"', "pitch = 10"),
    ('pitch = "10 mm"', 'pitch = "10 N"'),
    ('pitch = "10 mm"', 'pitch = "10,5 mm"'),
    ('free = "y"', "axis = [0, 1]"),
    ('kind = "hung", mass = "0.30 kg"', 'kind = "hung"'),
    ("every = 4", "every = 0.5"),
    ('sprocket = "head"', ""),
    ("links = 112", "links = -1"),
    ('{ kind = "set down", rate = "1 /s" }', '"every bucket"'),
]


@pytest.mark.parametrize(("old", "new"), REFUSED)
def test_schema_refuses_what_the_reader_refuses(validator, old, new):
    assert not validator.is_valid(tomllib.loads(edited(old, new)))


def test_schema_is_plain_json():
    assert json.loads(json.dumps(json_schema())) == json_schema()


def every_field():
    return [
        pytest.param(table, name, field, id=f"{table.__name__}.{name}")
        for table in all_tables()
        for name, field in fields_of(table).items()
    ]


@pytest.mark.parametrize(("table", "name", "field"), every_field())
def test_every_key_is_documented(table, name, field):
    text = field.description or ""
    assert text.endswith(".") or text.endswith('".'), text
    holds_tables = table_in(field.annotation) is not None or name in ("bench", "resolved")
    assert field.examples or holds_tables
    quantity = quantity_of(field)
    if quantity is not None and isinstance(field.examples[0], str):
        to_si(field.examples[0], quantity.kind)
    for end in ("likely", "usual"):
        span = hints(field).get(end)
        if span:
            kind = quantity.kind if quantity else PLAIN_NUMBER
            low, high = (to_si(x, kind) if isinstance(x, str) else x for x in span)
            assert low < high
            if end == "likely":
                assert low <= field.default <= high


def stated_paths(tables, path=()):
    """Every key path in plain tables, without the places in lists."""
    for name, value in tables.items():
        yield (*path, name)
        members = value if isinstance(value, list) else [value]
        for member in members:
            if isinstance(member, dict) and path + (name,) not in (("bench",), ("resolved",)):
                yield from stated_paths(member, (*path, name))


def all_paths(table, path=()):
    """Every key path that the format knows."""
    for name, field in fields_of(table).items():
        yield (*path, name)
        inner = table_in(field.annotation)
        if inner is not None and name not in ("bench", "resolved"):
            yield from all_paths(inner, (*path, name))


def test_one_scenario_and_its_variants_use_every_key():
    full = read_scenario(ALL_KEYS_FILE)
    stated = set(stated_paths(tomllib.loads(ALL_KEYS_FILE.read_text(encoding="utf-8"))))
    for values in VARIANTS:
        stated |= set(stated_paths(full.with_values(values)._tables))
    assert parse_scenario(BREAKING_LOAD).chain.allowable_tension == 40.0
    stated |= set(stated_paths(tomllib.loads(BREAKING_LOAD)))
    assert set(all_paths(all_tables()[0])) - stated == set()


def test_every_value_of_a_scenario_has_an_origin():
    scenario = read_scenario(ALL_KEYS_FILE)
    keys = {
        leaf.key
        for leaf in leaves(scenario)
        if leaf.value is not None and leaf.path[0] not in ("bench", "resolved")
    }
    assert keys == set(scenario.origins())


DEMANDS = [("500 mm", "16 mm", "1 /s"), ("0.3 m", "8 mm", "2 /s"), ("3 m", "40 mm", "20 /min")]


@pytest.mark.parametrize("layout", LAYOUTS)
@pytest.mark.parametrize("demand", DEMANDS, ids=str)
def test_starters_are_scenarios_without_remarks(validator, layout, demand):
    text = starter(layout, *demand)
    scenario = parse_scenario(text)
    height, ball, rate = (
        to_si(text, kind) for text, kind in zip(demand, ("length", "length", "rate"), strict=True)
    )
    assert [str(remark) for remark in scenario.remarks] == []
    assert validator.is_valid(tomllib.loads(text))
    assert scenario.balls.diameter == pytest.approx(ball)
    spacing = scenario.carriers.every * scenario.chain.pitch
    assert scenario.drive.chain_speed / spacing > 1.2 * rate  # met with its reserve
    assert scenario.chain.links % scenario.carriers.every == 0
    (x, y), (x0, y0) = (sprocket.center for sprocket in scenario.sprocket)
    distance = ((x - x0) ** 2 + (y - y0) ** 2) ** 0.5
    assert height - 1e-6 < y - y0 < height + spacing  # written to a micrometer
    # two equal sprockets: both strands and two half wraps make the loop
    loop = 2 * distance / scenario.chain.pitch + scenario.sprocket[0].teeth
    assert loop == pytest.approx(scenario.chain.links, abs=1e-3)


def test_tail_driven_starter_hangs_more_than_its_balls_weigh():
    scenario = parse_scenario(starter("tail-driven-hung-unit"))
    pockets = 0.5 / (scenario.carriers.every * scenario.chain.pitch)
    assert scenario.sprocket[1].mount.mass > 1.2 * pockets * scenario.balls.mass


REFUSED_DEMANDS = [
    ({"layout": "head-drivn-hung-idler"}, "did you mean 'head-driven-hung-idler'"),
    ({"layout": "spring", "height": "500"}, "height: '500' has no unit"),
    ({"layout": "spring", "ball": "1 m"}, "ball is 1 m; 5 mm to 80 mm is due"),
    ({"layout": "spring", "height": "10 mm"}, "height is 10 mm; for this ball"),
    ({"layout": "spring", "rate": "0 /s"}, "more than nothing is due"),
]


@pytest.mark.parametrize(("demand", "expected"), REFUSED_DEMANDS)
def test_starter_refuses_what_cannot_be(demand, expected):
    with pytest.raises(CallError, match=expected):
        starter(**demand)


def test_base_text_is_legal(validator):
    assert validator.is_valid(tomllib.loads(BASE))
