"""What is drawn over time: which quantities, in which unit, with which limits.

Each function takes a recording and returns panels, one above the other in a plot; an empty list
says that the run holds nothing of the kind.
"""

from __future__ import annotations

import warnings
from dataclasses import dataclass
from typing import Any

import numpy as np

from chainsim.analysis.chain_motion import chain_speed, excursion, sag
from chainsim.analysis.ride import ball_acceleration
from chainsim.analysis.survey import survey
from chainsim.analysis.tensions import strand_ends

LEANING = 0.1
"""Sideways share of a chord from which a strand counts as leaning [dimensionless]."""

DEMANDED = "demanded"
"""Label of the curve that the drive was asked to follow."""


@dataclass(frozen=True)
class Curve:
    """One line over time.

    Attributes
    ----------
    label : str
        Name in the legend; empty where the panel has only this one.
    values : ndarray, shape (n_samples,)
        In the unit of the panel; NaN where there is none.
    """

    label: str
    values: np.ndarray


@dataclass(frozen=True)
class Limit:
    """A level that a quantity is judged against.

    Attributes
    ----------
    value : float
        In the unit of the panel.
    label : str
        What it is.
    """

    value: float
    label: str


@dataclass(frozen=True)
class Panel:
    """One pair of axes over time.

    Attributes
    ----------
    title : str
        What is shown.
    quantity, unit : str
        Label of the vertical axis.
    curves : tuple of Curve
        The lines.
    limits : tuple of Limit
        The levels.
    """

    title: str
    quantity: str
    unit: str
    curves: tuple[Curve, ...]
    limits: tuple[Limit, ...] = ()


