"""Fill in what a scenario leaves out: from its kind of chain, from the rest, or assumed.

Works on the plain tables of the file, so that the filled scenario passes through the very
same checks as one that states everything.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any

from chainsim.scenario.filler import Filled, Filler, Source
from chainsim.scenario.kinds import (
    KIND_ASSUMED_WITHOUT_ONE,
    KINDS_OF_CHAIN,
    POCKET_FORMS,
    SHAFT_SHEAR_MODULI,
    Range,
    ball_mass,
    chain_properties,
)
from chainsim.scenario.schema import Document
from chainsim.scenario.schema_balls import Balls, Pocket
from chainsim.scenario.schema_drive import Motor

DEFAULT_BALL_RATE = 1.0  # 1/s, common practice on a shared exhibit, no source
OFFSET_OVER_PITCH = Range(0.3, 0.4, 0.6)
AXLE_OVER_PITCH = Range(0.3, 0.4, 0.6)
CARRIER_OVER_BALL_MASS = Range(0.08, 0.15, 0.3)
BALL_OVER_PITCH = 1.6  # size a pocket is made for where no ball is described
COUPLING_STIFFNESS = Range(5.0, 20.0, 100.0)  # N m/rad
NO_LOAD_OVER_STALL_CURRENT = Range(0.04, 0.08, 0.15)
RUNNING_OVER_NO_LOAD_SPEED = 0.8


def complete(tables: Mapping[str, Any], document: Document) -> Filled:
    """Fill in every value that is left out and can be stated without the chain's route.

    Parameters
    ----------
    tables : mapping
        Tables of the file, checked.
    document : Document
        The same, read.

    Returns
    -------
    Filled
        New tables, in which a number of the type `SI` was filled in, and origins.
    """
    filler = Filler(tables)
    for fill in _FILLERS:
        fill(filler, document)
    return Filled(filler.tables, filler.origins)


def pitch_of(document: Document) -> float:
    """Pitch of the chain [m], from its kind where it is not given."""
    if document.chain.pitch is not None:
        return document.chain.pitch
    return KINDS_OF_CHAIN[document.chain.kind or KIND_ASSUMED_WITHOUT_ONE].pitch


def _fill_chain(filler: Filler, document: Document) -> None:
    chain = document.chain
    kind = chain.kind or KIND_ASSUMED_WITHOUT_ONE
    source: Source = "kind" if chain.kind else "assumed"
    note = kind if chain.kind else f"as {kind}"
    pitch = pitch_of(document)
    filler.fill(("chain", "pitch"), pitch, source, note)
    _replace_alternatives(filler, document, pitch)
    for name, span in chain_properties(kind, pitch).items():
        filler.fill(("chain", *name.split(".")), span, source, note)


def _replace_alternatives(filler: Filler, document: Document, pitch: float) -> None:
    """Work out link mass, stiffness and allowable tension from what is given instead."""
    chain = document.chain
    if chain.mass_per_length is not None:
        mass = chain.mass_per_length * pitch
        filler.replace(("chain", "link_mass"), ("mass_per_length",), mass, "mass_per_length")
    if chain.stretch is not None:
        links = chain.stretch.length / pitch
        stiffness = chain.stretch.load * links / chain.stretch.growth
        filler.replace(("chain", "link_stiffness"), ("stretch",), stiffness, "stretch")
    if chain.breaking_load is not None and chain.load_factor is not None:
        tension = chain.breaking_load / chain.load_factor
        names = ("breaking_load", "load_factor")
        filler.replace(("chain", "allowable_tension"), names, tension, "breaking_load")


def _fill_sprockets(filler: Filler, document: Document) -> None:
    axle = AXLE_OVER_PITCH.scaled(pitch_of(document))
    for i in range(len(document.sprocket)):
        filler.fill(("sprocket", i, "axle_diameter"), axle, "assumed", "0.4 of the pitch")


def _fill_balls(filler: Filler, document: Document) -> None:
    balls = document.balls
    if balls is None:
        return
    material = balls.material or "steel"
    mass = ball_mass(material, balls.diameter)
    filler.fill(("balls", "mass"), mass, "assumed", f"solid {material}")
    _fill_heights(filler, document, balls)
    if balls.feed.kind != "every pocket":
        demand = document.limits.ball_rate or DEFAULT_BALL_RATE
        note = "limits.ball_rate" if document.limits.ball_rate else "usual demand"
        filler.fill(("balls", "feed", "rate"), demand, "assumed", note)


def _fill_heights(filler: Filler, document: Document, balls: Balls) -> None:
    """Say at both places where held balls come and go."""
    heights = [sprocket.center[1] for sprocket in document.sprocket] or [0.0]
    for name, axle in (("load_at", min(heights)), ("unload_at", max(heights))):
        stated = getattr(balls, name), getattr(balls.feed, name)
        value = next((height for height in stated if height is not None), axle)
        source: Source = "assumed" if stated == (None, None) else "given"
        note = "height of the axle" if source == "assumed" else ""
        filler.fill(("balls", name), value, source, note)
        filler.fill(("balls", "feed", name), value, source, note)


def _fill_carriers(filler: Filler, document: Document) -> None:
    carriers = document.carriers
    if carriers is None:
        return
    pitch = pitch_of(document)
    diameter = document.balls.diameter if document.balls else BALL_OVER_PITCH * pitch
    if carriers.mass is None:
        ball = document.balls.mass if document.balls else None
        mass = ball if ball is not None else ball_mass("steel", diameter).typical
        mass_range = CARRIER_OVER_BALL_MASS.scaled(mass)
        filler.fill(("carriers", "mass"), mass_range, "assumed", "0.15 of a ball")
    _fill_pocket(filler, carriers.pocket, diameter)
    offset = OFFSET_OVER_PITCH.scaled(pitch)
    filler.fill(("carriers", "pocket", "offset"), offset, "assumed", "0.4 of the pitch")


def _fill_pocket(filler: Filler, pocket: Pocket, diameter: float) -> None:
    """Give a pocket the proportions of its shape."""
    form = POCKET_FORMS[pocket.shape or "tray"]
    note = f"shape {pocket.shape or 'tray'}"
    for name in ("floor", "lip", "back"):
        length = getattr(form, name) * diameter
        filler.fill(("carriers", "pocket", name), length, "assumed", note)
    filler.fill(("carriers", "pocket", "tilt"), form.tilt, "assumed", note)


def _fill_drive(filler: Filler, document: Document) -> None:
    drive = document.drive
    shaft = drive.shaft
    if shaft.length is not None and shaft.diameter is not None:
        stiffness = _shaft_stiffness(shaft.length, shaft.diameter, shaft.material or "steel")
        note = f"{shaft.material or 'steel'} shaft"
        filler.fill(("drive", "shaft", "stiffness"), stiffness, "assumed", note)
    filler.fill(("drive", "shaft", "stiffness"), COUPLING_STIFFNESS, "assumed", "couplings")
    if drive.motor is None:
        return
    _fill_currents(filler, drive.motor)
    driven = [sprocket for sprocket in document.sprocket if sprocket.name == drive.sprocket]
    if driven and driven[0].teeth > 0:
        turns = drive.motor.no_load_speed / drive.motor.gear_ratio / (2.0 * math.pi)
        speed = RUNNING_OVER_NO_LOAD_SPEED * turns * driven[0].teeth * pitch_of(document)
        filler.fill(("drive", "chain_speed"), speed, "assumed", "80 % of the speed without load")


def _shaft_stiffness(length: float, diameter: float, material: str) -> float:
    """Torsional stiffness of a round shaft, G π d⁴ / (32 L) [N m/rad].

    Parameters
    ----------
    length, diameter : float
        Length and diameter [m].
    material : str
        A key of `SHAFT_SHEAR_MODULI`.

    Returns
    -------
    float
        Stiffness [N m/rad].

    References
    ----------
    R. G. Budynas and J. K. Nisbett, *Shigley's Mechanical Engineering Design*, section on
    torsion (from memory).
    """
    return SHAFT_SHEAR_MODULI[material] * math.pi * diameter**4 / (32.0 * length)


def _fill_currents(filler: Filler, motor: Motor) -> None:
    """Currents of a motor whose torque is in proportion to current, loss by no-load current."""
    share = NO_LOAD_OVER_STALL_CURRENT
    path = ("drive", "motor")
    if motor.stall_current is None:
        torque_current = motor.stall_torque * motor.no_load_speed / motor.supply
        idle = motor.no_load_current
        stall = torque_current + idle if idle else torque_current / (1.0 - share.typical)
        filler.fill((*path, "stall_current"), stall, "assumed", "motor constant")
    else:
        stall = motor.stall_current
    filler.fill((*path, "no_load_current"), share.scaled(stall), "assumed", "8 % of stall")


_FILLERS: tuple[Callable[[Filler, Document], None], ...] = (
    _fill_chain,
    _fill_sprockets,
    _fill_balls,
    _fill_carriers,
    _fill_drive,
)
