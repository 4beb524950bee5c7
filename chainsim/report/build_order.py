"""What to order and to make, in one list, and how it goes together, step by step."""

from __future__ import annotations

import math
from collections.abc import Iterator

from chainsim.analysis.advice import STALL_RESERVE
from chainsim.analysis.drive import duty
from chainsim.report.build_case import Case
from chainsim.report.build_drive import CONTINUOUS_SHARE, running_torque
from chainsim.report.build_line import DRAWN, PRACTICE, Line, Part
from chainsim.report.build_spares import spare_parts
from chainsim.report.build_takeup import movable_axles, travel_of
from chainsim.report.layout_notes import mount_text
from chainsim.units import format_si

BALLS_BESIDE = 2.0
"""Balls on the way round beside those that ride, as a share of these (dimensionless): a track
brings them back; our choice."""


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
        f"{1e3 * chain.roller_diameter:g} mm, {format_si(chain.link_mass, 'mass')} a link, good for "
        f"{format_si(chain.allowable_tension, 'force')}; with what joins them to a loop",
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
            what = f"smooth, {2e3 * part.roller_radius:.2f} mm across, {bore}"
        yield Line(f"sprocket {wheel.name}", 1, "1", DRAWN, what)
        role = "turned by the drive" if k == case.driven else "runs in its bearing"
        axle = f"{1e3 * part.axle_diameter:g} mm across; {role}; {mount_text(part.mount)}"
        yield Line(f"axle with bearing, {wheel.name}", 1, "1", DRAWN, axle)


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
            f"{guides[mount.kind]}; weighs {format_si(mount.mass, 'mass')} in all, sprocket and axle "
            f"included; travel of at least {1e3 * (high - low):.1f} mm",
        )


def _drive_lines(case: Case) -> Iterator[Line]:
    drive = case.scenario.drive
    rpm = case.rate * 30.0 / math.pi
    if drive.motor is None:
        load, (_, closed) = case.simulated(duty), running_torque(case)
        torque = load.rms_torque if load else closed
        stall = max(
            STALL_RESERVE * (torque or 0.0), load.peak_torque / CONTINUOUS_SHARE if load else 0.0
        )
        need = f"{rpm:.1f} rev/min under load"
        if torque:
            need += (
                f", {1e3 * torque / CONTINUOUS_SHARE:.3g} mN m all day, {1e3 * stall:.3g} mN m at "
                "stall"
            )
        yield Line("gearmotor", 1, "1", DRAWN, f"{need}; see motor duty")
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
            f"{1e3 * shaft.length:g} mm long, {1e3 * shaft.diameter:g} mm {shaft.material or 'steel'}, "
            f"{shaft.supports} bearings, 2 couplings",
        )
    extras = (
        (drive.backstop, "backstop", "keeps the driven sprocket from turning back"),
        (drive.overrunning, "overrunning clutch", "passes torque forward only"),
        (drive.polarity == "rectified", "rectifier", "in the motor's supply: either polarity runs it "
         "forward"),
    )  # fmt: skip
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
        f"{aboard:.1f} ride at a time, the rest is on the way round ({PRACTICE})"
    )
    yield Line("balls", count, "1", DRAWN, note)
    if balls.discharge is not None:
        mouth = f"mouth {1e3 * balls.discharge.mouth:g} mm"
        yield Line("discharge chute", 1, "1", DRAWN, f"{mouth}; its place is told with the balls")
    if balls.feed.kind != "every pocket":
        item = {"set down": "feeder that sets balls down", "chute": "feeding chute"}
        yield Line(item.get(balls.feed.kind, "feeding trough"), 1, "1", DRAWN, "see the balls")


def assembly_steps(case: Case) -> list[str]:
    """Say how the lift goes together.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    list of str
        Steps in their order, with figures.
    """
    n, movable = case.lift.n_links, movable_axles(case)
    driven = case.lift.wheels[case.driven].name
    steps = [
        "Lay all parts out and count them against the first list. Measure the check square of each "
        "printed drawing before anything is cut from it.",
        "Set the fixed axles to their places, level and parallel, sprockets in one plane.",
    ]
    if movable:
        names = " and ".join(case.lift.wheels[k].name for k in movable)
        steps.append(
            f"Mount {names} so that it is free along its way over the whole travel told, with the "
            "catching stop in place; hold it up."
        )
    if case.scenario.carriers is not None:
        carriers = case.scenario.carriers
        where = "the links listed" if carriers.at else f"every {carriers.every} links"
        up = "lips up on the strand that rises, pockets outward"
        steps.append(f"Fit the carriers to the open chain, one on {where}: {up}.")
    order = ", ".join(case.lift.wheel_names)
    steps.append(
        f"Lay the chain round {order}, in this order of travel, and close it at {n} links."
    )
    for k in movable:
        mount, new = case.scenario.sprocket[k].mount, travel_of(case, k).new
        steps.append(
            f"Let {case.lift.wheels[k].name} down gently until the chain carries it "
            f"({mount_text(mount)}); it comes to stand {1e3 * new + 0.0:+.1f} mm from its place on "
            "the drawing, the same within the band of the checks."
        )
    if not movable:
        steps.append("Set the screwed axle until the chain is taut without being strained.")
    side = "counterclockwise" if not case.is_from_back else "clockwise"
    if case.scenario.sprocket[case.driven].side == "outside":
        side = "clockwise" if side == "counterclockwise" else "counterclockwise"
    view = "behind" if case.is_from_back else "the front"
    steps += [
        f"Turn {driven} by hand one whole turn of the chain, {side} seen from {view}: nothing may "
        "touch, and no carrier may catch.",
        "Couple the motor with the end play told, and check its direction before the chain is on it.",
        "Fit the guards. Then go through the checks at commissioning, first empty, then with balls.",
    ]
    return steps
