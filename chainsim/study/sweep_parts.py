"""What goes into a sweep and what comes out: settings, tally, and who watches it."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Protocol

from chainsim.study.engines import Engine
from chainsim.study.jobs import SIMULATE, Outcome
from chainsim.study.plan import Keep


class Watcher(Protocol):
    """What follows a sweep while it runs."""

    def begin(self, planned: int, reused: int, engine: Engine) -> None:
        """The sweep starts: so many runs planned, so many finished before."""
        ...

    def report(self, outcome: Outcome | None) -> None:
        """A run has ended, or (None) a moment has passed."""
        ...

    def stopping(self) -> None:
        """The user has asked to stop; runs in hand are being finished."""
        ...

    def end(self) -> None:
        """The sweep is over, for whatever reason."""
        ...


@dataclass(frozen=True)
class Tally:
    """What became of the points of a sweep.

    Attributes
    ----------
    planned : int
        Points of the plan, or of the part of it (dimensionless).
    reused : int
        Points whose run was finished before (dimensionless).
    computed : int
        Runs finished now (dimensionless).
    failed : int
        Runs recorded as failed, earlier ones included (dimensionless).
    """

    planned: int
    reused: int
    computed: int
    failed: int


@dataclass(frozen=True)
class Settings:
    """How a sweep is carried out.

    Attributes
    ----------
    keep : Keep
        What is kept of every run.
    task : str
        What does a run, as ``module:function``.
    only_failed : bool
        True to try the failed runs again and nothing else.
    give_up_after : int
        Equal failures in a row that stop the sweep (dimensionless).
    index_name : str
        File name of the index.
    """

    keep: Keep = field(default_factory=Keep)
    task: str = SIMULATE
    only_failed: bool = False
    give_up_after: int = 20
    index_name: str = "index.sqlite"
