"""One judged result of a run, and how its outcome follows from its margins."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from chainsim.findings.wording import amount

HOLDS, CLOSE, FAILS, NOT_JUDGED = "holds", "close", "fails", "not judged"
DOES_NOT_APPLY = "does not apply"
NOT_ENOUGH_DATA = "not enough data"
OUTSIDE_RANGE = "outside validated range"


@dataclass(frozen=True, kw_only=True)
class Finding:
    """One judged result of a run.

    Attributes
    ----------
    name, group, title : str
        Its name in machine-readable output, its group on paper, and its heading.
    outcome : str
        ``"holds"``, ``"close"`` (inside its own reserve), ``"fails"`` or ``"not judged"``.
    value, limit, margin : float or None
        Worst measured value, its limit, and the signed margin (positive is good), in `unit`;
        None where it does not exist.
    unit : str
        Their unit; ``"1"`` where dimensionless.
    scale : float or None
        What the reserve is a share of, in `unit`.
    time : float or None
        When the worst value was reached [s].
    place : str
        Where, in words.
    note : str
        What a reader should know beside it.
    why : str
        Reason where it is not judged: ``"does not apply"``, ``"not enough data"`` or
        ``"outside validated range"``.
    """

    name: str = ""
    group: str = ""
    title: str = ""
    outcome: str = NOT_JUDGED
    value: float | None = None
    unit: str = ""
    limit: float | None = None
    margin: float | None = None
    scale: float | None = None
    time: float | None = None
    place: str = ""
    note: str = ""
    why: str = ""


@dataclass(frozen=True, kw_only=True)
class Measure:
    """One measured value, with the limit it is held against.

    Attributes
    ----------
    what : str
        What was measured, in words.
    value : float
        Worst value in `unit`.
    unit : str
        Its unit.
    limit : float or None
        Its limit; None where none was set.
    scale : float or None
        What the reserve is a share of; None for the magnitude of the limit.
    is_floor : bool
        Whether the value must stay above the limit instead of below.
    time : float
        When [s]; NaN where no moment can be named.
    place : str
        Where.
    has_failed : bool
        Whether it fails whatever the margin says.
    """

    what: str
    value: float
    unit: str
    limit: float | None = None
    scale: float | None = None
    is_floor: bool = False
    time: float = math.nan
    place: str = ""
    has_failed: bool = False

    @property
    def margin(self) -> float | None:
        """Distance from the limit in `unit`, positive on the good side; None without a limit."""
        if self.limit is None or not math.isfinite(self.value):
            return None
        return self.value - self.limit if self.is_floor else self.limit - self.value

    @property
    def reserve_scale(self) -> float:
        """What the reserve is a share of, in `unit`; 0 without a limit."""
        return abs(self.scale if self.scale is not None else (self.limit or 0.0))

    @property
    def relative_margin(self) -> float:
        """Margin by its scale [dimensionless]; infinite without a limit."""
        if self.margin is None:
            return math.inf
        if self.reserve_scale > 0.0:
            return self.margin / self.reserve_scale
        return math.copysign(math.inf, self.margin) if self.margin else 0.0


def judged(measures: Sequence[Measure], reserve: float, note: str = "") -> Finding:
    """Judge by the measure with the least margin by its scale.

    Parameters
    ----------
    measures : sequence of Measure
        What was measured; those without a limit are told in the note.
    reserve : float
        Share of the scale inside which a finding is close [dimensionless].
    note : str
        What else to tell.

    Returns
    -------
    Finding
        Without its name, group and title. Not judged where no measure has a limit; its value is
        then the first one's.
    """
    limited = [measure for measure in measures if measure.margin is not None]
    if not limited:
        return unjudged(DOES_NOT_APPLY, _notes("no limit is set", note), measures)
    worst = min(limited, key=lambda m: (not m.has_failed, m.relative_margin))
    margin = worst.margin if worst.margin is not None else math.nan
    if worst.has_failed or margin < 0.0:
        outcome = FAILS
    else:
        outcome = CLOSE if margin < reserve * worst.reserve_scale else HOLDS
    what = worst.what if len(measures) > 1 else ""
    others = "; ".join(_told(m) for m in measures if m is not worst)
    return Finding(
        outcome=outcome,
        value=worst.value,
        unit=worst.unit,
        limit=worst.limit,
        margin=margin,
        scale=worst.reserve_scale,
        time=_known(worst.time),
        place=worst.place,
        note=_notes(what, others and f"beside it: {others}", note),
    )


def unjudged(why: str, note: str, measures: Sequence[Measure] = ()) -> Finding:
    """A finding that was not judged.

    Parameters
    ----------
    why : str
        `DOES_NOT_APPLY`, `NOT_ENOUGH_DATA` or `OUTSIDE_RANGE`.
    note : str
        What a reader should know.
    measures : sequence of Measure
        What was measured all the same; the first gives the value.

    Returns
    -------
    Finding
        Without its name, group and title.
    """
    finding = Finding(outcome=NOT_JUDGED, why=why, note=note)
    known = [measure for measure in measures if math.isfinite(measure.value)]
    if not known:
        return finding
    first = known[0]
    told = "; ".join(_told(measure) for measure in known[1:])
    what = first.what if len(known) > 1 else ""
    return replace(
        finding,
        value=first.value,
        unit=first.unit,
        time=_known(first.time),
        place=first.place,
        note=_notes(what, told and f"beside it: {told}", note),
    )


def add_note(finding: Finding, note: str) -> Finding:
    """Finding with one more remark.

    Parameters
    ----------
    finding : Finding
        The finding.
    note : str
        The remark; an empty one changes nothing.

    Returns
    -------
    Finding
        The same, the remark at the end of its note.
    """
    return replace(finding, note=_notes(finding.note, note))


def _notes(*notes: str) -> str:
    """Join remarks that are not empty."""
    return "; ".join(note for note in notes if note)


def _known(value: float) -> float | None:
    """The value, or None where it is not finite."""
    return float(value) if math.isfinite(value) else None


def _told(measure: Measure) -> str:
    """One measure in words."""
    if not math.isfinite(measure.value):
        return f"{measure.what} not known"
    limit = "" if measure.limit is None else f" (limit {amount(measure.limit, measure.unit)})"
    return f"{measure.what} {amount(measure.value, measure.unit)}{limit}"
