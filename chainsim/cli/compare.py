"""`chainsim compare`: runs side by side."""

from __future__ import annotations

from contextlib import ExitStack
from dataclasses import asdict
from pathlib import Path
from typing import Any

import click

from chainsim.cli.files import free_name, writable_folder
from chainsim.cli.frame import (
    HOLDS,
    command,
    force_option,
    json_option,
    out_option,
    print_json,
)
from chainsim.cli.screen import show, shown_path

PAGE = "comparison.html"


@command("compare", short_help="Set runs side by side: inputs, findings, plots.")
@click.argument("recordings", nargs=-1, required=True, type=click.Path(), metavar="RECORDING…")
@out_option("out", "Where the page goes.")
@click.option("--no-report", is_flag=True, help="Write no page.")
@force_option
@json_option
def compare(
    recordings: tuple[str, ...], out: str, no_report: bool, force: bool, as_json: bool
) -> int:
    """Say what differs in the inputs of runs, then set their findings side by side.

    Changes are those against the first recording.
    """
    from chainsim.recording import open_recording
    from chainsim.report import compare as set_side_by_side
    from chainsim.report import comparison_table, render_comparison

    with ExitStack() as stack:
        runs = [stack.enter_context(open_recording(name)) for name in recordings]
        found = set_side_by_side(runs)
        page = None
        if not no_report:
            place = free_name(writable_folder(out), PAGE, force)
            page = render_comparison(found, place).absolute()
        if as_json:
            print_json(_data(found, page))
            return HOLDS
        show("", comparison_table(found))
        if page is not None:
            show(f"\nReport  {shown_path(page)}")
    return HOLDS


def _data(found: Any, page: Path | None) -> dict[str, Any]:
    """A comparison as plain data."""
    return {
        "runs": [
            {"name": name, "recording": str(rec.path.absolute())}
            for name, rec in zip(found.names, found.runs, strict=True)
        ],
        "inputs": [asdict(difference) for difference in found.inputs],
        "findings": [asdict(row) for row in found.findings],
        "report": str(page) if page else None,
    }
