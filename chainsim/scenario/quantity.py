"""Types of scenario values: text with a unit in the file, a float in SI in the model.

A field is declared as `Annotated[float, Quantity("length", above=0.0)]`; the common ones have
names (`Length`, `PositiveLength`, …). pydantic calls `Quantity` to read the text, and again to
describe the value in the JSON Schema.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Annotated, Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler, ValidationInfo
from pydantic_core import CoreSchema, core_schema

from chainsim.units import KIND_NAMES, UNITS, json_pattern, to_si

PLAIN_NUMBER = "fraction"
"""The unit kind of values without a dimension: a bare number, or text such as `"3 %"`."""

LEAST_SIZE, LARGEST_SIZE = 1e-15, 1e15
"""Sizes of numbers [SI] that are taken, zero aside: beyond them powers overflow."""


class SI(float):
    """A number that is known to be in SI already, so that it needs no unit.

    A scenario file can hold none: there, a number without a unit is refused.
    """


@dataclass(frozen=True)
class Quantity:
    """How the text of one value becomes a float in SI, and which values are possible.

    Attributes
    ----------
    kind : str
        Unit kind, a key of `chainsim.units.UNITS`.
    above, least, most : float or None
        Value it must exceed, may not undercut, may not exceed [SI unit of the kind].
    kind_where : mapping of str to str
        Unit kind to use instead where the `kind` key of the same table has this value.
    """

    kind: str
    above: float | None = None
    least: float | None = None
    most: float | None = None
    kind_where: Mapping[str, str] = field(default_factory=dict, hash=False)

    def kind_for(self, table_kind: Any) -> str:
        """Unit kind in a table whose own `kind` key is `table_kind`."""
        return self.kind_where.get(table_kind, self.kind)

    def read(self, value: Any, table_kind: Any = None) -> float:
        """Read one value of a scenario.

        Parameters
        ----------
        value : object
            Text with a unit, a bare number where the kind has no dimension, or `SI`.
        table_kind : str or None
            Value of the `kind` key of the table that holds it.

        Returns
        -------
        float
            The value [SI unit of its kind].

        Raises
        ------
        ValueError
            No such quantity, or not a possible value; the text says what is due.
        """
        number = self._number(value, self.kind_for(table_kind))
        self._refuse_impossible(number)
        return number

    def _number(self, value: Any, kind: str) -> float:
        if isinstance(value, str):
            return to_si(value, kind)
        if isinstance(value, bool) or not isinstance(value, (int, float)):
            raise ValueError(f"{KIND_NAMES[kind]} is due, such as {example(kind)}")
        if not _is_finite(value):
            raise ValueError("a finite number is due")
        if not isinstance(value, SI) and kind != PLAIN_NUMBER:
            raise ValueError(
                f"a number without a unit; {KIND_NAMES[kind]} is due, such as {example(kind)}"
            )
        return float(value)

    def _refuse_impossible(self, number: float) -> None:
        unit = next(iter(UNITS[self.kind]))
        if number != 0.0 and not LEAST_SIZE <= abs(number) <= LARGEST_SIZE:
            raise ValueError("no machine has a value of this size")
        if self.above is not None and number <= self.above:
            raise ValueError(f"must be more than {f'{self.above:g} {unit}'.strip()}")
        if self.least is not None and number < self.least:
            raise ValueError(f"must be at least {f'{self.least:g} {unit}'.strip()}")
        if self.most is not None and number > self.most:
            raise ValueError(f"must be at most {f'{self.most:g} {unit}'.strip()}")

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        """Put the reader before pydantic's own check for a float."""

        def read(value: Any, info: ValidationInfo) -> float:
            return self.read(value, (info.data or {}).get("kind"))

        return core_schema.with_info_before_validator_function(read, handler(source))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        """Describe the text, not the float that it becomes."""
        if self.kind == PLAIN_NUMBER:
            limits = {"exclusiveMinimum": self.above, "minimum": self.least, "maximum": self.most}
            number = {"type": "number"} | {k: v for k, v in limits.items() if v is not None}
            return {"anyOf": [number, _text_schema(self.kind)]}
        kinds = [self.kind, *dict.fromkeys(self.kind_where.values())]
        if len(kinds) == 1:
            return _text_schema(self.kind)
        return {"anyOf": [_text_schema(kind) for kind in kinds]}


def example(kind: str) -> str:
    """A quantity of this kind as it is written in a scenario, with its quotes."""
    return f'"{_EXAMPLES[kind]}"'


