"""What `chainsim run` repeats a run for: its step, its unsure values, other situations."""

from __future__ import annotations

from typing import Any, NamedTuple

from chainsim.cli.frame import FAILS, HOLDS
from chainsim.cli.screen import say

ALL = "all"


class Repeated(NamedTuple):
    """Answer of a study.

    Attributes
    ----------
    status : int
        Exit status that it asks for (dimensionless).
    table : object
        For `rich` to print.
    data : object
        Plain data.
    """

    status: int
    table: Any
    data: Any


def step_check(scenario: Any, asked: bool, quiet: bool) -> Repeated:
    """Run at the full, half and quarter step."""
    from chainsim.cli.progress import RunProgress
    from chainsim.report.study_tables import drift_table
    from chainsim.run import run
    from chainsim.study.as_data import drift_data
    from chainsim.study.step_check import verify_step

    def repeat(changed: Any) -> Any:
        progress = None if quiet else RunProgress(f"{scenario.stem}, step check")
        return run(changed, keep="summary", progress=progress)

    drifts = verify_step(scenario, repeat)
    return Repeated(HOLDS, drift_table(drifts), drift_data(drifts))


def unsure_values(scenario: Any, asked: bool, quiet: bool) -> Repeated:
    """Run at both ends of every unsure value's range."""
    from chainsim.report.study_tables import unsure_table
    from chainsim.scenario.table import leaves
    from chainsim.study.as_data import unsure_data
    from chainsim.study.unsure import unsure

    if not quiet:
        say(f"{len(scenario.uncertain())} unsure values: a run at each end of their ranges")
    with bench_for(scenario, quiet) as bench:
        found = unsure(scenario, bench)
    kinds = {leaf.key: leaf.unit_kind for leaf in leaves(scenario)}
    return Repeated(HOLDS, unsure_table(found, kinds), unsure_data(found))


def proving_run(scenario: Any, asked: str, quiet: bool) -> Repeated:
    """Run through situations, each from a start of its own."""
    from chainsim.report.study_tables import proving_table
    from chainsim.scenario.schema_run import SITUATIONS
    from chainsim.study.as_data import proving_data
    from chainsim.study.proving import prove

    names = SITUATIONS if asked == ALL else [name.strip() for name in asked.split(",")]
    with bench_for(scenario, quiet) as bench:
        proof = prove(scenario, bench, names)
    fails = any(f["outcome"] == "fails" for row in proof.rows.values() for f in row.findings)
    return Repeated(FAILS if fails else HOLDS, proving_table(proof), proving_data(proof))


def bench_for(scenario: Any, quiet: bool, folder: str | None = None) -> Any:
    """Return a bench whose progress shows on standard error."""
    from chainsim.study.bench import Bench
    from chainsim.study.progress import progress

    return Bench(scenario, folder=folder, watcher=None if quiet else progress())
