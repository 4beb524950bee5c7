"""Where the model has not been checked against anything: findings made there are not judged.

A finding that fails stays failed: to call it "not judged" would hide a fault.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from types import MappingProxyType

import numpy as np

from chainsim.analysis.resonance import modes, strand_length
from chainsim.analysis.survey import Survey
from chainsim.findings.finding import (
    FAILS,
    NOT_JUDGED,
    OUTSIDE_RANGE,
    Finding,
    add_note,
)

MOST_STRAIN = 0.1
"""Strain of a link up to which its linear law is believed [dimensionless]."""

MOST_DEPTH = 0.3
"""Depth of a contact up to which its linear law is believed [roller radii]."""

MOST_WAVE_SHARE = 0.8
"""Chain speed up to which a strand's modes are believed [its wave speeds]."""


def _too_stretched(s: Survey) -> str:
    """Whether a link was strained beyond what its law covers."""
    strain = max(-s.tension_range[0], s.tension_range[1]) / (
        s.scenario.chain.link_stiffness * s.pitch
    )
    if strain <= MOST_STRAIN:
        return ""
    return f"a link was strained by {100 * strain:.0f} %, its law is linear"


def _too_deep(s: Survey) -> str:
    """Whether a contact went deeper than its law covers."""
    depth, radius = s.channel("contacts/penetration"), 0.5 * s.scenario.chain.roller_diameter
    if depth is None or not len(depth) or float(np.nanmax(depth)) <= MOST_DEPTH * radius:
        return ""
    return f"a contact was pressed in by {1e3 * float(np.nanmax(depth)):.2f} mm"


def _too_fast(s: Survey) -> str:
    """Whether the chain ran near the wave speed of a strand."""
    for mode in modes(s):
        if mode.is_judged and mode.kind.startswith("strand"):
            length = strand_length(s, mode.kind.split()[1])
            wave = 2.0 * length * mode.frequency
            if s.steady_speed > MOST_WAVE_SHARE * wave:
                return f"the chain runs at {s.steady_speed / wave:.0%} of a strand's wave speed"
    return ""


RANGES: MappingProxyType[str, tuple[Callable[[Survey], str], ...]] = MappingProxyType(
    {
        "no_tooth_skipped": (_too_deep,),
        "chain_stays_on": (_too_deep,),
        "carrying_strand_taut": (_too_stretched,),
        "links_hold": (_too_stretched,),
        "strand_in_clearance": (_too_stretched, _too_fast),
        "off_resonance": (_too_fast,),
    }
)
"""Checks by finding; each gives a reason, or an empty text where all is well."""


def within_range(finding: Finding, s: Survey) -> Finding:
    """The finding itself, or one that is not judged where the run left the validated range.

    Parameters
    ----------
    finding : Finding
        As judged by its margins.
    s : Survey
        The recording.

    Returns
    -------
    Finding
        With the reason in its note.
    """
    if finding.outcome == NOT_JUDGED:
        return finding
    reasons = [reason for check in RANGES.get(finding.name, ()) if (reason := check(s))]
    if not reasons:
        return finding
    noted = add_note(finding, "outside validated range: " + "; ".join(reasons))
    if finding.outcome == FAILS:
        return noted
    return replace(noted, outcome=NOT_JUDGED, why=OUTSIDE_RANGE)
