"""Finding about resonance: no judged mode sits on the tooth rate."""

from __future__ import annotations

import math

from chainsim.analysis.resonance import Nearness, nearness, string_frequency_of_run
from chainsim.analysis.survey import Survey
from chainsim.findings.finding import (
    DOES_NOT_APPLY,
    NOT_ENOUGH_DATA,
    Finding,
    Measure,
    judged,
    unjudged,
)

LISTED_MODES = 6
"""Modes that are listed beside the judged ones [dimensionless]."""


def off_resonance(s: Survey) -> Finding:
    """Whether the take-up's modes and each strand's first keep away from the tooth rate.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: smallest distance ``|f − excitation|/excitation`` [dimensionless], with the
        excitation at the tooth rate, for strands also at half of it; limit: the guard band.
        Of a strand the nearer of its frequencies at rest and running counts.
    """
    near = nearness(s)
    if not near:
        known = "no natural frequencies are known" if s.steady else "nothing ran steadily"
        return unjudged(NOT_ENOUGH_DATA, known)
    measures = [_near_measure(s, item) for item in near if item.mode.is_judged]
    listed = [item for item in near if not item.mode.is_judged][:LISTED_MODES]
    notes = [f"tooth rate {s.tooth_rate:.3g} Hz"]
    if near and listed:
        others = ", ".join(_told_mode(item) for item in listed)
        notes.append(f"not judged, nearest first: {others}")
    notes += _string_notes(s)
    if not measures:
        return unjudged(DOES_NOT_APPLY, "; ".join(["no take-up and no strand mode", *notes]))
    return judged(measures, s.scenario.limits.reserve, "; ".join(notes))


def _near_measure(s: Survey, item: Nearness) -> Measure:
    """Distance of one judged mode from one excitation."""
    return Measure(
        what=f"{_told_mode(item)} against {'half the' if item.is_half else 'the'} tooth rate",
        value=item.distance,
        unit="1",
        limit=s.scenario.limits.guard_band,
        is_floor=True,
        place=item.mode.kind,
    )


def _told_mode(item: Nearness) -> str:
    """A mode with its frequencies in words."""
    mode = item.mode
    running = "" if mode.running == mode.frequency else f" ({mode.running:.3g} Hz running)"
    return f"{mode.kind} {mode.frequency:.3g} Hz{running}"


def _string_notes(s: Survey) -> list[str]:
    """First frequency of each carrying strand as a loaded string, beside the eigenvalues."""
    notes = []
    for k in s.carrying:
        frequency = string_frequency_of_run(s, k)
        if math.isfinite(frequency):
            name = s.strands[k].name
            notes.append(f"strand {name} with its balls, as a string: {frequency:.3g} Hz")
    return notes
