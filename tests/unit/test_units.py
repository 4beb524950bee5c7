"""Quantities: what is read, what is refused and in which words, and what is printed."""

import json
import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from chainsim.errors import UnitError
from chainsim.units import KIND_NAMES, UNITS, format_si, json_pattern, to_si

# NIST Special Publication 811 (2008), appendix B (from memory): 1 in = 25.4 mm exactly,
# 1 lb = 0.45359237 kg exactly, standard gravity 9.80665 m/s2 exactly.
READ = [
    ("12.7 mm", "length", 0.0127),
    ("12.7mm", "length", 0.0127),
    ("  12.7   mm ", "length", 0.0127),
    (".5 in", "length", 0.0127),
    ("+1e-3 m", "length", 0.001),
    ("-4 µm", "length", -4e-6),
    ("-4 μm", "length", -4e-6),  # Greek mu, as some keyboards give it
    ("0.43 lb/ft", "mass_per_length", 0.43 * 0.45359237 / 0.3048),
    ("3125 lbf", "force", 3125 * 0.45359237 * 9.80665),
    ("60 rev/min", "angular_speed", 2 * math.pi),
    ("60 rev / min", "angular_speed", 2 * math.pi),
    ("1 /s", "rate", 1.0),
    ("30 1/min", "rate", 0.5),
    ("500 Hz", "frequency", 500.0),
    ("20 °C", "temperature", 293.15),
    ("20 degC", "temperature", 293.15),
    ("293.15 K", "temperature", 293.15),
    ("3 %", "fraction", 0.03),
    ("0.03", "fraction", 0.03),
    ("2 N·m", "torque", 2.0),
    ("2 N*m", "torque", 2.0),
    ("2 Nm", "torque", 2.0),
    ("1 kg m²", "inertia", 1.0),
    ("1 kg m^2", "inertia", 1.0),
    ("7.85 g/cm³", "density", 7850.0),
    ("0.5 g", "acceleration", 4.903325),
    ("0.5 g", "mass", 0.0005),
    ("180 deg", "angle", math.pi),
    ("180°", "angle", math.pi),
    ("80 ppm/K", "expansion", 8e-5),
    ("50 kN/m", "stiffness", 5e4),
    ("1 N m/deg", "torsional_stiffness", 180 / math.pi),
]

REFUSED = [
    ("12,7 mm", "length", "comma in its number: write a decimal point, such as '12.7 mm'"),
    ("1,000 mm", "length", "no thousands separator"),
    ("12.7", "length", "has no unit: a length is a number with one of the units m, cm, mm"),
    ("5 kg", "length", "is a mass, but a length is due"),
    ("5 N", "torque", "is a force, but a torque is due"),
    ("2 Nm", "energy", "is a torque, but an energy is due"),
    ("60 Hz", "angular_speed", "1 turn a second is '60 rev/min'"),
    ("60 rpm", "frequency", "is an angular speed, but a frequency is due"),
    ("60 rmp", "angular_speed", "unknown unit 'rmp'; did you mean rpm?"),
    ("1 MM", "length", "unknown unit 'MM'; did you mean mm?"),
    ("1 furlong", "length", "unknown unit 'furlong'; a length is"),
    ("wide", "length", "'wide' is not a length"),
    ("", "length", "'' is not a length"),
    ("nan mm", "length", "is not a length"),
    ("inf mm", "length", "is not a length"),
    ("1e999 mm", "length", "too large a number"),
    ("1 2 mm", "length", "unknown unit '2 mm'"),
    ("0x10 mm", "length", "unknown unit 'x10 mm'"),
    ("1_000 mm", "length", "unknown unit '_000 mm'"),
    ("5 mm; rm", "length", "unknown unit 'mm; rm'"),
    ("20 degF", "temperature", "did you mean degC?"),
]


@pytest.mark.parametrize(("text", "kind", "value"), READ)
def test_text_is_read_in_si(text, kind, value):
    assert to_si(text, kind) == pytest.approx(value, rel=1e-12)


@pytest.mark.parametrize(("text", "kind", "message"), REFUSED)
def test_what_cannot_be_read_is_refused_in_words(text, kind, message):
    with pytest.raises(UnitError, match=re.escape(message)):
        to_si(text, kind)


@pytest.mark.parametrize(
    ("value", "kind", "text"),
    [
        (0.0127, "length", "12.7 mm"),
        (0.0, "length", "0 mm"),
        (0.0005, "length", "0.5 mm"),
        (5e-5, "length", "50 µm"),
        (1.25, "length", "1.25 m"),
        (-0.52, "length", "-520 mm"),
        (0.3, "mass", "300 g"),
        (12345.6, "time", "12350 s"),
        (math.pi, "angular_speed", "30 rev/min"),
        (293.15, "temperature", "20 °C"),
        (0.143, "fraction", "14.3 %"),
        (1.5, "rate", "1.5 /s"),
        (2.65, "acceleration", "2.65 m/s2"),
        (5e4, "stiffness", "50 kN/m"),
        (math.nan, "length", "–"),
    ],
)
def test_value_is_printed_readably(value, kind, text):
    assert format_si(value, kind) == text


@given(
    kind=st.sampled_from(sorted(set(UNITS) - {"temperature"})),
    value=st.floats(min_value=1e-6, max_value=1e6),
    sign=st.sampled_from([-1.0, 1.0]),
)
def test_printed_value_reads_back(kind, value, sign):
    text = format_si(sign * value, kind)
    assert to_si(text, kind) == pytest.approx(sign * value, rel=6e-4)  # four digits are printed


@given(text=st.text(max_size=20), kind=st.sampled_from(sorted(UNITS)))
def test_any_text_gives_a_finite_value_or_a_unit_error(text, kind):
    try:
        value = to_si(text, kind)
    except UnitError as error:
        assert str(error)
    else:
        assert math.isfinite(value)


@pytest.mark.parametrize("kind", sorted(UNITS))
def test_schema_pattern_takes_every_unit_and_no_bare_text(kind):
    pattern = re.compile(json.loads(json.dumps(json_pattern(kind))))
    for unit in UNITS[kind]:
        assert pattern.search(f"-1.5e-3 {unit}")
    assert not pattern.search("12 cubits")
    assert not pattern.search("mm")


@pytest.mark.parametrize("kind", sorted(UNITS))
def test_first_unit_of_a_kind_is_the_si_one(kind):
    assert next(iter(UNITS[kind].values())) == 1.0
    assert KIND_NAMES[kind].startswith(("a ", "an "))
