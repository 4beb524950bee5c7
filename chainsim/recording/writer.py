"""Records a run into an HDF5 file while it goes on.

The file is written under a temporary name and appears under its own when it is whole. After a kill
the temporary file can be read up to the last flush.
"""

from __future__ import annotations

import time
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import h5py
import numpy as np

from chainsim.errors import RecordingError
from chainsim.recording.axes import AXIS_NAMES, axis_labels
from chainsim.recording.channels import TIME, channel
from chainsim.recording.geometry import shape
from chainsim.recording.lanes import Lane, chunk_samples
from chainsim.recording.netcdf import (
    TEXT,
    attach,
    create_stream,
    describe,
    write_attributes,
    write_scale,
    write_table,
)
from chainsim.recording.places import free_path, partial_path, put_in_place
from chainsim.recording.reader import FileStore
from chainsim.recording.recorder import Recorder
from chainsim.recording.recording import Recording
from chainsim.recording.rows import Static
from chainsim.recording.tables import TABLES, Choice
from chainsim.recording.tail import remove_tail, write_tail

FLUSH_EVERY = 1.0
"""Wall time [s] between flushes: what a kill can cost at most, besides the block in work."""
LIBRARY_VERSIONS = ("v108", "v110")
"""Range of HDF5 file formats. From 1.8 on, headers have checksums, so that damage is noticed (older
ones made the library crash on damaged files); from 1.10 on, a killed writer's file stays locked."""


