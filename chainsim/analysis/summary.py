"""One row of plain numbers that stands for a whole run, for sweeps and comparisons."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from chainsim.analysis.axles import axle_loads, takeup_travel
from chainsim.analysis.chain_motion import N_HARMONICS, excursion, ripple
from chainsim.analysis.drive import droop, duty
from chainsim.analysis.energy import energy_audit
from chainsim.analysis.losses import is_lost
from chainsim.analysis.ride import ride
from chainsim.analysis.slack import taut
from chainsim.analysis.stops import overrun, run_back
from chainsim.analysis.survey import Survey, survey
from chainsim.analysis.tensions import sides_of_drive
from chainsim.analysis.work import efficiency

RunSummary = dict[str, float | int | str | None]
"""Scalars of one run by name; a value that does not exist is None. Units are SI, see `UNITS`."""

UNITS = {
    "duration": "s", "n_links": "1", "chain_speed": "m s-1", "tooth_rate": "Hz", "ripple": "1",
    "balls_ended": "1", "balls_delivered": "1", "balls_lost": "1", "lateral_peak": "m s-2",
    "lateral_rms": "m s-2", "longitudinal_peak": "m s-2", "longitudinal_rms": "m s-2",
    "peak_tension": "N", "least_tension": "N", "slack_time": "s", "tight_tension": "N",
    "slack_tension": "N", "tension_ratio": "1", "excursion_inward": "m",
    "excursion_outward": "m", "torque_peak": "N m", "torque_rms": "N m", "power": "W",
    "droop": "1", "run_back": "m", "overrun": "m", "work_per_ball": "J", "efficiency": "1",
    "energy_residual": "1",
}  # fmt: skip
"""Unit of each scalar; names with a part behind a dot have the unit of their first word."""


def run_summary(rec: Any, findings: Sequence[Any] | None = None) -> RunSummary:
    """Summarize a run.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.
    findings : sequence of Finding, optional
        Its findings; those that the recording holds by default.

    Returns
    -------
    RunSummary
        Flat scalars; findings as ``<name>.outcome``, ``<name>.value`` and ``<name>.margin``.
        What needs channels that were not kept is left out.
    """
    s = survey(rec)
    row: dict[str, Any] = {
        "stop_reason": s.rec.stop_reason,
        "complete": int(s.rec.complete),
        "duration": float(s.time[-1]) if len(s.time) else 0.0,
    }
    if len(s.time) > 1:
        parts = [part(s) for part, needs in _PARTS if s.has(*needs)]
        row |= {name: value for part in parts for name, value in part.items()}
    for finding in s.rec.findings if findings is None else findings:
        row[f"{finding.name}.outcome"] = finding.outcome
        row[f"{finding.name}.value"] = finding.value
        row[f"{finding.name}.margin"] = finding.margin
    return {name: _plain(value) for name, value in row.items()}


def _plain(value: Any) -> Any:
    """The value, or None where it is a number that is not finite."""
    return None if isinstance(value, float) and not np.isfinite(value) else value


def _chain(s: Survey) -> dict[str, Any]:
    """Speed, tensions, excursions, axle loads and take-ups."""
    row: dict[str, Any] = {"n_links": s.n_pins, "chain_speed": s.steady_speed}
    row["tooth_rate"] = s.tooth_rate
    speed = ripple(s)
    row["ripple"] = speed.peak_to_peak if speed else None
    for k in range(N_HARMONICS):
        row[f"ripple.{k + 1}"] = float(speed.harmonic[k]) if speed else None
    peak = s.extremes.get("link_tension")
    row["peak_tension"] = peak.value if peak is not None else float(np.max(s.tension))
    levels = [found for k in s.carrying if (found := taut(s, k)) is not None]
    row["least_tension"] = min((found.level for found in levels), default=None)
    row["slack_time"] = max((found.slack_time for found in levels), default=None)
    sides = sides_of_drive(s)
    row["tight_tension"], row["slack_tension"] = (
        (sides.tight, sides.slack) if sides else (None,) * 2
    )
    row["tension_ratio"] = sides.ratio if sides else None
    away = [excursion(s, k) for k in range(len(s.strands))]
    row["excursion_inward"] = _largest([a.inward[s.is_steady] for a in away])
    row["excursion_outward"] = _largest([a.outward[s.is_steady] for a in away])
    row |= {f"axle_load.{load.sprocket}": load.peak for load in axle_loads(s)}
    for travel in takeup_travel(s):
        row[f"takeup_low.{travel.sprocket}"] = travel.low
        row[f"takeup_high.{travel.sprocket}"] = travel.high
    return row


def _largest(parts: list[np.ndarray]) -> float | None:
    """Largest known value of several series, in their unit."""
    values = np.concatenate(parts) if parts else np.empty(0)
    values = values[np.isfinite(values)]
    return float(values.max()) if values.size else None


def _balls(s: Survey) -> dict[str, Any]:
    """Fates of the balls and their ride."""
    fates = [ball.fate for ball in s.balls]
    row: dict[str, Any] = {
        "balls_ended": sum(fate != "aboard" for fate in fates),
        "balls_delivered": sum(fate == "delivered" for fate in fates),
        "balls_lost": sum(is_lost(fate) for fate in fates),
    }
    felt = ride(s)
    for k, name in enumerate(("lateral", "longitudinal")):
        row[f"{name}_peak"] = felt[k].peak if felt else None
        row[f"{name}_rms"] = felt[k].rms if felt else None
    return row


def _drive(s: Survey) -> dict[str, Any]:
    """Torque, power, speed under load, work and energy."""
    load, lost, ran_on = duty(s), droop(s), overrun(s)
    work, audit = efficiency(s), energy_audit(s)
    return {
        "torque_peak": load.peak_torque,
        "torque_rms": load.rms_torque,
        "power": load.mean_power,
        "droop": lost.share if lost else None,
        "run_back": run_back(s).distance,
        "overrun": ran_on.distance if ran_on else None,
        "work_per_ball": work.work_per_ball if work else None,
        "efficiency": work.efficiency if work else None,
        "energy_residual": audit.residual_of_flows if audit else None,
    }


_PARTS = (
    (_chain, ("pins/position", "pins/velocity", "links/tension")),
    (_balls, ("pins/position", "balls/acceleration")),
    (_drive, ("drive/torque", "sprockets/rate", "sprockets/angle")),
)
"""Parts of the row, each with the channels that it needs."""
