"""The one change that would help most, volunteered in a sentence with its figures.

Each concern says how far a lift is from where it should be, as a ratio above 1; the greatest
speaks. All are closed forms: a run may find something else.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator

from chainsim import closed_forms as cf
from chainsim.analysis.sized import (
    Sized,
    size_up,
    sprocket_torque,
    starting_pull,
    whirl_margin,
)
from chainsim.analysis.take_up_advice import (
    Advice,
    nothing_holds,
    resonance,
    slack,
    surplus,
    weak_take_up,
)
from chainsim.model.tangents import Route
from chainsim.scenario import Scenario
from chainsim.units import format_si

__all__ = ["Advice", "advice"]

ROUGH = 0.10
"""Speed variation (dimensionless) above which more teeth are suggested: ten teeth stay at half of
it, six exceed it; common practice, no source."""

STALL_RESERVE = 2.5
"""Stall torque over running torque of a motor (dimensionless) that starts and wear ask for; common
practice, no source."""

WHIRL_RESERVE = 2.0
"""Critical over running speed of a shaft (dimensionless): *Shigley's Mechanical Engineering
Design*, 9th edition, p. 383."""


def advice(scenario: Scenario, path: Route, n_links: int) -> list[Advice]:
    """List the changes that would help, the one that helps most first.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    path : Route
        The taut loop on the axles as drawn.
    n_links : int
        Number of links (dimensionless).

    Returns
    -------
    list of Advice
        Those with an urgency above 1; empty when nothing stands out.
    """
    sized = size_up(scenario, path, n_links)
    found = [item for concern in _CONCERNS for item in concern(sized)]
    return sorted((item for item in found if item.urgency > 1.0), key=lambda a: -a.urgency)


def _overload(sized: Sized) -> Iterator[Advice]:
    """Links near their allowable tension."""
    most = sized.running.most + starting_pull(sized)
    allowed = sized.scenario.chain.allowable_tension
    yield Advice(
        most / (0.8 * allowed),
        "chain.kind",
        f"take a stronger chain or a smaller take-up: running and starting pull reach "
        f"{format_si(most, 'force')}, links are allowed {format_si(allowed, 'force')}",
    )


def _rate(sized: Sized) -> Iterator[Advice]:
    """Too few pockets for the demand, or far more than it needs."""
    carriers, balls = sized.scenario.carriers, sized.scenario.balls
    demand = sized.scenario.limits.ball_rate
    if demand is None or carriers is None or balls is None:
        return
    places = carriers.every * (balls.spacing or 1) * sized.path.pitch
    pockets = cf.pocket_rate(sized.speed, places)
    needed = demand * places
    if pockets < demand:
        yield Advice(
            2.0 * demand / pockets,
            "drive.chain_speed",
            f"run at {format_si(1.1 * needed, 'speed')} instead of "
            f"{format_si(sized.speed, 'speed')}, or set carriers closer: pockets come by at "
            f"{format_si(pockets, 'rate')}, {format_si(demand, 'rate')} are wanted",
        )
    elif pockets > 2.0 * demand:
        yield Advice(
            0.5 * pockets / demand,
            "drive.chain_speed",
            f"run at {format_si(1.25 * needed, 'speed')} instead of "
            f"{format_si(sized.speed, 'speed')}: that still brings "
            f"{format_si(1.25 * demand, 'rate')} where {format_si(demand, 'rate')} are wanted, "
            f"and every shake falls with the speed",
        )


def _teeth(sized: Sized) -> Iterator[Advice]:
    """A driven sprocket with so few teeth that the ride is rough."""
    wheel = sized.path.wheels[sized.driven]
    if not wheel.teeth:
        return
    now, limit = cf.speed_variation(wheel.teeth), sized.scenario.limits.ripple or ROUGH
    more = wheel.teeth
    while cf.speed_variation(more) > 0.6 * limit:
        more += 1
    yield Advice(
        now / limit,
        f"sprocket.{wheel.name}.teeth",
        f"give {wheel.name} {more} teeth instead of {wheel.teeth}: the chain speed then varies "
        f"by {format_si(cf.speed_variation(more), 'fraction')} instead of "
        f"{format_si(now, 'fraction')}",
    )


def _motor(sized: Sized) -> Iterator[Advice]:
    """A motor without reserve, or one that a load turns back."""
    motor = sized.scenario.drive.motor
    if motor is None or len(sized.path.wheels) == 1:
        return
    load = sprocket_torque(sized) / (motor.gear_ratio * motor.gear_efficiency)
    allowed = motor.continuous_torque or motor.stall_torque / STALL_RESERVE
    geared = motor.gear_ratio * load / (0.8 * allowed)
    yield Advice(
        load / (0.8 * allowed),
        "drive.motor.gear_ratio",
        f"gear the motor down by {geared:.3g} instead of {motor.gear_ratio:.3g}, or take a "
        f"stronger one: it runs at {format_si(load, 'torque')}, good for "
        f"{format_si(allowed, 'torque')}",
    )
    drive = sized.scenario.drive
    if motor.back_drivable and not drive.backstop and sized.payload > 0.0:
        yield Advice(
            1.5,
            "drive.backstop",
            f"fit a backstop: with the supply cut, balls of {format_si(sized.payload, 'force')} "
            "run a lift back whose motor the load can turn",
        )


def _whirl(sized: Sized) -> Iterator[Advice]:
    """A shaft that runs near its critical speed."""
    margin = whirl_margin(sized)
    if math.isnan(margin):
        return
    shaft = sized.scenario.drive.shaft
    needed = math.ceil((shaft.supports - 1) * math.sqrt(WHIRL_RESERVE / margin)) + 1
    yield Advice(
        WHIRL_RESERVE / margin,
        "drive.shaft.supports",
        f"hold the shaft at {needed} instead of {shaft.supports} places: it runs at "
        f"{1.0 / margin:.2f} of its first critical speed",
    )


_CONCERNS: tuple[Callable[[Sized], Iterator[Advice]], ...] = (
    slack,
    nothing_holds,
    weak_take_up,
    surplus,
    _overload,
    resonance,
    _rate,
    _teeth,
    _motor,
    _whirl,
)
