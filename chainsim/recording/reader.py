"""Opens recordings, and says in one sentence what is wrong with a file that is none."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import h5py
import numpy as np

from chainsim.errors import RecordingError
from chainsim.recording.channels import TIME, channel
from chainsim.recording.geometry import shape
from chainsim.recording.provenance import FORMAT, FORMAT_VERSION
from chainsim.recording.recording import Recording
from chainsim.recording.tables import TABLES, Choice
from chainsim.recording.tail import Rest, joined, read_tail

DEFLATE_LIMIT = 1032
"""Largest ratio at which deflate can shrink data [dimensionless]: 258 bytes from 2 bits (RFC 1951,
section 3.2.5: a match of length 258 with codes of one bit each for length and distance)."""
SLACK = 1 << 20
"""Size [bytes] up to which a dataset is read without comparing it with its storage."""


def open_recording(path: str | Path) -> Recording:
    """Open a recording, whole or cut off.

    Parameters
    ----------
    path : str or Path
        Path of the file.

    Returns
    -------
    Recording
        The recording; its arrays are read when asked for.

    Raises
    ------
    RecordingError
        If there is no such file, or it is cut off, foreign, damaged, in use by its writer, or from
        a newer version.
    """
    store = FileStore(Path(path).absolute())
    store.check()
    return Recording(store)


class FileStore:
    """Values of a recording in an HDF5 file, opened when first needed.

    Parameters
    ----------
    path : Path
        Path of the file.
    handle : h5py.File, optional
        The file of a recorder that is still writing it.
    """

    def __init__(self, path: Path, handle: h5py.File | None = None) -> None:
        self.path: Path | None = path
        self._place = path
        self._handle = handle
        self._samples: int | None = None
        self._rests: dict[str, Rest] = {}

    def move(self, path: Path) -> None:
        """Follow the file to another place; its recorder has closed it."""
        self.path = self._place = path
        self._handle = None
        self._samples = None

    def close(self) -> None:
        """Close the file."""
        if self._handle is not None:
            self._handle.close()
            self._handle = None

    def check(self) -> None:
        """Raise RecordingError unless the file is a recording that this version can read."""
        with self._reading("its attributes"):
            found = self._file.attrs.get("format")
            number = int(self._file.attrs.get("format_version", 0))
            maker = self._file.attrs.get("chainsim_version", "an unknown version")
        if found != FORMAT:
            raise RecordingError(f"{self._place}: is an HDF5 file, but not a recording of chainsim")
        if number > FORMAT_VERSION:
            raise RecordingError(
                f"{self._place}: has format {number} (written by chainsim {maker}), and this "
                f"version reads up to {FORMAT_VERSION}; update chainsim to read it"
            )
        if number < 1:
            raise RecordingError(f"{self._place}: is damaged: its format_version is {number}")
        if self.attributes().get("complete") and TIME.path not in self.names():
            raise RecordingError(
                f"{self._place}: is damaged: it calls itself complete without time"
            )

    def names(self) -> list[str]:
        """Return the paths of all channels and shapes."""
        with self._reading("its list of datasets"):
            return [path for path in _datasets(self._file, "") if _is_known(path)]

    def read(self, name: str, window: slice) -> np.ndarray:
        """Return the values of one dataset within a window of its first axis."""
        fixed = name.startswith("geometry/")
        samples = None if fixed else self._length()
        with self._reading(f"'{name}'"):
            dataset = self._dataset(name)
            dims = len(shape(name).dims) if fixed else 1 + len(channel(name).dims)
            if dataset.ndim != dims or dataset.dtype.kind not in "iuf":
                raise ValueError(f"it has {dataset.ndim} axes of {dataset.dtype}, not {dims}")
            if samples is None:
                return dataset[window] if dataset.ndim else dataset[()]
            if not self._rests:
                return dataset[_within(window, samples)]
            values = joined(dataset[:], self._rests.get(name))
            if len(values) < samples:
                raise ValueError("its newest samples do not fit the others")
            return values[_within(window, samples)]

    def table(self, name: str) -> dict[str, np.ndarray | Choice]:
        """Return the columns of a table; none where it was never written."""
        with self._reading(f"table '{name}'"):
            if name not in self._file:
                return {}
            columns = {field: self._column(f"{name}/{field}") for field in TABLES[name].columns}
            lengths = {len(c.codes if isinstance(c, Choice) else c) for c in columns.values()}
            if len(lengths) > 1:
                raise ValueError("its columns differ in length")
            return columns

    def attributes(self) -> dict[str, Any]:
        """Return the root attributes as plain values."""
        with self._reading("its attributes"):
            return {name: _plain(value) for name, value in self._file.attrs.items()}

    def labels(self, dim: str) -> tuple[str, ...]:
        """Return the labels along an axis; none where the file has no such axis."""
        with self._reading(f"axis '{dim}'"):
            if dim not in self._file:
                return ()
            dataset = self._dataset(dim)
            values = dataset.asstr()[:] if dataset.dtype.kind == "O" else dataset[:]
            return tuple(str(value) for value in values)

    def texts(self) -> dict[str, str]:
        """Return the scenario's texts."""
        with self._reading("its scenario"):
            names = list(self._file["scenario"]) if "scenario" in self._file else []
            return {name: self._dataset(f"scenario/{name}").asstr()[()] for name in names}

    def scenario(self) -> Any:
        """Parse the scenario that the file holds."""
        from chainsim.scenario import parse_scenario

        texts = self.texts()
        if "resolved" not in texts:
            raise RecordingError(f"{self._place}: is damaged: it holds no scenario")
        return parse_scenario(texts["resolved"], file=f"{self.attributes().get('stem')}.toml")

    @property
    def _file(self) -> h5py.File:
        if self._handle is None:
            self._handle = _open(self._place)
        return self._handle

    @contextmanager
    def _reading(self, what: str) -> Iterator[None]:
        try:
            yield
        except (OSError, RuntimeError, LookupError, ValueError, TypeError, MemoryError) as error:
            reason = str(error).strip("'\"").splitlines() or ["no reason given"]
            raise RecordingError(
                f"{self._place}: is damaged: {what} cannot be read ({reason[0]})"
            ) from error

    def _dataset(self, name: str) -> h5py.Dataset:
        """Return a dataset that lies in this file, and can be as large as it claims to be."""
        found = self._file[name]
        if not isinstance(found, h5py.Dataset):
            raise TypeError("it is not a dataset")
        if found.is_virtual or found.external or found.file.filename != self._file.filename:
            raise ValueError("it lies in another file")
        if found.nbytes > SLACK + DEFLATE_LIMIT * found.id.get_storage_size():
            raise ValueError(f"it claims {found.nbytes} bytes, more than the file can hold")
        return found

    def _length(self) -> int:
        """Number of samples that all channels have: a cut-off file may end raggedly."""
        if self._samples is None:
            names = [name for name in self.names() if not name.startswith("geometry/")]
            with self._reading("its number of samples"):
                self._rests = {} if self._file.attrs.get("complete") else read_tail(self._place)
                self._samples = min((self._joined_length(name) for name in names), default=0)
        return self._samples

    def _joined_length(self, name: str) -> int:
        length, rest = len(self._dataset(name)), self._rests.get(name)
        if rest is None or not 0 <= rest.first <= length:
            return length
        return max(length, rest.first + len(rest.values))

    def _column(self, path: str) -> np.ndarray | Choice:
        dataset = self._dataset(path)
        if dataset.ndim != 1:
            raise ValueError(f"'{path}' is not a column")
        codes = h5py.check_enum_dtype(dataset.dtype)
        if codes is None:
            return dataset.asstr()[:] if dataset.dtype.kind == "O" else dataset[:]
        by_code = {int(code): text for text, code in codes.items()}
        texts = tuple(by_code.get(code, "unknown") for code in range(max(by_code, default=0) + 1))
        values = dataset[:]
        if len(values) and not 0 <= values.min() <= values.max() < len(texts):
            raise ValueError(f"'{path}' has a code without a text")
        return Choice(values, texts)


