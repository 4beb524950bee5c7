"""Where recordings lie: names that never hit an existing file, and files that appear when whole."""

from __future__ import annotations

import os
from pathlib import Path

SUFFIX = ".lift.h5"
PARTIAL = ".partial"


def recording_path(folder: str | Path, stem: str) -> Path:
    """Return the path of a recording in a folder.

    Parameters
    ----------
    folder : str or Path
        Folder of the recording.
    stem : str
        Its name without ending; separators of folders in it are replaced, so that it stays inside.

    Returns
    -------
    Path
        ``folder/stem.lift.h5``.
    """
    name = "".join("_" if letter in "/\\:\0" else letter for letter in stem).strip(". ")
    return Path(folder) / f"{name or 'recording'}{SUFFIX}"


def numbered(path: Path, number: int) -> Path:
    """Return the path with ``-number`` after its stem; unchanged for the first.

    Parameters
    ----------
    path : Path
        Path of a recording.
    number : int
        Counts from 1 [dimensionless].

    Returns
    -------
    Path
        Such as ``foyer-2.lift.h5``.
    """
    if number == 1:
        return path
    suffix = SUFFIX if path.name.endswith(SUFFIX) else path.suffix
    stem = path.name.removesuffix(suffix)
    return path.with_name(f"{stem}-{number}{suffix}")


def free_path(path: Path, force: bool) -> Path:
    """Return the first path whose name is not taken, by a whole recording or a partial one.

    Parameters
    ----------
    path : Path
        Path that is asked for.
    force : bool
        Whether an existing file is to be replaced [dimensionless]; then `path` itself.

    Returns
    -------
    Path
        Path to use.
    """
    number = 1
    while not force and _taken(numbered(path, number)):
        number += 1
    return numbered(path, number)


def partial_path(path: Path, number: int) -> Path:
    """Return the name under which a recording is written until it is whole.

    Parameters
    ----------
    path : Path
        Its final path.
    number : int
        Counts from 1 [dimensionless], for more than one writer at a time.

    Returns
    -------
    Path
        Such as ``foyer.lift.h5.partial``.
    """
    return path.with_name(path.name + PARTIAL + (f"-{number}" if number > 1 else ""))


def put_in_place(partial: Path, path: Path) -> None:
    """Make a whole file appear under its final name, on the disk and not only in the cache.

    Parameters
    ----------
    partial : Path
        The file, closed.
    path : Path
        Its final path; a file that is there is replaced.
    """
    _sync(partial)
    os.replace(partial, path)
    if os.name == "posix":
        _sync(path.parent)


def _taken(path: Path) -> bool:
    return os.path.lexists(path) or os.path.lexists(partial_path(path, 1))


def _sync(path: Path) -> None:
    handle = os.open(path, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
