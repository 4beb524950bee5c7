"""Recordings of runs: written while they go on, in memory or in HDF5, read by everything else."""

from chainsim.recording.copying import save_recording
from chainsim.recording.memory import MemoryRecorder
from chainsim.recording.reader import open_recording
from chainsim.recording.recording import Recording
from chainsim.recording.rows import FindingRow, ModeRow, Static, StrandRow
from chainsim.recording.writer import FileRecorder

__all__ = [
    "FileRecorder",
    "FindingRow",
    "MemoryRecorder",
    "ModeRow",
    "Recording",
    "Static",
    "StrandRow",
    "open_recording",
    "save_recording",
]
