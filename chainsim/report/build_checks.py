"""Checks at commissioning: what to measure, how, and the band of numbers to accept."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from chainsim import closed_forms as cf
from chainsim.analysis.chain_motion import chain_speed
from chainsim.analysis.stops import overrun
from chainsim.report.build_case import Case, steady_mean
from chainsim.report.build_drive import running_torque
from chainsim.report.build_line import (
    CLOSED,
    CLOSED_ONLY,
    DRAWN,
    SIMULATED,
    STATED,
    UNKNOWN,
    Line,
    Part,
    ran_or_reckoned,
)
from chainsim.report.build_takeup import movable_axles, travel_of
from chainsim.report.build_tolerances import PITCH_SHARE

SPEED_BAND = 0.05
"""Band of a speed to accept (dimensionless): what moves no finding far; our choice."""

WEIGHT_BAND = 0.05
"""Band of a mass or a spring's force to accept (dimensionless); our choice."""

FRICTION_BAND = 0.3
"""Band of a torque or current to accept (dimensionless), since friction is seldom known; our
choice."""

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
    if not isinstance(line.value, float) or not math.isfinite(line.value):
        return line
    width = abs(line.value) * share
    return line._replace(low=line.value - width, high=line.value + width)


def _standing_lines(case: Case) -> Iterator[Line]:
    n = case.lift.n_links
    yield Line("links counted", n, "1", DRAWN, "", n, n)
    if case.scenario.carriers is not None:
        count = len(case.lift.carrier_links)
        yield Line("carriers counted", count, "1", DRAWN, "", count, count)
    for k in movable_axles(case):
        mount, name = case.scenario.sprocket[k].mount, case.lift.wheels[k].name
        if mount.kind == "spring":
            line = Line(f"{name}: spring at the place on the drawing", mount.set_force, "N")
        elif mount.kind == "counterweight":
            line = Line(f"{name}: counterweight on the scales", mount.weight, "kg")
        else:
            line = Line(f"{name}: all that hangs, on the scales", mount.mass, "kg")
        yield _banded(line, WEIGHT_BAND)
        new = travel_of(case, k).new
        off = 0.5 * PITCH_SHARE * case.loop
        rest = case.simulated(lambda s, k=k: _rest_travel(s, case, k))
        line = Line(f"{name}: travel from the drawing, standing, empty", None, "m")
        line = ran_or_reckoned(line, rest, new)
        middle = rest if rest is not None else new
        note = f"{line.note}; " if line.note else ""
        yield line._replace(
            low=middle - off,
            high=middle + off,
            note=f"{note}band: chain {100 * PITCH_SHARE:g} % longer or shorter",
        )
        yield from _bounce_line(case, name)


def _rest_travel(s, case: Case, k: int) -> float:
    """Travel of an axle in the first sample [m]."""
    way = np.array(case.sized.path.wheels[k].movable)
    return float((s.center[0, k] - np.array(case.lift.wheels[k].center)) @ way)


def _bounce_line(case: Case, name: str) -> Iterator[Line]:
    """Bounce of the take-up by hand: it tells the stiffness of the chain."""
    mode = case.simulated(
        lambda s: next(m.frequency for m in s.rec.modes if m.kind == f"take-up {name}")
    )
    if mode is None:
        return
    origin = case.scenario.origins().get("chain.link_stiffness")
    low, high = 0.8, 1.2
    if origin is not None and origin.low and origin.high and origin.low < origin.high:
        low, high = (math.sqrt(end / origin.typical) for end in (origin.low, origin.high))
    yield Line(
        f"{name}: bounces when tapped from below, chain empty",
        mode,
        "Hz",
        SIMULATED,
        "filmed from the side; lower than the band is a softer chain",
        low * mode,
        high * mode,
    )


