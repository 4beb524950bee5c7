"""Which findings would turn at the ends of values that nobody has measured."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from chainsim.errors import CallError
from chainsim.study.bench import Bench, Variant
from chainsim.study.rows import Row, relative_margin


@dataclass(frozen=True)
class Turn:
    """A finding whose outcome changes.

    Attributes
    ----------
    finding : str
        Its name.
    before, after : str
        Outcome with the typical value, and at the end of the range.
    """

    finding: str
    before: str
    after: str


@dataclass(frozen=True)
class Unsure:
    """What an uncertain value does to the findings.

    Attributes
    ----------
    key : str
        The value.
    source : str
        `assumed` or `kind`.
    low, typical, high : float
        Its range [SI unit of the key].
    at_low, at_high : tuple of Turn
        Findings that turn at either end.
    swing : float
        Largest change of any margin over its scale, from one end to the other
        (dimensionless).
    swinging : str
        The finding of which that is; empty where nothing moves.
    not_completed : tuple of str
        Ends at which the run could not be completed, with the reason.
    """

    key: str
    source: str
    low: float
    typical: float
    high: float
    at_low: tuple[Turn, ...]
    at_high: tuple[Turn, ...]
    swing: float
    swinging: str
    not_completed: tuple[str, ...] = ()

    @property
    def turns(self) -> int:
        """Number of findings that turn at one end or the other (dimensionless)."""
        return len({turn.finding for turn in (*self.at_low, *self.at_high)})


def unsure(scenario: Any, bench: Bench, keys: Sequence[str] = ()) -> list[Unsure]:
    """Repeat a run at both ends of each uncertain value, one value at a time.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    bench : Bench
        Does the runs.
    keys : sequence of str
        Values to look at; empty looks at all that are assumed or come from a kind of chain.

    Returns
    -------
    list of Unsure
        What to measure first stands first: values that turn findings, then those that move a
        margin the most. Two values that are both off are not tried together.

    Raises
    ------
    CallError
        If a key is not uncertain, or nothing is.
    """
    ranges = dict(scenario.uncertain())
    unknown = [key for key in keys if key not in ranges]
    if unknown or not ranges:
        raise CallError(
            f"{', '.join(unknown)}: not among the uncertain values of this scenario"
            if unknown
            else "no value of this scenario is uncertain: all are given or measured"
        )
    chosen = list(keys) or list(ranges)
    variants = [Variant("typical", {})]
    for key in chosen:
        origin = ranges[key]
        variants += [
            Variant(f"{key} low", {key: _value(scenario, key, origin.low)}),
            Variant(f"{key} high", {key: _value(scenario, key, origin.high)}),
        ]
    typical, *ends = bench.rows(variants)
    found = [
        _compared(key, ranges[key], typical, ends[2 * i], ends[2 * i + 1])
        for i, key in enumerate(chosen)
    ]
    return sorted(found, key=lambda entry: (-entry.turns, -entry.swing))


def _value(scenario: Any, key: str, number: float) -> Any:
    """Value in SI, as a whole number where the key counts something."""
    return round(number) if isinstance(scenario.origin(key).typical, int) else number


def _compared(key: str, origin: Any, typical: Row, low: Row, high: Row) -> Unsure:
    swing, swinging = _largest_swing(low, high)
    lost = tuple(
        f"{end}: {row.failure.text}"
        for end, row in (("low", low), ("high", high))
        if row.failure is not None
    )
    return Unsure(
        key=key,
        source=origin.source,
        low=origin.low,
        typical=origin.typical,
        high=origin.high,
        at_low=turns(typical, low),
        at_high=turns(typical, high),
        swing=swing,
        swinging=swinging,
        not_completed=lost,
    )


def turns(before: Row, after: Row) -> tuple[Turn, ...]:
    """Findings whose outcome differs between two rows.

    Parameters
    ----------
    before, after : Row
        The rows.

    Returns
    -------
    tuple of Turn
        In the order of the first row; findings that one of them lacks are left out.
    """
    later = _by_name(after)
    return tuple(
        Turn(finding["name"], finding["outcome"], later[finding["name"]]["outcome"])
        for finding in before.findings
        if finding["name"] in later and finding["outcome"] != later[finding["name"]]["outcome"]
    )


def _largest_swing(low: Row, high: Row) -> tuple[float, str]:
    later = _by_name(high)
    swings = [
        (abs(relative_margin(later[f["name"]]) - relative_margin(f)), f["name"])
        for f in low.findings
        if _has_margin(f) and f["name"] in later and _has_margin(later[f["name"]])
    ]
    return max(swings, default=(0.0, ""))


def _has_margin(finding: Mapping[str, Any]) -> bool:
    return finding.get("margin") is not None and bool(finding.get("scale"))


def _by_name(row: Row) -> dict[str, Mapping[str, Any]]:
    return {finding["name"]: finding for finding in row.findings}
