"""The answer to a search for a limit: values that were tried, and the brackets between them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from chainsim.study.limit_question import Question
from chainsim.study.rows import Row, outcome

HOLDS, CLOSE, FAILS = "holds", "close", "fails"


@dataclass(frozen=True)
class Probe:
    """One value that was tried.

    Attributes
    ----------
    value : float
        The value [SI unit of the question].
    row : Row
        Its result.
    """

    value: float
    row: Row

    def outcome(self, names: tuple[str, ...]) -> str:
        """Outcome for some findings.

        Parameters
        ----------
        names : tuple of str
            Findings that count; empty counts all.

        Returns
        -------
        str
            `holds`, `close` or `fails`; a run that could not be completed fails, and where none of
            the findings could be judged, all of the run's count.
        """
        word = outcome(self.row, names)
        if word == "not judged":  # a lift that came apart is no lift that holds
            word = outcome(self.row)
        return {"not completed": FAILS, "not judged": HOLDS}.get(word, word)


@dataclass(frozen=True)
class Bracket:
    """Two neighboring values with different outcomes.

    Attributes
    ----------
    good, bad : Probe
        The value that passes and the one that does not.
    """

    good: Probe
    bad: Probe


@dataclass(frozen=True)
class Stretch:
    """A part of the scan over which the outcome does not change.

    Attributes
    ----------
    first, last : float
        Its ends [SI unit of the question].
    outcome : str
        `holds`, `close` or `fails`.
    """

    first: float
    last: float
    outcome: str


@dataclass(frozen=True)
class Limit:
    """Where a lift stops to hold.

    Attributes
    ----------
    question : Question
        What was asked.
    scan : tuple of Probe
        All values that were tried, in order.
    stretches : tuple of Stretch
        Outcomes along the scan; more than two mean islands.
    fails : Bracket or None
        The last value that does not fail and the first that does; None where nothing changes.
    reserve : Bracket or None
        The last value that holds with its reserve and the first that does not.
    limiting : tuple of mapping
        Findings at the first value that fails, the weakest first: the one that gives way, and
        its neighbors.
    confirmed : bool
        True where the values a little beyond the bracket on both sides agree with it.
    tolerance : float
        Width of the brackets over their value (dimensionless).
    """

    question: Question
    scan: tuple[Probe, ...]
    stretches: tuple[Stretch, ...]
    fails: Bracket | None
    reserve: Bracket | None
    limiting: tuple[Mapping[str, Any], ...]
    confirmed: bool
    tolerance: float