def _running_lines(case: Case) -> Iterator[Line]:
    speed = case.simulated(lambda s: s.steady_speed)
    turn = case.loop / speed if speed and math.isfinite(speed) else None
    line = Line("time of one turn of the chain, one carrier watched", None, "s")
    yield _banded(ran_or_reckoned(line, turn, case.loop / case.speed), SPEED_BAND)
    rate = case.simulated(lambda s: abs(steady_mean(s, "sprockets/rate", case.driven)))
    line = Line("speed of the driven sprocket", None, "rad s-1")
    yield _banded(ran_or_reckoned(line, rate, case.rate), SPEED_BAND)
    teeth = case.lift.wheels[case.driven].teeth
    if teeth:
        turns = int(np.lcm(case.lift.n_links, teeth)) // case.lift.n_links
        yield Line(
            "turns of the chain until a marked link is on its marked tooth again",
            turns,
            "1",
            DRAWN,
            "any other number is a skipped tooth",
            turns,
            turns,
        )
    for k in movable_axles(case):
        travel, name = travel_of(case, k), case.lift.wheels[k].name
        width = travel.high - travel.low
        line = Line(f"{name}: moves up and down while running by", None, "m", note="whole run")
        line = ran_or_reckoned(line, width)
        yield line._replace(high=1.5 * width if line.is_known else None)
    yield from _shake_line(case)


def _shake_line(case: Case) -> Iterator[Line]:
    """Speed variation, the rhythm of the teeth."""
    rate = case.speed / case.scenario.chain.pitch
    yield _banded(Line("rhythm of the teeth, heard or filmed", rate, "Hz", CLOSED), SPEED_BAND)
    speed = case.simulated(chain_speed)
    if speed is None:
        return


def _drive_lines(case: Case) -> Iterator[Line]:
    mean, closed = running_torque(case)
    line = Line("mean torque on the driven sprocket, loaded", None, "N m")
    yield _banded(ran_or_reckoned(line, mean, closed), FRICTION_BAND)
    motor = case.scenario.drive.motor
    if motor is None:
        yield Line(
            "current of the motor, loaded",
            None,
            "A",
            UNKNOWN,
            "no motor was calculated with: write down the value of the first good day",
        )
        return
    current = case.simulated(lambda s: steady_mean(s, "drive/current"))
    reckoned = None
    if closed is not None:
        load = closed / (motor.gear_ratio * motor.gear_efficiency)
        reckoned = cf.motor_current(
            load, motor.stall_torque, motor.no_load_current, motor.stall_current
        )
    line = Line("current of the motor, loaded", None, "A")
    yield _banded(ran_or_reckoned(line, current, reckoned), FRICTION_BAND)


def _ball_lines(case: Case) -> Iterator[Line]:
    if case.scenario.balls is None or case.scenario.carriers is None:
        return
    spacing = case.scenario.carriers.every * (case.scenario.balls.spacing or 1)
    pockets = cf.pocket_rate(case.speed, spacing * case.scenario.chain.pitch)
    yield _banded(Line("pockets that come by", pockets, "s-1", CLOSED), SPEED_BAND)
    demand = case.scenario.limits.ball_rate or case.scenario.balls.feed.rate
    found = next((f.value for f in case.findings if f.name == "rate_met"), None)
    line = Line("balls delivered, counted over ten minutes", None, "s-1")
    line = ran_or_reckoned(line, found, min(demand, pockets) if demand else pockets)
    yield line._replace(low=demand - 0.1 / 60.0 if demand else None)
    trials = cf.trials_without_failure(PROVING)
    yield Line(
        "balls to run in a row with none lost",
        trials,
        "1",
        CLOSED,
        f"then fewer than {100 * PROVING:g} % are lost, with 95 % confidence; one lost starts the "
        "count again, after its cause is found",
        trials,
        digits=6,
    )


def _stop_lines(case: Case) -> Iterator[Line]:
    has_stop = "stop" in case.situations_run
    ran_on = case.simulated(overrun) if has_stop else None
    line = Line("chain runs on after a stop by", None, "m", note="ramp included")
    line = ran_or_reckoned(line, ran_on.distance if ran_on else None)
    yield line._replace(high=1.2 * line.value if line.is_known else None)
    yield Line(
        "loaded, supply cut: runs back by",
        None,
        "m",
        STATED,
        "see the direction of running; more than a pitch needs a backstop",
        None,
        case.scenario.chain.pitch,
    )._replace(source=CLOSED_ONLY if has_stop else UNKNOWN)
