"""Axle and shaft of the drive on the build sheet: size, supports, alignment, play at couplings."""

from __future__ import annotations

import math
from collections.abc import Iterator

from chainsim import closed_forms as cf
from chainsim.analysis.advice import WHIRL_RESERVE
from chainsim.analysis.axles import axle_loads
from chainsim.analysis.materials import SHAFT_MATERIALS
from chainsim.report.build_case import Case
from chainsim.report.build_drive import running_torque
from chainsim.report.build_line import CLOSED, CLOSED_ONLY, PRACTICE, SIMULATED, Line, Part

ADDED_DRAG = 0.05
"""Share of the running torque that one support off the line may cost (dimensionless); our own
choice."""

PUSH = 10.0
"""Push along the motor's shaft that a cost is told for [N]."""

SHEAR_OVER_MODULUS = 1.0 / 2.6
"""Shear modulus over Young's modulus (dimensionless), Poisson's ratio 0.3."""

EXPANSION = {"steel": 12e-6, "stainless": 16e-6, "aluminum": 23e-6, "brass": 19e-6}
"""Linear expansion of shaft materials [1/K]; usual handbook figures, from memory."""

ROOM_SPAN = 20.0
"""Change of temperature that end play must take where none is stated [K]."""

ASSEMBLY_PLAY = 0.3e-3
"""End play for assembly at a coupling, beside expansion [m]; common practice, no source."""

BEND_PERCENT = 1.0
"""How far a driven axle may bend under the chain [percent of the pitch]; our choice."""

BENDING_LIMIT = 100e6
"""Bending stress that a turning plain steel axle may see [Pa]; common practice, no source."""

DIAMETERS = (4e-3, 6e-3, 8e-3, 10e-3)
"""Shafts to choose from where none is stated [m]."""


def shaft_part(case: Case) -> Part:
    """Write the drive's axle, its shaft and supports.

    Parameters
    ----------
    case : Case
        The lift.
    """
    shaft = case.scenario.drive.shaft
    lines = list(_axle_lines(case))
    if shaft.length is not None and shaft.diameter is not None:
        lines += _size_lines(case, shaft.length, shaft.diameter)
        lines += _support_lines(case, shaft.length, shaft.diameter)
        text = "Supports are spaced evenly, ends included. Whirl is a closed form, never simulated."
    else:
        lines += _choice_lines(case)
        text = (
            "The scenario states no shaft, so the gearmotor is taken to sit at the driven "
            "sprocket. For one that stands apart, state length and diameter and write this anew."
        )
    return Part("shaft", "Axle, shaft and couplings", text, (*lines, *_push_lines(case)))


def _axle_lines(case: Case) -> Iterator[Line]:
    """How far the driven sprocket may hang over its bearing."""
    part = case.scenario.sprocket[case.driven]
    diameter = part.axle_diameter
    load, source = None, SIMULATED
    loads = case.simulated(axle_loads)
    if loads:
        load = case.extreme(f"axle_load.{part.name}") or loads[case.driven].peak
    elif case.sized is not None:
        load, source = float(math.hypot(*case.sized.running.hub[case.driven])), CLOSED_ONLY
    yield Line(f"axle of {part.name}", diameter, "m", note="plain round steel taken here")
    if load:
        bend = 0.01 * BEND_PERCENT * case.scenario.chain.pitch
        strong = BENDING_LIMIT * math.pi * diameter**3 / (32.0 * load)
        stiff = (3.0 * bend * _bending_stiffness(diameter, "steel") / load) ** (1.0 / 3.0)
        note = (
            f"at {load:.3g} N on the axle it bends by less than {1e3 * bend:.2g} mm and stays "
            f"below {BENDING_LIMIT / 1e6:.0f} MPa; further out, hold it at both ends"
        )
        yield Line("sprocket from its bearing, at most", min(strong, stiff), "m", source, note)


def _bending_stiffness(diameter: float, material: str) -> float:
    """Young's modulus times second moment of area of a round bar [N m2]."""
    return SHAFT_MATERIALS[material].modulus * math.pi * diameter**4 / 64.0


def _size_lines(case: Case, length: float, diameter: float) -> Iterator[Line]:
    shaft = case.scenario.drive.shaft
    material = shaft.material or "steel"
    shear = SHEAR_OVER_MODULUS * SHAFT_MATERIALS[material].modulus
    torque = _torque(case)
    yield Line("shaft: diameter", diameter, "m", note=material)
    yield Line("shaft: length", length, "m")
    if torque is not None:
        stiffness = cf.torsional_stiffness(diameter, length, shear)
        yield Line("shaft: twist, running", torque / stiffness, "rad", CLOSED)
        stress = cf.torsional_stress(torque, diameter)
        yield Line("shaft: shear stress, running", stress, "Pa", CLOSED)
    if shaft.backlash:
        yield Line("shaft: backlash of gearing and couplings", shaft.backlash, "rad")


