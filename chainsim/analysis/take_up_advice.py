"""Concerns about what keeps the loop taut, and how it bounces."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import NamedTuple

from chainsim import closed_forms as cf
from chainsim.analysis.sized import Sized, bounce_frequency, threshold_mass
from chainsim.units import format_si

SAFE_HANG = 2.0
"""Hung mass over the mass at which a strand goes slack (dimensionless): starts, chordal action and
bunching balls need the rest; common practice, no source."""


class Advice(NamedTuple):
    """A change that would help.

    Attributes
    ----------
    urgency : float
        How far the lift is from where it should be (dimensionless): 1 is just there.
    key : str
        Dotted key of the value to change first.
    text : str
        One sentence with figures.
    """

    urgency: float
    key: str
    text: str


def slack(sized: Sized) -> Iterator[Advice]:
    """A hung mass near the one at which a strand goes slack.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    threshold = threshold_mass(sized)
    if math.isnan(threshold) or threshold <= 0.0:
        return
    k = [i for i, wheel in enumerate(sized.path.wheels) if wheel.movable is not None][-1]
    sprocket = sized.scenario.sprocket[k]
    mass = sprocket.mount.mass
    wanted = _rounded_up(SAFE_HANG * threshold)
    text = (
        f"hang {format_si(wanted, 'mass')} instead of {format_si(mass, 'mass')} at "
        f"{sprocket.name}: its balls slacken a strand at {format_si(threshold, 'mass')}"
    )
    if sized.driven == k:
        others = [wheel.name for i, wheel in enumerate(sized.path.wheels) if i != k]
        text += f"; or drive {others[0]} instead, where the balls do not count against it"
    yield Advice(SAFE_HANG * threshold / mass, f"sprocket.{sprocket.name}.mount.mass", text)


def _rounded_up(value: float) -> float:
    """Round up to two digits, as one would buy it."""
    unit = 10.0 ** (math.floor(math.log10(value)) - 1)
    return math.ceil(value / unit) * unit


def nothing_holds(sized: Sized) -> Iterator[Advice]:
    """Fixed axles, so that nothing keeps the loop taut as it wears.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    pull = sized.running.driven_pull
    fixed = all(wheel.movable is None for wheel in sized.path.wheels)
    if not fixed or len(sized.path.wheels) == 1 or sized.surplus < 0.0 or pull <= 0.0:
        return
    name = sized.path.wheels[sized.driven].name
    yield Advice(
        2.0,
        "sprocket",
        f"hang or spring one axle: on fixed ones nothing keeps the loop taut against the "
        f"{format_si(pull, 'force')} by which {name} pulls, and less as the chain wears",
    )


def weak_take_up(sized: Sized) -> Iterator[Advice]:
    """A spring or counterweight that leaves a strand slack.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    movable = [i for i, wheel in enumerate(sized.path.wheels) if wheel.movable is not None]
    if not movable or sized.running.least >= 0.0 or not math.isnan(threshold_mass(sized)):
        return
    short, sprocket = -sized.running.least, sized.scenario.sprocket[movable[-1]]
    yield Advice(
        3.0,
        f"sprocket.{sprocket.name}.mount",
        f"the take-up at {sprocket.name} leaves a strand slack by {format_si(short, 'force')}: "
        f"strengthen it by at least {format_si(4.0 * short, 'force')}",
    )


def surplus(sized: Sized) -> Iterator[Advice]:
    """Fixed axles with links to spare, or none.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    if any(w.movable is not None for w in sized.path.wheels) or math.isnan(sized.surplus):
        return
    if abs(sized.surplus) < 0.05:
        return
    way = "apart" if sized.surplus > 0.0 else "together"
    shift = abs(sized.surplus) * sized.path.pitch / 2.0
    spare = "to spare" if sized.surplus > 0.0 else "missing"
    yield Advice(
        1.0 + 2.0 * abs(sized.surplus),
        "sprocket",
        f"{sized.n_links} links leave {abs(sized.surplus):.2f} links {spare} on these axles: set "
        f"them about {format_si(shift, 'length')} further {way}, or let one hang in the loop",
    )


def resonance(sized: Sized) -> Iterator[Advice]:
    """A take-up that bounces at the tooth rate.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    bounce, teeth = bounce_frequency(sized), cf.tooth_rate(sized.speed, sized.path.pitch)
    guard = sized.scenario.limits.guard_band
    if math.isnan(bounce):
        return
    apart = abs(bounce / teeth - 1.0)
    if apart >= guard:
        return
    carriers = sized.scenario.carriers
    slower = bounce * sized.path.pitch * (1.0 - 2.0 * guard)
    text = (
        f"run at {format_si(slower, 'speed')} instead of {format_si(sized.speed, 'speed')}: the "
        f"tooth rate of {format_si(teeth, 'frequency')} lies within "
        f"{format_si(guard, 'fraction')} of the take-up's bounce of "
        f"{format_si(bounce, 'frequency')}"
    )
    denser = math.floor(carriers.every * slower / sized.speed) if carriers is not None else 0
    if carriers is not None and 1 <= denser < carriers.every:
        text += f"; carriers every {denser} instead of {carriers.every} links keep the pocket rate"
    yield Advice(min(guard / max(apart, 1e-3), 2.5), "drive.chain_speed", text)
