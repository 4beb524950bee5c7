"""Checks at commissioning: what to measure, how, and the band of numbers to accept."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from chainsim import closed_forms as cf
from chainsim.analysis.stops import overrun
from chainsim.report.build_case import Case, steady_mean
from chainsim.report.build_direction import run_back_line
from chainsim.report.build_drive import driven_rate, reckoned_current, running_torque
from chainsim.report.build_line import (
    CLOSED,
    DRAWN,
    SIMULATED,
    STATED,
    UNKNOWN,
    Line,
    Part,
    ran_or_reckoned,
)
from chainsim.report.build_takeup import movable_axles, resting_travel, travel_of
from chainsim.report.build_tolerances import PITCH_SHARE

SPEED_BAND = 0.05
"""Band of a speed to accept (dimensionless): what moves no finding far; our choice."""

WEIGHT_BAND = 0.05
"""Band of a mass or a spring's force to accept (dimensionless); our choice."""

FRICTION_BAND = 0.3
"""Band of a torque or current to accept (dimensionless), since friction is seldom known; our
choice."""

BOUNCE_BAND = 0.1
"""Band of a bounce to accept where the stiffness was stated (dimensionless); our choice."""

MOTION_BAND = 1.5
"""How far a motion may exceed the predicted one (dimensionless); our choice."""

COUNTED_MINUTES = 10
"""Minutes over which balls are counted (dimensionless)."""

PROVING = 0.01
"""Share of balls lost that the proving count is to exclude (dimensionless)."""


def checks_part(case: Case) -> Part:
    """Write the checks at commissioning.

    Parameters
    ----------
    case : Case
        The lift.
    """
    lines = [
        *_standing_lines(case),
        *_running_lines(case),
        *_drive_lines(case),
        *_ball_lines(case),
        *_stop_lines(case),
    ]
    return Part(
        "checks",
        "Checks at commissioning",
        "In this order, each written down. Outside its band: stop, and find out why before going "
        "on. The bands are widths of our choice round the predicted value, wider where friction "
        "decides.",
        tuple(lines),
    )


def _banded(line: Line, share: float) -> Line:
    """Give a line a band round its value."""
    if isinstance(line.value, str) or line.value is None or not math.isfinite(line.value):
        return line
    width = abs(line.value) * share
    return line._replace(low=line.value - width, high=line.value + width)


def _up_to(line: Line, factor: float) -> Line:
    """Give a line a band from nothing up to a multiple of its value."""
    if isinstance(line.value, str) or line.value is None or not math.isfinite(line.value):
        return line
    return line._replace(high=factor * line.value)


def _standing_lines(case: Case) -> Iterator[Line]:
    n = case.lift.n_links
    yield Line("links, counted", n, "1", DRAWN, "", n, n, digits=6)
    if case.scenario.carriers is not None:
        count = len(case.lift.carrier_links)
        yield Line("carriers, counted", count, "1", DRAWN, "", count, count, digits=6)
    for k in movable_axles(case):
        yield _banded(_weight_line(case, k), WEIGHT_BAND)
        yield _rest_line(case, k)
        yield from _bounce_line(case, case.lift.wheels[k].name)


def _weight_line(case: Case, k: int) -> Line:
    """Setting of a take-up, measured."""
    mount, name = case.scenario.sprocket[k].mount, case.lift.wheels[k].name
    if mount.kind == "spring":
        return Line(
            f"{name}: force of the spring at the place on the drawing", mount.set_force, "N"
        )
    if mount.kind == "counterweight":
        return Line(f"{name}: counterweight, on the scales", mount.weight, "kg")
    return Line(f"{name}: all that hangs, on the scales", mount.mass, "kg")


def _rest_line(case: Case, k: int) -> Line:
    """Where a take-up comes to stand."""
    new, rest = travel_of(case, k).new, resting_travel(case, k)
    line = Line(f"{case.lift.wheels[k].name}: travel from the drawing, standing, empty", None, "m")
    line = ran_or_reckoned(line, rest, new)
    middle = rest if rest is not None else new
    off = 0.5 * PITCH_SHARE * case.loop
    note = f"{line.note}; " if line.note else ""
    note += f"band for a chain {100 * PITCH_SHARE:g} % longer or shorter"
    return line._replace(low=middle - off, high=middle + off, note=note)


