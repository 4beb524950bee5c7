"""The cautions of a lift, each with the figure that belongs to it."""

from __future__ import annotations

import math
from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.survey import Survey, survey
from chainsim.report.text import quantity, significant

STANDING = 1e-3
"""Chain speed below which a lift counts as standing [m/s]."""


class Caution(NamedTuple):
    """One caution.

    Attributes
    ----------
    title, text : str
        What can hurt, and how much of it.
    """

    title: str
    text: str


def cautions(rec: Any) -> list[Caution]:
    """Return the cautions for a recorded lift.

    Parameters
    ----------
    rec : Recording
        The run.
    """
    s = survey(rec)
    found = [falling_ball(s), hung_mass(s), stored_energy(s), pull(s)]
    found += [overrun(s), run_back(s), nip_places(s), reach(s)]
    return [caution for caution in found if caution is not None]


def fall_height(s: Survey) -> float:
    """Return the height from the foot of the lowest to the top of the highest wrap [m]."""
    y = s.center[0, :, 1]
    return float((y + s.seat_radius).max() - (y - s.seat_radius).min())


def falling_ball(s: Survey) -> Caution | None:
    """Energy of a ball that falls from the head."""
    balls = s.scenario.balls
    if balls is None:
        return None
    height = fall_height(s)
    gravity = s.scenario.frame.gravity
    energy = balls.mass * gravity * height
    speed = math.sqrt(2.0 * gravity * height)
    return Caution(
        "A ball that falls",
        f"From the head to the foot of the lift ({quantity(height, 'm')}) a ball of "
        f"{quantity(balls.mass, 'kg')} arrives with {quantity(energy, 'J')} at "
        f"{quantity(speed, 'm s-1')}, more if the lift stands above the floor. "
        "Guard the fall on both sides of the lift.",
    )


def hung_mass(s: Survey) -> Caution | None:
    """What hangs, and how far it drops if the chain parts."""
    gravity = s.scenario.frame.gravity
    parts = []
    for sprocket in s.scenario.sprocket:
        mount = sprocket.mount
        if mount.kind not in ("hung", "arm", "sliding", "counterweight", "spring"):
            continue
        mass = mount.mass
        what = f"{quantity(mass, 'kg')} at sprocket {sprocket.name}"
        if mount.kind == "counterweight":
            what += f" and a counterweight of {quantity(mount.weight, 'kg')}"
            mass += mount.weight
        if mass <= 0.0:
            continue
        if mount.stops is None:
            drop = "without a stop: it drops until something else catches it"
        elif mount.kind == "arm":
            drop = f"stopped after {quantity(mount.stops[1] - mount.stops[0], 'rad')} of swing"
        else:
            travel = mount.stops[1] - mount.stops[0]
            energy = mass * gravity * travel
            drop = f"with {quantity(travel, 'm')} between its stops, {quantity(energy, 'J')}"
        parts.append(f"{what}, {drop}")
    if not parts:
        return None
    return Caution(
        "Hung masses",
        "If the chain parts or is opened, what it carries falls: "
        + "; ".join(parts)
        + ". Support it "
        "before working on the chain, and keep hands and feet from below it.",
    )


def stored_energy(s: Survey) -> Caution | None:
    """Energy in take-up springs and in the stretched chain."""
    springs = [
        0.5 * sprocket.mount.set_force**2 / sprocket.mount.rate
        for sprocket in s.scenario.sprocket
        if sprocket.mount.kind == "spring" and sprocket.mount.rate
    ]
    stored = s.channel("energy/stored")
    parts = []
    if springs:
        parts.append(f"{quantity(sum(springs), 'J')} in the take-up springs as they are set")
    if stored is not None and np.isfinite(stored).any():
        parts.append(
            f"up to {quantity(float(np.nanmax(stored)), 'J')} in springs, links and contacts "
            "during the run"
        )
    if not parts:
        return None
    text = " and ".join(parts)
    return Caution(
        "Stored energy", f"{text[0].upper()}{text[1:]}. Let it off before opening the chain."
    )


