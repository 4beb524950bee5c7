"""`chainsim new`: a first, commented scenario."""

from __future__ import annotations

from pathlib import Path

import click

from chainsim.cli.frame import HOLDS, command, json_option, print_json
from chainsim.cli.screen import say, shown_path
from chainsim.errors import CallError

USUAL_LAYOUT = "head-driven-hung-idler"


@command("new", short_help="Write a commented starter scenario.")
@click.argument("file", required=False, type=click.Path(dir_okay=False))
@click.option(
    "--layout",
    default=USUAL_LAYOUT,
    show_default=True,
    metavar="NAME",
    help="Which end is driven, and what takes up the slack; see --layouts.",
)
@click.option("--layouts", is_flag=True, help="List the layouts, and write nothing.")
@click.option("--height", default="500 mm", show_default=True, help="Height to lift by.")
@click.option("--ball", default="16 mm", show_default=True, help="Diameter of a ball.")
@click.option("--rate", default="1 /s", show_default=True, help="Balls to deliver.")
@click.option("--force", is_flag=True, help="Replace FILE where it exists.")
@json_option
def new(
    file: str | None,
    layout: str,
    layouts: bool,
    height: str,
    ball: str,
    rate: str,
    force: bool,
    as_json: bool,
) -> int:
    """Write a commented starter scenario to FILE, or to standard output.

    Pitch, carriers, speed and take-up follow from height, ball and rate.
    """
    from chainsim.scenario import LAYOUTS, starter

    if layouts:
        texts = {name: known.text for name, known in LAYOUTS.items()}
        if as_json:
            print_json(texts)
        else:
            click.echo("\n".join(f"{name:24} {text}" for name, text in texts.items()))
        return HOLDS
    text = starter(layout, height, ball, rate)
    if file is not None:
        _write(Path(file), text, force)
    if as_json:
        written = str(Path(file).absolute()) if file is not None else None
        print_json({"file": written, "layout": layout, "scenario": text})
    elif file is None:
        click.echo(text, nl=False)
    else:
        say(f"{shown_path(file)} is written; look at it with: chainsim check {shown_path(file)}")
    return HOLDS


def _write(path: Path, text: str, force: bool) -> None:
    """Write a new file; an existing one is kept unless it is to be replaced."""
    try:
        with path.open("w" if force else "x", encoding="utf-8") as stream:
            stream.write(text)
    except FileExistsError:
        raise CallError(f"{path}: there is such a file; --force replaces it") from None
