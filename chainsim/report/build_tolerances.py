"""The tolerances that matter: how far a part may be off, and what it does when it is."""

from __future__ import annotations

import math
from collections.abc import Iterator
from functools import partial

import numpy as np

from chainsim import closed_forms as cf
from chainsim.analysis.chain_motion import excursion
from chainsim.analysis.survey import Survey
from chainsim.errors import CallError
from chainsim.report.build_case import Case
from chainsim.report.build_line import (
    CLOSED,
    PRACTICE,
    SIMULATED,
    STATED,
    UNKNOWN,
    Line,
    Part,
    ran_or_reckoned,
)
from chainsim.report.text import readable

RUN_OUT_SHARE = 0.1
"""Share of the polygon's own speed variation that run-out may add (dimensionless); our choice."""

PITCH_SHARE = 0.002
"""Difference of a new chain's pitch from the sprockets' (dimensionless) that is taken as usual;
common practice, no source."""

ONE_DEGREE = math.radians(1.0)
LIP_STEP = 0.5e-3
"""Height of lip that a cost is told for [m]."""

RULER = 0.02e-3
"""Least run-out that is asked for [m]: less is not measured in a workshop."""

LINKS_MEASURED = 24
"""Links over which a pitch is measured (dimensionless)."""

OUT_OF_PLANE = 0.5e-3
"""Offset of one sprocket's face from the other's to accept [m]; common practice, no source."""

PARALLEL = 2e-3
"""Axles out of parallel to accept (dimensionless); common practice, no source."""


def tolerances_part(case: Case) -> Part:
    """Write the tolerances that matter.

    Parameters
    ----------
    case : Case
        The lift.
    """
    lines = [
        *_wheel_lines(case),
        *_pitch_lines(case),
        *_pocket_lines(case),
        *_room_lines(case),
        *_gap_lines(case),
        *_plane_lines(),
    ]
    text = "Hold these; other dimensions take what the workshop does without thinking."
    return Part("tolerances", "Tolerances that matter", text, tuple(lines))


def _wheel_lines(case: Case) -> Iterator[Line]:
    for wheel, part in zip(case.lift.wheels, case.scenario.sprocket, strict=True):
        if not wheel.teeth:
            continue
        off = max(0.5 * RUN_OUT_SHARE * cf.speed_variation(wheel.teeth) * wheel.radius, RULER)
        yield Line(
            f"{wheel.name}: pitch circle off the axle",
            part.eccentricity,
            "m",
            STATED,
            f"at the band's end the speed varies by {100 * RUN_OUT_SHARE:.0f} % of what "
            f"{wheel.teeth} teeth make it vary anyway (our choice)",
            None,
            max(off, part.eccentricity),
            digits=2,
        )


def _pitch_lines(case: Case) -> Iterator[Line]:
    new = LINKS_MEASURED * case.scenario.chain.pitch
    yield Line(
        f"length of {LINKS_MEASURED} links of the new chain",
        new,
        "m",
        PRACTICE,
        f"{100 * PITCH_SHARE:g} % off moves the take-up like wear",
        new * (1.0 - PITCH_SHARE),
        new * (1.0 + PITCH_SHARE),
        digits=5,
    )


def _pocket_lines(case: Case) -> Iterator[Line]:
    balls, carriers = case.scenario.balls, case.scenario.carriers
    if balls is None or carriers is None or case.lift.pocket is None:
        return
    pocket, radius = carriers.pocket, 0.5 * balls.diameter
    if pocket.outline is None and pocket.lip > 0.0:
        holds, flatter, lower = (
            _held(radius, lip, tilt, case.scenario.frame.gravity)
            for lip, tilt in (
                (pocket.lip, pocket.tilt),
                (pocket.lip, pocket.tilt - ONE_DEGREE),
                (pocket.lip - LIP_STEP, pocket.tilt),
            )
        )
        note = "standing still, pushed slowly against its lip; what follows comes off this"
        yield Line("pocket: holds a ball against, sideways", holds, "m s-2", CLOSED, note)
        note = "the whole lift out of plumb counts alike"
        yield Line("pocket: each degree of tilt less costs", holds - flatter, "m s-2", CLOSED, note)
        item = f"pocket: each {1e3 * LIP_STEP:g} mm of lip less costs"
        yield Line(item, holds - lower, "m s-2", CLOSED)
    line = Line("pocket: smallest reserve while running", None, "m s-2")
    yield ran_or_reckoned(line, _smallest_reserve(case))


def _smallest_reserve(case: Case) -> float | None:
    """Smallest seat reserve of the run [m/s2]: the extreme, or what the finding is about."""
    kept = case.extreme("seat_reserve")
    if kept is not None:
        return kept
    found = (f for f in case.findings if f.name == "balls_stay_seated" and f.unit == "m s-2")
    return next((f.value for f in found), None)


def _held(radius: float, lip: float, tilt: float, gravity: float) -> float:
    """Sideways acceleration that a seat holds [m/s2]; NaN where its lip holds nothing or all."""
    try:
        held = cf.lip_acceleration(radius, lip, gravity, floor_tilt=tilt)
    except CallError:
        return math.nan
    return held if math.isfinite(held) else math.nan


def _room_lines(case: Case) -> Iterator[Line]:
    clearance = case.scenario.limits.clearance
    for k, strand in enumerate(case.lift.strands):
        for side, limit in (("inward", clearance.inward), ("outward", clearance.outward)):
            free = limit if strand.carrying else None
            used = case.simulated(partial(_excursion, strand=k, side=side))
            if free is None and used is None:
                continue
            note = "what the line of the pins used; carriers and balls come on top"
            line = Line(f"room beside strand {strand.name}, {side}", None, "m", "", note)
            yield ran_or_reckoned(line, used)._replace(high=free)


def _excursion(s: Survey, strand: int, side: str) -> float | None:
    """Largest excursion of a strand to one side in steady running [m]."""
    values = getattr(excursion(s, strand), side)[s.is_steady]
    known = values[np.isfinite(values)]
    return float(known.max()) if known.size else None


def _gap_lines(case: Case) -> Iterator[Line]:
    """Smallest gap of the run, and where."""
    found = next((f for f in case.findings if f.name == "parts_keep_clear"), None)
    if found is None or found.value is None or found.unit != "m":
        return
    least = case.scenario.limits.gap
    note = readable(found.note.split(";")[0])
    yield Line(
        "smallest gap of parts that pass each other", found.value, "m", SIMULATED, note, least
    )


def _plane_lines() -> Iterator[Line]:
    note = f"of the face of one from a straightedge on the other; {UNKNOWN}: the model is planar"
    yield Line("sprockets in one plane", 0.0, "m", PRACTICE, note, None, OUT_OF_PLANE, digits=2)
    note = f"out of the plane; {UNKNOWN}: the model is planar"
    yield Line("axles parallel", 0.0, "m/m", PRACTICE, note, None, PARALLEL, digits=2)
