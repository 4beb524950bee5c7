"""Answers of studies as plain data, for ``--json``: units are those of the recording (SI)."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import Any

from chainsim.study.limit_answer import Bracket, Limit, Probe
from chainsim.study.limit_estimates import Estimate
from chainsim.study.mend import Mend
from chainsim.study.proving import Proving
from chainsim.study.ranking import Ranked, reason
from chainsim.study.rows import FAILED, outcome
from chainsim.study.step_check import Drift
from chainsim.study.sweep_parts import Tally
from chainsim.study.sweeping import Sweep
from chainsim.study.unsure import Turn, Unsure
from chainsim.units import UNITS


def sweep_data(sweep: Sweep, tally: Tally | None = None) -> dict[str, Any]:
    """A sweep as plain data.

    Parameters
    ----------
    sweep : Sweep
        The sweep.
    tally : Tally or None
        What the last go did; None where there was none.

    Returns
    -------
    dict
        Counts, the reason why the best variant is the best, and all variants in order.
    """
    ranked = sweep.ranking()
    rows = sweep.rows()
    return {
        "plan": sweep.plan.file,
        "folder": str(sweep.store.folder.resolve()),
        "planned": len(sweep.points),
        "finished": sum(row is not None and row.state != FAILED for row in rows),
        "failed": sum(row is not None and row.state == FAILED for row in rows),
        "computed": tally.computed if tally else 0,
        "reused": tally.reused if tally else 0,
        "reason": reason(ranked),
        "variants": [_variant(entry) for entry in ranked],
    }


def _variant(entry: Ranked) -> dict[str, Any]:
    return {
        "place": entry.place,
        "id": entry.row.id,
        "choices": dict(entry.point.labels),
        "outcome": entry.outcome,
        "weakest": entry.weakest or None,
        "reserve": _finite(entry.reserve),
        "findings": [dict(found) for found in entry.row.findings],
    }


def limit_data(limit: Limit, estimate: Estimate) -> dict[str, Any]:
    """A limit as plain data.

    Parameters
    ----------
    limit : Limit
        The limit.
    estimate : Estimate
        The closed-form estimate beside it.

    Returns
    -------
    dict
        Both brackets, the findings that give way, the stretches and every run.
    """
    question = limit.question
    return {
        "question": question.name,
        "varies": question.title,
        "unit": _unit(question.unit_kind),
        "fails": _bracket(limit.fails),
        "reserve": _bracket(limit.reserve),
        "gives_way": [dict(found) for found in limit.limiting],
        "confirmed": limit.confirmed,
        "tolerance": limit.tolerance,
        "estimate": {"value": estimate.value, "text": estimate.text},
        "stretches": [
            {"from": s.first, "to": s.last, "outcome": s.outcome} for s in limit.stretches
        ],
        "runs": [_probe(probe) for probe in limit.scan],
    }


def _bracket(bracket: Bracket | None) -> dict[str, float] | None:
    return {"good": bracket.good.value, "bad": bracket.bad.value} if bracket else None


def _probe(probe: Probe) -> dict[str, Any]:
    return {"value": probe.value, "id": probe.row.id, "outcome": outcome(probe.row)}


def _unit(kind: str) -> str:
    return next(iter(UNITS[kind]))


def mend_data(found: Sequence[Mend]) -> list[dict[str, Any]]:
    """Mends as plain data.

    Parameters
    ----------
    found : sequence of Mend
        The mends, the smallest first.

    Returns
    -------
    list of dict
        Each change with the two runs that prove it.
    """
    return [
        {
            "key": change.key,
            "present": change.present,
            "value": change.value,
            "change": change.text,
            "size": change.size,
            "outcome": change.outcome,
            "proof": [_probe(probe) for probe in change.proof],
        }
        for change in found
    ]


def unsure_data(found: Sequence[Unsure]) -> list[dict[str, Any]]:
    """Unsure values as plain data.

    Parameters
    ----------
    found : sequence of Unsure
        The values, what to measure first standing first.

    Returns
    -------
    list of dict
        Each value with its range and the findings that it turns.
    """
    return [
        {
            "key": entry.key,
            "source": entry.source,
            "low": entry.low,
            "typical": entry.typical,
            "high": entry.high,
            "turns_at_low": _turns(entry.at_low),
            "turns_at_high": _turns(entry.at_high),
            "swing": _finite(entry.swing),
            "swinging": entry.swinging or None,
            "not_completed": list(entry.not_completed),
        }
        for entry in found
    ]


def _turns(turns: Sequence[Turn]) -> list[dict[str, str]]:
    return [{"finding": t.finding, "before": t.before, "after": t.after} for t in turns]


def proving_data(proof: Proving) -> dict[str, Any]:
    """A proving run as plain data.

    Parameters
    ----------
    proof : Proving
        The proving run.

    Returns
    -------
    dict
        Situations run and not run, and all findings by situation.
    """
    return {
        "situations": {"run": list(proof.rows), "not_run": dict(proof.not_run)},
        "findings": {
            name: {"findings": [dict(f) for f in row.findings], "stop_reason": row.stop_reason}
            for name, row in proof.rows.items()
        },
        "worst": {name: _worst(proof, name) for name in proof.findings},
    }


def _worst(proof: Proving, name: str) -> Mapping[str, Any] | None:
    worst = proof.worst(name)
    return {"situation": worst[0], **worst[1]} if worst else None


def drift_data(found: Sequence[Drift]) -> list[dict[str, Any]]:
    """A step check as plain data.

    Parameters
    ----------
    found : sequence of Drift
        Drift of each finding.

    Returns
    -------
    list of dict
        Values at full, half and quarter step, and the observed order.
    """
    return [
        {
            "name": drift.name,
            "unit": drift.unit,
            "full": drift.full,
            "half": drift.half,
            "quarter": drift.quarter,
            "moved": drift.moved,
            "order": drift.order,
            "outcomes": list(drift.outcomes),
        }
        for drift in found
    ]


def _finite(value: float) -> float | None:
    return value if math.isfinite(value) else None