def _within(window: slice, samples: int) -> slice:
    """Return a window with plain bounds within a number of samples."""
    return slice(*window.indices(samples))


def _open(path: Path) -> h5py.File:
    if not path.is_file():
        raise RecordingError(f"{path}: there is no such file")
    if not h5py.is_hdf5(path):
        raise RecordingError(f"{path}: is not a recording (not an HDF5 file, or its start is lost)")
    try:
        return h5py.File(path, "r")
    except BlockingIOError as error:
        raise RecordingError(f"{path}: is being written by a run that is not over") from error
    except (OSError, RuntimeError) as error:
        size = path.stat().st_size
        raise RecordingError(f"{path}: is cut off or damaged ({size} bytes are left)") from error


def _datasets(group: h5py.Group, prefix: str) -> Iterator[str]:
    """Yield the paths of all datasets that are no scales, at most two groups deep."""
    for name, kind in ((name, group.get(name, getclass=True)) for name in group):
        path = f"{prefix}{name}"
        if kind is h5py.Group and path.count("/") < 2:
            yield from _datasets(group[name], f"{path}/")
        elif kind is h5py.Dataset and (path == TIME.path or not group[name].is_scale):
            yield path


def _is_known(path: str) -> bool:
    try:
        return bool(shape(path) if path.startswith("geometry/") else channel(path))
    except RecordingError:
        return False


def _plain(value: Any) -> Any:
    if isinstance(value, bytes):
        return value.decode(errors="replace")
    if isinstance(value, np.generic):
        return value.item()
    return value.tolist() if isinstance(value, np.ndarray) else value
