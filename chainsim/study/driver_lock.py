"""One driver at a time in the folder of a sweep."""

from __future__ import annotations

import contextlib
from collections.abc import Iterator
from pathlib import Path

from chainsim.errors import RunError


@contextlib.contextmanager
def only_driver(lock: Path) -> Iterator[None]:
    """Keep a second driver out of the same sweep.

    Parameters
    ----------
    lock : Path
        File to lock; the lock ends with the process, however that ends.

    Yields
    ------
    None
        While the lock is held.

    Raises
    ------
    RunError
        If another driver holds it.
    """
    with lock.open("a") as file:
        try:
            _lock(file.fileno())
        except OSError:
            raise RunError(
                f"{lock.parent}: another sweep is at work in this folder; "
                "wait for it, or divide the plan with --part"
            ) from None
        yield


def _lock(descriptor: int) -> None:
    try:
        import fcntl
    except ImportError:  # Windows
        import msvcrt

        msvcrt.locking(descriptor, msvcrt.LK_NBLCK, 1)  # type: ignore[attr-defined]
    else:
        fcntl.lockf(descriptor, fcntl.LOCK_EX | fcntl.LOCK_NB)
