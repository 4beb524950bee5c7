"""Parameters that bench measurements can tell, and when one counts as known."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from types import MappingProxyType
from typing import Any, NamedTuple

KNOWN_FACTOR = 1.5
"""A positive parameter counts as known when its interval ends within this factor of its value
[dimensionless]."""

KNOWN_SHARE = 0.5
"""A parameter that may be zero counts as known when half its interval is below this share of its
value [dimensionless]."""

KNOWN_NEAR_ZERO = 0.25
"""So it does when half its interval is below this share of its usual size [dimensionless]."""


class Parameter(NamedTuple):
    """One value of the scenario that a fit may find.

    Attributes
    ----------
    key : str
        Its dotted key.
    unit_kind : str
        A key of `chainsim.units.UNITS`.
    name : str
        In words.
    from_zero : bool
        Whether it may be zero: it is then fitted itself, else its logarithm.
    low, high : float
        Bounds [SI].
    usual : callable
        Scenario -> usual size [SI], for parameters that may be zero.
    """

    key: str
    unit_kind: str
    name: str
    from_zero: bool
    low: float
    high: float
    usual: Callable[[Any], float]

    def inside(self, value: float, scenario: Any) -> float:
        """Return the variable that the fit works with (dimensionless).

        Parameters
        ----------
        value : float
            Value of the parameter [SI].
        scenario : Scenario
        """
        return value / self.usual(scenario) if self.from_zero else math.log(value)

    def outside(self, variable: float, scenario: Any) -> float:
        """Return the value of the parameter [SI].

        Parameters
        ----------
        variable : float
            What the fit works with (dimensionless).
        scenario : Scenario
        """
        return variable * self.usual(scenario) if self.from_zero else math.exp(variable)

    def is_known(self, variable: float, half: float) -> bool:
        """Whether an interval is narrow enough for its value to be claimed.

        Parameters
        ----------
        variable, half : float
            Middle and half width of the interval, as the fit works with it (dimensionless).
        """
        if self.from_zero:
            return half <= max(KNOWN_NEAR_ZERO, KNOWN_SHARE * variable)
        return half <= math.log(KNOWN_FACTOR)


def value_of(scenario: Any, key: str) -> Any:
    """Return a value of a scenario outside its arrays.

    Parameters
    ----------
    scenario : Scenario
    key : str
        Dotted key.
    """
    node = scenario
    for step in key.split("."):
        node = getattr(node, step)
    return node


def _unit_size(scenario: Any) -> float:
    return 1.0


def _joint_size(scenario: Any) -> float:
    """Friction moment of a joint of the usual friction, 0.2, under 2 N [N m]."""
    return 0.4 * scenario.chain.joint.pin_radius


def _friction_size(scenario: Any) -> float:
    return 0.2


def _air_size(scenario: Any) -> float:
    """Damping that takes half the amplitude from a strand in 1.4 s [N s/m]."""
    return scenario.chain.link_mass / 1.0


_ALL = (
    Parameter("chain.link_stiffness", "stiffness", "stiffness of a link",
              False, 1.0, 1e10, _unit_size),
    Parameter("chain.link_damping", "fraction", "damping of a link",
              False, 1e-4, 2.0, _unit_size),
    Parameter("chain.joint.moment", "torque", "joint friction without tension",
              True, 0.0, 10.0, _joint_size),
    Parameter("chain.joint.friction", "fraction", "coefficient of joint friction",
              True, 0.0, 3.0, _friction_size),
    Parameter("chain.air_damping", "damping", "air damping of a pin",
              True, 0.0, 100.0, _air_size),
    Parameter("drive.motor.no_load_speed", "angular_speed", "speed without load",
              False, 1e-3, 1e6, _unit_size),
    Parameter("drive.motor.stall_torque", "torque", "stall torque",
              False, 1e-7, 1e4, _unit_size),
    Parameter("drive.motor.no_load_current", "current", "current without load",
              False, 1e-7, 1e4, _unit_size),
    Parameter("drive.motor.stall_current", "current", "stall current",
              False, 1e-6, 1e5, _unit_size),
    Parameter("drive.motor.gear_efficiency", "fraction", "efficiency of the gearing",
              False, 0.05, 1.0, _unit_size),
)  # fmt: skip

PARAMETERS: Mapping[str, Parameter] = MappingProxyType({item.key: item for item in _ALL})
"""Dotted key -> parameter."""
