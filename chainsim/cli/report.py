"""`chainsim report`: page, plots and exports of recordings."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from chainsim.cli.files import free_name, stem_of, writable_folder
from chainsim.cli.findings import run_data, show_verdict, status_of
from chainsim.cli.frame import (
    answer_each,
    command,
    force_option,
    json_option,
    out_option,
    strict_option,
)
from chainsim.cli.screen import show, shown_path


@command("report", short_help="Write the report page of recordings, plots, exports.")
@click.argument("recordings", nargs=-1, required=True, type=click.Path(), metavar="RECORDING…")
@out_option(None, "Where the page goes; beside the recording by default.")
@click.option("--plots", metavar="DIR", help="Write every plot there, as SVG and PNG.")
@click.option("--csv", metavar="DIR", help="Write every channel and table there, as CSV.")
@click.option("--mat", metavar="DIR", help="Write the recording there as a MAT file.")
@click.option("--animation", type=click.Choice(["gif", "mp4"]), help="Write the motion too.")
@force_option
@json_option
@strict_option
def report(recordings: tuple[str, ...], as_json: bool, strict: bool, **options: Any) -> int:
    """Write the report page of recordings, and what else is asked for."""
    from chainsim.recording import open_recording
    from chainsim.report.text import findings_of

    options["apart"] = len(recordings) > 1

    def answer(name: str) -> tuple[int, dict[str, Any]]:
        with open_recording(name) as rec:
            files = _write(rec, options)
            remarks = rec.scenario.remarks
            if not as_json:
                show_verdict(rec)
                show("", *(f"{what:10} {shown_path(path)}" for what, path in files.items()))
            data = {"file": name, **run_data(rec, remarks)}
            data |= {what: str(path.absolute()) for what, path in files.items()}
            return status_of(findings_of(rec), remarks, strict), data

    return answer_each(recordings, as_json, answer)


def _write(rec: Any, options: dict[str, Any]) -> dict[str, Path]:
    """Write everything that was asked for; what, and its file or folder."""
    from chainsim.report import animate, render_report, write_plots

    stem, force = stem_of(rec), options["force"]
    own = stem if options["apart"] else "."  # of several recordings, each has its own folder
    folder = writable_folder(options["out"] or rec.path.parent)
    written = {"report": render_report(rec, free_name(folder, f"{stem}.html", force))}
    if options["plots"]:
        written["plots"] = writable_folder(Path(options["plots"]) / own)
        write_plots(rec, written["plots"])
    if options["csv"]:
        written["csv"] = writable_folder(Path(options["csv"]) / own)
        rec.export_csv(written["csv"])
    if options["mat"]:
        place = free_name(writable_folder(options["mat"]), f"{stem}.mat", force)
        written["mat"] = rec.export_mat(place)
    if options["animation"]:
        written["animation"] = animate(
            rec, free_name(folder, f"{stem}.{options['animation']}", force)
        )
    return written