def _bounce_line(case: Case, name: str) -> Iterator[Line]:
    """Bounce of the take-up by hand: it tells the stiffness of the chain."""
    mode = case.mode(f"take-up {name}")
    if mode is None:
        return
    origin = case.scenario.origins().get("chain.link_stiffness")
    low, high = 1.0 - BOUNCE_BAND, 1.0 + BOUNCE_BAND
    if origin is not None and origin.low and origin.high and origin.low < origin.high:
        low, high = (math.sqrt(end / (origin.typical or end)) for end in (origin.low, origin.high))
    yield Line(
        f"{name}: bounces when tapped from below, standing",
        mode,
        "Hz",
        SIMULATED,
        "filmed from the side at many frames a second; below the band the chain is softer",
        low * mode,
        high * mode,
    )


def _running_lines(case: Case) -> Iterator[Line]:
    speed = case.simulated(lambda s: s.steady_speed)
    turn = case.loop / float(speed) if speed else None
    line = Line("time of one turn of the chain, one carrier watched", None, "s")
    yield _banded(ran_or_reckoned(line, turn, case.loop / case.speed), SPEED_BAND)
    line = Line("speed of the driven sprocket", None, "rad s-1")
    yield _banded(ran_or_reckoned(line, driven_rate(case), case.rate), SPEED_BAND)
    teeth = case.lift.wheels[case.driven].teeth
    if teeth:
        turns = int(np.lcm(case.lift.n_links, teeth)) // case.lift.n_links
        item = "turns of the chain until a marked link is on its marked tooth again"
        yield Line(item, turns, "1", DRAWN, "any other number: a tooth was skipped", turns, turns)
    for k in movable_axles(case):
        travel, name = travel_of(case, k), case.lift.wheels[k].name
        note = "range over the whole run, starts and stops included"
        line = Line(f"{name}: moves up and down by", None, "m", "", note)
        yield _up_to(ran_or_reckoned(line, travel.high - travel.low), MOTION_BAND)
    teeth_rate = case.speed / case.scenario.chain.pitch
    line = Line("rhythm of the teeth, filmed or heard", teeth_rate, "Hz", CLOSED)
    yield _banded(line, SPEED_BAND)


def _drive_lines(case: Case) -> Iterator[Line]:
    mean, closed = running_torque(case)
    line = Line("mean torque on the driven sprocket, loaded", None, "N m")
    yield _banded(ran_or_reckoned(line, mean, closed), FRICTION_BAND)
    if case.scenario.drive.motor is None:
        note = "no motor was calculated with: write down the value of the first good day"
        yield Line("current of the motor, loaded", None, "A", UNKNOWN, note)
        return
    current = case.simulated(lambda s: steady_mean(s, "drive/current"))
    line = Line("current of the motor, loaded", None, "A")
    line = ran_or_reckoned(line, current, reckoned_current(case, closed))
    yield _banded(line, FRICTION_BAND)


def _ball_lines(case: Case) -> Iterator[Line]:
    balls, carriers = case.scenario.balls, case.scenario.carriers
    if balls is None or carriers is None:
        return
    spacing = carriers.every * (balls.spacing or 1)
    pockets = cf.pocket_rate(case.speed, spacing * case.scenario.chain.pitch)
    yield _banded(Line("pockets that come by", pockets, "s-1", CLOSED), SPEED_BAND)
    demand = case.scenario.limits.ball_rate or balls.feed.rate
    found = next((f.value for f in case.findings if f.name == "rate_met"), None)
    line = Line(f"balls delivered, counted over {COUNTED_MINUTES} min", None, "s-1")
    line = ran_or_reckoned(line, found, min(demand, pockets) if demand else pockets)
    yield line._replace(low=demand - 1.0 / (60.0 * COUNTED_MINUTES) if demand else None)
    trials = cf.trials_without_failure(PROVING)
    note = (
        f"then fewer than {100 * PROVING:g} % are lost, with 95 % confidence; after a lost one "
        "find its cause and count anew"
    )
    item = "balls to run in a row with none lost"
    yield Line(item, trials, "1", CLOSED, note, trials, digits=6)


def _stop_lines(case: Case) -> Iterator[Line]:
    ran_on = case.simulated(overrun) if "stop" in case.situations_run else None
    line = Line("chain runs on after a stop by", None, "m", STATED, "ramp of the stop included")
    yield _up_to(ran_or_reckoned(line, ran_on.distance if ran_on else None), MOTION_BAND)
    yield run_back_line(case)._replace(high=case.scenario.chain.pitch)
