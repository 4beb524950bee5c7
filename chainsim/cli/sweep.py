"""`chainsim sweep`: many variants of a lift, by a plan; it goes on where it stopped."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from chainsim.cli.frame import HOLDS, command, json_option, out_option, print_json
from chainsim.cli.screen import say, show, shown_path
from chainsim.errors import RUN_COULD_NOT_BE_COMPLETED, CallError

PAGE = "sweep.html"


@command("sweep", short_help="Run the variants of a plan, and rank them.")
@click.argument("plan", type=click.Path())
@out_option(None, "Folder of its run files; by default beside PLAN, with its name.")
@click.option("--dry-run", is_flag=True, help="Say how many runs, time and disk; run nothing.")
@click.option("--list", "listed", is_flag=True, help="List every run and its state; run nothing.")
@click.option("--only-failed", is_flag=True, help="Try the failed runs again, and nothing else.")
@click.option("--part", metavar="I/N", help="Do only the I-th of N parts, for job arrays.")
@click.option("--csv", metavar="FILE", help="Write all finished runs there as a table.")
@json_option
def sweep(
    plan: str,
    out: str | None,
    dry_run: bool,
    listed: bool,
    only_failed: bool,
    part: str | None,
    csv: str | None,
    as_json: bool,
) -> int:
    """Run every variant of a plan that is not finished yet, and rank them.

    The status is 0 when all runs were completed, whatever their findings; 3 when some could not be.
    """
    from chainsim.study.plan_reading import read_plan
    from chainsim.study.progress import progress
    from chainsim.study.sweeping import open_sweep

    if dry_run and listed:
        raise CallError("sweep: ask for --dry-run or for --list, not for both")
    opened = open_sweep(read_plan(plan), out, part)
    if listed:
        return _list(opened, as_json)
    ahead = opened.forecast(only_failed)
    if dry_run:
        return _dry_run(opened, ahead, as_json)
    say(f"{opened.plan.title}: {ahead}")
    tally = opened.run(only_failed, progress())
    files = _write(opened, csv)
    if as_json:
        from chainsim.study.as_data import sweep_data

        print_json(sweep_data(opened, tally) | {name: str(p) for name, p in files.items()})
    else:
        from chainsim.report.study_tables import sweep_table

        show(sweep_table(opened), "")
        for name, path in files.items():
            show(f"{name:8} {shown_path(path)}")
    return RUN_COULD_NOT_BE_COMPLETED if tally.failed else HOLDS


def _dry_run(opened: Any, ahead: Any, as_json: bool) -> int:
    """Say what is ahead."""
    if as_json:
        print_json({"plan": opened.plan.file, **vars(ahead)})
    else:
        show(f"{opened.plan.title}: {ahead}", "Nothing was run.")
    return HOLDS


def _list(opened: Any, as_json: bool) -> int:
    """List every run and its state."""
    if not as_json:
        from chainsim.report.study_tables import list_table

        show(list_table(opened))
        return HOLDS
    print_json(
        [
            {
                "id": point.id,
                "choices": dict(point.labels),
                "state": line.state if line else "to do",
                "outcome": line.outcome if line else None,
                "text": line.text if line else None,
            }
            for point, line in opened.entries()
        ]
    )
    return HOLDS


def _write(opened: Any, csv: str | None) -> dict[str, Path]:
    """Write page and table of what is finished; both are of this sweep, and replaced by it."""
    from chainsim.report.sweep_page import render_sweep
    from chainsim.study.export import export_csv

    files = {"report": render_sweep(opened, opened.store.folder / PAGE).absolute()}
    if csv is not None:
        files["csv"] = export_csv(opened, csv).absolute()
    return files
