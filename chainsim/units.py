"""Quantities with units: text to SI, and SI to readable text.

The table is closed: a unit that is not listed for its kind is refused, and the message says
what would be accepted. Nothing is guessed: a decimal comma, a missing unit, `Hz` where an
angular speed is due are errors.

Conversion factors are exact by definition (NIST Special Publication 811, 2008, appendix B,
from memory), except `psi`, `lbf ft` and the like, which are products of exact ones.
"""

from __future__ import annotations

import difflib
import math
import re
from types import MappingProxyType

from chainsim.errors import UnitError

_TURN = 2.0 * math.pi
_DEGREE = math.pi / 180.0
_INCH = 0.0254
_FOOT = 0.3048
_POUND = 0.45359237
_STANDARD_GRAVITY = 9.80665
_POUND_FORCE = _POUND * _STANDARD_GRAVITY
_CELSIUS_ZERO = 273.15

# kind -> unit -> factor to SI. The first unit of a kind is the SI one.
_TABLE: dict[str, dict[str, float]] = {
    "length": {
        "m": 1.0, "cm": 1e-2, "mm": 1e-3, "um": 1e-6, "µm": 1e-6, "in": _INCH, "ft": _FOOT,
    },
    "mass": {"kg": 1.0, "g": 1e-3, "mg": 1e-6, "t": 1e3, "lb": _POUND, "oz": _POUND / 16},
    "time": {"s": 1.0, "ms": 1e-3, "us": 1e-6, "µs": 1e-6, "min": 60.0, "h": 3600.0},
    "speed": {
        "m/s": 1.0, "cm/s": 1e-2, "mm/s": 1e-3, "m/min": 1 / 60, "mm/min": 1e-3 / 60,
        "km/h": 1 / 3.6, "in/s": _INCH, "ft/s": _FOOT, "ft/min": _FOOT / 60,
    },
    "acceleration": {
        "m/s2": 1.0, "cm/s2": 1e-2, "mm/s2": 1e-3, "ft/s2": _FOOT, "g": _STANDARD_GRAVITY,
    },
    "force": {"N": 1.0, "mN": 1e-3, "kN": 1e3, "lbf": _POUND_FORCE, "kgf": _STANDARD_GRAVITY},
    "torque": {
        "N m": 1.0, "Nm": 1.0, "mN m": 1e-3, "mNm": 1e-3, "N cm": 1e-2, "Ncm": 1e-2,
        "N mm": 1e-3, "Nmm": 1e-3, "kN m": 1e3, "kgf cm": _STANDARD_GRAVITY * 1e-2,
        "lbf in": _POUND_FORCE * _INCH, "lbf ft": _POUND_FORCE * _FOOT,
    },
    "stiffness": {
        "N/m": 1.0, "kN/m": 1e3, "MN/m": 1e6, "N/mm": 1e3, "N/cm": 1e2, "kN/mm": 1e6,
        "lbf/in": _POUND_FORCE / _INCH,
    },
    "torsional_stiffness": {
        "N m/rad": 1.0, "Nm/rad": 1.0, "N m/deg": 1 / _DEGREE, "Nm/deg": 1 / _DEGREE,
        "mN m/rad": 1e-3, "N mm/rad": 1e-3, "N mm/deg": 1e-3 / _DEGREE, "kN m/rad": 1e3,
    },
    "damping": {
        "N s/m": 1.0, "Ns/m": 1.0, "N s/mm": 1e3, "mN s/m": 1e-3, "kN s/m": 1e3, "kg/s": 1.0,
    },
    "torsional_damping": {
        "N m s/rad": 1.0, "Nms/rad": 1.0, "N m s": 1.0, "Nms": 1.0, "mN m s/rad": 1e-3,
        "N mm s/rad": 1e-3,
    },
    "angle": {"rad": 1.0, "mrad": 1e-3, "deg": _DEGREE, "°": _DEGREE, "rev": _TURN},
    "angular_speed": {
        "rad/s": 1.0, "deg/s": _DEGREE, "rev/s": _TURN, "rev/min": _TURN / 60,
        "rpm": _TURN / 60, "rev/h": _TURN / 3600,
    },
    "rate": {
        "1/s": 1.0, "/s": 1.0, "1/min": 1 / 60, "/min": 1 / 60, "1/h": 1 / 3600, "/h": 1 / 3600,
    },
    "frequency": {"Hz": 1.0, "mHz": 1e-3, "kHz": 1e3},
    "mass_per_length": {
        "kg/m": 1.0, "g/m": 1e-3, "g/cm": 0.1, "g/mm": 1.0, "lb/ft": _POUND / _FOOT,
        "lb/in": _POUND / _INCH,
    },
    "density": {"kg/m3": 1.0, "g/cm3": 1e3, "g/ml": 1e3, "lb/in3": _POUND / _INCH**3},
    "pressure": {
        "Pa": 1.0, "kPa": 1e3, "MPa": 1e6, "GPa": 1e9, "bar": 1e5, "N/mm2": 1e6, "N/m2": 1.0,
        "psi": _POUND_FORCE / _INCH**2,
    },
    "temperature": {"K": 1.0, "degC": 1.0, "°C": 1.0},
    "expansion": {
        "1/K": 1.0, "/K": 1.0, "1/degC": 1.0, "1/°C": 1.0, "ppm/K": 1e-6, "um/m/K": 1e-6,
        "µm/m/K": 1e-6, "%/K": 1e-2,
    },
    "inertia": {
        "kg m2": 1.0, "kg cm2": 1e-4, "kg mm2": 1e-6, "g m2": 1e-3, "g cm2": 1e-7, "g mm2": 1e-9,
    },
    "power": {"W": 1.0, "mW": 1e-3, "kW": 1e3},
    "energy": {"J": 1.0, "mJ": 1e-3, "uJ": 1e-6, "kJ": 1e3, "Wh": 3600.0},
    "voltage": {"V": 1.0, "mV": 1e-3, "kV": 1e3},
    "current": {"A": 1.0, "mA": 1e-3},
    "resistance": {"ohm": 1.0, "Ω": 1.0, "mohm": 1e-3, "kohm": 1e3},
    "fraction": {"": 1.0, "%": 1e-2, "ppm": 1e-6},
}  # fmt: skip

