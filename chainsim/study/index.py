"""SQLite index of a study: a cache for lists and tables, rebuilt from the run files.

Only the driver of a sweep writes it, in SQLite's default journal, which also works on network
folders. It may be deleted at any time.
"""

from __future__ import annotations

import contextlib
import sqlite3
from collections.abc import Iterable
from typing import NamedTuple

from chainsim.study.rows import DONE, Row, outcome, relative_margin, weakest
from chainsim.study.store import Store

_SCHEMA = """
CREATE TABLE IF NOT EXISTS runs (
    id TEXT PRIMARY KEY, state TEXT NOT NULL, outcome TEXT NOT NULL, weakest TEXT, margin REAL,
    code TEXT, text TEXT, tries INTEGER, seconds REAL
);
"""


class Entry(NamedTuple):
    """One line of the index.

    Attributes
    ----------
    id, state, outcome : str
        Run id, `done` or `failed`, and the outcome as a word.
    weakest : str or None
        Finding with the least reserve.
    margin : float or None
        Its margin over its scale (dimensionless).
    code, text : str or None
        Kind of failure and what happened.
    tries : int
        How often the run was tried (dimensionless).
    seconds : float or None
        Duration on the wall [s].
    """

    id: str
    state: str
    outcome: str
    weakest: str | None
    margin: float | None
    code: str | None
    text: str | None
    tries: int
    seconds: float | None


def entry(row: Row) -> Entry:
    """Line of the index for a row.

    Parameters
    ----------
    row : Row
        The row.

    Returns
    -------
    Entry
        Its line.
    """
    first = next(iter(weakest(row)), None)
    share = relative_margin(first) if first else None
    failure = row.failure
    return Entry(
        row.id,
        row.state,
        outcome(row),
        first["name"] if first else None,
        share if share is not None and abs(share) < float("inf") else None,
        failure.code if failure else None,
        failure.text if failure else None,
        failure.tries if failure else 1,
        row.how.get("seconds"),
    )


class Index:
    """The index of a study, brought in step with its run files when opened.

    Parameters
    ----------
    store : Store
        The run files.
    name : str
        File name of the index; each part of a divided sweep has its own.

    Notes
    -----
    An index that is damaged is deleted and rebuilt. On a full disk nothing is written; the
    run files stay the truth and the next start catches up.
    """

    def __init__(self, store: Store, name: str = "index.sqlite") -> None:
        self._store = store
        self.path = store.folder / name
        self.path.parent.mkdir(parents=True, exist_ok=True)
        try:
            self._connection = self._open()
        except sqlite3.DatabaseError:
            self.path.unlink()
            self._connection = self._open()

    def _open(self) -> sqlite3.Connection:
        connection = sqlite3.connect(self.path)
        try:
            connection.execute("PRAGMA synchronous=NORMAL")
            connection.executescript(_SCHEMA)
        except sqlite3.DatabaseError:
            connection.close()
            raise
        return connection

    def catch_up(self) -> int:
        """Bring the index in step with the run files.

        Returns
        -------
        int
            Number of lines added or dropped (dimensionless).
        """
        there = set(self._store.runs())
        states = dict(self._connection.execute("SELECT id, state FROM runs"))
        known = set(states)
        finished = {run for run, state in states.items() if state == DONE}
        rows = (self._store.read(run) for run in sorted(there - finished))
        self.add(row for row in rows if row is not None)
        with contextlib.suppress(sqlite3.OperationalError), self._connection:
            gone = [(run,) for run in known - there]
            self._connection.executemany("DELETE FROM runs WHERE id = ?", gone)
        return len(there ^ known)

    def add(self, rows: Iterable[Row]) -> None:
        """Add or replace the lines of rows.

        Parameters
        ----------
        rows : iterable of Row
            The rows.
        """
        with contextlib.suppress(sqlite3.OperationalError), self._connection:
            marks = ",".join("?" * len(Entry._fields))
            lines = [entry(row) for row in rows]
            self._connection.executemany(f"INSERT OR REPLACE INTO runs VALUES ({marks})", lines)

    def entries(self) -> dict[str, Entry]:
        """All lines, by run id."""
        return {line[0]: Entry(*line) for line in self._connection.execute("SELECT * FROM runs")}

    def close(self) -> None:
        """Close the file."""
        self._connection.close()
