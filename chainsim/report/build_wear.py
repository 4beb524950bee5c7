"""Wear on the build sheet: what growth of the chain does to its ride on the teeth and travel."""

from __future__ import annotations

from chainsim import closed_forms as cf
from chainsim.report.build_case import Case
from chainsim.report.build_line import CLOSED, DRAWN, SIMULATED, UNKNOWN, Line, Part
from chainsim.report.build_takeup import movable_axles, travel_per_chain
from chainsim.report.build_wheels import ride_height

GROWTHS = (0.005, 0.010, 0.015, 0.020, 0.030)
"""Growth of the pitch that the table goes through (dimensionless)."""


def wear_part(case: Case) -> Part:
    """Write what wear does, and when the chain is replaced.

    Parameters
    ----------
    case : Case
        The lift.
    """
    lines = [line for growth in GROWTHS for line in _step_lines(case, growth)]
    return Part(
        "wear",
        "Wear of the chain",
        "By growth of the pitch, all links alike, not by hours: how fast a chain grows is known "
        "only from measuring it. Growth is by how much a length of links is longer than when new, "
        "as a share of that.",
        (*_limit_lines(case), *lines),
    )


def _limit_lines(case: Case) -> list[Line]:
    links = min(24, case.lift.n_links)
    new = links * case.scenario.chain.pitch
    largest = max((wheel.teeth for wheel in case.lift.wheels), default=0) or 1
    limit = cf.wear_limit(largest, fixed_centers=not movable_axles(case))
    stated = case.scenario.limits.wear
    if stated is not None:
        limit = min(limit, stated)
    lines = [
        Line(f"{links} links measured taut: new", new, "m", DRAWN, digits=5),
        Line(
            f"{links} links measured taut: replace the chain at",
            new * (1.0 + limit),
            "m",
            CLOSED,
            f"{100 * limit:.2g} % growth: what service guides of steel roller chain say, or the "
            "scenario's allowance where it is less; the chain maker's word comes first",
            digits=5,
        ),
    ]
    for wheel, tooth in zip(case.lift.wheels, case.lift.teeth, strict=True):
        if tooth is not None:
            tip = tooth.outer_radius / tooth.pitch_radius - 1.0
            note = "all pins on the wheel sharing the load; the chain skips long before"
            item = f"growth at which pins reach the tips of {wheel.name}"
            lines.append(Line(item, tip, "share", CLOSED, note))
    return [*lines, _failure_line(case)]


def _failure_line(case: Case) -> Line:
    """Growth at which a finding first fails, where it was simulated."""
    item, study = "growth at which a finding first fails", case.wear
    if study is None:
        return Line(item, None, "share", UNKNOWN, "chainsim limit FILE wear simulates it")
    failure = study.first_failure
    if failure is None:
        return Line(item, "none that was run", source=SIMULATED, note=study.sentence)
    return Line(item, failure.growth, "share", SIMULATED, study.sentence)


def _step_lines(case: Case, growth: float) -> list[Line]:
    """Travel and ride at one growth, a column of the table."""
    column = f"{100 * growth:g} %"
    lines = []
    chain = case.scenario.chain
    slack = cf.slack_of_growth(case.lift.n_links, chain.pitch, growth)
    lines.append(Line("longer by", slack, "m", CLOSED, subject=column))
    for k in movable_axles(case):
        name = case.lift.wheels[k].name
        travel = slack * travel_per_chain(case, k)
        lines.append(Line(f"{name} moves by", travel, "m", CLOSED, subject=column))
    for k, wheel in enumerate(case.lift.wheels):
        height = ride_height(case, k, growth)
        if height is not None:
            item = f"rides above the seats of {wheel.name}"
            lines.append(Line(item, height, "m", CLOSED, subject=column))
    return lines