def _support_lines(case: Case, length: float, diameter: float) -> Iterator[Line]:
    shaft = case.scenario.drive.shaft
    material = SHAFT_MATERIALS[shaft.material or "steel"]
    span = length / (shaft.supports - 1)
    whirl = cf.whirl_speed(diameter, span, material.modulus, material.density)
    widest = cf.support_distance(diameter, material.modulus, material.density, case.rate)
    yield Line("shaft: supports, ends included", shaft.supports, "1")
    yield Line("shaft: distance of the supports", span, "m", CLOSED, "", None, widest)
    yield Line(
        "shaft: first critical speed over running speed",
        whirl / case.rate,
        "1",
        CLOSED,
        "never simulated",
        WHIRL_RESERVE,
    )
    fewest = math.ceil(length / widest) + 1
    yield Line("shaft: fewest supports for that", max(2, fewest), "1", CLOSED, "more bind sooner")
    torque = _torque(case)
    if shaft.supports > 2 and torque is not None:
        friction = case.scenario.sprocket[case.driven].bearing_friction
        bending = _bending_stiffness(diameter, shaft.material or "steel")
        offset = alignment_tolerance(bending, span, friction * 0.5 * diameter, torque)
        note = (
            f"one support this far off the line of its neighbors adds {100 * ADDED_DRAG:.0f} % to "
            "the running torque (our choice): 6 E I δ / L³ on it, half on either neighbor"
        )
        yield Line("shaft: each support in line within ±", offset, "m", CLOSED, note)


def alignment_tolerance(
    bending_stiffness: float, span: float, friction_arm: float, torque: float
) -> float:
    """Return how far one support of a shaft may stand off the line of its two neighbors.

    Parameters
    ----------
    bending_stiffness : float
        Young's modulus times second moment of area ``E I`` [N m2].
    span : float
        Distance of the supports ``L`` [m].
    friction_arm : float
        Coefficient of friction of the bearings times their radius [m].
    torque : float
        Running torque [N m].

    Returns
    -------
    float
        Offset ``δ`` [m] whose bearing forces cost `ADDED_DRAG` of the torque.

    Notes
    -----
    Two spans, pinned at their far ends and pushed at the middle: ``F = 48 E I δ / (2 L)³`` there
    and half of it at either end, so that friction takes ``2 F μ r``.

    References
    ----------
    *Shigley's Mechanical Engineering Design*, 9th edition, table A-9, simple supports with center
    load (from memory).
    """
    force_per_offset = 48.0 * bending_stiffness / (2.0 * span) ** 3
    return ADDED_DRAG * torque / (2.0 * force_per_offset * friction_arm)


def _choice_lines(case: Case) -> Iterator[Line]:
    """Distances of supports for shafts that one might choose."""
    steel = SHAFT_MATERIALS["steel"]
    for diameter in DIAMETERS:
        widest = cf.support_distance(diameter, steel.modulus, steel.density, case.rate)
        yield Line(
            f"if a shaft of {1e3 * diameter:g} mm steel is used: supports no further apart than",
            widest,
            "m",
            CLOSED,
            f"whirl at {WHIRL_RESERVE:g} times the running speed",
        )


def _push_lines(case: Case) -> Iterator[Line]:
    """End play, and what a push on the motor's bearing costs."""
    shaft, torque = case.scenario.drive.shaft, _torque(case)
    part = case.scenario.sprocket[case.driven]
    length, material = shaft.length or 0.0, shaft.material or "steel"
    warmth = case.scenario.frame.temperature
    span = warmth.high - warmth.low if warmth is not None else ROOM_SPAN
    grown = EXPANSION[material] * length * span
    note = f"{PRACTICE}; the motor's shaft must not be pushed when the coupling is tightened"
    if length:
        note = f"of it {1e3 * grown:.2f} mm for {span:.0f} K on the whole length; {note}"
    yield Line("end play at the coupling, at least", ASSEMBLY_PLAY + grown, "m", CLOSED, note)
    radius = 0.5 * (shaft.diameter or part.axle_diameter)
    cost = part.bearing_friction * PUSH * radius
    share = f", {100 * cost / torque:.0f} % of the running torque" if torque else ""
    yield Line(
        f"torque that a push of {PUSH:g} N on the motor's bearing costs",
        cost,
        "N m",
        CLOSED,
        f"μ F r, friction {part.bearing_friction:g} at the shaft's radius{share}; an upright shaft "
        "rests on a collar of its own, not on the motor",
    )


def _torque(case: Case) -> float | None:
    """Mean running torque, simulated where it was [N m]."""
    simulated, closed = running_torque(case)
    if simulated is not None and math.isfinite(simulated):
        return simulated
    return closed
