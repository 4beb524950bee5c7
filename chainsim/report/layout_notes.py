"""What a drawing of a lift says beside its parts."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from chainsim.model.lift import Lift
from chainsim.report.layout_parts import ball_places, route_at_rest
from chainsim.units import format_si


class Note(NamedTuple):
    """A text that belongs to a place.

    Attributes
    ----------
    place : ndarray, shape (2,)
        In the frame [m].
    title : str
        Name of the part.
    lines : tuple of str
        What is said of it.
    """

    place: np.ndarray
    title: str
    lines: tuple[str, ...]


def wheel_notes(lift: Lift) -> list[Note]:
    """Say of every wheel where it stands, what it is and what holds it.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.

    Returns
    -------
    list of Note
        In the order of travel.
    """
    notes, path = [], route_at_rest(lift)
    for k, sprocket in enumerate(lift.scenario.sprocket):
        center, wheel = lift.laid.wheel_center[k], lift.wheels[k]
        size = (
            f"{wheel.teeth} teeth, pitch circle {2e3 * wheel.radius:.2f} mm"
            if wheel.teeth
            else f"smooth, {2e3 * sprocket.roller_radius:.1f} mm across"
        )
        wrap = f"wrap {math.degrees(path.wrap[k]):.0f}°"
        if sprocket.side == "outside":
            wrap += ", outside the loop"
        where = f"at {_coordinate(center[0])}, {_coordinate(center[1])} mm"
        role = ", driven" if k == lift.driven else ""
        lines = (size, f"{wrap}; {where}", mount_text(sprocket.mount))
        notes.append(Note(center, sprocket.name + role, lines))
    return notes


def strand_notes(lift: Lift) -> list[Note]:
    """Say of every strand how long it is and whether it carries.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.

    Returns
    -------
    list of Note
        In the order of travel.
    """
    notes, path = [], route_at_rest(lift)
    balls = len(ball_places(lift))
    for strand in lift.strands:
        length = float(path.length[strand.start])
        lines = [f"{1e3 * length:.1f} mm, {length / path.pitch:.1f} links"]
        if strand.carrying and balls:
            lines.append(f"rises; room for {balls} balls on the way up")
        middle = 0.5 * (path.start[strand.start] + path.end[strand.start])
        notes.append(Note(middle, strand.name, tuple(lines)))
    return notes


def mount_text(mount) -> str:
    """Say in a few words what holds an axle.

    Parameters
    ----------
    mount : Mount
        The mount's table of the scenario.

    Returns
    -------
    str
        Such as `hangs in the loop, 300 g`.
    """
    mass = format_si(mount.mass, "mass")
    if mount.kind == "fixed":
        return "fixed axle"
    if mount.kind == "screwed":
        return f"screwed, shifted {1e3 * mount.shift:+.2f} mm"
    if mount.kind == "hung":
        return f"hangs in the loop, {mass}"
    if mount.kind == "arm":
        return f"on an arm, {mass}"
    if mount.kind == "spring":
        return (
            f"sprung, {format_si(mount.set_force, 'force')} at {format_si(mount.rate, 'stiffness')}"
        )
    if mount.kind == "counterweight":
        return f"drawn by a counterweight, {format_si(mount.weight, 'mass')}"
    return f"slides, {mass}"


def _coordinate(value: float) -> str:
    """Write a coordinate [m] in millimeters, without a negative zero."""
    return f"{1e3 * value + 0.0:.1f}".replace("-0.0", "0.0")
