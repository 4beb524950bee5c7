"""Direction of running on the build sheet, and what a reversed or missing supply does."""

from __future__ import annotations

from collections.abc import Iterator

from chainsim.analysis.stops import run_back
from chainsim.report.build_case import Case
from chainsim.report.build_line import SIMULATED, STATED, UNKNOWN, Line, Part, ran_or_reckoned
from chainsim.scenario.schema_drive import Drive


def direction_part(case: Case) -> Part:
    """Write the direction of running and what a reversed or missing supply does.

    Parameters
    ----------
    case : Case
        The lift.
    """
    rising = [strand.name for strand in case.lift.strands if strand.carrying]
    lines = [
        Line(
            f"{case.lift.wheels[case.driven].name}, driven, turns",
            turning(case),
            note="mark it with an arrow on the lift; check it with the chain off",
        ),
        Line("strand that rises with the balls", ", ".join(rising) or "none"),
        Line("the chain meets the sprockets in this order", " → ".join(case.lift.wheel_names)),
        *_supply_lines(case),
    ]
    text = "An arrow on the lift and one on the motor save the first start from being the test."
    return Part("direction", "Direction of running, and a reversed supply", text, tuple(lines))


def turning(case: Case) -> str:
    """Say which way the driven sprocket turns, from which side.

    Parameters
    ----------
    case : Case
        The lift.
    """
    is_inside = case.scenario.sprocket[case.driven].side == "inside"
    word = "counterclockwise" if is_inside != case.is_from_back else "clockwise"
    return f"{word}, seen from {'behind' if case.is_from_back else 'the front'}"


def reversed_text(drive: Drive) -> str:
    """Say what a drive does when its supply is reversed.

    Parameters
    ----------
    drive : Drive
        The drive's table of the scenario.

    Returns
    -------
    str
        One sentence, from how it is built, not from a run.
    """
    if drive.polarity == "rectified":
        return "a rectifier keeps it turning forward"
    if drive.backstop:
        return "the backstop holds the sprocket: it stands, and the motor is stalled"
    if drive.overrunning:
        return "the clutch lets go: the motor turns, the sprocket is not driven"
    return "it RUNS BACKWARD, and carries balls down: make the plug so that it cannot be turned"


def _supply_lines(case: Case) -> Iterator[Line]:
    drive = case.scenario.drive
    has_reversed = "supply reversed" in case.situations_run
    yield Line(
        "with the supply reversed",
        reversed_text(drive),
        source=SIMULATED if has_reversed else UNKNOWN,
        note="" if has_reversed else "from how it is built; try it without balls first",
    )
    yield run_back_line(case)


def run_back_line(case: Case) -> Line:
    """Return the line about running back after a cut of the supply.

    Parameters
    ----------
    case : Case
        The lift.
    """
    has_cut = "supply cut" in case.situations_run
    back = case.simulated(run_back) if has_cut else None
    note = _cut_text(case.scenario.drive)
    line = Line("runs back after a cut of the supply, loaded", None, "m", STATED, note)
    return ran_or_reckoned(line, back.distance if back else None)


def _cut_text(drive: Drive) -> str:
    if drive.backstop:
        return "a backstop holds it"
    if drive.motor is not None and not drive.motor.back_drivable:
        return "the gearing holds it"
    if drive.motor is None:
        return "a set speed says nothing of it: take a gear that locks, or fit a backstop"
    return "the load can turn this motor back: fit a backstop"
