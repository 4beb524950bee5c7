"""Refuse scenarios whose values are each possible but do not go together.

Each check is one small function in `_CHECKS`; it yields a `Fault` for each thing it refuses.
What needs the chain's route (a chain too short, balls that cannot pass) is judged later.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterator, Mapping
from itertools import pairwise
from typing import Any, NamedTuple

from chainsim.scenario.faults import Fault, shown
from chainsim.scenario.paths import KeyNotFoundError, Path, nearest, resolve, value_at
from chainsim.scenario.schema import Document
from chainsim.scenario.schema_sprocket import FEWEST_TEETH
from chainsim.units import format_si

MOVABLE_MOUNTS = ("sliding", "hung", "arm", "spring", "counterweight")


class Case(NamedTuple):
    """What a check looks at: the file's tables, as read, and with every value filled in."""

    tables: Mapping[str, Any]
    given: Document
    filled: Document

    def fault(self, path: Path, rule: str, *uses: Path) -> Fault:
        """Make a fault that shows the value the file has there."""
        return Fault(path, shown(value_at(self.tables, path)), rule, uses)


def faults_of_names(tables: Mapping[str, Any]) -> Iterator[Fault]:
    """Refuse names that are used twice, and references to names that are not there.

    Parameters
    ----------
    tables : mapping
        Tables of the file, which need not be readable otherwise.

    Yields
    ------
    Fault
        One for each.
    """
    for array in ("sprocket", "wall", "guide"):
        names = Counter(name for _, name in _names(tables, array))
        seen: set[str] = set()
        for i, name in _names(tables, array):
            if names[name] > 1 and name in seen:
                yield Fault((array, i, "name"), shown(name), f"another {array} has this name")
            seen.add(name)
    known = [name for _, name in _names(tables, "sprocket")]
    for path in [("drive", "sprocket"), *_event_sprockets(tables)]:
        name = value_at(tables, path)
        if isinstance(name, str) and name not in known:
            near = nearest(name, known)
            hint = f"; did you mean '{near}'?" if near else ""
            listed = ", ".join(known) or "none"
            yield Fault(path, shown(name), f"no sprocket has this name (there is {listed}){hint}")


def _names(tables: Mapping[str, Any], array: str) -> list[tuple[int, str]]:
    members = tables.get(array)
    if not isinstance(members, list):
        return []
    named = [(i, m.get("name")) for i, m in enumerate(members) if isinstance(m, Mapping)]
    return [(i, name) for i, name in named if isinstance(name, str)]


def _event_sprockets(tables: Mapping[str, Any]) -> list[Path]:
    events = tables.get("event")
    count = len(events) if isinstance(events, list) else 0
    return [("event", i, "sprocket") for i in range(count)]


def faults_of_values(case: Case) -> Iterator[Fault]:
    """Run every check.

    Parameters
    ----------
    case : Case
        The scenario.

    Yields
    ------
    Fault
        One for each thing refused.
    """
    for check in _CHECKS:
        yield from check(case)


def _check_chain(case: Case) -> Iterator[Fault]:
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


def _check_sprockets(case: Case) -> Iterator[Fault]:
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
    yield from _check_places(case)


def _check_places(case: Case) -> Iterator[Fault]:
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


def _check_drive(case: Case) -> Iterator[Fault]:
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


def _check_motor(case: Case) -> Iterator[Fault]:
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


def _check_carriers(case: Case) -> Iterator[Fault]:
    carriers, links = case.given.carriers, case.given.chain.links
    if carriers is None:
        return
    path: Path = ("carriers",)
    if carriers.at is not None and len(set(carriers.at)) < len(carriers.at):
        yield case.fault((*path, "at"), "a link holds one carrier at most")
    if carriers.at is not None and not carriers.at:
        yield case.fault((*path, "at"), "at least one link is due")
    places = {"every": carriers.every, "first": carriers.first + 1}
    places["at"] = max(carriers.at or (0,)) + 1
    for name, needed in places.items():
        if links is not None and needed > links:
            yield case.fault((*path, name), f"the chain has only {links} links", ("chain", "links"))