def _over_slots(values: np.ndarray, largest: bool) -> np.ndarray:
    """Return the largest or smallest of the slots that are in use, shape (n_samples,)."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore", RuntimeWarning)  # no slot in use: NaN is the answer
        return np.nanmax(values, axis=1) if largest else np.nanmin(values, axis=1)


def tension_panels(rec: Any) -> list[Panel]:
    """Tension at both ends of every strand [N], averaged over one tooth passage."""
    s = survey(rec)
    panels = []
    for k, strand in enumerate(s.strands):
        ends = strand_ends(s, k)
        curves = (
            Curve(f"at {s.sprocket_names[strand.start]}", ends.start),
            Curve(f"at {s.sprocket_names[strand.end]}", ends.end),
        )
        limits = (Limit(rec.scenario.limits.slack_tension, "slack"),) if strand.carrying else ()
        panels.append(Panel(strand_title(strand), "tension", "N", curves, limits))
    return panels


def strand_title(strand: Any) -> str:
    """Return the name of a strand with its role."""
    return f"{'carrying strand' if strand.carrying else 'strand'} {strand.name}"


def excursion_panels(rec: Any) -> list[Panel]:
    """Sideways excursion of every strand from its straight line, both ways [mm]."""
    s = survey(rec)
    clearance = rec.scenario.limits.clearance
    limits = []
    if clearance.outward is not None:
        limits.append(Limit(1e3 * clearance.outward, "clearance outward"))
    if clearance.inward is not None:
        limits.append(Limit(-1e3 * clearance.inward, "clearance inward"))
    panels = []
    for k, strand in enumerate(s.strands):
        found = excursion(s, k)
        curves = (Curve("outward", 1e3 * found.outward), Curve("inward", -1e3 * found.inward))
        shown = tuple(limits) if strand.carrying else ()
        panels.append(Panel(strand_title(strand), "excursion", "mm", curves, shown))
    return panels


def sag_panels(rec: Any) -> list[Panel]:
    """Sag below the chord of every strand that leans [mm]; an upright one has none."""
    s = survey(rec)
    panels = []
    for k, strand in enumerate(s.strands):
        chord = s.center[0, strand.end] - s.center[0, strand.start]
        if abs(chord[0]) > LEANING * np.linalg.norm(chord):
            curve = Curve("", 1e3 * sag(s, k))
            panels.append(Panel(strand_title(strand), "sag", "mm", (curve,)))
    return panels


def ride_panels(rec: Any) -> list[Panel]:
    """Chain speed [m/s], and accelerations at the balls [m/s2]."""
    curves = [Curve("chain", chain_speed(rec))]
    if "drive/set_speed" in rec:
        curves.append(Curve(DEMANDED, rec["drive/set_speed"]))
    panels = [Panel("chain speed", "speed", "m/s", tuple(curves))]
    acceleration = ball_acceleration(rec)
    if acceleration is not None and np.isfinite(acceleration).any():
        largest = [_over_slots(np.abs(acceleration[:, :, k]), largest=True) for k in (0, 1)]
        panels.append(
            Panel(
                "largest acceleration at any carried ball, mean over a sample",
                "acceleration",
                "m/s²",
                (Curve("across the link", largest[0]), Curve("along the link", largest[1])),
            )
        )
    return panels


def seat_panels(rec: Any) -> list[Panel]:
    """Smallest seat reserve of all carried balls [m s-2]."""
    reserve = usable(rec, "balls/seat_reserve")
    if reserve is None:
        return []
    curve = Curve("", _over_slots(reserve, largest=False))
    limits = (Limit(0.0, "the seat gives way"),)
    return [
        Panel("smallest seat reserve of all carried balls", "reserve", "m/s²", (curve,), limits)
    ]


def drive_panels(rec: Any) -> list[Panel]:
    """Torque [N m], power [W] and current [A] of the drive."""
    panels = [Panel("drive torque", "torque", "N m", (Curve("", rec["drive/torque"]),))]
    if "drive/power" in rec:
        panels.append(Panel("mechanical power", "power", "W", (Curve("", rec["drive/power"]),)))
    current = usable(rec, "drive/current")
    if current is not None:
        panels.append(Panel("motor current", "current", "A", (Curve("", current),)))
    return panels


def takeup_panels(rec: Any) -> list[Panel]:
    """Travel of every sprocket that can move [mm]."""
    if "mounts/travel" not in rec:
        return []
    panels = []
    for k, sprocket in enumerate(rec.scenario.sprocket):
        if sprocket.mount.kind in ("fixed", "screwed"):
            continue
        stops = getattr(sprocket.mount, "stops", None) or ()
        limits = tuple(Limit(1e3 * stop, "stop") for stop in stops)
        curve = Curve("", 1e3 * rec["mounts/travel"][:, k])
        panels.append(Panel(f"take-up {sprocket.name}", "travel", "mm", (curve,), limits))
    return panels


def seating_panels(rec: Any) -> list[Panel]:
    """How high engaged pins ride over their seats [mm], and seats skipped."""
    if "sprockets/ride_height" not in rec:
        return []
    names = [s.name for s in rec.scenario.sprocket]
    height, skip = rec["sprockets/ride_height"], rec["sprockets/skip"]
    return [
        Panel(
            "highest engaged pin over its seat",
            "height",
            "mm",
            tuple(Curve(name, 1e3 * height[:, k]) for k, name in enumerate(names)),
        ),
        Panel(
            "chain through the sprocket less its rotation",
            "difference",
            "seats",
            tuple(Curve(name, skip[:, k]) for k, name in enumerate(names)),
            (Limit(1.0, "a seat skipped"), Limit(-1.0, "a seat skipped")),
        ),
    ]


def axle_panels(rec: Any) -> list[Panel]:
    """Load on every axle [N]."""
    load = np.linalg.norm(rec["sprockets/force"], axis=-1)
    curves = tuple(Curve(s.name, load[:, k]) for k, s in enumerate(rec.scenario.sprocket))
    return [Panel("load of the chain on each axle", "load", "N", curves)]


def usable(rec: Any, name: str) -> np.ndarray | None:
    """Return a channel, None where it is missing or holds no number at all."""
    if name not in rec:
        return None
    values = np.asarray(rec[name], dtype=float)
    return values if np.isfinite(values).any() else None
