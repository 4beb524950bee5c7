"""The answer of a fit: as text, as data, and as a new scenario."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

from chainsim.errors import CallError
from chainsim.study.fit_claims import Fitted, Pair
from chainsim.study.fit_losses import Count, Trial
from chainsim.study.fit_writing import with_fitted
from chainsim.units import UNITS, format_si


@dataclass(frozen=True)
class FitResult:
    """What bench measurements say about a scenario.

    Attributes
    ----------
    scenario : Scenario
        What it was fitted to.
    confidence : float
        Of every interval (dimensionless).
    parameters : tuple of Fitted
        Every parameter that the measurements speak about, claimed or not.
    held : tuple of str
        Dotted keys that were held at the scenario's value.
    pairs : tuple of Pair
        Correlations that matter.
    counts : tuple of Count
        Counted losses beside simulated ones, with the fitted values.
    trials : tuple of Trial
        What the counts say to the range of the pockets' friction.
    remarks : tuple of str
        What to take with care.
    """

    scenario: Any
    confidence: float
    parameters: tuple[Fitted, ...]
    held: tuple[str, ...]
    pairs: tuple[Pair, ...]
    counts: tuple[Count, ...]
    trials: tuple[Trial, ...]
    remarks: tuple[str, ...]

    @property
    def claimed(self) -> dict[str, Fitted]:
        """Dotted key -> parameter, of those that the measurements tell."""
        return {item.key: item for item in self.parameters if item.is_claimed}

    @property
    def unknown(self) -> dict[str, Fitted]:
        """Dotted key -> parameter, of those that they speak about and cannot tell."""
        return {item.key: item for item in self.parameters if not item.is_claimed}

    def scenario_text(self) -> str:
        """The scenario with the claimed values and where they came from, comments kept."""
        return with_fitted(self.scenario.text, self.parameters, self.confidence)

    def write(self, path: str | Path, force: bool = False) -> Path:
        """Write the new scenario.

        Parameters
        ----------
        path : str or path
            Where to.
        force : bool
            Whether a file that is there may be replaced.

        Returns
        -------
        Path
            Where it is.

        Raises
        ------
        CallError
            If the file is there already, or can't be written.
        """
        path = Path(path)
        try:
            with open(path, "w" if force else "x", encoding="utf-8") as stream:
                stream.write(self.scenario_text())
        except FileExistsError:
            raise CallError(f"{path} is there already; name another file, or force it") from None
        except OSError as error:
            raise CallError(f"{path} cannot be written: {error.strerror}") from None
        return path

    def text(self) -> str:
        """Everything in lines for the terminal."""
        lines = [f"fitted, with {self.confidence:.0%} intervals:"]
        lines += [_line(item) for item in self.claimed.values()] or ["  nothing"]
        if self.unknown:
            lines.append("not told by these measurements:")
            lines += [f"  {item.key}: {item.why}" for item in self.unknown.values()]
            lines.append("  (other loads or speeds may tell them, or hold one at a known value)")
        if self.held:
            lines.append(f"held as in the scenario: {', '.join(self.held)}")
        if self.pairs:
            lines.append("errors that go together:")
            lines += [f"  {p.first} and {p.second}: {p.correlation:+.2f}" for p in self.pairs]
        lines += _count_lines(self.counts, self.trials)
        lines += [f"note: {remark}" for remark in self.remarks]
        return "\n".join(lines)

    def as_json(self) -> dict[str, Any]:
        """Everything in SI, ready for `json.dumps`; what does not exist is None."""
        return {
            "confidence": self.confidence,
            "parameters": [
                {
                    "key": item.key, "value": item.value, "low": item.low, "high": item.high,
                    "unit": next(iter(UNITS[item.unit_kind])), "claimed": item.is_claimed,
                    "why": item.why or None, "files": list(item.files),
                }
                for item in self.parameters
            ],
            "held": list(self.held),
            "correlations": [pair._asdict() for pair in self.pairs],
            "losses": [count._asdict() | {"agrees": count.agrees} for count in self.counts],
            "friction_of_pockets": [
                {"value": trial.value, "agrees": trial.agrees} for trial in self.trials
            ],
            "remarks": list(self.remarks),
        }  # fmt: skip


def _line(item: Fitted) -> str:
    """One claimed value."""
    value, low, high = (format_si(end or 0.0, item.unit_kind) for end in item[3:6])
    files = ", ".join(Path(file).name for file in item.files)
    return f"  {item.key} = {value}, between {low} and {high} ({item.name}; {files})"


def _count_lines(counts: tuple[Count, ...], trials: tuple[Trial, ...]) -> list[str]:
    """Counted losses, and what they say to the pockets' friction."""
    if not counts:
        return []
    lines = ["losses, share lost on the bench and in the simulation:"]
    for count in counts:
        lines.append(
            f"  {format_si(count.speed, 'speed')}: {count.lost} of {count.fed} "
            f"({count.low:.1%} to {count.high:.1%}); {count.simulated_lost} of "
            f"{count.simulated_fed} ({count.simulated_low:.1%} to {count.simulated_high:.1%}): "
            f"{'they agree' if count.agrees else 'they contradict each other'}"
        )
    verdicts = [f"{t.value:g} {'agrees' if t.agrees else 'is contradicted'}" for t in trials]
    lines.append(f"friction of the pockets against these counts: {', '.join(verdicts)}")
    lines.append("  (counts alone do not tell it from their shape: not claimed)")
    return lines
