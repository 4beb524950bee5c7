"""Refuse carriers, balls, events and runs whose values do not go together."""

from __future__ import annotations

from collections.abc import Iterator

from chainsim.scenario.case import MOVABLE_MOUNTS, Case
from chainsim.scenario.faults import Fault, shown
from chainsim.scenario.paths import KeyNotFoundError, Path, resolve, value_at
from chainsim.units import format_si


def check_carriers(case: Case) -> Iterator[Fault]:
    """Refuse carriers on links that are not there, or two on one link."""
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


def check_pocket(case: Case) -> Iterator[Fault]:
    """Refuse pockets that are narrower than their ball."""
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


def check_balls(case: Case) -> Iterator[Fault]:
    """Refuse balls without carriers, and places where balls cannot come and go."""
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


def check_run(case: Case) -> Iterator[Fault]:
    """Refuse steps, events and marked keys that make no sense here."""
    run = case.given.run
    if run.step is not None and run.step > 1.0 / run.sample_rate:
        yield case.fault(
            ("run", "step"), "must not exceed the time between samples", ("run", "sample_rate")
        )
    for i, event in enumerate(case.given.event):
        yield from check_event(case, i, event.kind, event.sprocket)
    for i, key in enumerate(case.given.study.free):
        try:
            resolve(key, case.tables)
        except KeyNotFoundError as error:
            yield case.fault(("study", "free", i), str(error))


def check_event(case: Case, i: int, kind: str, sprocket: str | None) -> Iterator[Fault]:
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