def _check_pocket(case: Case) -> Iterator[Fault]:
    carriers, balls = case.filled.carriers, case.filled.balls
    if carriers is None or balls is None:
        return
    pocket, path = carriers.pocket, ("carriers", "pocket")
    diameter = format_si(balls.diameter, "length")
    ball = ("balls", "diameter")
    if pocket.outline is None and pocket.floor < balls.diameter:
        yield Fault(
            (*path, "floor"),
            shown(value_at(case.tables, (*path, "floor"))) or format_si(pocket.floor, "length"),
            f"the pocket is narrower than its ball ({diameter})",
            (ball,),
        )
    if pocket.outline is not None:
        outward = [b for _, b in pocket.outline]
        if len(pocket.outline) < 3:
            yield case.fault((*path, "outline"), "at least three points are due")
        elif max(outward) - min(outward) < balls.diameter:
            yield case.fault(
                (*path, "outline"), f"the pocket is narrower than its ball ({diameter})", ball
            )


def _check_balls(case: Case) -> Iterator[Fault]:
    balls, filled = case.given.balls, case.filled.balls
    if balls is None or filled is None:
        return
    if case.given.carriers is None:
        yield Fault(("balls",), "", "balls need [carriers] to ride on")
    for name in ("load_at", "unload_at"):
        stated, other = getattr(balls, name), getattr(balls.feed, name)
        if stated is not None and other is not None and stated != other:
            yield case.fault(
                ("balls", "feed", name), f"differs from {name} in [balls]", ("balls", name)
            )
    if filled.load_at >= filled.unload_at and len(case.given.sprocket) > 1:
        yield case.fault(
            ("balls", "unload_at"),
            f"must lie above load_at ({format_si(filled.load_at, 'length')})",
            ("balls", "load_at"),
            ("sprocket",),
        )
    if balls.discharge is not None and balls.discharge.mouth < balls.diameter:
        yield case.fault(
            ("balls", "discharge", "mouth"),
            f"the mouth is narrower than a ball ({format_si(balls.diameter, 'length')})",
            ("balls", "diameter"),
        )


def _check_fixed_parts(case: Case) -> Iterator[Fault]:
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


def _check_run(case: Case) -> Iterator[Fault]:
    run = case.given.run
    if run.step is not None and run.step > 1.0 / run.sample_rate:
        yield case.fault(
            ("run", "step"), "must not exceed the time between samples", ("run", "sample_rate")
        )
    for i, event in enumerate(case.given.event):
        yield from _check_event(case, i, event.kind, event.sprocket)
    for i, key in enumerate(case.given.study.free):
        try:
            resolve(key, case.tables)
        except KeyNotFoundError as error:
            yield case.fault(("study", "free", i), str(error))


def _check_event(case: Case, i: int, kind: str, sprocket: str | None) -> Iterator[Fault]:
    """Refuse events that have nothing to happen to."""
    if kind in ("missing_ball", "double_ball") and case.given.balls is None:
        yield case.fault(("event", i, "kind"), "there are no [balls]")
    if kind == "jam" and case.given.carriers is None:
        yield case.fault(("event", i, "kind"), "there are no [carriers] to catch")
    fixed = [s.name for s in case.given.sprocket if s.mount.kind not in MOVABLE_MOUNTS]
    if sprocket in fixed:
        yield case.fault(
            ("event", i, "sprocket"),
            "its mount does not move, so nothing can block it",
            ("sprocket",),
        )


_CHECKS: tuple[Callable[[Case], Iterator[Fault]], ...] = (
    _check_chain,
    _check_sprockets,
    _check_drive,
    _check_motor,
    _check_carriers,
    _check_pocket,
    _check_balls,
    _check_fixed_parts,
    _check_run,
)
