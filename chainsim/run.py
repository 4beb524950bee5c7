"""Runs one scenario: simulates it, records it, judges it."""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

from chainsim.findings import judge
from chainsim.integration.loop import Simulation
from chainsim.integration.samples import Ending
from chainsim.model.lift import build_lift
from chainsim.recording import (
    FileRecorder,
    MemoryRecorder,
    ModeRow,
    Recording,
    Static,
    StrandRow,
)
from chainsim.recording.places import recording_path

Progress = Callable[[float, float, float], None]
"""Called with simulated time [s], duration [s] and wall time [s]."""


def run(
    scenario: Any,
    out: str | Path | None = None,
    *,
    keep: str | Sequence[str] = "all",
    progress: Progress | None = None,
    force: bool = False,
    step_scale: float = 1.0,
) -> Recording:
    """Simulate a scenario and judge what came of it.

    Parameters
    ----------
    scenario : Scenario
    out : str or Path or None
        Folder of the recording's file; None keeps it in memory.
    keep : str or sequence of str
        Channels to keep in the file: ``"all"``, ``"summary"``, or a list.
    progress : callable or None
        Called with simulated time [s], duration [s] and wall time [s].
    force : bool
        Whether an existing recording may be replaced.
    step_scale : float
        Share of the usual inner step (dimensionless).

    Returns
    -------
    Recording
        With its findings; from the file where there is one.

    Raises
    ------
    LayoutError
        If the layout is impossible.
    RunError
        If the run can't be completed; the file keeps what there is.
    KeyboardInterrupt
        Passed on after the file has been closed with what there is.
    """
    lift = build_lift(scenario)
    simulation = Simulation(lift, step_scale)
    recorders: list[Any] = [MemoryRecorder("all")]
    if out is not None:
        path = recording_path(Path(out), scenario.stem)
        recorders.append(FileRecorder(path, keep=keep, force=force))
    static = Static(lift.wheel_names, _strand_rows(lift), _attributes(simulation))
    for recorder in recorders:
        recorder.begin(scenario, simulation.geometry(), static)
    try:
        _march(simulation, recorders, progress)
    except KeyboardInterrupt:
        _finish(simulation, recorders, Ending("interrupted", False))
        _close(recorders)
        raise
    except BaseException as error:
        _finish(simulation, recorders, Ending(str(error), False))
        _close(recorders)
        raise
    _finish(simulation, recorders, simulation.ending)
    findings = judge(recorders[0].recording())
    for recorder in recorders:
        recorder.add_findings(findings)
    result = recorders[-1].recording()
    _close(recorders)
    return result


def _march(simulation: Simulation, recorders: list[Any], progress: Progress | None) -> None:
    """Hand every block to every recorder."""
    began = time.perf_counter()
    for block in simulation:
        for recorder in recorders:
            recorder.append(block)
        if progress is not None:
            progress(simulation.time, simulation.duration, time.perf_counter() - began)


def _finish(simulation: Simulation, recorders: list[Any], ending: Ending) -> None:
    """Write the tables."""
    balls = simulation.feeder.finish()
    modes = [ModeRow(mode.frequency, mode.kind) for mode in simulation.modes]
    for recorder in recorders:
        recorder.finish(simulation.events, balls, simulation.extremes, modes, ending)


def _close(recorders: list[Any]) -> None:
    """Close every recorder."""
    for recorder in recorders:
        recorder.close()


def _strand_rows(lift: Any) -> tuple[StrandRow, ...]:
    """Return the strands as a recording names them."""
    names = lift.wheel_names
    return tuple(
        StrandRow(strand.name, names[strand.start], names[strand.end], strand.carrying)
        for strand in lift.strands
    )


def _attributes(simulation: Simulation) -> dict[str, Any]:
    """Return what else is known before the first sample."""
    prepared = simulation.prepared
    return {
        "seed": simulation.lift.scenario.run.seed,
        "inner_step": prepared.dt,
        "inner_step_limit": prepared.limit,
        "stiffest_mode": prepared.stiffest / 6.283185307179586,
        "rest_residual": prepared.rest.residual,
        "duration": simulation.duration,
    }
