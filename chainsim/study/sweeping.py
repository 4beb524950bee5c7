"""A whole sweep, from its plan file to its rows: what the command line and notebooks call."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from chainsim.errors import CallError
from chainsim.study.engines import Engine, engine_of
from chainsim.study.forecast import Forecast, forecast
from chainsim.study.index import Entry, Index
from chainsim.study.jobs import SIMULATE
from chainsim.study.maps import Map, maps
from chainsim.study.plan import Plan
from chainsim.study.points import Point, points
from chainsim.study.ranking import Ranked, rank
from chainsim.study.rows import Row
from chainsim.study.store import Store, done_rows, rows_of
from chainsim.study.sweep import run_points
from chainsim.study.sweep_parts import Settings, Tally, Watcher


@dataclass(frozen=True)
class Sweep:
    """A plan with its points and its folder of run files.

    Attributes
    ----------
    plan : Plan
        The plan.
    points : tuple of Point
        Its points, or those of one part of it.
    store : Store
        Its run files.
    part : tuple of int or None
        (i, n) where only one part of the plan is done.
    """

    plan: Plan
    points: tuple[Point, ...]
    store: Store
    part: tuple[int, int] | None = None

    @property
    def index_name(self) -> str:
        """File name of the index; every part has its own, since only its driver writes it."""
        return f"index-{self.part[0]}-of-{self.part[1]}.sqlite" if self.part else "index.sqlite"

    def forecast(self, only_failed: bool = False) -> Forecast:
        """What is ahead. Nothing is run.

        Parameters
        ----------
        only_failed : bool
            True where only failed runs are tried again.

        Returns
        -------
        Forecast
            Runs, time and disk.
        """
        return forecast(
            self.points,
            self.store,
            engine_of(self.plan.engine).workers,
            self.plan.keep.trajectories,
            only_failed,
            self.index_name,
        )

    def run(
        self,
        only_failed: bool = False,
        watcher: Watcher | None = None,
        engine: Engine | None = None,
        task: str = SIMULATE,
    ) -> Tally:
        """Do what is not done yet.

        Parameters
        ----------
        only_failed : bool
            True to try the failed runs again and nothing else.
        watcher : Watcher or None
            Follows the progress.
        engine : Engine or None
            Does the runs; None takes the plan's choice.
        task : str
            What does a run, as ``module:function``.

        Returns
        -------
        Tally
            What became of the points.

        Raises
        ------
        Interrupted
            If the user asked to stop; everything finished is kept.
        RunError
            If the sweep cannot go on.
        """
        settings = Settings(
            keep=self.plan.keep,
            task=task,
            only_failed=only_failed,
            give_up_after=self.plan.engine.give_up_after,
            index_name=self.index_name,
        )
        engine = engine or engine_of(self.plan.engine)
        return run_points(self.points, self.store, engine, settings, watcher)

    def rows(self) -> list[Row | None]:
        """Rows in the order of the points; None where a run is not done yet."""
        return rows_of(self.points, self.store)

    def ranking(self) -> list[Ranked]:
        """Completed variants, best first, by the findings that the plan keeps."""
        return rank(done_rows(self.points, self.store), self.plan.keep.findings)

    def maps(self) -> list[Map]:
        """Maps of a grid over its two longest axes; empty for a sample."""
        if self.plan.sample.kind != "grid":
            return []
        return maps(self.plan.axes, self.points, self.rows(), self.plan.keep.findings)

    def entries(self) -> list[tuple[Point, Entry | None]]:
        """Every point with its line of the index; None where it is not done yet."""
        if not self.store.folder.exists():
            return [(point, None) for point in self.points]
        index = Index(self.store, self.index_name)
        index.catch_up()
        known = index.entries()
        index.close()
        return [(point, known.get(point.id)) for point in self.points]


def open_sweep(plan: Plan, out: str | Path | None = None, part: str | None = None) -> Sweep:
    """Open a sweep. Nothing is run, and nothing is written.

    Parameters
    ----------
    plan : Plan
        The plan.
    out : str, Path or None
        Folder for its run files; None takes one beside the plan, named after it.
    part : str or None
        ``i/n`` to do only every n-th point, starting at the i-th.

    Returns
    -------
    Sweep
        The sweep, with whatever was finished before.

    Raises
    ------
    CallError
        If `part` is not written so.
    ScenarioError
        If a key or value of the plan does not fit its scenario.
    """
    folder = Path(out) if out is not None else plan.folder / f"{Path(plan.file).stem}.sweep"
    chosen = _part(part) if part is not None else None
    return Sweep(plan, tuple(points(plan, chosen)), Store(folder), chosen)


def _part(text: str) -> tuple[int, int]:
    pieces = text.split("/")
    if len(pieces) != 2 or not all(piece.isdecimal() for piece in pieces):
        raise CallError(f"part {text!r}: needs the form i/n, such as 3/16")
    return int(pieces[0]), int(pieces[1])