class FileRecorder(Recorder):
    """Records into a file.

    Parameters
    ----------
    path : str or Path
        Path of the recording, ending in ``.lift.h5``; where the name is taken, ``-2``, ``-3``, …
        is put after its stem.
    keep : str or sequence of str
        As of `Recorder`.
    force : bool
        Replace an existing recording when this one is whole [dimensionless].

    Attributes
    ----------
    path : Path
        Path where the recording will stand, absolute.
    partial : Path
        Path where it is being written.
    """

    def __init__(
        self, path: str | Path, keep: str | Sequence[str] = "all", force: bool = False
    ) -> None:
        super().__init__(keep)
        self.path = Path(path).absolute()
        self.partial = partial_path(self.path, 1)
        self._force = force
        self._lanes: dict[str, Lane] = {}
        self._groups: dict[str, h5py.Group] = {}
        self._scales: dict[str, h5py.Dataset] = {}
        self._static: Static | None = None
        self._stores: list[FileStore] = []
        self._flushed_at = -np.inf
        self._finished = False
        self._file: h5py.File | None = None

    def __enter__(self) -> FileRecorder:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def flush(self) -> None:
        """Make everything taken so far safe against a kill of the process.

        `append` does so once per `FLUSH_EVERY`; more often is seldom worth its time.
        """
        with self._writing():
            self._open.flush()
            if self._lanes and not self._finished:
                write_tail(self.partial, {path: lane.rest() for path, lane in self._lanes.items()})
            self._flushed_at = time.monotonic()

    def recording(self) -> Recording:
        """Return what was recorded so far; it stays usable when the recorder is closed."""
        if self._file is not None:
            self.flush()
        store = FileStore(self.partial if self._file is not None else self.path, self._file)
        self._stores.append(store)
        return Recording(store)

    def close(self) -> Path:
        """Complete the file; without `finish` it stays under its temporary name.

        Returns
        -------
        Path
            Where it is now, absolute.
        """
        if self._file is None:
            return self.path
        with self._writing():
            self.flush()
            self._file.close()
            self._file = None
            if self._finished:
                if not self._force and self.path.exists():
                    self.path = free_path(self.path, force=False)
                put_in_place(self.partial, self.path)
        place = self.path if self._finished else self.partial
        for store in self._stores:
            store.move(place)
        return place

    @property
    def _open(self) -> h5py.File:
        if self._file is None:
            raise RecordingError(f"{self.path}: the recorder is not open")
        return self._file

    @contextmanager
    def _writing(self) -> Iterator[None]:
        try:
            yield
        except (OSError, RuntimeError) as error:
            raise RecordingError(f"{self.partial}: cannot be written: {error}") from error

    def _start(self, attributes: dict[str, Any], scenario: Any, texts: dict[str, str]) -> None:
        with self._writing():
            self.path.parent.mkdir(parents=True, exist_ok=True)
            self._file = self._create()
            write_attributes(self._open, attributes)
            group = self._open.create_group("scenario", track_order=True)
            for name, text in texts.items():
                dataset = group.create_dataset(name, data=text, dtype=TEXT)
                describe(dataset, "", f"scenario, {name.replace('_', ' ')}")

    def _create(self) -> h5py.File:
        number = 1
        self.path = free_path(self.path, self._force)
        while True:
            self.partial = partial_path(self.path, number)
            try:
                return h5py.File(self.partial, "x", libver=LIBRARY_VERSIONS, track_order=True)
            except FileExistsError:
                if self._force:
                    number += 1
                else:
                    self.path = free_path(self.path, force=False)

    def _store_static(self, static: Static, shapes: dict[str, np.ndarray]) -> None:
        self._static = static
        with self._writing():
            self._axes(
                self._open, ("sprocket", "strand"), (len(static.sprockets), len(static.strands))
            )
            for path, values in shapes.items():
                row = shape(path)
                group, name = self._group(path)
                dataset = group.create_dataset(name, data=values)
                describe(dataset, row.unit, row.long_name)
                attach(group, dataset, self._axes(group, row.dims, values.shape))

    def _group(self, path: str) -> tuple[h5py.Group, str]:
        """Return the group of a dataset, and its name in there."""
        place, _, name = path.rpartition("/")
        if not place:
            return self._open, name
        if place not in self._groups:
            self._groups[place] = self._open.create_group(place, track_order=True)
        return self._groups[place], name

    def _axes(
        self, group: h5py.Group, dims: tuple[str, ...], lengths: tuple[int, ...]
    ) -> dict[str, h5py.Dataset]:
        """Return the scales of axes; points belong to one shape alone, other axes to all."""
        for dim, length in zip(dims, lengths, strict=True):
            if dim not in self._scales:
                place = group if dim.endswith("_point") else self._open
                labels = axis_labels(dim, length, self._static)
                long_name = AXIS_NAMES.get(dim, "number of the point")
                self._scales[dim] = write_scale(place, dim, labels, long_name)
        return {dim: self._scales[dim] for dim in dims}

    def _push(self, values: dict[str, np.ndarray]) -> None:
        with self._writing():
            if not self._lanes:
                self._create_lanes(values)
            for path, array in values.items():
                self._lanes[path].push(array)
        if time.monotonic() - self._flushed_at >= FLUSH_EVERY:
            self.flush()

    def _create_lanes(self, values: dict[str, np.ndarray]) -> None:
        for path, array in values.items():
            row, sample = channel(path), array.shape[1:]
            group, name = self._group(path)
            chunk = (chunk_samples(row, sample), *sample)
            dataset = create_stream(group, name, chunk, row.dtype)
            describe(dataset, row.unit, row.long_name)
            if path == TIME.path:
                dataset.make_scale(path)
                self._scales[path] = dataset
            else:
                axes = self._axes(group, row.dims, sample)
                attach(group, dataset, {TIME.path: self._scales[TIME.path]} | axes)
            self._lanes[path] = Lane(dataset)

    def _store_table(self, name: str, columns: dict[str, np.ndarray | Choice]) -> None:
        with self._writing():
            write_table(self._open, name, TABLES[name], columns)

    def _end(self, attributes: dict[str, Any]) -> None:
        with self._writing():
            for lane in self._lanes.values():
                lane.finish()
            write_attributes(self._open, attributes)
            self._finished = True
            self._open.flush()
            remove_tail(self.partial)
