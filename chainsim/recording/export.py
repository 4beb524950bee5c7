"""Exports a recording to xarray and to MAT files."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np

from chainsim.errors import CallError, RecordingError
from chainsim.recording.channels import TIME
from chainsim.recording.recording import Recording
from chainsim.recording.tables import TABLES

LONGEST_MAT_NAME = 63
"""Longest name of a variable in a MAT file of version 5 with long names [characters]."""


def to_xarray(recording: Recording) -> Any:
    """Return a recording as an xarray DataTree, one node per group.

    A whole file is opened by xarray itself through h5netcdf and read when values are used; other
    recordings are copied.

    Parameters
    ----------
    recording : Recording
        What is converted.

    Returns
    -------
    xarray.DataTree
        Channels with their units, labels along the axes, and the tables; their columns `time` are
        called ``event_time``, ``extreme_time`` and ``finding_time``.

    Raises
    ------
    CallError
        If xarray or h5netcdf is not installed.
    """
    try:
        import h5netcdf  # noqa: F401 - xarray names it as an engine
        import xarray
    except ImportError as error:
        raise CallError(f"to_xarray needs xarray and h5netcdf: {error}") from error
    tables = _tables(recording, xarray)
    if recording.path is None or not recording.complete:
        tree = xarray.DataTree.from_dict(_channels(recording, xarray))
        tree.attrs.update(recording.attrs)
    else:
        recording.close()
        tree = xarray.open_datatree(recording.path, engine="h5netcdf")
    for path, table in tables.items():
        tree[path] = xarray.DataTree(table)
    return tree


def _channels(recording: Recording, xarray: Any) -> dict[str, Any]:
    groups: dict[str, dict[str, Any]] = {"/": {}}
    for name in recording.names():
        group, _, short = name.rpartition("/")
        attributes = {"units": recording.unit(name), "long_name": recording.long_name(name)}
        variable = (recording.dims(name), recording[name], attributes)
        groups.setdefault(f"/{group}", {})[short] = variable
    found = {path: xarray.Dataset(variables) for path, variables in groups.items()}
    return {path: data.assign_coords(_labels(recording, data)) for path, data in found.items()}


def _tables(recording: Recording, xarray: Any) -> dict[str, Any]:
    """Tables by path; a column `time` is renamed, as the samples' time would hide it in a tree."""
    found = {}
    for name, table in TABLES.items():
        rows = recording.rows(name)
        columns = zip(*rows, strict=True) if rows else [() for _ in table.columns]
        variables = {}
        for (field, column), values in zip(table.columns.items(), columns, strict=True):
            attributes = {"long_name": column.long_name}
            attributes |= {"units": column.unit} if column.unit else {}
            title = f"{table.dim}_time" if field == TIME.path else field
            variables[title] = (table.dim, list(values), attributes)
        found[name] = xarray.Dataset(variables)
    return found


def _labels(recording: Recording, data: Any) -> dict[str, list[str | int]]:
    labels: dict[str, list[str | int]] = {
        dim: [int(label) if label.isdigit() else label for label in recording.labels(dim)]
        for dim in data.dims
        if dim != TIME.path
    }
    return {dim: found for dim, found in labels.items() if len(found) == data.sizes[dim]}


def export_mat(recording: Recording, path: str | Path, names: Sequence[str] | None = None) -> Path:
    """Write a recording as a MAT file of version 5.

    A channel ``links/tension`` becomes the field ``tension`` of the struct ``links``, its unit the
    same field of ``units.links``.

    Parameters
    ----------
    recording : Recording
        What is exported.
    path : str or Path
        Path of the file; an existing one is replaced.
    names : sequence of str, optional
        Channels, shapes and tables; all by default.

    Returns
    -------
    Path
        The file.

    Raises
    ------
    RecordingError
        If the file cannot be written, or is too large for its format.
    """
    from scipy.io import savemat
    from scipy.io.matlab import MatWriteError

    content: dict[str, Any] = {"units": {}}
    for name in names or [*recording.names(), *TABLES]:
        if name in TABLES:
            _put(content, name, _table(recording, name))
        else:
            _put(content, name, recording[name])
            _put(content["units"], name, recording.unit(name))
    content["about"] = {_mat_name(key): value for key, value in recording.attrs.items()}
    path = Path(path)
    try:
        savemat(path, content, do_compression=True, long_field_names=True)
    except (OSError, ValueError, MatWriteError) as error:
        raise RecordingError(f"{path}: cannot be written: {error}") from error
    return path


def _put(content: dict[str, Any], name: str, value: Any) -> None:
    *groups, last = (_mat_name(part) for part in name.split("/"))
    for group in groups:
        content = content.setdefault(group, {})
    content[last] = value


def _table(recording: Recording, name: str) -> dict[str, Any]:
    rows = recording.rows(name)
    fields = TABLES[name].columns
    table: dict[str, Any] = {}
    for index, (field, column) in enumerate(fields.items()):
        values = [np.nan if row[index] is None else row[index] for row in rows]
        is_text = column.kind in ("text", "choice")
        table[field] = np.array(values, dtype=object if is_text else float)
    return table


def _mat_name(text: str) -> str:
    """Turn any text into a legal name: letters, digits, low lines, a letter first."""
    name = "".join(c if c.isascii() and (c.isalnum() or c == "_") else "_" for c in text)
    return (name if name[:1].isalpha() else f"x{name}")[:LONGEST_MAT_NAME]