def _text_schema(kind: str) -> dict[str, Any]:
    return {
        "type": "string",
        "pattern": json_pattern(kind),
        "description": f"{KIND_NAMES[kind]}, with a unit",
        "examples": [_EXAMPLES[kind]],
    }


_EXAMPLES = {
    "length": "12.7 mm", "mass": "0.30 kg", "time": "0.5 s", "speed": "0.15 m/s",
    "acceleration": "2 m/s2", "force": "5 N", "torque": "20 mN m", "stiffness": "50 kN/m",
    "torsional_stiffness": "20 N m/rad", "damping": "0.5 N s/m",
    "torsional_damping": "0.5 mN m s/rad", "angle": "5 deg", "angular_speed": "60 rev/min",
    "rate": "1 /s", "frequency": "500 Hz", "mass_per_length": "100 g/m", "density": "7.8 g/cm3",
    "pressure": "200 GPa", "temperature": "20 degC", "expansion": "100 ppm/K",
    "inertia": "5 g cm2", "power": "5 W", "energy": "10 mJ", "voltage": "12 V",
    "current": "0.5 A", "resistance": "10 ohm", "fraction": "3 %",
}  # fmt: skip


def _is_finite(value: int | float) -> bool:
    """Whether a number fits a float; a TOML integer may be of any size."""
    try:
        return math.isfinite(value)
    except OverflowError:
        return False


def whole_number(value: Any) -> int:
    """Read a count: a whole number without a unit.

    Parameters
    ----------
    value : object
        What the file holds.

    Returns
    -------
    int
        The count (dimensionless).

    Raises
    ------
    ValueError
        It is no number, or not a whole one.
    """
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        raise ValueError("a whole number without a unit is due")
    if not _is_finite(value) or value != int(value):
        raise ValueError("a whole number is due")
    return int(value)


@dataclass(frozen=True)
class Count:
    """A whole number with its least and largest value (dimensionless)."""

    least: int = 0
    why: str = ""
    most: int = 2**31

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> CoreSchema:
        """Put the reader before pydantic's own check for an integer."""

        def read(value: Any) -> int:
            reason = f": {self.why}" if self.why else ""
            try:
                number = whole_number(value)
            except ValueError as error:
                raise ValueError(f"{error}{reason}") from None
            if number < self.least:
                raise ValueError(f"must be at least {self.least}{reason}")
            if number > self.most:
                raise ValueError(f"must be at most {self.most}")
            return number

        return core_schema.no_info_before_validator_function(read, handler(source))

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        """Describe the whole number and its least value."""
        return {"type": "integer", "minimum": self.least, "maximum": self.most}


Length = Annotated[float, Quantity("length")]
PositiveLength = Annotated[float, Quantity("length", above=0.0)]
LengthFromZero = Annotated[float, Quantity("length", least=0.0)]
PositiveMass = Annotated[float, Quantity("mass", above=0.0)]
MassFromZero = Annotated[float, Quantity("mass", least=0.0)]
PositiveTime = Annotated[float, Quantity("time", above=0.0)]
TimeFromZero = Annotated[float, Quantity("time", least=0.0)]
PositiveForce = Annotated[float, Quantity("force", above=0.0)]
ForceFromZero = Annotated[float, Quantity("force", least=0.0)]
TorqueFromZero = Annotated[float, Quantity("torque", least=0.0)]
PositiveTorque = Annotated[float, Quantity("torque", above=0.0)]
PositiveStiffness = Annotated[float, Quantity("stiffness", above=0.0)]
DampingFromZero = Annotated[float, Quantity("damping", least=0.0)]
PositiveInertia = Annotated[float, Quantity("inertia", above=0.0)]
PositiveAcceleration = Annotated[float, Quantity("acceleration", above=0.0)]
Angle = Annotated[float, Quantity("angle")]
PositiveAngle = Annotated[float, Quantity("angle", above=0.0)]
Temperature = Annotated[float, Quantity("temperature", above=0.0)]
NumberFromZero = Annotated[float, Quantity(PLAIN_NUMBER, least=0.0)]
PositiveNumber = Annotated[float, Quantity(PLAIN_NUMBER, above=0.0)]
Share = Annotated[float, Quantity(PLAIN_NUMBER, least=0.0, most=1.0)]
Point = tuple[Length, Length]
Direction = tuple[
    Annotated[float, Quantity(PLAIN_NUMBER)], Annotated[float, Quantity(PLAIN_NUMBER)]
]
