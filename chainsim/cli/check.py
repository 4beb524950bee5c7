"""`chainsim check`: validate, draw to scale, size; nothing is simulated."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from chainsim.cli.files import free_name, writable_folder
from chainsim.cli.frame import (
    FAILS,
    HOLDS,
    answer_each,
    command,
    force_option,
    json_option,
    out_option,
    print_json,
    set_option,
    strict_option,
)
from chainsim.cli.screen import heading, say, show, shown_path, tell_remarks
from chainsim.errors import CallError

if TYPE_CHECKING:
    from chainsim.cli.sheet import Sheet


@command("check", short_help="Validate, draw to scale and size lifts; nothing is simulated.")
@click.argument("files", nargs=-1, type=click.Path(), metavar="FILE…")
@click.option("--full", is_flag=True, help="Show every value and where it came from.")
@click.option("--schema", is_flag=True, help="Print the JSON Schema of scenario files.")
@set_option
@out_option(None, "Write the drawing there, as FILE's name with .svg.")
@force_option
@json_option
@strict_option
def check(
    files: tuple[str, ...],
    full: bool,
    schema: bool,
    changes: tuple[str, ...],
    out: str | None,
    force: bool,
    as_json: bool,
    strict: bool,
) -> int:
    """Validate scenarios, draw them to scale, and print their sizing sheets.

    Nothing is simulated.
    """
    if schema:
        from chainsim.scenario import json_schema

        print_json(json_schema())
        return HOLDS
    if not files:
        raise CallError("check: name a scenario file, or ask for --schema")
    from chainsim.cli.sheet import sheet_data, sheet_of
    from chainsim.scenario import read_scenario

    def answer(file: str) -> tuple[int, dict[str, Any]]:
        scenario = read_scenario(file, changes)
        tell_remarks(file, scenario.remarks)
        sheet = sheet_of(scenario)
        drawing = _draw(sheet.lift, scenario.stem, out, force) if out else None
        if not as_json:
            _print(scenario, sheet, full, drawing)
        status = FAILS if strict and scenario.remarks else HOLDS
        return status, sheet_data(file, scenario, sheet, full, drawing)

    return answer_each(files, as_json, answer)


def _draw(lift: Any, stem: str, out: str, force: bool) -> Path:
    """Write the drawing."""
    from chainsim.report.layout import layout_svg

    path = free_name(writable_folder(out), f"{stem}.svg", force)
    path.write_text(layout_svg(lift), encoding="utf-8")
    return path


def _print(scenario: Any, sheet: Sheet, full: bool, drawing: Path | None) -> None:
    from chainsim.report.layout import layout_sketch
    from chainsim.report.text import BLIND_SPOTS

    show(heading(scenario.title or scenario.stem), "", layout_sketch(sheet.lift).rstrip())
    if drawing is not None:
        show(f"drawing  {shown_path(drawing)}")
    show(heading("Number of links"), _links_table(sheet))
    show(heading("Sizing sheet: closed forms, nothing was simulated"), _sizing_table(sheet.rows))
    show(heading("What would help most"))
    if not sheet.advice:
        show("Nothing stands out. Prove it in motion with `chainsim run`.")
    for item in sheet.advice[:3]:
        show(f"- {item.key}: {item.text}")
    if full:
        _print_values(scenario)
    show("", BLIND_SPOTS)
    say(f"{shown_path(scenario.file)}: in order")


def _links_table(sheet: Sheet) -> Any:
    table = _plain_table()
    for choice in sheet.choices:
        mark = "→" if choice.links == sheet.lift.n_links else ""
        table.add_row(mark, choice.text)
    return table


def _sizing_table(rows: Sequence[Any]) -> Any:
    table = _plain_table()
    table.add_column(max_width=28)
    for row in rows:
        meaning = "; ".join(part for part in (row.source, row.note) if part)
        table.add_row(row.name, row.text, meaning)
    return table


def _print_values(scenario: Any) -> None:
    from chainsim.report.values import origin_counts, value_blocks

    show(heading("Every value, and where it came from"), origin_counts(scenario))
    for block in value_blocks(scenario):
        table = _plain_table()
        for key, value, origin, span in block["rows"]:
            table.add_row(key, value, origin + (f" ({span})" if span else ""))
        show(heading(block["title"]), table)


def _plain_table() -> Any:
    """A table without lines, its last column taking what is left."""
    from rich.table import Table

    return Table(box=None, show_header=False, padding=(0, 2, 0, 0), pad_edge=False)
