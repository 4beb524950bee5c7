"""The plan of a sweep: which scenario, what varies, what to keep, where it runs.

A plan is a TOML file::

    format = 1
    title = "Driven at the head or at the tail"
    scenario = "head-driven.toml"            # path from the plan's own folder
    seed = 7                                 # left out: every run keeps the scenario's seed
    set = { "run.duration" = "8 s" }         # for all runs

    [[axis]]                                 # listed values of one key
    key = "sprocket.tail.mount.mass"
    values = ["0.1 kg", "0.2 kg", "0.4 kg"]

    [[axis]]                                 # a range; log = true for equal ratios
    key = "drive.chain_speed"
    range = ["0.05 m/s", "0.6 m/s"]
    count = 12

    [[axis]]                                 # several keys moved together
    together = { "chain.pitch" = ["8 mm", "10 mm"], "sprocket.head.teeth" = [10, 8] }

    [[axis]]                                 # whole alternatives
    name = "drive"
    [[axis.choice]]
    name = "head"
    [[axis.choice]]
    name = "tail"
    scenario = "tail-driven.toml"            # or set = { … }

    [[axis]]                                 # a tolerance; needs a [sample]
    key = "balls.mass"
    distribution = { kind = "normal", mean = "16 g", deviation = "0.2 g" }

    [sample]                                 # left out: the full grid
    kind = "sobol"                           # "grid" | "sobol" | "latin" | "halton" | "indices"
    count = 64

    [keep]
    findings = ["carrying_strand_taut"]      # left out: all
    summary = ["peak_tension"]               # left out: all
    trajectories = false

    [engine]
    kind = "processes"                       # "serial" | "processes" | "dask"
    workers = 2
    wall_limit = 600                         # seconds for one run, of the clock on the wall
    give_up_after = 20                       # equal failures in a row
    address = "tcp://host:8786"              # dask: a running scheduler
    slurm = { queue = "short", walltime = "01:00:00", jobs = 20, memory = "4 GB" }
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from chainsim.study.axes import Axis

PLAN_FORMAT = 1
SAMPLE_KINDS = ("grid", "sobol", "latin", "halton", "indices")
ENGINE_KINDS = ("serial", "processes", "dask")


@dataclass(frozen=True)
class Keep:
    """What is kept of every run.

    Attributes
    ----------
    findings : tuple of str
        Names of the findings; empty keeps all.
    summary : tuple of str
        Names of the summary values; empty keeps all.
    trajectories : bool
        True to keep a whole recording beside every row.
    """

    findings: tuple[str, ...] = ()
    summary: tuple[str, ...] = ()
    trajectories: bool = False


@dataclass(frozen=True)
class Sample:
    """How points are taken from the axes.

    Attributes
    ----------
    kind : str
        `grid`: every combination; `sobol`, `latin`, `halton`: a space-filling sample;
        `indices`: the design from which Sobol indices are worked out.
    count : int
        Number of points, or of base points for `indices` (dimensionless).
    """

    kind: str = "grid"
    count: int = 0


@dataclass(frozen=True)
class EngineChoice:
    """Where the runs are done.

    Attributes
    ----------
    kind : str
        `serial`, `processes` or `dask`.
    workers : int or None
        Number of worker processes (dimensionless); None takes one per core.
    address : str or None
        Address of a running dask scheduler.
    slurm : mapping of str to object or None
        Settings of a SLURM queue.
    wall_limit : float or None
        Longest time for one run [s], by the clock on the wall; None for no limit.
    give_up_after : int
        Equal failures in a row that stop the sweep (dimensionless).
    """

    kind: str = "processes"
    workers: int | None = None
    address: str | None = None
    slurm: Mapping[str, Any] | None = None
    wall_limit: float | None = None
    give_up_after: int = 20


@dataclass(frozen=True)
class Plan:
    """A sweep as its plan file describes it.

    Attributes
    ----------
    file : str
        Name of the plan file, for messages.
    folder : Path
        Folder from which the plan's paths are taken.
    title : str
        Title for tables and pages.
    scenario : str
        Scenario file, as the plan has it.
    axes : tuple of Axis
        What varies; at least one.
    fixed : mapping of str to object
        Values set for every run, by dotted key.
    sample : Sample
        How points are taken.
    keep : Keep
        What is kept.
    engine : EngineChoice
        Where the runs are done.
    seed : int or None
        Seed of the study (dimensionless); None leaves every run the scenario's own.
    lines : mapping of str to int
        Line of each axis in the plan file, by axis name (dimensionless).
    """

    file: str
    folder: Path
    title: str
    scenario: str
    axes: tuple[Axis, ...]
    fixed: Mapping[str, Any] = field(default_factory=dict)
    sample: Sample = field(default_factory=Sample)
    keep: Keep = field(default_factory=Keep)
    engine: EngineChoice = field(default_factory=EngineChoice)
    seed: int | None = None
    lines: Mapping[str, int] = field(default_factory=dict)
