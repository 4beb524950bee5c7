"""Everything chainsim raises on purpose, each with the exit status of the command line.

A user never sees a traceback: the command line prints `str(error)` and leaves with
`error.exit_status`.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

INPUT_IS_WRONG = 2
RUN_COULD_NOT_BE_COMPLETED = 3
STOPPED_BY_USER = 130


@dataclass(frozen=True)
class Problem:
    """One fault of an input file.

    Attributes
    ----------
    file : str
        Name of the file as the user gave it.
    line : int or None
        Line number, counted from 1 (dimensionless); None where no line can be named.
    key : str
        Dotted TOML key, such as `sprocket.tail.teeth`; empty for the file as a whole.
    found : str
        What was found there; empty where nothing was (a missing key).
    rule : str
        What is needed instead, and why.
    """

    file: str
    line: int | None
    key: str
    found: str
    rule: str

    def __str__(self) -> str:
        place = self.file if self.line is None else f"{self.file}:{self.line}"
        subject = f"{self.key}: " if self.key else ""
        found = f"found {self.found}; " if self.found else ""
        return f"{place}: {subject}{found}{self.rule}"


@dataclass(frozen=True)
class Remark:
    """A caution about an input that is legal but looks unlikely or needs care.

    Attributes
    ----------
    key : str
        Dotted TOML key it concerns.
    text : str
        One sentence: what was seen, and why it matters.
    """

    key: str
    text: str

    def __str__(self) -> str:
        return f"{self.key}: {self.text}" if self.key else self.text


class ChainsimError(Exception):
    """Base of all errors that chainsim raises on purpose."""

    exit_status: int = INPUT_IS_WRONG


class UnitError(ChainsimError, ValueError):
    """A quantity that cannot be read: no unit, an unknown one, or one of another kind."""


class ScenarioError(ChainsimError):
    """A scenario, plan or measurement file with one fault or several.

    Parameters
    ----------
    problems : iterable of Problem
        All faults of the file, in the order in which they are printed.
    """

    def __init__(self, problems: Iterable[Problem]) -> None:
        self.problems = list(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class CallError(ChainsimError):
    """A command or function was called in a way that cannot work."""


class LayoutError(ChainsimError):
    """A geometry that no chain can follow."""


class RecordingError(ChainsimError):
    """A recording that is missing, cut off, foreign, or from a newer version."""


class RunError(ChainsimError):
    """A run that could not be completed: no equilibrium, or a state that is not finite."""

    exit_status = RUN_COULD_NOT_BE_COMPLETED


class Interrupted(ChainsimError):  # noqa: N818 - the user stopped it; nothing went wrong
    """The user stopped the run; what was recorded up to then is kept."""

    exit_status = STOPPED_BY_USER
