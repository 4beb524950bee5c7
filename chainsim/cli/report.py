"""`chainsim report`: page, plots and exports of recordings."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from chainsim.cli.findings import run_data, show_verdict, status_of
from chainsim.cli.frame import (
    command,
    explained,
    force_option,
    json_option,
    out_option,
    print_json,
    strict_option,
    tell,
)
from chainsim.cli.screen import show, shown_path
from chainsim.errors import ChainsimError

SUFFIX = ".lift.h5"


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
    options["apart"] = len(recordings) > 1
    answers = [_answer(name, as_json, strict, options) for name in recordings]
    if as_json:
        data = [answer for _, answer in answers]
        print_json(data[0] if len(recordings) == 1 else data)
    return max(status for status, _ in answers)


def _answer(
    name: str, as_json: bool, strict: bool, options: dict[str, Any]
) -> tuple[int, dict[str, Any]]:
    """Status and plain data of one recording; for people it is printed at once."""
    from chainsim.recording import open_recording
    from chainsim.report.text import findings_of

    try:
        with open_recording(name) as rec:
            files = _write(rec, options)
            remarks = rec.scenario.remarks
            if not as_json:
                show_verdict(rec)
                show("")
                for what, paths in files.items():
                    show(f"{what:10} {_places(paths)}")
            data = run_data(rec, remarks)
            data |= {
                what: [str(path.absolute()) for path in paths] for what, paths in files.items()
            }
            return status_of(findings_of(rec), remarks, strict), data
    except (ChainsimError, OSError) as error:
        told = explained(error)
        tell(told)
        return told.status, {"recording": name, **told.data()}


def _places(paths: list[Path]) -> str:
    if len(paths) == 1:
        return shown_path(paths[0])
    return f"{len(paths)} files in {shown_path(paths[0].parent)}"


def _write(rec: Any, options: dict[str, Any]) -> dict[str, list[Path]]:
    """Write everything that was asked for; what, and the files of each."""
    from chainsim.report import animate, render_report, write_plots

    stem = rec.path.name.removesuffix(SUFFIX)
    folder = Path(options["out"]) if options["out"] else rec.path.parent
    folder.mkdir(parents=True, exist_ok=True)

    def free(place: Path, ending: str) -> Path:
        from chainsim.recording.places import free_path

        return free_path(place / f"{stem}{ending}", options["force"])

    written = {"report": [render_report(rec, free(folder, ".html"))]}
    own = stem if options["apart"] else "."  # of several recordings, each has its own folder
    if options["plots"]:
        written["plots"] = write_plots(rec, Path(options["plots"]) / own)
    if options["csv"]:
        written["csv"] = rec.export_csv(Path(options["csv"]) / own)
    if options["mat"]:
        place = Path(options["mat"])
        place.mkdir(parents=True, exist_ok=True)
        written["mat"] = [rec.export_mat(free(place, ".mat"))]
    if options["animation"]:
        written["animation"] = [animate(rec, free(folder, f".{options['animation']}"))]
    return written
