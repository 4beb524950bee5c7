"""Sprockets and axles on the build sheet, one column for each, and their outlines at true size."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from chainsim import closed_forms as cf
from chainsim.analysis.axles import axle_loads
from chainsim.errors import CallError
from chainsim.report.build_case import Case
from chainsim.report.build_line import (
    DRAWN,
    SIMULATED,
    STATED,
    UNKNOWN,
    Line,
    Part,
    place_text,
    ran_or_reckoned,
)
from chainsim.report.layout_notes import mount_text
from chainsim.report.outline import outline_svg


def sprockets_part(case: Case) -> Part:
    """Write the sprocket table and draw what is to be cut.

    Parameters
    ----------
    case : Case
        The lift.
    """
    columns = [list(_sprocket_lines(case, k)) for k in range(len(case.lift.wheels))]
    return Part(
        "sprockets",
        "Sprockets",
        "The outline drawn here is the one that was calculated with, at 1:1: print without scaling "
        "and measure the square; circles are pins in their seats, dashes the polygon through them. "
        "Kerf is not allowed for. Axle and bore are one diameter: choose the fit, a press or key "
        "on the driven axle, a running fit or a bearing on an idle one.",
        tuple(line for column in columns for line in column),
        tuple(_outlines(case)),
    )


def _sprocket_lines(case: Case, k: int) -> Iterator[Line]:
    part, wheel, tooth = case.scenario.sprocket[k], case.lift.wheels[k], case.lift.teeth[k]
    name, pins = wheel.name, case.scenario.chain.roller_diameter

    def line(item: str, value: float | str | None, unit: str = "", source: str = DRAWN) -> Line:
        return Line(item, value, unit, source, subject=name, digits=5)

    role = "driven" if k == case.driven else "idles"
    yield line("what it does", f"{role}, {part.side} the loop")
    yield line("teeth", wheel.teeth or "none, smooth roller", "1" if wheel.teeth else "")
    yield line("pitch it is cut for", part.pitch or case.scenario.chain.pitch, "m")
    yield line("pitch circle, through the pins", 2.0 * wheel.radius, "m")
    yield line("over the tips", 2.0 * tooth.outer_radius if tooth else None, "m")
    yield line("at the seats, across the root", 2.0 * wheel.radius - pins, "m")
    yield line(
        "radius of a seat", tooth.roller_radius + tooth.seat_clearance if tooth else None, "m"
    )
    yield line("pressure angle", tooth.pressure_angle if tooth else None, "rad")
    yield line("radius of a tooth tip", tooth.corner_radius if tooth else None, "m")
    yield line("bore and axle", part.axle_diameter, "m")
    yield line("thickness", "inner width of the chain, less its side play", "", UNKNOWN)
    yield line("friction of chain on tooth, calculated with", part.tooth.friction, "1", STATED)
    yield line("friction of its bearing, calculated with", part.bearing_friction, "1", STATED)
    links = case.lift.n_links
    turns = int(np.lcm(links, wheel.teeth)) // links if wheel.teeth else None
    yield line("a marked link meets a marked tooth again after turns of the chain", turns, "1")


def _outlines(case: Case) -> Iterator[tuple[str, str]]:
    """One drawing for each form; sprockets cut alike share it."""
    drawn: dict[str, list[str]] = {}
    for wheel in case.lift.wheels:
        if not wheel.teeth:
            continue
        try:
            svg = outline_svg(case.scenario, wheel.name)
        except CallError:
            continue
        drawn.setdefault(_without_name(svg, wheel.name), []).append(wheel.name)
    for names in drawn.values():
        yield f"To cut: {' and '.join(names)}", outline_svg(case.scenario, names[0])


def _without_name(svg: str, name: str) -> str:
    return svg.replace(f"{name}: ", "")


def axles_part(case: Case) -> Part:
    """Write where the axles stand: on the drawing, new, at rest, running.

    Parameters
    ----------
    case : Case
        The lift.
    """
    view = "behind" if case.is_from_back else "the front"
    columns = [list(_axle_lines(case, k)) for k in range(len(case.lift.wheels))]
    return Part(
        "axles",
        "Axles",
        f"Places are right and up from the drawing's origin, seen from {view}. Where a movable "
        "axle comes to stand is the chain's doing: check it, do not set it.",
        (*(line for column in columns for line in column), *_distance_lines(case)),
    )


def _axle_lines(case: Case, k: int) -> Iterator[Line]:
    part, wheel = case.scenario.sprocket[k], case.lift.wheels[k]

    def line(item: str, value: str | None, source: str = DRAWN, unit: str = "") -> Line:
        return Line(item, value, unit, source, subject=wheel.name)

    yield line("held by", held_text(part.mount))
    yield line("place on the drawing", _place(case, part.center))
    yield line("place with the new chain laid taut", _place(case, case.lift.laid.wheel_center[k]))
    rest = case.simulated(lambda s: s.center[0, k])
    item = "place at rest, chain stretched by what hangs on it"
    if rest is None:
        yield line(item, None, UNKNOWN)
    else:
        yield line(item, _place(case, rest), SIMULATED)
    hub = float(np.hypot(*case.sized.running.hub[k])) if case.sized else None
    loads = case.simulated(axle_loads) or [None] * (k + 1)
    mean = loads[k].mean if loads[k] else None
    yield ran_or_reckoned(line("load of the chain on it, running", None, unit="N"), mean, hub)
    peak = case.extreme(f"axle_load.{wheel.name}")
    if peak is None and loads[k]:
        peak = loads[k].peak
    yield ran_or_reckoned(line("peak of that load", None, unit="N"), peak)


def held_text(mount) -> str:
    """Say what holds an axle.

    Parameters
    ----------
    mount : Mount
        The mount's table of the scenario.
    """
    return "a fixed place in the frame" if mount.kind == "fixed" else mount_text(mount)


def _distance_lines(case: Case) -> Iterator[Line]:
    """Distances of neighboring axles."""
    centers, names = case.lift.laid.wheel_center, case.lift.wheel_names
    count = len(names)
    for i in range(count - 1 if count == 2 else count):
        j = (i + 1) % count
        if i == j:
            continue
        yield Line(
            f"axle to axle, {names[i]} to {names[j]}, new chain taut",
            float(np.hypot(*(centers[j] - centers[i]))),
            "m",
            DRAWN,
            digits=5,
        )


def ride_height(case: Case, k: int, growth: float) -> float | None:
    """Return how far a grown chain rides above its seats.

    Parameters
    ----------
    case : Case
        The lift.
    k : int
        Index of the sprocket (dimensionless).
    growth : float
        Growth of the pitch as a fraction (dimensionless).

    Returns
    -------
    float or None
        Rise of the pins [m]; None for a smooth roller.
    """
    wheel, part = case.lift.wheels[k], case.scenario.sprocket[k]
    if not wheel.teeth:
        return None
    return cf.ride_height(part.pitch or case.scenario.chain.pitch, wheel.teeth, growth)


def _place(case: Case, center) -> str:
    return place_text(case.across(float(center[0])), float(center[1]))
