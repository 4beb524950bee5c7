"""Records a run in memory: for sweeps that keep little, for tests, and for a quick look."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np

from chainsim.recording.axes import axis_labels
from chainsim.recording.channels import channel
from chainsim.recording.recorder import Recorder
from chainsim.recording.recording import Recording
from chainsim.recording.rows import Static
from chainsim.recording.tables import Choice


class MemoryStore:
    """Values of a recording as plain arrays; what is read must not be changed."""

    def __init__(self) -> None:
        self.path: Path | None = None
        self.pieces: dict[str, list[np.ndarray]] = {}
        self.shapes: dict[str, np.ndarray] = {}
        self.tables: dict[str, dict[str, np.ndarray | Choice]] = {}
        self.root: dict[str, Any] = {}
        self.static: Static | None = None
        self.scenario_texts: dict[str, str] = {}
        self.given: Any = None

    def names(self) -> list[str]:
        """Return the paths of all channels and shapes."""
        return [*self.pieces, *self.shapes]

    def read(self, name: str, window: slice) -> np.ndarray:
        """Return the values of one dataset within a window of its first axis."""
        if name in self.shapes:
            values = self.shapes[name]
            return values[window] if values.ndim else values
        if len(self.pieces[name]) > 1:
            self.pieces[name] = [np.concatenate(self.pieces[name])]
        return self.pieces[name][0][window]

    def table(self, name: str) -> dict[str, np.ndarray | Choice]:
        """Return the columns of a table."""
        return self.tables.get(name, {})

    def attributes(self) -> dict[str, Any]:
        """Return the root attributes."""
        return dict(self.root)

    def labels(self, dim: str) -> tuple[str, ...]:
        """Return the labels along an axis."""
        return tuple(str(label) for label in axis_labels(dim, self._length(dim), self.static))

    def texts(self) -> dict[str, str]:
        """Return the scenario's texts."""
        return dict(self.scenario_texts)

    def scenario(self) -> Any:
        """Return the scenario that was given."""
        return self.given

    def close(self) -> None:
        """Do nothing: there is no file."""

    def _length(self, dim: str) -> int:
        for path, pieces in self.pieces.items():
            if dim in channel(path).dims:
                return pieces[0].shape[1 + channel(path).dims.index(dim)]
        return 0


class MemoryRecorder(Recorder):
    """Records in memory; parameters as of `Recorder`."""

    def __init__(self, keep: str | Sequence[str] = "all") -> None:
        super().__init__(keep)
        self._store = MemoryStore()

    def flush(self) -> None:
        """Do nothing: memory does not outlive the process."""

    def recording(self) -> Recording:
        """Return what was recorded so far."""
        return Recording(self._store)

    def close(self) -> Path | None:
        """Return None: there is no file."""
        return None

    def _start(self, attributes: dict[str, Any], scenario: Any, texts: dict[str, str]) -> None:
        self._store.root = dict(attributes)
        self._store.given = scenario
        self._store.scenario_texts = texts

    def _store_static(self, static: Static, shapes: dict[str, np.ndarray]) -> None:
        self._store.static = static
        self._store.shapes = shapes

    def _push(self, values: dict[str, np.ndarray]) -> None:
        for path, array in values.items():
            piece = array.astype(channel(path).dtype, copy=True)
            self._store.pieces.setdefault(path, []).append(piece)

    def _store_table(self, name: str, columns: dict[str, np.ndarray | Choice]) -> None:
        self._store.tables[name] = columns

    def _end(self, attributes: dict[str, Any]) -> None:
        self._store.root |= attributes
