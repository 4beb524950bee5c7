"""What a build sheet must not be used for: its stamps, and why."""

from __future__ import annotations

from typing import Any, NamedTuple

from chainsim.findings.finding import DOES_NOT_APPLY, FAILS, NOT_JUDGED
from chainsim.report.build_case import Case
from chainsim.report.text import quantity, unit_of

NOT_FOR_BUILDING = "NOT FOR BUILDING"
NOT_SIMULATED = "NOT SIMULATED"

STAMPED_GROUPS = ("balls", "chain")
"""Groups of findings that stamp a sheet when one of them fails or was not judged."""


class Stamp(NamedTuple):
    """A stamp on the sheet.

    Attributes
    ----------
    word : str
        What is stamped.
    reason : str
        Why, as a sentence.
    """

    word: str
    reason: str


def stamps(case: Case) -> list[Stamp]:
    """Return the stamps of a sheet.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    list of Stamp
        The worst first; none only where all situations were simulated and held.
    """
    found = [Stamp(NOT_FOR_BUILDING, reason) for reason in reasons_not_to_build(case)]
    if case.run is None:
        return [
            *found,
            Stamp(NOT_SIMULATED, "Nothing was simulated: all figures are closed forms."),
        ]
    if case.situations_not_run:
        listed = ", ".join(case.situations_not_run)
        found.append(Stamp(NOT_SIMULATED, f"These situations were not simulated: {listed}."))
    return found


def reasons_not_to_build(case: Case) -> list[str]:
    """Return why nothing should be built from a sheet.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    list of str
        Sentences; empty where nothing speaks against it.
    """
    if case.run is None:
        return ["No finding about balls or chain was judged: nothing was simulated."]
    has_balls = case.scenario.balls is not None
    reasons = [
        f"{finding.title[0].upper()}{finding.title[1:]}: {_state(finding)}."
        for finding in case.findings
        if finding.group in STAMPED_GROUPS and _speaks_against(finding, has_balls)
    ]
    judged = {finding.name for finding in case.findings}
    if not judged:
        reasons.append("The recording holds no findings.")
    if not case.run.rec.complete:
        reasons.append(f"The run is not complete: {case.run.rec.stop_reason}.")
    return reasons


def _speaks_against(finding: Any, has_balls: bool) -> bool:
    """Tell whether a finding about balls or chain forbids building.

    One that does not apply because no limit was set does not; one about the seat of balls that are
    there does, since held balls cannot fall out and prove nothing.
    """
    if finding.outcome == FAILS:
        return True
    if finding.outcome != NOT_JUDGED:
        return False
    return finding.why != DOES_NOT_APPLY or (finding.name == "balls_stay_seated" and has_balls)


def _state(finding: Any) -> str:
    if finding.outcome == FAILS:
        unit = unit_of(finding.name, finding.unit)
        value = quantity(finding.value, unit) if finding.value is not None else "no value"
        return f"fails ({value}, limit {quantity(finding.limit, unit)})"
    return f"not judged, {finding.why}" + (f" ({finding.note})" if finding.note else "")
