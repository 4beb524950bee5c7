"""The tolerances that matter: how far a part may be off, and what it does when it is."""

from __future__ import annotations

import math
from collections.abc import Iterator

from chainsim import closed_forms as cf
from chainsim.analysis.chain_motion import excursion
from chainsim.errors import CallError
from chainsim.report.build_case import Case
from chainsim.report.build_line import CLOSED, PRACTICE, SIMULATED, UNKNOWN, Line, Part

RUN_OUT_SHARE = 0.1
"""Share of the polygon's own speed variation that run-out may add (dimensionless); our choice."""

PITCH_SHARE = 0.002
"""Difference of a new chain's pitch from the sprockets' (dimensionless) that is taken as usual;
common practice, no source."""

ONE_DEGREE = math.radians(1.0)


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
        *_plane_lines(case),
    ]
    text = "Hold these; other dimensions take what the workshop does without thinking."
    return Part("tolerances", "Tolerances that matter", text, tuple(lines))


def _wheel_lines(case: Case) -> Iterator[Line]:
    for wheel, part in zip(case.lift.wheels, case.scenario.sprocket, strict=True):
        if not wheel.teeth:
            continue
        variation = cf.speed_variation(wheel.teeth)
        off = 0.5 * RUN_OUT_SHARE * variation * wheel.radius
        simulated = f"; simulated with {1e3 * part.eccentricity:.2g} mm"
        yield Line(
            f"{wheel.name}: pitch circle off the axle by at most",
            max(off, part.eccentricity),
            "m",
            CLOSED,
            f"then the speed varies by {100 * RUN_OUT_SHARE:.0f} % of what {wheel.teeth} teeth do "
            f"anyway (our choice){simulated}",
            None,
            max(off, part.eccentricity),
            digits=2,
        )


def _pitch_lines(case: Case) -> Iterator[Line]:
    chain = case.scenario.chain
    yield Line(
        "pitch of the new chain",
        chain.pitch,
        "m",
        PRACTICE,
        f"measured over 24 links; {100 * PITCH_SHARE:g} % off moves the take-up like wear",
        chain.pitch * (1.0 - PITCH_SHARE),
        chain.pitch * (1.0 + PITCH_SHARE),
        digits=5,
    )


def _pocket_lines(case: Case) -> Iterator[Line]:
    balls, carriers = case.scenario.balls, case.scenario.carriers
    if balls is None or carriers is None or case.lift.pocket is None:
        return
    pocket, gravity = carriers.pocket, case.scenario.frame.gravity
    if pocket.outline is None and pocket.lip > 0.0:
        try:
            holds = [
                cf.lip_acceleration(0.5 * balls.diameter, pocket.lip, gravity, floor_tilt=tilt)
                for tilt in (pocket.tilt, pocket.tilt - ONE_DEGREE)
            ]
            lower = cf.lip_acceleration(
                0.5 * balls.diameter, 0.9 * pocket.lip, gravity, floor_tilt=pocket.tilt
            )
        except CallError:
            return
        yield Line(
            "pocket: each degree less of tilt costs the seat",
            holds[0] - holds[1],
            "m s-2",
            CLOSED,
            f"of {holds[0]:.1f} m/s² sideways that it holds standing still; the lift out of plumb "
            "counts alike",
            digits=2,
        )
        yield Line(
            "pocket: a lip lower by a tenth costs the seat",
            holds[0] - lower,
            "m s-2",
            CLOSED,
            digits=2,
        )
    reserve = case.simulated(lambda s: s.extremes["seat_reserve"].value)
    if reserve is not None:
        note = "smallest of the run; all of these come out of it"
        yield Line("pocket: sideways acceleration to spare", reserve, "m s-2", SIMULATED, note)


def _room_lines(case: Case) -> Iterator[Line]:
    clearance = case.scenario.limits.clearance
    for name, free in (("inward", clearance.inward), ("outward", clearance.outward)):
        used = case.simulated(lambda s, name=name: _most(s, name))
        if free is None and used is None:
            continue
        yield Line(
            f"room beside the strands, {name}",
            used,
            "m",
            SIMULATED if used is not None else UNKNOWN,
            "what the line of the pins used; carriers come on top",
            None,
            free,
        )


def _most(s, name: str) -> float:
    """Largest excursion of all strands to one side in steady running [m]."""
    peaks = []
    for k in range(len(s.strands)):
        values = getattr(excursion(s, k), name)[s.is_steady]
        peaks.append(float(values[values == values].max()))
    return max(peaks)


def _plane_lines(case: Case) -> Iterator[Line]:
    pitch = case.scenario.chain.pitch
    note = (
        f"the model is planar and does not see it; {PRACTICE}: less than the side play of the chain "
        "on the teeth, found by moving it by hand"
    )
    yield Line("sprockets in one plane, straightedge across both", None, "m", UNKNOWN, note)
    yield Line(
        "axles parallel",
        0.25 * pitch,
        "m/m",
        PRACTICE,
        "a quarter of a pitch on a meter; out of the plane nothing is simulated",
    )._replace(value=2.0e-3)
