"""The proving run: one lift through every situation it will meet, one table of findings."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from chainsim.errors import CallError
from chainsim.scenario.schema_run import SITUATIONS
from chainsim.study.bench import Bench, Variant
from chainsim.study.rows import Row, urgency, weakest
from chainsim.study.situations import situation_values, timing


@dataclass(frozen=True)
class Proving:
    """What the proving run showed.

    Attributes
    ----------
    rows : mapping of str to Row
        Row of each situation that was run, in the order of the proving run.
    not_run : mapping of str to str
        Situations that were not run, each with the reason.
    """

    rows: Mapping[str, Row]
    not_run: Mapping[str, str]

    @property
    def findings(self) -> list[str]:
        """Names of all findings, in the order of the first row."""
        return list(dict.fromkeys(f["name"] for row in self.rows.values() for f in row.findings))

    def outcome(self, finding: str, situation: str) -> str:
        """Outcome of a finding in a situation.

        Parameters
        ----------
        finding, situation : str
            Their names.

        Returns
        -------
        str
            `holds`, `close`, `fails` or `not judged`.
        """
        found = self.rows[situation].finding(finding)
        return found["outcome"] if found else "not judged"

    def worst(self, finding: str) -> tuple[str, Mapping[str, Any]] | None:
        """Situation in which a finding has the least reserve.

        Parameters
        ----------
        finding : str
            Its name.

        Returns
        -------
        tuple of (str, mapping) or None
            Situation and finding; None where it was judged in none.
        """
        judged = [
            (situation, found[0])
            for situation, row in self.rows.items()
            if (found := weakest(row, (finding,)))
        ]
        return min(judged, key=lambda pair: urgency(pair[1]), default=None)


def prove(scenario: Any, bench: Bench, names: Sequence[str] = SITUATIONS) -> Proving:
    """Run a lift through situations, each from a start of its own.

    Parameters
    ----------
    scenario : Scenario
        The lift; its own events are left out.
    bench : Bench
        Does the runs.
    names : sequence of str
        Situations to run.

    Returns
    -------
    Proving
        Rows by situation, and what could not be run.

    Raises
    ------
    CallError
        If a situation is unknown.
    """
    unknown = [name for name in names if name not in SITUATIONS]
    if unknown:
        raise CallError(
            f"no situation is called {', '.join(unknown)}; known: {', '.join(SITUATIONS)}"
        )
    times = timing(scenario)
    planned: dict[str, dict[str, Any]] = {}
    not_run: dict[str, str] = {}
    for name in names:
        values = situation_values(scenario, name, times)
        if isinstance(values, str):
            not_run[name] = values
        else:
            planned[name] = values
    rows = bench.rows([Variant(name, values) for name, values in planned.items()])
    done: dict[str, Row] = {}
    for name, row in zip(planned, rows, strict=True):
        if row.failure is not None:
            not_run[name] = row.failure.text
        else:
            done[name] = row
    return Proving(done, not_run)
