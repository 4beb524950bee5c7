"""A bench on which variants of one scenario are run, for searches that decide as they go.

It is the sweep's own machinery: the same run files, the same engines. A search that is given
a folder goes on where it stopped, because what it has tried is found there.
"""

from __future__ import annotations

import tempfile
from collections.abc import Mapping, Sequence
from pathlib import Path
from types import TracebackType
from typing import Any, NamedTuple

from chainsim.errors import RunError
from chainsim.study.engines import Engine, cores
from chainsim.study.jobs import PROGRAM_FAULT, SIMULATE
from chainsim.study.plan import Keep
from chainsim.study.points import Point, make_point
from chainsim.study.portable import file_text
from chainsim.study.processes import ProcessEngine
from chainsim.study.rows import Row
from chainsim.study.store import Store, rows_of
from chainsim.study.sweep import run_points
from chainsim.study.sweep_parts import Settings, Watcher


class Variant(NamedTuple):
    """One run to be done on the bench.

    Attributes
    ----------
    label : str
        How tables call it.
    values : mapping of str to object
        Values to set, by dotted key, as in a file or in SI.
    base : Scenario or None
        Scenario in which they are set; None takes the bench's own.
    """

    label: str
    values: Mapping[str, Any]
    base: Any = None


class Bench:
    """Runs variants of a scenario and keeps the workers ready between goes.

    Parameters
    ----------
    scenario : Scenario
        What the variants start from.
    folder : str, Path or None
        Folder for the run files; None takes one that is deleted at the end.
    engine : Engine or None
        Does the runs; None takes one worker process per core.
    keep : Keep or None
        What is kept of each run; None keeps all findings and no trajectories.
    task : str
        What does a run, as ``module:function``.
    watcher : Watcher or None
        Follows each go.
    """

    def __init__(
        self,
        scenario: Any,
        folder: str | Path | None = None,
        engine: Engine | None = None,
        keep: Keep | None = None,
        task: str = SIMULATE,
        watcher: Watcher | None = None,
    ) -> None:
        self.scenario = scenario
        self._temporary = (
            tempfile.TemporaryDirectory(prefix="chainsim-") if folder is None else None
        )
        self.store = Store(folder if self._temporary is None else self._temporary.name)  # type: ignore[arg-type]
        self._engine = engine or ProcessEngine(cores(), stay=True)
        self._settings = Settings(keep=keep or Keep(), task=task)
        self._watcher = watcher
        self._texts: dict[int, tuple[Any, str]] = {}
        self.n_runs = 0

    def __enter__(self) -> Bench:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        close = getattr(self._engine, "close", None)
        if close is not None:
            close()
        if self._temporary is not None:
            self._temporary.cleanup()

    def rows(self, variants: Sequence[Variant]) -> list[Row]:
        """Run variants, as many at a time as there are workers.

        Parameters
        ----------
        variants : sequence of Variant
            The variants.

        Returns
        -------
        list of Row
            Their rows, in the same order; a run that could not be completed is `failed`.

        Raises
        ------
        Interrupted
            If the user asked to stop.
        RunError
            If the disk is full, the set-up is wrong, or a run ends in a fault of the program:
            an answer that rests on it would be false.
        """
        points = [self._point(i, variant) for i, variant in enumerate(variants)]
        run_points(points, self.store, self._engine, self._settings, self._watcher)
        self.n_runs += len({point.id for point in points})
        rows = [row for row in rows_of(points, self.store) if row is not None]
        for row in rows:
            if row.failure is not None and row.failure.code == PROGRAM_FAULT:
                raise RunError(f"a run ended in a fault of the program: {row.failure.text}")
        return rows

    def _point(self, index: int, variant: Variant) -> Point:
        base = self.scenario if variant.base is None else variant.base
        if id(base) not in self._texts:
            self._texts[id(base)] = (base, file_text(base))
        text = self._texts[id(base)][1]
        return make_point(index, {"variant": variant.label}, variant.values, base.stem, base, text)
