"""What to order and to make, in one list with quantities."""

from __future__ import annotations

import math
from collections.abc import Iterator

from chainsim.report.build_case import Case
from chainsim.report.build_drive import wanted_torques
from chainsim.report.build_line import CLOSED_ONLY, DRAWN, PRACTICE, SIMULATED, Line, Part
from chainsim.report.build_spares import spare_parts
from chainsim.report.build_takeup import movable_axles, travel_of
from chainsim.report.build_wheels import held_text
from chainsim.units import format_si

BALLS_BESIDE = 2.0
"""Balls on the way round beside those that ride, as a share of these (dimensionless): a track
brings them back; common practice, no source."""


def order_part(case: Case) -> Part:
    """List what to order and to make.

    Parameters
    ----------
    case : Case
        The lift.
    """
    lines = [*_chain_lines(case), *_wheel_lines(case), *_takeup_lines(case), *_drive_lines(case)]
    lines += _ball_lines(case)
    return Part(
        "order",
        "What to order and to make",
        "Quantities with spares; each part is told in full further down. The frame, its fixing, "
        "guards and the track are not part of this sheet.",
        tuple(lines),
    )


def _chain_lines(case: Case) -> Iterator[Line]:
    chain, every = case.scenario.chain, 1
    if case.scenario.carriers is not None:
        every = case.scenario.carriers.every
    n = case.lift.n_links
    yield Line(
        "chain links",
        n + spare_parts(n, every),
        "1",
        DRAWN,
        f"{n} and {spare_parts(n, every)} spare; pitch {1e3 * chain.pitch:g} mm, rollers "
        f"{1e3 * chain.roller_diameter:g} mm, {format_si(chain.link_mass, 'mass')} a link, good "
        f"for {format_si(chain.allowable_tension, 'force')}; with what joins them to a loop",
        digits=6,
    )
    if case.scenario.carriers is not None:
        count = len(case.lift.carrier_links)
        yield Line(
            "carriers",
            count + spare_parts(count),
            "1",
            DRAWN,
            f"{count} and {spare_parts(count)} spare; "
            f"{format_si(case.scenario.carriers.mass, 'mass')} each; to make, see its drawing",
        )


def _wheel_lines(case: Case) -> Iterator[Line]:
    for k, (wheel, part) in enumerate(zip(case.lift.wheels, case.scenario.sprocket, strict=True)):
        bore = f"bore {1e3 * part.axle_diameter:g} mm"
        if wheel.teeth:
            what = f"{wheel.teeth} teeth, pitch circle {2e3 * wheel.radius:.3f} mm, {bore}; to cut"
        else:
            what = f"smooth, {2e3 * (part.roller_radius or 0.0):.2f} mm across, {bore}"
        yield Line(f"sprocket {wheel.name}", 1, "1", DRAWN, what)
        role = "turned by the drive" if k == case.driven else "idles"
        axle = f"{1e3 * part.axle_diameter:g} mm across, {role}; {held_text(part.mount)}"
        yield Line(f"axle with bearings, {wheel.name}", 1, "1", DRAWN, axle)


def _takeup_lines(case: Case) -> Iterator[Line]:
    for k in movable_axles(case):
        mount, name = case.scenario.sprocket[k].mount, case.lift.wheels[k].name
        guides = {
            "hung": "free up and down, kept from turning and from swinging out of the plane"
            if mount.free == "y"
            else "free up, down and sideways, kept from swinging out of the plane",
            "sliding": "on a straight slide",
            "spring": f"on a straight slide with a spring of {mount.rate or 0.0:.4g} N/m",
            "counterweight": "on a straight slide with cord, pulley and counterweight of "
            f"{format_si(mount.weight or 0.0, 'mass')}",
            "arm": "on an arm that swings about its pivot",
        }
        low, high = travel_of(case, k).ends
        yield Line(
            f"take-up, {name}",
            1,
            "1",
            DRAWN,
            f"{guides[mount.kind]}; weighs {format_si(mount.mass, 'mass')} in all, sprocket and "
            f"axle included; travel of at least {1e3 * (high - low):.1f} mm",
        )


def _drive_lines(case: Case) -> Iterator[Line]:
    drive = case.scenario.drive
    rpm = case.rate * 30.0 / math.pi
    if drive.motor is None:
        torques = wanted_torques(case)
        need = f"{rpm:.1f} rev/min under load"
        if torques is not None:
            need += f", {1e3 * torques[0]:.3g} mN m all day, {1e3 * torques[1]:.3g} mN m at stall"
        source = SIMULATED if case.run is not None else CLOSED_ONLY
        yield Line("gearmotor", 1, "1", source, f"{need}; see motor duty")
    else:
        motor = drive.motor
        yield Line(
            "motor with gear",
            1,
            "1",
            DRAWN,
            f"{motor.supply:g} V, {motor.no_load_speed * 30 / math.pi:.4g} rev/min without load, "
            f"{1e3 * motor.stall_torque:.3g} mN m at stall, gear {motor.gear_ratio:g} to 1; "
            f"{rpm:.1f} rev/min at the sprocket",
        )
    if drive.shaft.length is not None and drive.shaft.diameter is not None:
        shaft = drive.shaft
        yield Line(
            "shaft",
            1,
            "1",
            DRAWN,
            f"{1e3 * drive.shaft.length:g} mm long, {1e3 * drive.shaft.diameter:g} mm "
            f"{shaft.material or 'steel'}, {shaft.supports} bearings, 2 couplings",
        )
    extras = (
        (drive.backstop, "backstop", "keeps the driven sprocket from turning back"),
        (drive.overrunning, "overrunning clutch", "passes torque forward only"),
        (drive.polarity == "rectified", "rectifier", "in the motor's supply, for either polarity"),
    )
    for is_there, item, text in extras:
        if is_there:
            yield Line(item, 1, "1", DRAWN, text)


def _ball_lines(case: Case) -> Iterator[Line]:
    balls = case.scenario.balls
    if balls is None:
        return
    aboard = float(case.sized.load.balls.sum()) if case.sized else 1.0
    count = math.ceil((1.0 + BALLS_BESIDE) * aboard)
    note = (
        f"{1e3 * balls.diameter:g} mm {balls.material or ''}, {format_si(balls.mass, 'mass')}; "
        f"{aboard:.1f} ride at a time, twice as many are taken to be on the way round"
    )
    yield Line("balls", count, "1", PRACTICE, note)
    if balls.discharge is not None:
        mouth = f"mouth {1e3 * balls.discharge.mouth:g} mm"
        yield Line("discharge chute", 1, "1", DRAWN, f"{mouth}; its place is told with the balls")
    if balls.feed.kind != "every pocket":
        item = {"set down": "feeder that sets balls down", "chute": "feeding chute"}
        yield Line(item.get(balls.feed.kind, "feeding trough"), 1, "1", DRAWN, "see the balls")
