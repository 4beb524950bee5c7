"""Refuse chains, wheels, drives and rails whose values do not go together."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from chainsim.scenario.case import MOVABLE_MOUNTS, Case
from chainsim.scenario.faults import Fault, shown
from chainsim.scenario.paths import Path
from chainsim.scenario.schema_sprocket import FEWEST_TEETH
from chainsim.units import format_si


def check_chain(case: Case) -> Iterator[Fault]:
    """Refuse values of the chain that are stated twice, half, or not at all."""
    chain, path = case.given.chain, ("chain",)
    if chain.pitch is None and chain.kind is None:
        yield Fault((*path, "pitch"), "", 'required without a kind of chain, such as "10 mm"')
    pairs = (
        ("mass_per_length", "link_mass"),
        ("stretch", "link_stiffness"),
        ("breaking_load", "allowable_tension"),
    )
    for instead, name in pairs:
        if getattr(chain, instead) is not None and getattr(chain, name) is not None:
            yield case.fault((*path, instead), f"state this or {name}, not both")
    if (chain.breaking_load is None) != (chain.load_factor is None):
        name = "breaking_load" if chain.load_factor is None else "load_factor"
        yield case.fault((*path, name), "breaking_load and load_factor go together")
    if case.filled.chain.roller_diameter >= case.filled.chain.pitch:
        yield case.fault(
            (*path, "roller_diameter"),
            f"must be less than the pitch ({format_si(case.filled.chain.pitch, 'length')})",
            (*path, "pitch"),
        )


def check_sprockets(case: Case) -> Iterator[Fault]:
    """Refuse wheels that cannot carry a chain, and mounts that cannot move."""
    if not case.given.sprocket:
        yield Fault(("sprocket",), "none", "at least one [[sprocket]] is required")
    for i, sprocket in enumerate(case.given.sprocket):
        path: Path = ("sprocket", i)
        if 0 < sprocket.teeth < FEWEST_TEETH:
            yield case.fault(
                (*path, "teeth"),
                f"a sprocket with {sprocket.teeth} teeth cannot carry a chain: at least "
                f"{FEWEST_TEETH} are needed",
            )
        if sprocket.teeth == 0 and sprocket.roller_radius is None:
            yield Fault(
                (*path, "teeth"),
                shown(sprocket.teeth or None),
                "teeth or roller_radius is required",
            )
        if sprocket.teeth > 0 and sprocket.roller_radius is not None:
            yield case.fault((*path, "roller_radius"), "state teeth or roller_radius, not both")
        if sprocket.mount.axis == (0.0, 0.0):
            yield case.fault((*path, "mount", "axis"), "a direction must not be zero")
        stops = sprocket.mount.stops
        if stops is not None and stops[0] >= stops[1]:
            yield case.fault((*path, "mount", "stops"), "the low stop must lie below the high one")
        if sprocket.mount.kind in MOVABLE_MOUNTS and sprocket.mount.mass <= 0.0:
            yield case.fault((*path, "mount", "mass"), "a mount that moves must have a mass")


def check_places(case: Case) -> Iterator[Fault]:
    """Refuse wheels on one spot, and a lift that nothing holds up."""
    sprockets = case.given.sprocket
    centers = [sprocket.center for sprocket in sprockets]
    for i, center in enumerate(centers):
        if center in centers[:i]:
            other = sprockets[centers.index(center)].name
            yield case.fault(("sprocket", i, "center"), f"sprocket '{other}' stands there already")
    if sprockets and all(sprocket.mount.kind == "hung" for sprocket in sprockets):
        yield Fault(
            ("sprocket",),
            "only hung mounts",
            "nothing holds the lift up: one axle must be held by the frame",
        )


def check_drive(case: Case) -> Iterator[Fault]:
    """Refuse drives that cannot turn the chain."""
    drive = case.given.drive
    if drive.kind == "motor" and drive.motor is None:
        yield Fault(("drive", "motor"), "", 'required with kind = "motor"')
    if drive.kind == "speed" and drive.chain_speed is None:
        yield Fault(
            ("drive", "chain_speed"), "", 'required with kind = "speed", such as "0.15 m/s"'
        )
    driven = [(i, s) for i, s in enumerate(case.given.sprocket) if s.name == drive.sprocket]
    for i, sprocket in driven:
        if sprocket.teeth == 0 and sprocket.roller_radius is not None:
            yield case.fault(
                ("drive", "sprocket"),
                "a smooth roller cannot drive a chain",
                ("sprocket", i, "teeth"),
            )
        if drive.reaction == "mount" and sprocket.mount.kind in ("fixed", "screwed"):
            yield case.fault(
                ("drive", "reaction"),
                f"the mount of '{sprocket.name}' is {sprocket.mount.kind}, so the frame takes the "
                'torque: reaction = "frame"',
                ("sprocket", i, "mount"),
            )
    shaft = drive.shaft
    if (shaft.length is None) != (shaft.diameter is None):
        name = "length" if shaft.diameter is None else "diameter"
        yield case.fault(("drive", "shaft", name), "length and diameter of a shaft go together")


def check_motor(case: Case) -> Iterator[Fault]:
    """Refuse motors whose figures contradict each other."""
    motor, path = case.given.drive.motor, ("drive", "motor")
    if motor is None:
        return
    if motor.stepper and motor.pull_out_torque is None:
        yield Fault((*path, "pull_out_torque"), "", "required for a stepper")
    filled = case.filled.drive.motor
    if filled is not None and filled.no_load_current >= filled.stall_current:
        yield case.fault((*path, "no_load_current"), "must be less than stall_current")
    if motor.table is not None:
        speeds = [speed for speed, _ in motor.table]
        if len(speeds) < 2 or any(a >= b for a, b in pairwise(speeds)):
            yield case.fault((*path, "table"), "at least two pairs with rising speed are due")


def check_fixed_parts(case: Case) -> Iterator[Fault]:
    """Refuse walls, guides and temperatures without extent."""
    for i, wall in enumerate(case.given.wall):
        points = wall.points
        if len(points) < 2 or any(a == b for a, b in pairwise(points)):
            yield case.fault(
                ("wall", i, "points"), "at least two points are due, no two in a row alike"
            )
    for i, guide in enumerate(case.given.guide):
        if guide.start is not None and guide.start == guide.end:
            yield case.fault(("guide", i, "to"), "both ends of the guide are on one spot")
        if guide.angles is not None and guide.angles[0] == guide.angles[1]:
            yield case.fault(("guide", i, "angles"), "the arc of the shoe has no length")
    temperature = case.given.frame.temperature
    if temperature is not None and temperature.low > temperature.high:
        yield case.fault(("frame", "temperature", "low"), "must not exceed high")
