"""Closed-form estimates that stand beside a limit found by simulation."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any, Literal

from chainsim.closed_forms import (
    growth_at_tip,
    least_hung_weight,
    least_lifting_force,
    take_up_bounce_frequency,
)
from chainsim.study.heights import height_of
from chainsim.study.scenario_numbers import takeup_sprocket

_ROUNDING = 1e-6  # a strand that holds 13 balls to rounding holds 13, not 14


@dataclass(frozen=True)
class Estimate:
    """A closed-form estimate of a limit.

    Attributes
    ----------
    value : float or None
        The estimate [SI unit of the question]; None where there is no closed form.
    text : str
        What it is made of, or why there is none.
    """

    value: float | None
    text: str


def estimate(scenario: Any, name: str) -> Estimate:
    """Closed-form estimate of a limit.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    name : str
        `takeup`, `speed`, `height`, `wear`, `slack` or a dotted key.

    Returns
    -------
    Estimate
        For a vertical lift on two sprockets; else there is none.
    """
    form = _FORMS.get(name)
    if form is None:
        return Estimate(None, "no closed form is known for this limit")
    if len(scenario.sprocket) != 2 or scenario.frame.tilt or _leans(scenario):
        return Estimate(None, "the closed form is that of a vertical lift on two sprockets")
    return form(scenario)


def carried_mass(scenario: Any, height: float | None = None) -> float:
    """Mass of the balls on a filled carrying strand, on average.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    height : float or None
        Rise of the balls [m]; None takes that of the scenario.

    Returns
    -------
    float
        Mass [kg]; less where the feed fills only a part of the pockets.
    """
    balls, carriers = scenario.balls, scenario.carriers
    if balls is None or carriers is None:
        return 0.0
    rise = balls.unload_at - balls.load_at if height is None else height
    spacing = carriers.every * scenario.chain.pitch
    pockets = rise / spacing
    speed, feed = scenario.drive.chain_speed, balls.feed
    fill = 1.0
    if feed.kind != "every pocket" and feed.rate and speed:
        fill = min(1.0, feed.rate * spacing / speed)
    return pockets * fill * balls.mass


def fullest_mass(scenario: Any) -> float:
    """Mass of the balls on the carrying strand at its fullest moment.

    Parameters
    ----------
    scenario : Scenario
        The lift.

    Returns
    -------
    float
        Mass [kg]: a strand that holds 5.8 balls on average holds 6 of them most of the time,
        and one that starts loaded begins with a ball in every pocket.
    """
    balls, carriers = scenario.balls, scenario.carriers
    if balls is None or carriers is None:
        return 0.0
    carried = carried_mass(scenario) / balls.mass
    if balls.start == "loaded":
        carried = (balls.unload_at - balls.load_at) / (carriers.every * scenario.chain.pitch)
    return math.ceil(carried - _ROUNDING) * balls.mass


def wrapped_mass(scenario: Any, sprocket: Any) -> float:
    """Mass of the chain and carriers on half a turn of a sprocket.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    sprocket : Sprocket
        The sprocket.

    Returns
    -------
    float
        Mass [kg].
    """
    return 0.5 * sprocket.teeth * _mass_of_link(scenario)


def _mass_of_link(scenario: Any) -> float:
    """Mass of a link with its share of the carriers [kg]."""
    carriers = scenario.carriers
    share = carriers.mass / carriers.every if carriers is not None else 0.0
    return scenario.chain.link_mass + share


def _takeup(scenario: Any) -> Estimate:
    sprocket = takeup_sprocket(scenario)
    if sprocket.mount.kind == "arm":
        return Estimate(None, "an arm pulls by its leverage, which the closed form leaves out")
    tail = _tail(scenario)
    driven: Literal["head", "tail"] = "tail" if scenario.drive.sprocket == tail.name else "head"
    payload = fullest_mass(scenario)
    moving = sprocket.mount.mass if sprocket.mount.kind in ("spring", "counterweight") else 0.0
    wrap = wrapped_mass(scenario, sprocket)
    if sprocket is tail:
        if driven == "head":
            return Estimate(0.0, "driven at the head, any hung weight keeps the strand taut")
        hung = hung_mass_with_friction(scenario)
        text = (
            "all that hangs weighs as much as the balls on the fullest carrying strand and the "
            f"drag of the idle head (without friction {max(payload - wrap - moving, 0.0):.4g} kg)"
        )
        pull = hung - wrap - moving
    else:
        strand = _mass_of_link(scenario) * height_of(scenario) / scenario.chain.pitch
        pull = least_lifting_force(moving + wrap, strand, payload, driven)
        text = "lifting force = head, both strands and balls"
        if driven == "tail":
            text += ", and the balls' weight once more"
        text += " (without friction)"
    factor = scenario.frame.gravity if sprocket.mount.kind == "spring" else 1.0
    return Estimate(max(pull, 0.0) * factor, f"{text}; free body, running slowly")


def hung_mass_with_friction(scenario: Any) -> float:
    """Hung mass of a tail-driven lift at which the foot of its carrying strand goes slack.

    Parameters
    ----------
    scenario : Scenario
        A vertical lift on two sprockets, driven at its hanging tail.

    Returns
    -------
    float
        Mass of all that hangs, chain on its wrap included [kg].

    Notes
    -----
    The idle head drags by its bearing, ``M_0 + μ_b r F``, and by the joints that bend onto it
    and straighten off it, 2π/z each on every pitch, ``M_j + μ_j r_pin T``. All divided by the
    pitch-wise lever z p / 2π, that is ``D = a F + b (T_in + T_out) + c``. At the threshold
    the foot carries nothing, the head draws P + w in and W + w out, so that W = P + D gives
    ``W (1 - a - b) = P + a (P + 2 w + w_h) + b (P + 2 w) + c``, with w the weight of one
    empty strand and w_h that of the chain on the head. Joints that bend at the driven tail
    are turned by the drive and do not enter. Derived here.
    """
    head = max(scenario.sprocket, key=lambda sprocket: sprocket.center[1])
    gravity, joint = scenario.frame.gravity, scenario.chain.joint
    payload = gravity * least_hung_weight(fullest_mass(scenario), "tail")
    strand = gravity * _mass_of_link(scenario) * height_of(scenario) / scenario.chain.pitch
    per_turn = 2.0 * math.pi / (head.teeth * scenario.chain.pitch)
    a = per_turn * head.bearing_friction * 0.5 * head.axle_diameter
    b = per_turn * joint.friction * joint.pin_radius
    c = per_turn * (head.bearing_drag + 2.0 * joint.moment)
    wrap = gravity * wrapped_mass(scenario, head)
    drag = a * (payload + 2.0 * strand + wrap) + b * (payload + 2.0 * strand) + c
    return (payload + drag) / (1.0 - a - b) / gravity


def _speed(scenario: Any) -> Estimate:
    tail = _tail(scenario)
    if tail.mount.kind != "hung":
        return Estimate(None, "the closed form is that of a hung take-up that bounces")
    links = height_of(scenario) / scenario.chain.pitch
    frequency = take_up_bounce_frequency(
        tail.mount.mass + wrapped_mass(scenario, tail),
        links * _mass_of_link(scenario),
        carried_mass(scenario),
        links,
        scenario.chain.link_stiffness,
    )
    return Estimate(
        frequency * scenario.chain.pitch,
        "the tooth rate meets the take-up's bounce on its chain, which is only one of the ways "
        "in which speed can fail",
    )


def _height(scenario: Any) -> Estimate:
    tail = _tail(scenario)
    if tail.mount.kind not in ("hung", "sliding"):
        return Estimate(None, "the closed form is that of a tail that hangs in the chain")
    if scenario.drive.sprocket != tail.name:
        return Estimate(None, "driven at the head, height does not enter the free body")
    if scenario.carriers is None or scenario.carriers.at is not None:
        return Estimate(None, "with a fixed number of balls, height does not enter the free body")
    hung = tail.mount.mass + wrapped_mass(scenario, tail)
    per_meter = carried_mass(scenario, 1.0)
    if not per_meter:
        return Estimate(None, "no balls are carried")
    return Estimate(
        hung / per_meter,
        "height at which the balls on the carrying strand weigh as much as all that hangs "
        "(free body, standing still)",
    )


def _wear(scenario: Any) -> Estimate:
    teeth = max(sprocket.teeth for sprocket in scenario.sprocket)
    return Estimate(growth_at_tip(teeth), f"a pin reaches the tip of a standard tooth, z = {teeth}")


def _tail(scenario: Any) -> Any:
    return min(scenario.sprocket, key=lambda sprocket: sprocket.center[1])


def _leans(scenario: Any) -> bool:
    (x0, y0), (x1, y1) = (sprocket.center for sprocket in scenario.sprocket)
    return abs(math.atan2(x1 - x0, abs(y1 - y0))) > math.radians(2.0)


_FORMS = {"takeup": _takeup, "speed": _speed, "height": _height, "wear": _wear}