UNITS = MappingProxyType({kind: MappingProxyType(units) for kind, units in _TABLE.items()})
"""kind -> unit -> factor to SI; the first unit of a kind is the SI one. A temperature in
`degC` also has its zero moved by 273.15 K."""

KIND_NAMES = MappingProxyType(
    {kind: f"{'an' if kind[0] in 'aei' else 'a'} {kind.replace('_', ' ')}" for kind in _TABLE}
    | {"expansion": "a thermal expansion", "mass_per_length": "a mass per length"}
)
"""kind -> its name in a sentence, with its article."""

# Units to print with, from large to small; the first that gives at least 1 is taken. A kind
# that is not here prints in its SI unit.
_PRINT_UNITS: dict[str, tuple[str, ...]] = {
    "length": ("m", "mm", "µm"),
    "mass": ("kg", "g", "mg"),
    "time": ("s", "ms", "µs"),
    "speed": ("m/s", "mm/s"),
    "acceleration": ("m/s2", "mm/s2"),
    "force": ("kN", "N", "mN"),
    "torque": ("N m", "mN m"),
    "stiffness": ("kN/m", "N/m"),
    "torsional_stiffness": ("N m/rad", "mN m/rad"),
    "damping": ("N s/m", "mN s/m"),
    "torsional_damping": ("N m s/rad", "mN m s/rad"),
    "angle": ("deg",),
    "angular_speed": ("rev/min",),
    "frequency": ("kHz", "Hz"),
    "mass_per_length": ("kg/m", "g/m"),
    "pressure": ("GPa", "MPa", "kPa", "Pa"),
    "temperature": ("°C",),
    "expansion": ("ppm/K",),
    "inertia": ("kg m2", "kg cm2", "g cm2", "g mm2"),
    "power": ("kW", "W", "mW"),
    "energy": ("J", "mJ", "uJ"),
    "voltage": ("V", "mV"),
    "current": ("A", "mA"),
    "fraction": ("%",),
}
# Least value printed in a unit, where that is less than 1 of it: 0.5 mm, not 500 µm.
_PRINT_FROM = {("length", "mm"): 1e-4}
_PRINT_ZERO = {"length": "mm", "mass": "g", "force": "N", "frequency": "Hz", "pressure": "MPa"}
_SIGNIFICANT_DIGITS = 4

_NUMBER = r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?"
_QUANTITY = re.compile(rf"\s*({_NUMBER})\s*(.*?)\s*", re.DOTALL)
_COMMA_NUMBER = re.compile(r"\s*[+-]?\d+,\d")
_SPELLINGS = str.maketrans(
    {"·": " ", "⋅": " ", "*": " ", "²": "2", "³": "3", "^": None, "μ": "µ", "\u2126": "Ω"}
)


