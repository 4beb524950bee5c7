"""Writes a recording anew, such as the summary of one that was judged in memory."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from chainsim.integration.samples import BLOCK_SAMPLES, Block, Ending
from chainsim.recording.channels import TIME
from chainsim.recording.recording import Recording
from chainsim.recording.rows import Static
from chainsim.recording.writer import FileRecorder


def save_recording(
    recording: Recording, path: str | Path, keep: str | Sequence[str] = "all", force: bool = False
) -> Path:
    """Write a recording to a file.

    Parameters
    ----------
    recording : Recording
        What is written; from memory or from another file.
    path : str or Path
        Path as of `FileRecorder`.
    keep : str or sequence of str
        As of `Recorder`.
    force : bool
        Replace an existing recording [dimensionless].

    Returns
    -------
    Path
        Where it is, absolute.

    Raises
    ------
    RecordingError
        If it cannot be read or written.
    """
    shapes = [name for name in recording.names() if name.startswith("geometry/")]
    channels = [name for name in recording.names() if name not in (*shapes, TIME.path)]
    static = Static(recording.sprockets, recording.strands, {})
    with FileRecorder(path, keep, force) as recorder:
        recorder.begin(recording.scenario, {name: recording[name] for name in shapes}, static)
        for start in range(0, len(recording.time), BLOCK_SAMPLES):
            window = slice(start, start + BLOCK_SAMPLES)
            values = {name: recording.read(name, window) for name in channels}
            recorder.append(Block(recording.time[window], values))
        kept = {name: value for name, value in recording.attrs.items() if name != "kept"}
        recorder.finish(
            recording.events,
            recording.balls,
            recording.extremes.values(),
            recording.modes,
            Ending(recording.stop_reason, recording.complete),
            kept,
        )
        recorder.add_findings(recording.findings)
        return recorder.close()
