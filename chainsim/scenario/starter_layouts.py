"""The common layouts of a lift, and the tables in which their starter scenarios differ."""

from __future__ import annotations

import math
from collections.abc import Callable
from types import MappingProxyType
from typing import NamedTuple

from chainsim.scenario.starter_sizes import Sizes

LEAN = math.radians(20.0)
ARM_OVER_DISTANCE = 0.25
SPRING_TRAVEL = 0.02  # m, way on which the spring's force changes by its set force


def grams(mass: float) -> str:
    """Write a mass to two digits, in a unit that reads well.

    Parameters
    ----------
    mass : float
        The mass [kg].

    Returns
    -------
    str
        Such as `0.25 kg`.
    """
    rounded = float(f"{mass:.2g}")
    return f"{rounded:.3g} kg" if rounded >= 0.1 else f"{1e3 * rounded:.3g} g"


class Layout(NamedTuple):
    """One layout: what it is, which sprocket is driven, and its tables."""

    text: str
    driven: str
    head: Callable[[Sizes], str]
    tail: Callable[[Sizes], str]
    lean: float = 0.0
    reaction: str = "frame"


def _no_mount(sizes: Sizes) -> str:
    return ""


def _screwed(sizes: Sizes) -> str:
    return 'mount = { kind = "screwed", shift = "0 mm" } # raise it to give the chain slack\n'


def _hung_idler(sizes: Sizes) -> str:
    return f'mount = {{ kind = "hung", mass = "{grams(sizes.hung_at_head)}", free = "y" }}\n'


def _slide(sizes: Sizes) -> str:
    axis = f"[{math.sin(LEAN):.4f}, {-math.cos(LEAN):.4f}]"
    mass = grams(sizes.hung_at_head)
    return f'mount = {{ kind = "sliding", mass = "{mass}", axis = {axis} }} # down the slope\n'


def _hung_unit(sizes: Sizes) -> str:
    return (
        "# all that hangs but the chain: motor, gearing, axle, sprocket\n"
        f'mount = {{ kind = "hung", mass = "{grams(sizes.hung_at_tail)}", free = "y" }}\n'
    )


def _counterweight(sizes: Sizes) -> str:
    return f"""
[sprocket.mount] # of the head
kind = "counterweight"
axis = [0, 1] # the cord pulls it up
mass = "{grams(sizes.head_unit)}"
# the weight carries head, chain and balls, and leaves a pull at the foot
weight = "{grams(sizes.counterweight)}"
pulley_drag = "0.1 N"
damping = "5 N s/m"
stops = ["-15 mm", "15 mm"]
"""


def _spring(sizes: Sizes) -> str:
    rate = sizes.spring_force / SPRING_TRAVEL
    return f"""
[sprocket.mount] # of the tail
kind = "spring"
axis = [0, -1] # the spring pulls it down
mass = "{grams(sizes.head_unit)}"
rate = "{rate:.2g} N/m"
set_force = "{sizes.spring_force:.2g} N"
damping = "3 N s/m"
stops = ["-15 mm", "15 mm"]
"""


def _arm(sizes: Sizes) -> str:
    length = 1e3 * max(ARM_OVER_DISTANCE * sizes.distance, 6.0 * sizes.pitch)
    return f"""
[sprocket.mount] # of the tail: arm, motor, gearing, axle, sprocket
kind = "arm"
pivot = ["{-length:.0f} mm", "0 mm"]
mass = "{grams(sizes.hung_at_tail)}"
center_of_mass = ["0 mm", "0 mm"]
stops = ["-8 deg", "8 deg"]
"""


LAYOUTS = MappingProxyType(
    {
        "head-driven-hung-idler": Layout(
            "driven at the head; an idle tail hung in the chain takes up the slack",
            "head",
            _no_mount,
            _hung_idler,
        ),
        "tail-driven-hung-unit": Layout(
            "driven at the tail by a unit that hangs from the chain",
            "tail",
            _no_mount,
            _hung_unit,
        ),
        "fixed-distance": Layout(
            "driven at the head; both axles at a fixed distance",
            "head",
            _no_mount,
            _screwed,
        ),
        "counterweight-head": Layout(
            "driven at the tail; a counterweight lifts the head",
            "tail",
            _counterweight,
            _no_mount,
        ),
        "spring": Layout(
            "driven at the head; a spring pulls the tail down",
            "head",
            _no_mount,
            _spring,
        ),
        "inclined": Layout(
            "leans to the left by 20 deg, driven at the head; the tail hangs on a slide",
            "head",
            _no_mount,
            _slide,
            lean=LEAN,
        ),
        "arm": Layout(
            "driven at the tail by a unit on an arm that rests in the chain",
            "tail",
            _no_mount,
            _arm,
            reaction="mount",
        ),
    }
)
"""Name of a layout -> what `starter` writes for it."""