def to_si(text: str, kind: str) -> float:
    """Read a quantity such as `"12.7 mm"`.

    Parameters
    ----------
    text : str
        A number, then a unit of the table.
    kind : str
        What is due there, a key of `UNITS`.

    Returns
    -------
    float
        The value in the SI unit of its kind, the first one in `UNITS[kind]`.

    Raises
    ------
    UnitError
        The text is no number with a unit of this kind; the message says what would be.
    """
    units = UNITS[kind]
    number, unit = _split(text, kind)
    if unit not in units:
        raise UnitError(_unit_message(text, unit, kind))
    value = number * units[unit]
    if kind == "temperature" and unit != "K":
        value += _CELSIUS_ZERO
    if not math.isfinite(value):
        raise UnitError(f"'{text}' is too large a number")
    return value


def format_si(value: float, kind: str) -> str:
    """Write a value in a readable unit of its kind, to four significant digits.

    Parameters
    ----------
    value : float
        Value in the SI unit of its kind.
    kind : str
        A key of `UNITS`.

    Returns
    -------
    str
        Number and unit, such as `12.7 mm`; a dash for a value that is not finite.
    """
    if not math.isfinite(value):
        return "–"
    unit = _print_unit(value, kind)
    if kind == "temperature":
        value -= _CELSIUS_ZERO
    number = f"{value / UNITS[kind][unit]:.{_SIGNIFICANT_DIGITS}g}"
    if "e" in number and abs(float(number)) >= 1.0:
        number = f"{float(number):.0f}" if abs(float(number)) < 1e7 else number
    return f"{number} {unit.removeprefix('1') if unit.startswith('1/') else unit}".strip()


def json_pattern(kind: str) -> str:
    """Regular expression of a quantity, for a JSON Schema.

    It knows the spellings of the table; `to_si` also takes `N·m`, `kg m²` and `kg m^2`.

    Parameters
    ----------
    kind : str
        A key of `UNITS`.

    Returns
    -------
    str
        Pattern anchored at both ends, in the dialect of JSON Schema (ECMA 262).
    """
    units = "|".join(
        re.sub(r"([^\w /%°µΩ])", r"\\\1", unit).replace("/", r"\/") for unit in UNITS[kind]
    )
    return rf"^\s*{_NUMBER}\s*({units})\s*$"


def _split(text: str, kind: str) -> tuple[float, str]:
    """Number and normalized unit of a quantity."""
    if _COMMA_NUMBER.match(text):
        fixed = text.strip().replace(",", ".")
        raise UnitError(
            f"'{text}' has a comma in its number: write a decimal point, such as '{fixed}', "
            "and no thousands separator"
        )
    match = _QUANTITY.fullmatch(text)
    if match is None:
        raise UnitError(f"'{text}' is not {KIND_NAMES[kind]}: {_example(kind)}")
    unit = " ".join(match[2].translate(_SPELLINGS).split())
    return float(match[1]), re.sub(r"\s*/\s*", "/", unit)


def _unit_message(text: str, unit: str, kind: str) -> str:
    """Say what is wrong with a unit, and what would be right."""
    name = KIND_NAMES[kind]
    if not unit:
        return f"'{text}' has no unit: {_example(kind)}"
    if kind == "angular_speed" and unit in UNITS["frequency"]:
        return (
            f"'{text}': {unit} counts events and is a frequency, but an angular speed is due "
            "(1 turn a second is '60 rev/min'); use rev/min, rad/s or deg/s"
        )
    others = [KIND_NAMES[other] for other, units in UNITS.items() if unit in units]
    if others:
        return f"'{text}' is {' or '.join(others)}, but {name} is due: {_example(kind)}"
    near = _nearest(unit, kind)
    hint = f"did you mean {near}? " if near else ""
    return f"'{text}': unknown unit '{unit}'; {hint}{_example(kind)}"


def _nearest(unit: str, kind: str) -> str | None:
    """Unit of this kind that looks most like the one given."""
    known = [known for known in UNITS[kind] if known]
    same_letters = [known_unit for known_unit in known if known_unit.lower() == unit.lower()]
    near = same_letters or difflib.get_close_matches(unit, known, n=1, cutoff=0.5)
    return near[0] if near else None


def _example(kind: str) -> str:
    """Sentence that lists the units of a kind."""
    units = [unit for unit in UNITS[kind] if unit]
    return f"{KIND_NAMES[kind]} is a number with one of the units {', '.join(units)}"


def _print_unit(value: float, kind: str) -> str:
    """Unit that shows a value with a number of 1 or more, where there is one."""
    choices = _PRINT_UNITS.get(kind, (next(iter(UNITS[kind])),))
    if value == 0.0:
        return _PRINT_ZERO.get(kind, choices[0])
    for unit in choices:
        if abs(value) >= _PRINT_FROM.get((kind, unit), UNITS[kind][unit]):
            return unit
    return choices[-1]
