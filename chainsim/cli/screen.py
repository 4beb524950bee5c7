"""What is printed: results on standard output, talk on standard error."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

if TYPE_CHECKING:
    from rich.console import Console


def say(text: str = "") -> None:
    """Say something on standard error."""
    click.echo(text, err=True)


def console() -> Console:
    """Return a console for results; without a terminal it is 80 columns wide and plain."""
    from rich.console import Console

    return Console(highlight=False, markup=False, emoji=False)


def show(*things: Any) -> None:
    """Print results: texts, and tables of `rich`."""
    screen = console()
    for thing in things:
        screen.print(thing)


def heading(text: str) -> Any:
    """Return a heading, an empty line before it."""
    from rich.text import Text

    return Text(f"\n{text}", style="bold")


def tell_remarks(file: str, remarks: Iterable[Any]) -> None:
    """Say the warnings of a scenario, each with its key."""
    for remark in remarks:
        say(f"{file}: warning: {remark}")


def remark_data(remarks: Iterable[Any]) -> list[dict[str, str]]:
    """Warnings as plain data."""
    return [{"key": remark.key, "text": remark.text} for remark in remarks]


def shown_path(path: str | Path) -> str:
    """Return a path as it is shortest to type from here."""
    absolute = Path(path).absolute()
    here = Path.cwd()
    return str(absolute.relative_to(here) if absolute.is_relative_to(here) else absolute)
