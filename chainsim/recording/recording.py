"""A recording as its readers see it, wherever its values are kept."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from chainsim.errors import RecordingError, ScenarioError
from chainsim.recording.channels import TIME, channel
from chainsim.recording.geometry import shape
from chainsim.recording.store import Store
from chainsim.recording.tables import to_rows

if TYPE_CHECKING:
    from chainsim.integration.samples import BallRow, Event, Extreme
    from chainsim.recording.rows import FindingRow, ModeRow, StrandRow
    from chainsim.scenario import Scenario


class Recording:
    """What happened in a run.

    Arrays are read when asked for and not kept, so that a long recording needs little memory; keep
    your own reference to one that you use often.

    Parameters
    ----------
    store : Store
        Where its values are kept.
    """

    def __init__(self, store: Store) -> None:
        self._store = store

    def __repr__(self) -> str:
        state = "complete" if self.complete else "not complete"
        return f"<Recording of '{self.attrs.get('title', '')}', {len(self.time)} samples, {state}>"

    def __enter__(self) -> Recording:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def __contains__(self, name: object) -> bool:
        return name in self._names

    def __getitem__(self, name: str) -> np.ndarray:
        return self.read(name)

    def read(self, name: str, window: slice = slice(None)) -> np.ndarray:
        """Read one dataset, or a window of its first axis.

        Parameters
        ----------
        name : str
            Path of the dataset, such as ``"links/tension"``.
        window : slice
            Which samples [dimensionless]; all by default.

        Returns
        -------
        ndarray, shape (n_samples, ...)
            Its values, in the unit that `unit` tells.

        Raises
        ------
        RecordingError
            If the recording does not have it, or it is damaged.
        """
        if name not in self._names:
            raise RecordingError(f"{self._title}: holds no '{name}'")
        return self._store.read(name, window)

    def names(self) -> list[str]:
        """Return the paths of all channels and shapes that the recording holds, sorted."""
        return list(self._names)

    def unit(self, name: str) -> str:
        """Return the unit of a dataset.

        Parameters
        ----------
        name : str
            Path of the dataset.

        Returns
        -------
        str
            Its unit; ``"1"`` where it is dimensionless.
        """
        return shape(name).unit if name.startswith("geometry/") else channel(name).unit

    def dims(self, name: str) -> tuple[str, ...]:
        """Return the names of the axes of a dataset.

        Parameters
        ----------
        name : str
            Path of the dataset.

        Returns
        -------
        tuple of str
            One name per axis; the first of a channel is ``"time"``.
        """
        if name.startswith("geometry/"):
            return shape(name).dims
        return (TIME.path,) if name == TIME.path else (TIME.path, *channel(name).dims)

    def long_name(self, name: str) -> str:
        """Return what a dataset is.

        Parameters
        ----------
        name : str
            Path of the dataset.

        Returns
        -------
        str
            A few words.
        """
        return shape(name).long_name if name.startswith("geometry/") else channel(name).long_name

    def labels(self, dim: str) -> tuple[str, ...]:
        """Return the labels along an axis.

        Parameters
        ----------
        dim : str
            Name of the axis, such as ``"sprocket"``.

        Returns
        -------
        tuple of str
            Its labels, numbers as texts; none where no dataset has this axis.
        """
        return self._store.labels(dim)

    def rows(self, table: str) -> list[Any]:
        """Return the rows of a table.

        Parameters
        ----------
        table : str
            Path of the table, such as ``"events"``.

        Returns
        -------
        list
            Its rows as named tuples; none if it was never written.
        """
        return to_rows(table, self._store.table(table))

    def close(self) -> None:
        """Close the file behind it, if there is one; reading opens it again."""
        self._store.close()

    @property
    def path(self) -> Path | None:
        """Path of its file; None in memory."""
        return self._store.path

    @cached_property
    def time(self) -> np.ndarray:
        """Times of the samples [s], shape (n_samples,)."""
        return self.read(TIME.path) if TIME.path in self._names else np.empty(0)

    @property
    def attrs(self) -> dict[str, Any]:
        """Root attributes by name."""
        return self._store.attributes()

    @property
    def complete(self) -> bool:
        """Whether everything that was asked for was simulated and written."""
        return bool(self.attrs.get("complete", False))

    @property
    def stop_reason(self) -> str:
        """Why the run ended."""
        return str(self.attrs.get("stop_reason", ""))

    @property
    def sprockets(self) -> tuple[str, ...]:
        """Names of the sprockets in the order of the arrays."""
        return self.labels("sprocket")

    @cached_property
    def strands(self) -> tuple[StrandRow, ...]:
        """Strands in the order of the arrays."""
        rows = self.rows("geometry/strands")
        return tuple(row._replace(carrying=bool(row.carrying)) for row in rows)

    @property
    def events(self) -> list[Event]:
        """Events in the order of time; none before the run was finished."""
        return self.rows("events")

    @property
    def balls(self) -> list[BallRow]:
        """One row per ball; none before the run was finished."""
        return self.rows("balls/table")

    @property
    def extremes(self) -> dict[str, Extreme]:
        """Worst values over every inner step, by name."""
        return {row.name: row for row in self.rows("extremes")}

    @property
    def modes(self) -> list[ModeRow]:
        """Natural modes of the lift at rest."""
        return self.rows("modes")

    @property
    def findings(self) -> list[FindingRow]:
        """Findings as they were judged at the end of the run."""
        return self.rows("findings")

    @cached_property
    def scenario(self) -> Scenario:
        """What was simulated.

        Raises
        ------
        RecordingError
            If this version cannot read the scenario that the recording holds.
        """
        try:
            return self._store.scenario()
        except ScenarioError as error:
            raise RecordingError(f"{self._title}: its scenario cannot be read: {error}") from error

    @property
    def scenario_texts(self) -> Mapping[str, str]:
        """Scenario's text as given (``"text"``) and resolved (``"resolved"``)."""
        return self._store.texts()

    def to_xarray(self) -> Any:
        """Return it as an xarray DataTree (see `chainsim.recording.export.to_xarray`)."""
        from chainsim.recording.export import to_xarray

        return to_xarray(self)

    def export_csv(self, folder: str | Path, **options: Any) -> list[Path]:
        """Write it as CSV files.

        Parameters
        ----------
        folder : str or Path
            Where to.
        **options : object
            As of `chainsim.recording.csv_files.export_csv`.

        Returns
        -------
        list of Path
            The files.
        """
        from chainsim.recording.csv_files import export_csv

        return export_csv(self, folder, **options)

    def export_mat(self, path: str | Path, **options: Any) -> Path:
        """Write it as a MAT file.

        Parameters
        ----------
        path : str or Path
            Path of the file.
        **options : object
            As of `chainsim.recording.export.export_mat`.

        Returns
        -------
        Path
            The file.
        """
        from chainsim.recording.export import export_mat

        return export_mat(self, path, **options)

    @cached_property
    def _names(self) -> dict[str, None]:
        return dict.fromkeys(sorted(self._store.names()))

    @property
    def _title(self) -> str:
        return str(self.path) if self.path else "recording in memory"
