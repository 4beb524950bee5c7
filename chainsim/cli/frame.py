"""What every command has in common: options, errors told in words, exit status, JSON."""

from __future__ import annotations

import errno
import functools
import json
import math
import os
from collections.abc import Callable, Sequence
from typing import Any, NamedTuple

import click

from chainsim.errors import (
    INPUT_IS_WRONG,
    RUN_COULD_NOT_BE_COMPLETED,
    STOPPED_BY_USER,
    ChainsimError,
    ScenarioError,
)

HOLDS, FAILS = 0, 1
"""Exit status where every judged finding holds or is close, and where one fails (dimensionless)."""

NO_SPACE = (errno.ENOSPC, errno.EDQUOT, errno.EFBIG)
"""Error numbers of a full disk, a full share of it, and a file that may not grow further."""

TRACEBACK = "CHAINSIM_TRACEBACK"
"""Environment variable that lets faults of chainsim itself through with their traceback."""


class Told(NamedTuple):
    """An error as the user hears of it.

    Attributes
    ----------
    status : int
        Exit status (dimensionless).
    text : str
        One line per fault.
    problems : list of dict
        Faults of a file, with file, line, key, found and rule.
    """

    status: int
    text: str
    problems: list[dict[str, Any]]

    def data(self) -> dict[str, Any]:
        """The error as plain data."""
        return {"error": self.text, "status": self.status, "problems": self.problems}


def command(name: str, **settings: Any) -> Callable[[Callable[..., int]], click.Command]:
    """Make a command of a function that returns an exit status.

    Parameters
    ----------
    name : str
        Name of the command.
    **settings : object
        As of `click.command`.
    """

    def decorate(function: Callable[..., int]) -> click.Command:
        @functools.wraps(function)
        def call(*args: Any, **options: Any) -> None:
            try:
                status = function(*args, **options)
            except (click.ClickException, click.exceptions.Exit, click.Abort):
                raise
            except BaseException as error:
                told = explained(error)
                if options.get("as_json"):
                    print_json(told.data())
                tell(told)
                status = told.status
            click.get_current_context().exit(status)

        return click.command(name, **settings)(call)

    return decorate


def answer_each(
    names: Sequence[str], as_json: bool, answer: Callable[[str], tuple[int, dict[str, Any]]]
) -> int:
    """Answer for each of several files; a fault of one does not keep the others from theirs.

    Parameters
    ----------
    names : sequence of str
        The files.
    as_json : bool
        Whether to print their data: one object, or an array where there are several.
    answer : callable
        Takes a name; returns exit status and plain data.

    Returns
    -------
    int
        The worst exit status (dimensionless).
    """
    answers: list[tuple[int, dict[str, Any]]] = []
    for name in names:
        try:
            answers.append(answer(name))
        except BaseException as error:
            told = explained(error)
            tell(told)
            answers.append((told.status, {"file": name, **told.data()}))
        if answers[-1][0] == STOPPED_BY_USER:
            break
    if as_json:
        data = [found for _, found in answers]
        print_json(data[0] if len(names) == 1 else data)
    return max(status for status, _ in answers)


def explained(error: BaseException) -> Told:
    """Put an error into words; errors that are nobody's business here are raised again.

    Parameters
    ----------
    error : BaseException
        What was raised.
    """
    if isinstance(error, KeyboardInterrupt):
        return Told(STOPPED_BY_USER, "interrupted", [])
    if isinstance(error, OSError) and error.errno == errno.EPIPE:
        raise error
    if isinstance(error, ChainsimError | OSError) and _is_full(error):
        return Told(RUN_COULD_NOT_BE_COMPLETED, f"the disk is full: {_shortly(error)}", [])
    if isinstance(error, ScenarioError):
        return Told(error.exit_status, str(error), [vars(p) for p in error.problems])
    if isinstance(error, ChainsimError):
        return Told(error.exit_status, str(error), [])
    if isinstance(error, OSError):
        return Told(INPUT_IS_WRONG, _words(error), [])
    if isinstance(error, MemoryError):
        return Told(RUN_COULD_NOT_BE_COMPLETED, "this machine has not enough memory for that", [])
    if not isinstance(error, Exception) or os.environ.get(TRACEBACK):
        raise error
    text = (
        f"a fault of chainsim itself, please report it: {type(error).__name__}: {error} "
        f"(set {TRACEBACK}=1 to see where)"
    )
    return Told(RUN_COULD_NOT_BE_COMPLETED, text, [])


def tell(told: Told) -> None:
    """Say an error on standard error."""
    click.echo(told.text, err=True)


def _is_full(error: BaseException | None) -> bool:
    """Whether an error, or what caused it, is a full disk; HDF5 tells that in its text alone."""
    if error is None:
        return False
    is_full = getattr(error, "errno", None) in NO_SPACE
    told = any(os.strerror(number) in str(error) for number in NO_SPACE)
    return is_full or told or _is_full(error.__cause__)


def _shortly(error: BaseException) -> str:
    """An error in words, without the file handles and addresses that HDF5 adds."""
    return _words(error).partition(" (file write failed")[0]


def _words(error: BaseException) -> str:
    """An error of the machine in words."""
    if isinstance(error, OSError) and error.strerror:
        return f"{error.filename}: {error.strerror}" if error.filename else error.strerror
    return str(error)


def print_json(data: Any) -> None:
    """Print plain data on standard output; what is not finite becomes null."""
    click.echo(json.dumps(_plain(data), indent=1, allow_nan=False))


def _plain(value: Any) -> Any:
    if hasattr(value, "item") and not hasattr(value, "__len__"):
        value = value.item()
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, dict):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(item) for item in value]
    return value if value is None or isinstance(value, bool | int | str) else str(value)


def json_option(function: Callable) -> Callable:
    """Add `--json`."""
    return click.option(
        "--json", "as_json", is_flag=True, help="Print machine-readable output, and nothing else."
    )(function)


def strict_option(function: Callable) -> Callable:
    """Add `--strict`."""
    return click.option(
        "--strict", is_flag=True, help="Count warnings and missing data as a failure (status 1)."
    )(function)


def set_option(function: Callable) -> Callable:
    """Add `--set`."""
    return click.option(
        "--set",
        "changes",
        multiple=True,
        metavar="KEY=VALUE",
        help='Change a value, such as "drive.chain_speed=0.1 m/s"; may be repeated.',
    )(function)


def out_option(default: str | None, text: str) -> Callable[[Callable], Callable]:
    """Add `--out`.

    Parameters
    ----------
    default : str or None
        Folder that is used where none is named.
    text : str
        What is written there.
    """
    return click.option(
        "--out",
        type=click.Path(file_okay=False),
        default=default,
        metavar="DIR",
        show_default=bool(default),
        help=text,
    )


def force_option(function: Callable) -> Callable:
    """Add `--force`."""
    return click.option(
        "--force", is_flag=True, help="Replace files of the same name instead of adding -2, -3, …"
    )(function)
