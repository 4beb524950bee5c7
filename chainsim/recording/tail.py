"""Keeps the newest samples of a run, those that do not fill a chunk yet, safe beside its file.

A chunk must not be written twice: until HDF5 has flushed its index, a kill would leave the index
pointing at space that is in use for something else. So the rest goes to a small file of its own,
replaced as a whole each time, which the reader joins to a cut-off recording.
"""

from __future__ import annotations

import os
import zipfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np


class Rest(NamedTuple):
    """Newest samples of a channel.

    Attributes
    ----------
    first : int
        Index of the first one in the run [dimensionless].
    values : ndarray, shape (m, ...)
        Values in the unit of the channel.
    """

    first: int
    values: np.ndarray


def tail_path(partial: Path) -> Path:
    """Return the path of the file that goes with a recording that is being written.

    Parameters
    ----------
    partial : Path
        Temporary path of the recording.

    Returns
    -------
    Path
        Such as ``foyer.lift.h5.partial.tail``.
    """
    return partial.with_name(partial.name + ".tail")


def write_tail(partial: Path, rests: Mapping[str, Rest]) -> None:
    """Replace the tail of a recording.

    Parameters
    ----------
    partial : Path
        Temporary path of the recording.
    rests : mapping of str to Rest
        Newest samples by dataset path.
    """
    path = tail_path(partial)
    new = path.with_name(path.name + ".new")
    first = np.array([rest.first for rest in rests.values()], dtype="i8")
    arrays: dict[str, Any] = {
        f"values{index}": rest.values for index, rest in enumerate(rests.values())
    }
    with open(new, "wb") as file:
        np.savez(file, names=np.array(list(rests), dtype="U"), first=first, **arrays)
    os.replace(new, path)


def read_tail(partial: Path) -> dict[str, Rest]:
    """Read the tail of a recording; none where there is no readable one.

    Parameters
    ----------
    partial : Path
        Temporary path of the recording.

    Returns
    -------
    dict of str to Rest
        Newest samples by dataset path.
    """
    path = tail_path(partial)
    if not path.is_file():
        return {}
    try:
        with np.load(path, allow_pickle=False) as file:
            names, first = file["names"].tolist(), file["first"].tolist()
            return {
                name: Rest(first[index], file[f"values{index}"]) for index, name in enumerate(names)
            }
    except (OSError, ValueError, LookupError, EOFError, zipfile.BadZipFile):
        return {}


def remove_tail(partial: Path) -> None:
    """Remove the tail of a recording, if there is one.

    Parameters
    ----------
    partial : Path
        Temporary path of the recording.
    """
    tail_path(partial).unlink(missing_ok=True)


def joined(values: np.ndarray, rest: Rest | None) -> np.ndarray:
    """Put the newest samples behind those of the file.

    Parameters
    ----------
    values : ndarray, shape (n, ...)
        Samples of the file in the unit of the channel.
    rest : Rest, optional
        Newest samples; used where they begin in the file or right behind it.

    Returns
    -------
    ndarray, shape (n or more, ...)
        All samples in the unit of the channel.
    """
    if rest is None or not 0 <= rest.first <= len(values) < rest.first + len(rest.values):
        return values
    if rest.values.shape[1:] != values.shape[1:] or rest.values.dtype != values.dtype:
        return values
    return np.concatenate([values, rest.values[len(values) - rest.first :]])
