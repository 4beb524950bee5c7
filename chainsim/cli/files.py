"""Where what is written goes: folders that are made, and names that are not taken."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from chainsim.errors import CallError

SUFFIX = ".lift.h5"


def writable_folder(name: str | Path) -> Path:
    """Make a folder, and find out before the work, not after it, that it cannot be written to.

    Parameters
    ----------
    name : str or Path
        The folder.

    Raises
    ------
    CallError
        If it cannot be made, or nothing can be written there.
    """
    folder = Path(name)
    try:
        folder.mkdir(parents=True, exist_ok=True)
        probe = folder / ".chainsim-probe"
        probe.touch()
        probe.unlink()
    except OSError as error:
        raise CallError(f"{folder}: cannot be written to: {error.strerror}") from error
    return folder


def free_name(folder: Path, name: str, force: bool) -> Path:
    """Return a path in a folder that is not taken: -2, -3, … are put after the stem.

    Parameters
    ----------
    folder : Path
        The folder.
    name : str
        Name that is wanted.
    force : bool
        Whether what has that name is to be replaced.
    """
    from chainsim.recording.places import free_path

    return free_path(folder / name, force)


def stem_of(rec: Any) -> str:
    """Return the name of a recording's file without its ending."""
    return rec.path.name.removesuffix(SUFFIX).removesuffix(f"{SUFFIX}.partial")
