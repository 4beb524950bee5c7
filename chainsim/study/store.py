"""Run files of a study: one small JSON file per run, the truth from which all else is rebuilt.

A row is about 6 kB of text, so a file of its own keeps it readable by eye and costs nothing;
HDF5 would take twenty times that for the same numbers. Where trajectories are kept, the whole
recording stands beside the row under the same name, and is finished before the row is written.

Every file is written under a temporary name in its own folder, brought to the disk, and
renamed: a run file that can be seen is whole, whatever was killed and whenever.
"""

from __future__ import annotations

import contextlib
import errno
import json
import os
import shutil
from collections.abc import Container, Iterator, Sequence
from pathlib import Path

from chainsim.errors import RecordingError
from chainsim.study.points import Point
from chainsim.study.rows import DONE, Row, row_from_data

_RUNS = "runs"
_FOLDER_DIGITS = 2  # 256 folders keep each of them small at a million runs
_UNFINISHED = ".partial"
_NO_SPACE = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG)


class DiskFull(OSError):  # noqa: N818 - a state of the machine, told apart from other faults
    """The disk, or the user's share of it, is full."""


class Store:
    """Folder of run files.

    Parameters
    ----------
    folder : Path
        Output folder of the study; made when the first row is written.
    """

    def __init__(self, folder: str | Path) -> None:
        self.folder = Path(folder)

    def path(self, run: str, ending: str = ".json") -> Path:
        """Path of a file of a run.

        Parameters
        ----------
        run : str
            Run id.
        ending : str
            End of the name.

        Returns
        -------
        Path
            `runs/ab/abcdef….json`.
        """
        return self.folder / _RUNS / run[:_FOLDER_DIGITS] / f"{run}{ending}"

    def read(self, run: str) -> Row | None:
        """Row of a run.

        Parameters
        ----------
        run : str
            Run id.

        Returns
        -------
        Row or None
            None where there is no whole row of that id.
        """
        try:
            return read_row(self.path(run))
        except (FileNotFoundError, RecordingError):
            return None

    def write(self, row: Row) -> Path:
        """Write the row of a run so that it is whole or not there.

        Parameters
        ----------
        row : Row
            The row; an older one of the same id is replaced.

        Returns
        -------
        Path
            The file.

        Raises
        ------
        DiskFull
            If there is no room; nothing is left behind then.
        """
        path = self.path(row.id)
        text = json.dumps(row.to_data(), allow_nan=False, indent=1) + "\n"
        try:
            path.parent.mkdir(parents=True, exist_ok=True)
            write_whole(path, text.encode())
        except OSError as error:
            if is_full(error):
                raise DiskFull(error.errno, f"no room left for {path}") from None
            raise
        return path

    def runs(self) -> Iterator[str]:
        """Ids of all runs that have a run file, in no particular order."""
        with contextlib.suppress(FileNotFoundError), os.scandir(self.folder / _RUNS) as folders:
            for folder in folders:
                with os.scandir(folder) as files:
                    yield from (f.name[:-5] for f in files if f.name.endswith(".json"))

    def remove_unfinished(self, runs: Container[str]) -> int:
        """Remove what killed processes left half written.

        Parameters
        ----------
        runs : container of str
            Ids of the runs that are this driver's; others may still be at work on theirs.

        Returns
        -------
        int
            Number of files and folders removed (dimensionless).
        """
        unfinished = self.folder.glob(f"{_RUNS}/*/*{_UNFINISHED}*")
        left = [path for path in unfinished if path.name.partition(".")[0] in runs]
        for path in left:
            if path.is_dir():
                shutil.rmtree(path, ignore_errors=True)
            else:
                path.unlink(missing_ok=True)
        return len(left)


def read_row(path: Path) -> Row:
    """Row of a run file.

    Parameters
    ----------
    path : Path
        The run file.

    Returns
    -------
    Row
        The row.

    Raises
    ------
    RecordingError
        If it is no run file, or a damaged one.
    """
    try:
        data = json.loads(path.read_text(encoding="utf-8"))
    except ValueError as error:
        raise RecordingError(f"{path}: the run file is damaged ({error})") from None
    return row_from_data(data, str(path))


def write_whole(path: Path, content: bytes) -> None:
    """Write a file so that it is whole or not there, also after a crash.

    Parameters
    ----------
    path : Path
        The file; replaced where it exists.
    content : bytes
        What to write.

    Raises
    ------
    OSError
        If it cannot be written; the temporary file is removed then.
    """
    temporary = path.with_name(f"{path.name}.{os.getpid()}{_UNFINISHED}")
    try:
        with temporary.open("wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        os.replace(temporary, path)
    except BaseException:
        temporary.unlink(missing_ok=True)
        raise


def is_full(error: BaseException) -> bool:
    """Whether an error means that the disk is full.

    Parameters
    ----------
    error : BaseException
        The error; HDF5 tells a full disk in its text alone.

    Returns
    -------
    bool
        True for a full disk or quota.
    """
    return isinstance(error, OSError) and (
        error.errno in _NO_SPACE or os.strerror(errno.ENOSPC) in str(error)
    )


def rows_of(points: Sequence[Point], store: Store) -> list[Row | None]:
    """Rows of points, in the order of the points.

    Parameters
    ----------
    points : sequence of Point
        The points.
    store : Store
        The run files.

    Returns
    -------
    list of (Row or None)
        None where a point is not done yet.
    """
    read: dict[str, Row | None] = {}
    for point in points:
        if point.id not in read:
            read[point.id] = store.read(point.id)
    return [read[point.id] for point in points]


def done_rows(points: Sequence[Point], store: Store) -> list[tuple[Point, Row]]:
    """Points whose run was completed, each with its row.

    Parameters
    ----------
    points : sequence of Point
        The points.
    store : Store
        The run files.

    Returns
    -------
    list of (Point, Row)
        In the order of the points.
    """
    pairs = zip(points, rows_of(points, store), strict=True)
    return [(point, row) for point, row in pairs if row is not None and row.state == DONE]
