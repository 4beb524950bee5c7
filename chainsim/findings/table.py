"""The findings in their order and groups, one row each."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any, NamedTuple

from chainsim.analysis.survey import Survey, survey
from chainsim.findings.balls import balls_stay_seated, rate_met, ride_smooth
from chainsim.findings.chain import (
    carrying_strand_taut,
    chain_stays_on,
    links_hold,
    no_tooth_skipped,
)
from chainsim.findings.drive import drive_copes, shaft_below_whirl
from chainsim.findings.finding import NOT_ENOUGH_DATA, Finding, unjudged
from chainsim.findings.resonance import off_resonance
from chainsim.findings.space import parts_keep_clear, strand_in_clearance, takeup_in_travel
from chainsim.findings.validity import within_range

MOTION = ("pins/position", "pins/velocity")
TENSION = ("pins/position", "links/tension")
TRAVEL = ("mounts/travel", "mounts/angle", "pins/position")
DRIVE = ("drive/torque", "sprockets/angle", "sprockets/rate")
RATE = ("sprockets/rate",)

GROUPS = ("balls", "chain", "space", "drive")


class Row(NamedTuple):
    """One finding of the table.

    Attributes
    ----------
    group, title : str
        Group on paper and heading.
    judge : callable
        Judges a survey; its name is the finding's name.
    needs : tuple of str
        Channels without which it is not judged.
    """

    group: str
    title: str
    judge: Callable[[Survey], Finding]
    needs: tuple[str, ...] = ()


ROWS = (
    Row("balls", "balls stay seated", balls_stay_seated),
    Row("balls", "rate is met", rate_met, RATE),
    Row("balls", "ride is smooth", ride_smooth, MOTION),
    Row("chain", "no tooth is skipped", no_tooth_skipped),
    Row("chain", "chain stays on its sprockets", chain_stays_on),
    Row("chain", "carrying strand stays taut", carrying_strand_taut, TENSION),
    Row("chain", "links hold", links_hold, TENSION),
    Row("space", "strand stays inside its clearance", strand_in_clearance, MOTION),
    Row("space", "parts keep clear", parts_keep_clear, MOTION),
    Row("space", "take-up stays in travel", takeup_in_travel, TRAVEL),
    Row("drive", "drive copes", drive_copes, DRIVE),
    Row("drive", "no resonance sits on the tooth rate", off_resonance, TENSION),
    Row("drive", "shaft stays below whirl", shaft_below_whirl, RATE),
)
"""All findings, the balls first."""


def judge(rec: Any) -> list[Finding]:
    """Judge a run.

    Parameters
    ----------
    rec : Recording or Survey
        The recording; a cut-off one is judged by what it holds.

    Returns
    -------
    list of Finding
        All of them, in the order of `ROWS`; one that could not be judged says why.
    """
    s = survey(rec)
    return [_judged(row, s) for row in ROWS]


def _judged(row: Row, s: Survey) -> Finding:
    """One finding with its name, group and title."""
    missing = [name for name in row.needs if name not in s.rec]
    if len(s.time) < 2:
        found = unjudged(NOT_ENOUGH_DATA, "nothing was recorded")
    elif missing:
        found = unjudged(NOT_ENOUGH_DATA, f"the recording keeps no {' and no '.join(missing)}")
    else:
        found = row.judge(s)
    named = replace(found, name=row.judge.__name__, group=row.group, title=row.title)
    return within_range(named, s)
