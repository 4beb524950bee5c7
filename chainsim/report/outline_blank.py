"""What is to be cut for a sprocket: its outline, its bore, and what to say beside it."""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.errors import CallError
from chainsim.model.tooth import ToothForm
from chainsim.model.wheels import teeth_of
from chainsim.scenario import Scenario
from chainsim.units import format_si


class Blank(NamedTuple):
    """A sprocket to be cut.

    Attributes
    ----------
    name : str
        Name of the sprocket.
    tooth : ToothForm
        Its outline.
    bore : float
        Diameter of the hole for the axle [m].
    notes : tuple of str
        Lines that go with the drawing.
    """

    name: str
    tooth: ToothForm
    bore: float
    notes: tuple[str, ...]


def blank_of(scenario: Scenario, sprocket: str, kerf: float = 0.0) -> Blank:
    """Gather what is to be cut.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    sprocket : str
        Name of the sprocket.
    kerf : float
        Width of the cut [m], stated in the notes.

    Returns
    -------
    Blank
        Outline, bore and notes.

    Raises
    ------
    CallError
        If there is no such sprocket, or it has no teeth, or the bore leaves no rim.
    """
    names = [item.name for item in scenario.sprocket]
    if sprocket not in names:
        raise CallError(f"no sprocket is called {sprocket!r}; there are {', '.join(names)}")
    part = scenario.sprocket[names.index(sprocket)]
    tooth = teeth_of(scenario)[names.index(sprocket)]
    if tooth is None:
        raise CallError(f"sprocket {sprocket!r} is a smooth roller: it has no outline to cut")
    root = tooth.pitch_radius - tooth.roller_radius
    if part.axle_diameter >= 2.0 * root:
        raise CallError(
            f"sprocket {sprocket!r}: a bore of {format_si(part.axle_diameter, 'length')} leaves "
            f"nothing inside seats {format_si(2.0 * root, 'length')} across"
        )
    return Blank(sprocket, tooth, part.axle_diameter, _notes(scenario, part, tooth, kerf))


def _notes(scenario: Scenario, part, tooth: ToothForm, kerf: float) -> tuple[str, ...]:
    pitch = part.pitch or scenario.chain.pitch
    cut: tuple[str, ...] = (
        f"kerf {1e3 * kerf:.2f} mm is not allowed for: set the machine to cut",
        f"{5e2 * kerf:.3f} mm outside the outline and inside the bore",
    )
    if kerf <= 0.0:
        cut = ("kerf is not allowed for: set it at the machine",)
    return (
        f"{part.name}: {tooth.teeth} teeth, pitch {1e3 * pitch:.3f} mm, "
        f"rollers {2e3 * tooth.roller_radius:.2f} mm",
        f"pitch circle {2e3 * tooth.pitch_radius:.3f} mm, over the tips "
        f"{2e3 * tooth.outer_radius:.3f} mm, at the seats "
        f"{2e3 * (tooth.pitch_radius - tooth.roller_radius):.3f} mm, "
        f"bore {1e3 * part.axle_diameter:.2f} mm",
        f"seat radius {1e3 * (tooth.roller_radius + tooth.seat_clearance):.3f} mm, tip radius "
        f"{1e3 * tooth.corner_radius:.3f} mm, pressure angle "
        f"{math.degrees(tooth.pressure_angle):.1f}°",
        *cut,
        "the square is 10 mm: measure it before cutting",
    )
