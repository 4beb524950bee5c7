"""The build sheet: what a workshop needs to order the parts of a lift and put it together.

One self-contained page that prints, and the same lines as CSV. Made from a recording where there
is one, else from closed forms, and every line says which.
"""

from __future__ import annotations

import csv
import io
from datetime import date
from pathlib import Path
from typing import Any, NamedTuple

from markupsafe import Markup

from chainsim import __version__
from chainsim.findings import verdict
from chainsim.findings.situations import Situations
from chainsim.report.build_assembly import assembly_steps
from chainsim.report.build_balls import balls_part
from chainsim.report.build_case import Case, case_of
from chainsim.report.build_cautions import sheet_cautions
from chainsim.report.build_chain import carriers_part, chain_part
from chainsim.report.build_checks import checks_part
from chainsim.report.build_direction import direction_part
from chainsim.report.build_drive import drive_part
from chainsim.report.build_line import SOURCE_TEXTS, Part
from chainsim.report.build_order import order_part
from chainsim.report.build_setting import takeup_part
from chainsim.report.build_shaft import shaft_part
from chainsim.report.build_stamps import stamps
from chainsim.report.build_tolerances import tolerances_part
from chainsim.report.build_view import part_view
from chainsim.report.build_wear import wear_part
from chainsim.report.build_wheels import axles_part, sprockets_part
from chainsim.report.findings_view import grouped
from chainsim.report.layout import layout_svg
from chainsim.report.page import csp_hash, environment, resource
from chainsim.report.text import BLIND_SPOTS, DEFERS, readable
from chainsim.study.wear import WearStudy

PARTS = (
    order_part,
    chain_part,
    carriers_part,
    sprockets_part,
    axles_part,
    takeup_part,
    drive_part,
    shaft_part,
    direction_part,
    balls_part,
    wear_part,
    tolerances_part,
    checks_part,
)
"""Parts of the sheet in their order; one that does not apply gives None."""

SIGNATURES = ("drawn by", "checked by", "released by", "built by", "commissioned by")

CSV_HEADINGS = (
    "part",
    "of",
    "item",
    "value",
    "unit",
    "accept from",
    "accept to",
    "known by",
    "note",
)


class Head(NamedTuple):
    """Head of a sheet.

    Attributes
    ----------
    rows : tuple of (str, str)
        What and value.
    stamps : tuple of Stamp
        What it must not be used for.
    """

    rows: tuple[tuple[str, str], ...]
    stamps: tuple[Any, ...]


def render_build(
    source: Any,
    path: str | Path,
    revision: str = "",
    day: date | None = None,
    wear: WearStudy | None = None,
) -> tuple[Path, Path]:
    """Write the build sheet of a lift as a page and as CSV beside it.

    Parameters
    ----------
    source : Scenario or Recording
        The lift, or one that was run.
    path : str or Path
        Page to write; the CSV has its name with another ending.
    revision : str
        Revision to print; a blank to fill in where it is empty.
    day : date, optional
        Date to print; today by default.
    wear : WearStudy, optional
        What runs with the chain grown showed, to tell when a finding first fails.

    Returns
    -------
    page, table : Path
        The files written.

    Raises
    ------
    LayoutError
        If the layout is impossible.
    """
    page = Path(path)
    case = case_of(source, wear)
    parts = sheet_parts(case)
    head = sheet_head(case, revision, day or date.today())
    page.write_text(_html(case, head, parts), encoding="utf-8")
    table = page.with_suffix(".csv")
    table.write_text(_csv(head, parts), encoding="utf-8", newline="")
    return page, table


def build_csv(source: Any, revision: str = "", day: date | None = None) -> str:
    """Return the build sheet of a lift as CSV.

    Parameters
    ----------
    source : Scenario or Recording
        The lift, or one that was run.
    revision : str
        Revision to print.
    day : date, optional
        Date to print; today by default.
    """
    case = case_of(source)
    return _csv(sheet_head(case, revision, day or date.today()), sheet_parts(case))


def sheet_parts(case: Case) -> list[Part]:
    """Return all parts of a sheet that apply.

    Parameters
    ----------
    case : Case
        The lift.
    """
    return [part for write in PARTS if (part := write(case)) is not None]


def sheet_head(case: Case, revision: str, day: date) -> Head:
    """Return the head of a sheet.

    Parameters
    ----------
    case : Case
        The lift.
    revision : str
        Revision; empty for a blank.
    day : date
        Date of the sheet.
    """
    scenario = case.scenario
    run = case.run.rec if case.run is not None else None
    made_from = "the scenario alone: closed forms, NOT SIMULATED"
    if run is not None:
        name = run.path.name if run.path else "a recording in memory"
        made_from = f"{name}, recorded {run.attrs.get('created', 'at an unknown date')}"
    view = "from behind" if case.is_from_back else "from the front"
    rows = (
        ("title", scenario.title or scenario.stem),
        ("revision", revision),
        ("date", day.isoformat()),
        ("scenario", scenario.file.replace("\\", "/").rsplit("/", 1)[-1]),
        ("hash of the scenario", scenario.sha256),
        ("made from", made_from),
        ("view", f"all of it as seen {view}; right and up are positive"),
        ("made by", f"chainsim {__version__}"),
    )
    return Head(rows, tuple(stamps(case)))


def _html(case: Case, head: Head, parts: list[Part]) -> str:
    style = resource("page.css") + resource("build.css")
    reserve = case.scenario.limits.reserve
    situations = Situations(list(case.situations_run), list(case.situations_not_run))
    page = environment().get_template("build.html.j2")
    return page.render(
        version=__version__,
        style=Markup(style),
        style_hash=csp_hash(style),
        script="",
        script_hash=csp_hash(""),
        title=f"Build sheet: {case.scenario.title or case.scenario.stem}",
        head=head,
        signatures=SIGNATURES,
        sources=SOURCE_TEXTS,
        verdict=readable(verdict(case.findings, situations)) if case.findings else "",
        layout=Markup(layout_svg(case.lift)),
        parts=[part_view(part) for part in parts],
        steps=assembly_steps(case),
        groups=grouped(list(case.findings), reserve, []) if case.findings else [],
        blind=BLIND_SPOTS,
        cautions=sheet_cautions(case),
        defers=DEFERS,
    )


def _csv(head: Head, parts: list[Part]) -> str:
    out = io.StringIO()
    table = csv.writer(out, lineterminator="\r\n")
    table.writerow(CSV_HEADINGS)
    for what, value in head.rows:
        table.writerow(("head", "", what, value, "", "", "", "", ""))
    for stamp in head.stamps:
        table.writerow(("stamp", "", stamp.word, "yes", "", "", "", "", stamp.reason))
    for part in parts:
        for line in part.lines:
            number = line.number if line.is_known else line.text
            low, high = line.shown(line.low), line.shown(line.high)
            unit = line.sheet_unit if line.is_known or low or high else ""
            table.writerow(
                (part.title, line.subject, line.item, _plain(number), unit, _plain(low),
                 _plain(high), line.source, line.note)
            )  # fmt: skip
    return out.getvalue()


def _plain(text: str) -> str:
    """Return a number as a spreadsheet reads it: with the minus of the keyboard."""
    return text.replace("−", "-") if text.startswith("−") else text