def pull(s: Survey) -> Caution:
    """Pull of the chain when something stops it."""
    drive = s.scenario.drive
    driven = s.sprocket_names.index(drive.sprocket)
    torque = stall_torque(drive)
    seen = s.rec.extremes.get("link_tension")
    parts = []
    if torque is None:
        parts.append(
            "This scenario sets a speed and no largest torque, so that a jam is pulled until "
            "something gives way: fit a motor or a clutch that limits it, and simulate that"
        )
    else:
        force = torque / float(s.seat_radius[driven])
        parts.append(
            f"At stall the drive gives {quantity(torque, 'N m')} at its sprocket, a pull of about "
            f"{quantity(force, 'N')} in the chain on top of its own tension"
        )
    if seen is not None:
        jammed = any(event.kind == "jam" for event in s.scenario.event)
        when = "with the jam that was simulated" if jammed else "without any jam"
        parts.append(
            f"the highest link tension of this run, {when}, was {quantity(seen.value, 'N')}"
        )
    text = "; ".join(parts)
    return Caution(
        "Pull at a stall or jam", f"{text}. A finger between chain and sprocket feels it."
    )


def stall_torque(drive: Any) -> float | None:
    """Return the largest torque of a drive at its sprocket [N m], None where nothing limits it."""
    motor = drive.motor
    if drive.kind == "motor" and motor is not None and motor.stall_torque:
        return float(motor.stall_torque * motor.gear_ratio * motor.gear_efficiency)
    return drive.max_torque


def _travel_after(s: Survey, start: float) -> np.ndarray:
    """Return the travel of the chain from a moment on, by its driven sprocket, shape (n,) [m]."""
    after = s.time >= start
    return np.cumsum(s.drive_speed[after]) * s.interval


def overrun(s: Survey) -> Caution | None:
    """How far the lift runs on after it was told to stop."""
    stops = [event.at for event in s.scenario.event if event.kind == "stop"]
    stops += [event.time for event in s.rec.events if event.kind == "stop"]
    if not stops:
        return Caution(
            "Overrun",
            "No stop was simulated, so nothing is known here of how far the lift runs on.",
        )
    start = min(stops)
    after = s.time >= start
    speed = np.abs(s.drive_speed[after])
    standing = np.flatnonzero(speed < STANDING)
    if not len(standing):
        return Caution(
            "Overrun", "After the stop that was simulated the lift had not come to rest."
        )
    end = int(standing[0])
    run_on = float(np.max(np.abs(_travel_after(s, start)[: end + 1])))
    return Caution(
        "Overrun",
        f"After the stop at {start:.2f} s the chain ran on by {quantity(run_on, 'm')} in "
        f"{significant(end * s.interval)} s.",
    )


def run_back(s: Survey) -> Caution | None:
    """How far a loaded lift runs back when its supply is cut."""
    cuts = [event.at for event in s.scenario.event if event.kind == "supply_cut"]
    if not cuts:
        return Caution(
            "Run-back",
            "No cut of the supply was simulated: whether the loaded lift then runs back is not "
            "known from this run.",
        )
    travel = _travel_after(s, cuts[0])
    peak = np.maximum.accumulate(travel)
    back = float(np.max(peak - travel)) if len(travel) else 0.0
    held = "it stood" if back < 0.5 * s.pitch else f"the chain ran back by {quantity(back, 'm')}"
    return Caution("Run-back", f"After the supply was cut at {cuts[0]:.2f} s, {held}.")


def nip_places(s: Survey) -> Caution:
    """Where the chain draws things in."""
    places = []
    for strand in s.strands:
        x, y = 1e3 * s.center[0, strand.end]
        name = s.sprocket_names[strand.end]
        places.append(
            f"where strand {strand.name} meets sprocket {name} (near x {x:.0f}, y {y:.0f} mm)"
        )
    return Caution(
        "Nip places",
        "Running forward the chain draws in "
        + "; ".join(places)
        + ". Running in reverse it does so at "
        "the other end of each strand. Carriers also pass fixed edges, the chute and the trough "
        "closely.",
    )


def reach(s: Survey) -> Caution:
    """Motors that restart, and what a visitor can reach."""
    speed = s.steady_speed if np.isfinite(s.steady_speed) else float(np.nanmax(s.drive_speed))
    return Caution(
        "Restart and reach",
        "A motor may start without warning when its supply returns; switch off and secure it "
        f"before reaching in. The carriers move at {quantity(speed, 'm s-1')}; keep all of it "
        "beyond a visitor's reach or behind a guard.",
    )
