"""`chainsim build`: the sheet that a workshop builds from, and the outlines of the sprockets."""

from __future__ import annotations

from contextlib import nullcontext
from pathlib import Path
from typing import Any

import click

from chainsim.cli.files import SUFFIX, free_name, stem_of, writable_folder
from chainsim.cli.findings import status_of
from chainsim.cli.frame import (
    HOLDS,
    command,
    force_option,
    json_option,
    out_option,
    print_json,
    strict_option,
)
from chainsim.cli.screen import say, show, shown_path
from chainsim.errors import CallError, UnitError

HDF5 = b"\x89HDF\r\n\x1a\n"
"""First bytes of a recording (HDF5 File Format Specification, superblock)."""


@command("build", short_help="Write the build sheet and the outlines of the sprockets.")
@click.argument("source", type=click.Path(), metavar="FILE|RECORDING")
@out_option("out", "Where sheet and outlines go.")
@click.option("--revision", default="", help="Revision to print; a blank to fill in by default.")
@click.option("--kerf", default="0 mm", show_default=True, help="Width of the cut, to be stated.")
@click.option("--no-outlines", is_flag=True, help="Write no outlines of sprockets.")
@force_option
@json_option
@strict_option
def build(
    source: str,
    out: str,
    revision: str,
    kerf: str,
    no_outlines: bool,
    force: bool,
    as_json: bool,
    strict: bool,
) -> int:
    """Write what a workshop needs to order the parts of a lift and put it together.

    Made of a RECORDING, the sheet says what was simulated; made of a scenario FILE it holds closed
    forms and is stamped NOT SIMULATED. The status is that of the recording's findings.
    """
    from chainsim.report.build_case import case_of
    from chainsim.report.build_stamps import stamps
    from chainsim.report.text import findings_of

    width = _kerf(kerf)
    folder = writable_folder(out)
    with _opened(source) as lift:
        is_run = hasattr(lift, "findings")
        stem = stem_of(lift) if is_run else lift.stem
        files = _sheet(lift, folder, stem, revision, force)
        scenario = lift.scenario if is_run else lift
        if not no_outlines:
            files |= _outlines(scenario, folder, stem, width, force)
        found = stamps(case_of(lift))
        status = status_of(findings_of(lift), scenario.remarks, strict) if is_run else HOLDS
    if as_json:
        print_json(
            {
                "source": source,
                "stamps": [{"stamp": stamp.word, "reason": stamp.reason} for stamp in found],
                "files": {name: str(path.absolute()) for name, path in files.items()},
            }
        )
        return status
    for stamp in found:
        show(f"{stamp.word}: {stamp.reason}")
    show("", *(f"{name:22} {shown_path(path)}" for name, path in files.items()))
    return status


def _opened(source: str) -> Any:
    """Open a recording, or read a scenario; the file's own first bytes decide."""
    if source.endswith((SUFFIX, f"{SUFFIX}.partial")) or _begins_as_recording(source):
        from chainsim.recording import open_recording

        return open_recording(source)
    from chainsim.cli.screen import tell_remarks
    from chainsim.scenario import read_scenario

    scenario = read_scenario(source)
    tell_remarks(source, scenario.remarks)
    return nullcontext(scenario)


def _begins_as_recording(source: str) -> bool:
    path = Path(source)
    if not path.is_file():
        return False
    with path.open("rb") as stream:
        return stream.read(len(HDF5)) == HDF5


def _kerf(text: str) -> float:
    """Return the width of the cut [m]."""
    from chainsim.units import to_si

    try:
        return to_si(text, "length")
    except UnitError as error:
        raise CallError(f"--kerf: {error}") from None


def _sheet(lift: Any, folder: Path, stem: str, revision: str, force: bool) -> dict[str, Path]:
    from chainsim.report.build import render_build

    place = free_name(folder, f"{stem}-build.html", force)
    page, table = render_build(lift, place, revision)
    return {"build sheet": page, "as a table": table}


def _outlines(scenario: Any, folder: Path, stem: str, width: float, force: bool) -> dict[str, Path]:
    """Write the outline of every toothed sprocket; DXF where the package for it is installed."""
    from chainsim.report.outline import outline_dxf, outline_svg

    files: dict[str, Path] = {}
    for name in [sprocket.name for sprocket in scenario.sprocket if sprocket.teeth]:
        path = free_name(folder, f"{stem}-{name}-mm.svg", force)
        path.write_text(outline_svg(scenario, name, width), encoding="utf-8")
        files[f"outline {name}, SVG"] = path
        drawing = free_name(folder, f"{stem}-{name}-mm.dxf", force)
        try:
            outline_dxf(scenario, name, drawing, width)
        except CallError as error:
            say(str(error))
        else:
            files[f"outline {name}, DXF"] = drawing
    return files
