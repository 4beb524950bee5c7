"""Write a first, commented scenario for each common layout."""

from __future__ import annotations

import math

from chainsim.errors import CallError, UnitError
from chainsim.scenario.paths import nearest
from chainsim.scenario.starter_layouts import LAYOUTS, Layout, grams
from chainsim.scenario.starter_sizes import TEETH, Sizes, sizes_for
from chainsim.units import to_si

COMMENT_COLUMN = 33


def starter(
    layout: str,
    height: str | float = "500 mm",
    ball: str | float = "16 mm",
    rate: str | float = "1 /s",
) -> str:
    """Write a commented scenario that states what a designer will want to change.

    Parameters
    ----------
    layout : str
        A key of `LAYOUTS`.
    height : str or float
        Height to lift by [m].
    ball : str or float
        Diameter of a ball [m].
    rate : str or float
        Balls per second [1/s].

    Returns
    -------
    str
        TOML text that `parse_scenario` reads.

    Raises
    ------
    CallError
        Unknown layout, or a demand that cannot be read or met.
    """
    if layout not in LAYOUTS:
        near = nearest(layout, LAYOUTS)
        hint = f"did you mean '{near}'? " if near else ""
        raise CallError(f"layout '{layout}': {hint}there is {', '.join(LAYOUTS)}")
    chosen = LAYOUTS[layout]
    along = _read("height", height, "length") / math.cos(chosen.lean)
    sizes = sizes_for(along, _read("ball", ball, "length"), _read("rate", rate, "rate"))
    return _text(chosen, sizes)


def _read(name: str, value: str | float, unit_kind: str) -> float:
    """A demand in SI."""
    if not isinstance(value, str):
        return float(value)
    try:
        return to_si(value, unit_kind)
    except UnitError as error:
        raise CallError(f"{name}: {error}") from None


def _text(layout: Layout, sizes: Sizes) -> str:
    """Join the tables of a starter scenario."""
    parts = (_head(layout, sizes), _sprockets(layout, sizes), _drive(layout, sizes), _load(sizes))
    return "\n".join(_aligned(line) for line in "\n".join(parts).split("\n"))


def _aligned(line: str) -> str:
    """Put the comment behind a value into its column."""
    value, mark, comment = line.partition(" # ")
    return f"{value.rstrip():<{COMMENT_COLUMN}}# {comment}" if mark and value.strip() else line


def _head(layout: Layout, sizes: Sizes) -> str:
    return f"""\
# A first scenario: {layout.text}.
# x points right, y up, seen from the front; the strand on the right rises.
# Draw and size it with `chainsim check`, prove it in motion with `chainsim run`.

format = 1
title = "Lift of {_millimetres(sizes.distance)}, {layout.text}"

[chain]
kind = "{sizes.kind}" # supplies what is not stated; replace by what you measure
pitch = "{_millimetres(sizes.pitch)}"
links = {sizes.links} # a whole number of carriers
# link_mass, link_stiffness, link_damping, roller_diameter, allowable_tension, joint, play, scatter
"""


def _sprockets(layout: Layout, sizes: Sizes) -> str:
    x = -sizes.distance * math.sin(layout.lean)
    y = sizes.distance * math.cos(layout.lean)
    return f"""\
[[sprocket]] # in the order in which the chain meets them
name = "head"
teeth = {TEETH}
center = ["{_millimetres(x)}", "{_millimetres(y)}"]
{layout.head(sizes)}
[[sprocket]]
name = "tail"
teeth = {TEETH}
center = ["0 mm", "0 mm"]
{layout.tail(sizes)}"""


def _drive(layout: Layout, sizes: Sizes) -> str:
    pockets = sizes.speed / (sizes.every * sizes.pitch)
    return f"""\
[drive]
sprocket = "{layout.driven}"
kind = "speed" # "motor" takes a [drive.motor] table
chain_speed = "{sizes.speed:.3g} m/s" # {pockets:.3g} pockets a second come by
ramp = "0.5 s"
reaction = "{layout.reaction}" # what takes the torque of the drive
"""


def _load(sizes: Sizes) -> str:
    inward, outward = _millimetres(0.8 * sizes.pitch), _millimetres(1.5 * sizes.pitch)
    return f"""\
[carriers]
every = {sizes.every} # links from one carrier to the next
mass = "{grams(sizes.carrier_mass)}"
pocket = {{ shape = "tray" }} # floor, lip, tilt, offset, back follow from the ball

[balls]
diameter = "{_millimetres(sizes.ball)}"
material = "steel"
model = "rolling" # "fixed" for a quick study of the chain alone
feed = {{ kind = "set down", rate = "{sizes.rate:.3g} /s" }}

[limits]
ball_rate = "{sizes.rate:.3g} /s"
clearance = {{ inward = "{inward}", outward = "{outward}" }}
"""


def _millimetres(length: float) -> str:
    return f"{1e3 * length:.6g} mm".replace("-0 mm", "0 mm")
