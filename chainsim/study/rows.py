"""The row of a run: what a study keeps of it, and how it is judged as a whole."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import asdict, dataclass, field
from typing import Any

from chainsim.errors import RecordingError
from chainsim.study.points import RESULTS_FORMAT

DONE = "done"
FAILED = "failed"
# The worse, the later. A finding that was not judged says nothing against a run.
_SEVERITY = {"not judged": 0, "holds": 1, "close": 2, "fails": 3}


@dataclass(frozen=True)
class Failure:
    """Why a run could not be completed.

    Attributes
    ----------
    code : str
        Short word for the kind of failure: `refused`, `run`, `error`, `killed`, `too long`.
    text : str
        What happened, in a sentence.
    tries : int
        How often the run was tried (dimensionless).
    """

    code: str
    text: str
    tries: int = 1


@dataclass(frozen=True)
class Row:
    """Result of one run.

    Attributes
    ----------
    id : str
        Run id.
    state : str
        `done` or `failed`; a lift that fails its findings is done.
    values : mapping of str to object
        Scenario values that were set, by dotted key.
    scenario : str
        Scenario file.
    findings : tuple of mapping
        Findings as `run --json` prints them, with `scale` beside `margin`.
    summary : mapping of str to float or str or None
        Summary values, SI units.
    stop_reason : str
        Why the run ended.
    failure : Failure or None
        Why it could not be completed.
    how : mapping of str to object
        Seconds on the wall, host, process, time of day: differs from one try to the next.
    """

    id: str
    state: str
    values: Mapping[str, Any]
    scenario: str
    findings: tuple[Mapping[str, Any], ...] = ()
    summary: Mapping[str, Any] = field(default_factory=dict)
    stop_reason: str = ""
    failure: Failure | None = None
    how: Mapping[str, Any] = field(default_factory=dict)

    def finding(self, name: str) -> Mapping[str, Any] | None:
        """Finding of a name.

        Parameters
        ----------
        name : str
            Name of the finding.

        Returns
        -------
        mapping or None
            The finding; None where the row has none of that name.
        """
        return next((f for f in self.findings if f["name"] == name), None)

    def to_data(self) -> dict[str, Any]:
        """The row as plain data for JSON, numbers that do not exist as None."""
        return {"format": RESULTS_FORMAT, **_plain(asdict(self))}


def row_from_data(data: Mapping[str, Any], name: str) -> Row:
    """Row from the data of a run file.

    Parameters
    ----------
    data : mapping
        What `Row.to_data` gave.
    name : str
        Name of the file, for messages.

    Returns
    -------
    Row
        The row.

    Raises
    ------
    RecordingError
        If the data is no row, or of another format.
    """
    if not isinstance(data, Mapping) or data.get("format") != RESULTS_FORMAT:
        raise RecordingError(f"{name}: no run file of format {RESULTS_FORMAT}")
    try:
        fields = {key: value for key, value in data.items() if key != "format"}
        failure = fields.pop("failure")
        findings = tuple(fields.pop("findings"))
        return Row(**fields, findings=findings, failure=Failure(**failure) if failure else None)
    except (KeyError, TypeError) as error:
        raise RecordingError(f"{name}: the run file is damaged ({error})") from None


def relative_margin(finding: Mapping[str, Any]) -> float:
    """Margin of a finding as a share of its own scale.

    Parameters
    ----------
    finding : mapping
        A finding.

    Returns
    -------
    float
        Share (dimensionless), negative where it fails; infinite where there is no margin,
        minus infinite where it fails without one.
    """
    margin, scale = finding.get("margin"), finding.get("scale")
    if margin is None or not scale:
        return -math.inf if finding["outcome"] == "fails" else math.inf
    return margin / abs(scale)


def severity(row: Row, names: tuple[str, ...] = ()) -> int:
    """How bad the worst finding of a row is.

    Parameters
    ----------
    row : Row
        The row.
    names : tuple of str
        Findings to look at; empty looks at all.

    Returns
    -------
    int
        0 nothing judged, 1 all hold, 2 one is close, 3 one fails, 4 the run could not be
        completed (dimensionless).
    """
    if row.state == FAILED:
        return len(_SEVERITY)
    return max((_SEVERITY[f["outcome"]] for f in chosen(row, names)), default=0)


def outcome(row: Row, names: tuple[str, ...] = ()) -> str:
    """Outcome of a row as a word.

    Parameters
    ----------
    row : Row
        The row.
    names : tuple of str
        Findings to look at; empty looks at all.

    Returns
    -------
    str
        `holds`, `close`, `fails`, `not judged` or `not completed`.
    """
    words = [*_SEVERITY, "not completed"]
    return words[severity(row, names)]


def weakest(row: Row, names: tuple[str, ...] = ()) -> list[Mapping[str, Any]]:
    """Judged findings of a row, the one with the least reserve first.

    Parameters
    ----------
    row : Row
        The row.
    names : tuple of str
        Findings to look at; empty looks at all.

    Returns
    -------
    list of mapping
        Findings that were judged, by outcome, then by margin over scale.
    """
    judged = [f for f in chosen(row, names) if f["outcome"] != "not judged"]
    return sorted(judged, key=urgency)


def urgency(finding: Mapping[str, Any]) -> tuple[int, float]:
    """Sorting key that puts the finding with the least reserve first.

    Parameters
    ----------
    finding : mapping
        A finding.

    Returns
    -------
    tuple of (int, float)
        Outcome, the worst first, then margin over scale (dimensionless).
    """
    return -_SEVERITY[finding["outcome"]], relative_margin(finding)


def chosen(row: Row, names: tuple[str, ...]) -> list[Mapping[str, Any]]:
    """Findings of a row by name.

    Parameters
    ----------
    row : Row
        The row.
    names : tuple of str
        Names; empty takes all.

    Returns
    -------
    list of mapping
        The findings, in the order of the row.
    """
    return [f for f in row.findings if not names or f["name"] in names]


def _plain(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {str(key): _plain(entry) for key, entry in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(entry) for entry in value]
    if hasattr(value, "item"):  # a numpy scalar
        value = value.item()
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
