"""`chainsim check`: validate, draw to scale, size; nothing is simulated."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from chainsim.cli.frame import (
    FAILS,
    HOLDS,
    command,
    explained,
    json_option,
    out_option,
    print_json,
    set_option,
    strict_option,
    tell,
)
from chainsim.cli.screen import heading, remark_data, say, show, shown_path, tell_remarks
from chainsim.errors import CallError, ChainsimError


@command("check", short_help="Validate, draw to scale and size lifts; nothing is simulated.")
@click.argument("files", nargs=-1, type=click.Path(), metavar="FILE…")
@click.option("--full", is_flag=True, help="Show every value and where it came from.")
@click.option("--schema", is_flag=True, help="Print the JSON Schema of scenario files.")
@set_option
@out_option(None, "Write the drawing there, as FILE's name with .svg.")
@json_option
@strict_option
def check(
    files: tuple[str, ...],
    full: bool,
    schema: bool,
    changes: tuple[str, ...],
    out: str | None,
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
    answers = [_answer(file, changes, full, out, as_json, strict) for file in files]
    if as_json:
        data = [answer for _, answer in answers]
        print_json(data[0] if len(files) == 1 else data)
    return max(status for status, _ in answers)


def _answer(
    file: str, changes: tuple[str, ...], full: bool, out: str | None, as_json: bool, strict: bool
) -> tuple[int, dict[str, Any]]:
    """Status and plain data of one file; for people it is printed at once."""
    from chainsim.scenario import read_scenario

    try:
        scenario = read_scenario(file, changes)
        tell_remarks(file, scenario.remarks)
        sheet = _sheet(scenario)
        drawing = _draw(sheet["lift"], scenario.stem, out) if out else None
        if as_json:
            return _status(scenario, strict), _data(file, scenario, sheet, full, drawing)
        _print(scenario, sheet, full, drawing)
        return _status(scenario, strict), {}
    except ChainsimError as error:
        told = explained(error)
        tell(told)
        return told.status, {"file": file, **told.data()}


def _status(scenario: Any, strict: bool) -> int:
    return FAILS if strict and scenario.remarks else HOLDS


def _sheet(scenario: Any) -> dict[str, Any]:
    """Everything that is worked out about a lift without running it."""
    from chainsim.analysis.advice import advice
    from chainsim.analysis.sizing import sizing_sheet
    from chainsim.errors import LayoutError
    from chainsim.model.lift import build_lift
    from chainsim.model.links import describe_links, link_choices
    from chainsim.model.wheels import down_of

    lift = build_lift(scenario)
    every = scenario.carriers.every if scenario.carriers is not None else None
    down = down_of(scenario)
    try:
        choices = list(link_choices(lift.route, every, down))
    except LayoutError:
        choices = []
    if lift.n_links not in [choice.links for choice in choices]:
        choices.append(describe_links(lift.route, lift.n_links, every, down))
    return {
        "lift": lift,
        "choices": choices,
        "rows": sizing_sheet(scenario, lift.route, lift.n_links),
        "advice": advice(scenario, lift.route, lift.n_links),
    }


def _draw(lift: Any, stem: str, out: str) -> Path:
    """Write the drawing; its name is that of the scenario, and a newer one replaces it."""
    from chainsim.report.layout import layout_svg

    folder = Path(out)
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / f"{stem}.svg"
    path.write_text(layout_svg(lift), encoding="utf-8")
    return path


def _print(scenario: Any, sheet: dict[str, Any], full: bool, drawing: Path | None) -> None:
    from chainsim.report.layout import layout_sketch
    from chainsim.report.text import BLIND_SPOTS

    show(heading(scenario.title or scenario.stem), "", layout_sketch(sheet["lift"]).rstrip())
    if drawing is not None:
        show(f"drawing  {shown_path(drawing)}")
    show(heading("Number of links"), _links_table(sheet))
    show(heading("Sizing sheet: closed forms, nothing was simulated"), _sizing_table(sheet["rows"]))
    show(heading("What would help most"))
    if not sheet["advice"]:
        show("Nothing stands out. Prove it in motion with `chainsim run`.")
    for item in sheet["advice"][:3]:
        show(f"- {item.key}: {item.text}")
    if full:
        _print_values(scenario)
    show("", BLIND_SPOTS)
    say(f"{shown_path(scenario.file)}: in order")


def _links_table(sheet: dict[str, Any]) -> Any:
    table = _plain_table()
    for choice in sheet["choices"]:
        mark = "→" if choice.links == sheet["lift"].n_links else ""
        table.add_row(mark, choice.text)
    return table


def _sizing_table(rows: list[Any]) -> Any:
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


def _data(
    file: str, scenario: Any, sheet: dict[str, Any], full: bool, drawing: Path | None
) -> dict[str, Any]:
    """One checked scenario as plain data, in the units of the recording."""
    from chainsim.cli.quantities import recording_unit

    data = {
        "file": file,
        "title": scenario.title,
        "sha256": scenario.sha256,
        "remarks": remark_data(scenario.remarks),
        "links": sheet["lift"].n_links,
        "link_choices": [
            {
                "links": choice.links,
                "carriers": choice.carriers,
                "left_over": choice.left_over,
                "is_odd": choice.is_odd,
                "surplus": choice.surplus,
                "text": choice.text,
            }
            for choice in sheet["choices"]
        ],
        "sizing": [
            {
                "name": row.name,
                "value": row.value,
                "unit": recording_unit(row.kind),
                "source": row.source,
                "note": row.note,
            }
            for row in sheet["rows"]
        ],
        "advice": [
            {"key": item.key, "text": item.text, "urgency": item.urgency}
            for item in sheet["advice"]
        ],
        "drawing": str(drawing.absolute()) if drawing else None,
    }
    return data | ({"values": _values(scenario)} if full else {})


def _values(scenario: Any) -> list[dict[str, Any]]:
    from chainsim.cli.quantities import recording_unit
    from chainsim.scenario.table import leaves

    origins = scenario.origins()
    return [
        {
            "key": leaf.key,
            "value": leaf.value,
            "unit": recording_unit(leaf.unit_kind),
            "source": origins[leaf.key].source,
            "low": origins[leaf.key].low,
            "high": origins[leaf.key].high,
            "note": origins[leaf.key].note,
        }
        for leaf in leaves(scenario)
        if leaf.key in origins
    ]
