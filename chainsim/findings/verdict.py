"""One sentence that says what a run showed, and what it did not."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from chainsim.findings.finding import CLOSE, FAILS, HOLDS, NOT_JUDGED

NAMED = 3
"""Most findings that are named in the sentence [dimensionless]."""


def verdict(findings: Sequence[Any], situations: Any) -> str:
    """Verdict of a run in one sentence.

    Parameters
    ----------
    findings : sequence of Finding
        All findings, judged or not.
    situations : Situations
        What was run and what was not.

    Returns
    -------
    str
        Names what fails, then what is close, and always what was not run: steady running only
        never reads as safe.
    """
    by_outcome = {
        outcome: [finding for finding in findings if finding.outcome == outcome]
        for outcome in (FAILS, CLOSE, HOLDS, NOT_JUDGED)
    }
    n_judged = len(findings) - len(by_outcome[NOT_JUDGED])
    return f"{_result(by_outcome, n_judged)}; {_scope(situations)}."


def _result(by_outcome: dict[str, list[Any]], n_judged: int) -> str:
    """What the findings say together."""
    fails, close = by_outcome[FAILS], by_outcome[CLOSE]
    if n_judged == 0:
        return "Nothing could be judged"
    if fails:
        more = f" and {len(close)} more {_are(len(close))} close" if close else ""
        share = f"{len(fails)} of {n_judged} judged findings {_fail(len(fails))}"
        return f"{share} ({_names(fails)}){more}"
    if close:
        share = f"{len(close)} of {n_judged} {_are(len(close))} close"
        return f"No finding fails, but {share} ({_names(close)})"
    return f"All {n_judged} judged findings hold with their reserve"


def _scope(situations: Any) -> str:
    """What was run, and what was not."""
    run, not_run = list(situations[0]), list(situations[1])
    said = f"shown for {', '.join(run)} only" if run else "no situation was run through"
    return f"{said}, not run: {', '.join(not_run)}" if not_run else said.removesuffix(" only")


def _names(findings: list[Any]) -> str:
    """Titles of the first few findings, with what happened."""
    named = "; ".join(
        f"{finding.title}: {_first(finding.note)}" if finding.outcome == FAILS and finding.note
        else finding.title
        for finding in findings[:NAMED]
    )  # fmt: skip
    left = len(findings) - NAMED
    return f"{named}; {left} more" if left > 0 else named


def _first(note: str) -> str:
    """First remark of a note."""
    return note.split(";")[0]


def _are(count: int) -> str:
    """Verb of so many findings."""
    return "is" if count == 1 else "are"


def _fail(count: int) -> str:
    """Verb of so many failing findings."""
    return "fails" if count == 1 else "fail"
