"""What every recorder does alike; where the values end up is the subclass's affair.

The life of a recorder: `begin`, any number of `append`, `finish`, `add_findings`, `close`.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from chainsim.errors import RecordingError
from chainsim.integration.samples import BallRow, Block, Ending, Event, Extreme
from chainsim.recording.channels import TIME, channel, is_kept
from chainsim.recording.geometry import shape
from chainsim.recording.provenance import root_attributes, scenario_texts
from chainsim.recording.rows import Static
from chainsim.recording.tables import Choice, to_columns

if TYPE_CHECKING:
    from chainsim.recording.recording import Recording


class Recorder(ABC):
    """Takes a run block by block and gives a `Recording`.

    Subclasses store arrays: `_start`, `_store_static`, `_push`, `_store_table`, `_end`.

    Parameters
    ----------
    keep : str or sequence of str
        Which channels are kept: ``"all"``, ``"summary"`` (all but the bulk: pins, links, motion of
        balls), or paths and groups, such as ``["links/tension", "drive"]``. Time always is.
    """

    def __init__(self, keep: str | Sequence[str] = "all") -> None:
        if isinstance(keep, str) and keep not in ("all", "summary"):
            raise RecordingError(f"keep is '{keep}'; it is 'all', 'summary' or a list of channels")
        self._keep: str | tuple[str, ...] = keep if isinstance(keep, str) else tuple(keep)
        self._shapes: dict[str, tuple[int, ...]] = {}
        self._names: dict[str, int] = {}

    def begin(self, scenario: Any, geometry: Mapping[str, Any], static: Static) -> None:
        """Store what is known before the first sample.

        Parameters
        ----------
        scenario : Scenario
            What is simulated.
        geometry : mapping of str to ndarray
            Outlines and sizes of the fixed parts by dataset path; shape and unit of each are in
            the geometry table.
        static : Static
            Names of sprockets and strands, and further root attributes.

        Raises
        ------
        RecordingError
            If a path is not in the geometry table, or the place cannot be written to.
        """
        shapes = {path: np.asarray(value, shape(path).dtype) for path, value in geometry.items()}
        attributes = root_attributes(scenario)
        attributes |= {"kept": self._keep if isinstance(self._keep, str) else list(self._keep)}
        self._start(attributes | dict(static.attributes), scenario, scenario_texts(scenario))
        self._names = {"sprocket": len(static.sprockets), "strand": len(static.strands)}
        self._store_static(static, shapes)
        self._store_table("geometry/strands", to_columns("geometry/strands", static.strands))

    def append(self, block: Block) -> None:
        """Take a block of samples.

        Parameters
        ----------
        block : Block
            Times and values; every block has the same channels as the first one.

        Raises
        ------
        RecordingError
            If a channel is unknown or missing, or its shape changed.
        """
        values = {TIME.path: np.asarray(block.time)}
        values |= {
            path: array
            for path, array in block.channels.items()
            if is_kept(path, self._keep) and 0 not in array.shape[1:]
        }
        shapes = {path: array.shape[1:] for path, array in values.items()}
        if not self._shapes:
            _check_axes(shapes, self._names)
            self._shapes = shapes
        if shapes != self._shapes or any(len(a) != len(block.time) for a in values.values()):
            raise RecordingError(f"a block differs from the first one: {self._difference(shapes)}")
        if len(block.time):
            self._push(values)

    @abstractmethod
    def flush(self) -> None:
        """Make everything taken so far safe against a kill of the process."""

    def finish(
        self,
        events: Iterable[Event],
        balls: Iterable[BallRow],
        extremes: Iterable[Extreme],
        modes: Iterable[Any],
        ending: Ending,
        attributes: Mapping[str, Any] | None = None,
    ) -> None:
        """Store what is known after the last sample.

        Parameters
        ----------
        events, balls, extremes, modes : iterable
            Rows of the tables.
        ending : Ending
            How the run ended.
        attributes : mapping, optional
            Further root attributes, such as the situations that were run.
        """
        for name, rows in (
            ("events", events),
            ("balls/table", balls),
            ("extremes", extremes),
            ("modes", modes),
        ):
            self._store_table(name, to_columns(name, rows))
        end = {"complete": bool(ending.complete), "stop_reason": ending.stop_reason}
        self._end(end | dict(attributes or {}))
        self.flush()

    def add_findings(self, findings: Iterable[Any]) -> None:
        """Store the findings of the run.

        Parameters
        ----------
        findings : iterable
            Objects, named tuples or mappings with the fields of `FindingRow`.
        """
        self._store_table("findings", to_columns("findings", findings))
        self.flush()

    @abstractmethod
    def recording(self) -> Recording:
        """Return what was recorded so far; it stays usable when the recorder is closed."""

    @abstractmethod
    def close(self) -> Path | None:
        """Complete the recording; return the path of its file, None in memory."""

    def _difference(self, shapes: dict[str, tuple[int, ...]]) -> str:
        for path in sorted(shapes.keys() ^ self._shapes.keys()):
            return f"'{path}' is in one but not in the other"
        for path, found in shapes.items():
            if found != self._shapes[path]:
                return f"'{path}' has shape {found}, not {self._shapes[path]}"
        return "its channels have different numbers of samples"

    @abstractmethod
    def _start(self, attributes: dict[str, Any], scenario: Any, texts: dict[str, str]) -> None: ...

    @abstractmethod
    def _store_static(self, static: Static, shapes: dict[str, np.ndarray]) -> None: ...

    @abstractmethod
    def _push(self, values: dict[str, np.ndarray]) -> None: ...

    @abstractmethod
    def _store_table(self, name: str, columns: dict[str, np.ndarray | Choice]) -> None: ...

    @abstractmethod
    def _end(self, attributes: dict[str, Any]) -> None: ...


def _check_axes(shapes: Mapping[str, tuple[int, ...]], names: Mapping[str, int]) -> None:
    """Raise RecordingError unless every axis has one length wherever it occurs."""
    lengths = dict(names)
    for path, found in shapes.items():
        dims = channel(path).dims
        if len(dims) != len(found):
            raise RecordingError(f"channel '{path}' has shape {found} per sample, not {dims}")
        for dim, length in zip(dims, found, strict=True):
            if lengths.setdefault(dim, length) != length:
                raise RecordingError(
                    f"channel '{path}' has {length} places along '{dim}', not {lengths[dim]}"
                )
