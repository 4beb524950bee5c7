"""Cautions for a lift that was not run: the same places, with figures from closed forms."""

from __future__ import annotations

import math
from collections.abc import Iterator

from chainsim.analysis.sized import starting_pull
from chainsim.report.build_case import Case
from chainsim.report.build_line import place_text
from chainsim.report.build_takeup import movable_axles
from chainsim.report.cautions import Caution, cautions, stall_torque
from chainsim.report.text import quantity


def sheet_cautions(case: Case) -> list[Caution]:
    """Return the cautions of a sheet: those of the run, else from closed forms.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    list of Caution
        In the order of the report page.
    """
    ran = case.simulated(cautions)
    return ran if ran else list(_without_run(case))


def _without_run(case: Case) -> Iterator[Caution]:
    yield from _falling(case)
    yield from _hanging(case)
    yield _pull(case)
    yield Caution("Overrun and run-back", "NOT SIMULATED: how far it runs on or back is not known.")
    yield _nips(case)
    yield Caution(
        "Restart and reach",
        "A motor may start without warning when its supply returns; switch off and secure it "
        f"before reaching in. The carriers move at {quantity(case.speed, 'm s-1')}; keep all of it "
        "beyond a visitor's reach or behind a guard.",
    )


def _falling(case: Case) -> Iterator[Caution]:
    balls, gravity = case.scenario.balls, case.scenario.frame.gravity
    if balls is None:
        return
    tops = [w.center[1] + w.radius for w in case.lift.wheels]
    feet = [
        c[1] - w.radius for c, w in zip(case.lift.laid.wheel_center, case.lift.wheels, strict=True)
    ]
    height = max(tops) - min(feet)
    energy, speed = balls.mass * gravity * height, math.sqrt(2.0 * gravity * height)
    yield Caution(
        "A ball that falls",
        f"From the head to the foot of the lift ({quantity(height, 'm')}) a ball of "
        f"{quantity(balls.mass, 'kg')} arrives with {quantity(energy, 'J')} at "
        f"{quantity(speed, 'm s-1')}, more if the lift stands above the floor. Guard the fall on "
        "both sides of the lift.",
    )


def _hanging(case: Case) -> Iterator[Caution]:
    parts = []
    for k in movable_axles(case):
        mount, name = case.scenario.sprocket[k].mount, case.lift.wheels[k].name
        mass = mount.mass + (mount.weight or 0.0)
        drop = "without a stop: it drops until something else catches it"
        if mount.stops is not None and mount.kind != "arm":
            drop = f"with {quantity(mount.stops[1] - mount.stops[0], 'm')} between its stops"
        parts.append(f"{quantity(mass, 'kg')} at {name}, {drop}")
        if mount.kind == "spring" and mount.rate:
            stored = 0.5 * mount.set_force**2 / mount.rate
            parts.append(f"its spring holds {quantity(stored, 'J')}")
    if parts:
        yield Caution(
            "Hung masses and springs",
            f"If the chain parts or is opened, what it carries falls: {'; '.join(parts)}. Support "
            "it before working on the chain, and keep hands and feet from below it.",
        )


def _pull(case: Case) -> Caution:
    torque, text = stall_torque(case.scenario.drive), ""
    radius = case.lift.wheels[case.driven].radius
    if torque is None:
        text = (
            "This scenario sets a speed and no largest torque, so that a jam is pulled until "
            "something gives way"
        )
    else:
        text = (
            f"At stall the drive gives {quantity(torque, 'N m')} at its sprocket, a pull of about "
            f"{quantity(torque / radius, 'N')} in the chain on top of its own tension"
        )
    if case.sized is not None:
        most = case.sized.running.most + starting_pull(case.sized)
        text += f"; running and starting take {quantity(most, 'N')} (closed form)"
    return Caution(
        "Pull at a stall or jam", f"{text}. A finger between chain and sprocket feels it."
    )


def _nips(case: Case) -> Caution:
    places = []
    for strand in case.lift.strands:
        x, y = case.lift.laid.wheel_center[strand.end]
        name = case.lift.wheel_names[strand.end]
        where = place_text(case.across(float(x)), float(y), 0)
        places.append(f"where strand {strand.name} meets sprocket {name} (near {where})")
    return Caution(
        "Nip places",
        f"Running forward the chain draws in {'; '.join(places)}. Running in reverse it does so at "
        "the other end of each strand. Carriers also pass fixed edges, the chute and the feed "
        "closely.",
    )
