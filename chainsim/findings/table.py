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
from chainsim.findings.drive import drive_copes, off_resonance, shaft_below_whirl
from chainsim.findings.finding import NOT_ENOUGH_DATA, Finding, unjudged
from chainsim.findings.space import parts_keep_clear, strand_in_clearance, takeup_in_travel
from chainsim.findings.validity import within_range

GROUPS = ("balls", "chain", "space", "drive")


class Row(NamedTuple):
    """One finding of the table.

    Attributes
    ----------
    group, title : str
        Group on paper and heading.
    judge : callable
        Judges a survey; its name is the finding's name.
    """

    group: str
    title: str
    judge: Callable[[Survey], Finding]


ROWS = (
    Row("balls", "balls stay seated", balls_stay_seated),
    Row("balls", "rate is met", rate_met),
    Row("balls", "ride is smooth", ride_smooth),
    Row("chain", "no tooth is skipped", no_tooth_skipped),
    Row("chain", "chain stays on its sprockets", chain_stays_on),
    Row("chain", "carrying strand stays taut", carrying_strand_taut),
    Row("chain", "links hold", links_hold),
    Row("space", "strand stays inside its clearance", strand_in_clearance),
    Row("space", "parts keep clear", parts_keep_clear),
    Row("space", "take-up stays in travel", takeup_in_travel),
    Row("drive", "drive copes", drive_copes),
    Row("drive", "no resonance sits on the tooth rate", off_resonance),
    Row("drive", "shaft stays below whirl", shaft_below_whirl),
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
    if len(s.time) < 2:
        found = unjudged(NOT_ENOUGH_DATA, "nothing was recorded")
    else:
        found = row.judge(s)
    named = replace(found, name=row.judge.__name__, group=row.group, title=row.title)
    return within_range(named, s)
