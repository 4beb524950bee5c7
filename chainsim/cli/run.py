"""`chainsim run`: simulate, judge, record, report."""

from __future__ import annotations

import time
from pathlib import Path
from typing import Any

import click

from chainsim.cli.files import free_name, stem_of, writable_folder
from chainsim.cli.findings import run_data, show_verdict, status_of
from chainsim.cli.frame import (
    HOLDS,
    answer_each,
    command,
    explained,
    force_option,
    json_option,
    out_option,
    set_option,
    strict_option,
    tell,
)
from chainsim.cli.screen import say, show, shown_path, tell_remarks
from chainsim.errors import STOPPED_BY_USER, Interrupted, RunError

FOLDER = "out"
"""Where recordings and pages go."""

CLOCK_GRAIN = 2.0
"""Coarsest time stamp of a file system in use [s]."""


@command("run", short_help="Simulate lifts, judge them, record and report.")
@click.argument("files", nargs=-1, type=click.Path(), metavar="FILE…", required=True)
@set_option
@out_option(FOLDER, "Where the recording and the report page go.")
@click.option("--unsure", is_flag=True, help="Repeat it at the ends of the assumed values' ranges.")
@click.option("--verify-step", is_flag=True, help="Repeat it at half and quarter of the step.")
@click.option(
    "--situations",
    metavar="NAMES",
    help='"all" for the proving run, or names of situations between commas.',
)
@click.option("--no-report", is_flag=True, help="Write no report page.")
@click.option("--quiet", is_flag=True, help="Say nothing on standard error but errors.")
@force_option
@json_option
@strict_option
def run(
    files: tuple[str, ...],
    changes: tuple[str, ...],
    out: str,
    as_json: bool,
    strict: bool,
    **options: Any,
) -> int:
    """Simulate scenarios and judge them.

    Each run ends in a verdict, its findings, a recording (DIR/<name>.lift.h5) and a report page.
    Ctrl-C stops a run and keeps what there is.
    """
    from chainsim.scenario import read_scenario

    folder = writable_folder(out)

    def answer(file: str) -> tuple[int, dict[str, Any]]:
        scenario = read_scenario(file, changes)
        if not options["quiet"]:
            tell_remarks(file, scenario.remarks)
        rec = simulated(scenario, folder, options["force"], options["quiet"])
        return _judged(file, scenario, rec, as_json, strict, options)

    return answer_each(files, as_json, answer)


def simulated(scenario: Any, folder: Path, force: bool, quiet: bool) -> Any:
    """Run a scenario, its progress on standard error, and return the recording.

    What a Ctrl-C leaves is opened and returned; it is not complete.
    """
    from chainsim.cli.progress import RunProgress, will_compile
    from chainsim.recording import open_recording
    from chainsim.recording.places import free_path, recording_path
    from chainsim.run import run as simulate
    from chainsim.study.interrupts import StopRequest

    if not quiet and will_compile():
        say("compiling the kernels for this machine: once, about half a minute")
    progress = None if quiet else RunProgress(scenario.stem)

    def follow(simulated: float, duration: float, wall: float) -> None:
        if progress is not None:
            progress(simulated, duration, wall)
        if request.asked:
            raise KeyboardInterrupt

    place = free_path(recording_path(folder, scenario.stem), force)
    begun = time.time()
    try:
        # a signal that comes inside compiled code or a file library can get lost there: it is
        # noted, and acted upon when the block of samples is on its way
        with StopRequest() as request:
            return simulate(scenario, folder, force=force, progress=follow)
    except KeyboardInterrupt:
        say("interrupted: judging what there is; once more to leave at once")
        if not _is_new(place, begun):
            raise Interrupted("interrupted before anything was recorded") from None
        return open_recording(place)
    except RunError as error:
        if _is_new(place, begun):
            raise RunError(f"{error}; what came before is kept in {shown_path(place)}") from error
        raise
    finally:
        if progress is not None:
            progress.end()


def _is_new(path: Path, begun: float) -> bool:
    """Whether a file was written since a moment."""
    return path.exists() and path.stat().st_mtime >= begun - CLOCK_GRAIN


def _judged(
    file: str, scenario: Any, rec: Any, as_json: bool, strict: bool, options: dict[str, Any]
) -> tuple[int, dict[str, Any]]:
    """Print a run and write its page; then do the studies that were asked for."""
    from chainsim.report.text import findings_of

    page = None if options["no_report"] else _page(rec, options["force"])
    status = status_of(findings_of(rec), scenario.remarks, strict)
    data = {"file": file, **run_data(rec, scenario.remarks)}
    data["report"] = str(page) if page else None
    if not as_json:
        show_verdict(rec)
        show_places(rec, page)
    if not rec.complete:
        say(f"{file}: stopped before its end ({rec.stop_reason}); what there is was kept")
        return STOPPED_BY_USER, data
    return max(status, _studies(scenario, data, as_json, options)), data


def _page(rec: Any, force: bool) -> Path | None:
    """Write the report page beside the recording, where there is enough to show."""
    from chainsim.errors import RecordingError
    from chainsim.report import render_report

    try:
        path = free_name(rec.path.parent, f"{stem_of(rec)}.html", force)
        return render_report(rec, path).absolute()
    except RecordingError as error:
        say(f"no report page: {error}")
        return None


def show_places(rec: Any, page: Path | None) -> None:
    """Print where the recording and the page are."""
    show(f"\nRecording  {shown_path(rec.path)}")
    if page is not None:
        show(f"Report     {shown_path(page)}")
        show("The report shows the motion, what the model cannot see, and the cautions.")


def _studies(scenario: Any, data: dict[str, Any], as_json: bool, options: dict[str, Any]) -> int:
    """Repeat the run as asked; add the answers to the data, and return the worst status."""
    from chainsim.cli import repeats

    status = HOLDS
    named = ",".join(scenario.run.situations or ())
    chosen: tuple[tuple[str, Any, Any], ...] = (
        ("verify_step", options["verify_step"], repeats.step_check),
        ("unsure", options["unsure"], repeats.unsure_values),
        ("proving", options["situations"] or named, repeats.proving_run),
    )
    for name, asked, study in chosen:
        if not asked:
            continue
        try:
            found = study(scenario, asked, options["quiet"])
        except Interrupted as error:
            tell(explained(error))
            return STOPPED_BY_USER
        data[name] = found.data
        status = max(status, found.status)
        if not as_json:
            show("", found.table)
    if "proving" in data:
        data["situations"] = _together(data["situations"], data["proving"]["situations"])
        if not as_json:
            show(f"Not run at all: {', '.join(data['situations']['not_run']) or 'none'}")
    return status


def _together(first: dict[str, Any], proven: dict[str, Any]) -> dict[str, list[str]]:
    """Situations that were run in the recorded run or in a run of their own, and the rest."""
    run = [*first["run"], *(name for name in proven["run"] if name not in first["run"])]
    return {"run": run, "not_run": [name for name in first["not_run"] if name not in run]}
