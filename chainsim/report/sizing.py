"""The sizing sheet of a lift beside what its run gave: closed forms left, simulation right.

The closed forms are those of `chainsim.analysis.sizing`; a simulated value stands beside a row
where the run has one of the same meaning: means of steady running, eigenvalues at rest.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from contextlib import suppress
from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.chain_motion import ripple
from chainsim.analysis.ride import carried_balls
from chainsim.analysis.sizing import Row, sizing_sheet
from chainsim.analysis.survey import Survey, survey
from chainsim.analysis.tensions import strand_ends
from chainsim.errors import ChainsimError, RecordingError
from chainsim.model.tangents import route
from chainsim.model.wheels import chain_pitch, down_of, wheels_of
from chainsim.report.text import findings_of, quantity
from chainsim.units import format_si


class SizingRow(NamedTuple):
    """One quantity, worked out two ways.

    Attributes
    ----------
    name : str
        What it is.
    closed_form, simulated : str
        Both values with their unit; ``"–"`` where one does not exist.
    source : str
        Formula of the closed form.
    remark : str
        What the closed form means or leaves out.
    """

    name: str
    closed_form: str
    simulated: str
    source: str
    remark: str


def sizing_rows(rec: Any) -> list[SizingRow]:
    """Return the sizing sheet of a recorded lift.

    Parameters
    ----------
    rec : Recording
        The run.

    Returns
    -------
    list of SizingRow
        Empty where the layout has no closed form.
    """
    s = survey(rec)
    try:
        path = route(wheels_of(s.scenario), chain_pitch(s.scenario), down_of(s.scenario))
        sheet = sizing_sheet(s.scenario, path, len(s["geometry/pitch"]))
    except ChainsimError:
        return []
    beside = simulated_values(s)
    return [
        SizingRow(row.name, row.text, simulated_text(row, beside), row.source, row.note)
        for row in sheet
    ]


def simulated_text(row: Row, beside: dict[str, float]) -> str:
    """Return the simulated value of a row with its unit, a dash where there is none.

    Parameters
    ----------
    row : Row
        Row of the sizing sheet.
    beside : dict of str to float
        Simulated values by the name of their row [SI].
    """
    value = beside.get(row.name, math.nan)
    if not math.isfinite(value):
        return "–"
    return format_si(value, row.kind) if row.kind else f"{value:.3g}"


def simulated_values(s: Survey) -> dict[str, float]:
    """Return what the run gave, by the name of the row of the sizing sheet that it belongs to.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    dict of str to float
        Values [SI]; NaN where nothing ran steadily, missing where it was not recorded.
    """
    values: dict[str, float] = {}
    for part in (drive_values, peak_values, speed_values, strand_values, mode_values):
        with suppress(RecordingError):
            values |= part(s)
    return values


def drive_values(s: Survey) -> dict[str, float]:
    """Return what the drive did in steady running, and the balls aboard."""
    driven = s.sprocket_names.index(s.scenario.drive.sprocket)
    return {
        "tooth rate": s.tooth_rate,
        "speed of the driven sprocket": mean_of(s, "sprockets/rate", lambda v: v[:, driven]),
        "mean torque on the driven sprocket": abs(mean_of(s, "drive/torque")),
        "current": mean_of(s, "drive/current"),
        "balls on the carrying strand": balls_aboard(s),
    }


def peak_values(s: Survey) -> dict[str, float]:
    """Return the peak tension as a share of what a link may carry [dimensionless]."""
    peak = s.extremes.get("link_tension")
    if peak is None:
        return {}
    return {"greatest tension over the allowable": peak.value / s.scenario.chain.allowable_tension}


def speed_values(s: Survey) -> dict[str, float]:
    """Return the ripple of the chain speed [dimensionless]."""
    found = ripple(s)
    name = f"speed variation from {s.scenario.drive.sprocket}"
    return {name: found.peak_to_peak} if found else {}


def strand_values(s: Survey) -> dict[str, float]:
    """Return the mean tensions at both ends of every strand [N]."""
    values = {}
    for k, strand in enumerate(s.strands):
        ends = strand_ends(s, k)
        leaves, meets = s.sprocket_names[strand.start], s.sprocket_names[strand.end]
        values[f"tension of {strand.name} leaving {leaves}"] = steady_mean(s, ends.start)
        values[f"tension of {strand.name} meeting {meets}"] = steady_mean(s, ends.end)
    return values


def mode_values(s: Survey) -> dict[str, float]:
    """Return the first frequencies of the strands and of a take-up at rest [Hz]."""
    values: dict[str, float] = {}
    for mode in s.rec.modes:
        if mode.kind.startswith("take-up "):
            values.setdefault("take-up bouncing on the chain", float(mode.frequency))
        elif mode.kind.startswith("strand ") and mode.kind.endswith(" 1"):
            name = mode.kind.removeprefix("strand ").removesuffix(" 1")
            values.setdefault(f"first frequency of {name}", float(mode.frequency))
    return values


def balls_aboard(s: Survey) -> float:
    """Return the mean number of balls carried in steady running [dimensionless]."""
    carried = carried_balls(s)
    held = s.channel("carriers/loaded")
    if not carried.any() and held is not None:
        return steady_mean(s, held.sum(axis=1))
    return steady_mean(s, carried.sum(axis=1))


def mean_of(s: Survey, name: str, part: Callable = lambda values: values) -> float:
    """Return the mean of a channel, or a part of it, in steady running; NaN where it is missing.

    Parameters
    ----------
    s : Survey
        The recording.
    name : str
        Path of the channel.
    part : callable
        Takes its values, returns those of shape (n_samples,).
    """
    values = s.channel(name)
    return math.nan if values is None else steady_mean(s, part(values))


def steady_mean(s: Survey, values: np.ndarray) -> float:
    """Return the mean over steady running, NaN where there is none.

    Parameters
    ----------
    s : Survey
        The recording.
    values : ndarray, shape (n_samples,)
        In any unit.
    """
    chosen = np.asarray(values, dtype=float)[s.is_steady]
    chosen = chosen[np.isfinite(chosen)]
    return float(chosen.mean()) if chosen.size else math.nan


def delivered_text(rec: Any) -> str:
    """Return the rate at which balls were delivered, as a sentence."""
    found = next((f for f in findings_of(rec) if f.name == "rate_met"), None)
    if found is None or found.value is None:
        return ""
    return f"The run delivered {quantity(found.value, found.unit)}."
