"""The command `chainsim`: its subcommands, and what its exit status means."""

from __future__ import annotations

import os
import sys

import click

from chainsim import __version__
from chainsim.cli.build import build
from chainsim.cli.check import check
from chainsim.cli.compare import compare
from chainsim.cli.fit import fit
from chainsim.cli.frame import TRACEBACK
from chainsim.cli.limit import limit
from chainsim.cli.new import new
from chainsim.cli.ready import ready
from chainsim.cli.report import report
from chainsim.cli.run import run
from chainsim.cli.sweep import sweep
from chainsim.errors import RUN_COULD_NOT_BE_COMPLETED


class _InOrder(click.Group):
    """A group that lists its commands in the order in which they are used."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(self.commands)


@click.group(
    cls=_InOrder,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100},
    epilog="Exit status: 0 every judged finding holds or is close, 1 a finding fails, "
    "2 the input or the call is wrong, 3 the run could not be completed, 130 interrupted.",
)
@click.version_option(__version__, prog_name="chainsim")
def commands() -> None:
    """Simulate chain lifts for ball machines.

    A lift is described in a scenario file. Start with `chainsim new lift.toml`, look at it with
    `chainsim check lift.toml`, prove it in motion with `chainsim run lift.toml`.
    """


for _command in (new, check, run, report, compare, sweep, limit, fit, build, ready):
    commands.add_command(_command)


def main() -> None:
    """Run the command line; a character that the terminal cannot show becomes a question mark."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")
    if TRACEBACK not in os.environ:
        sys.excepthook = sys.unraisablehook = _say_nothing
    try:
        commands(prog_name="chainsim")
    except SystemExit as leaving:
        if leaving.code == RUN_COULD_NOT_BE_COMPLETED:
            _leave_at_once(leaving.code)
        raise


def _say_nothing(*_: object) -> None:
    """Keep quiet about faults inside destructors; all others have been told in words."""


def _leave_at_once(status: int) -> None:
    """Leave without tearing down: HDF5 crashes when it closes a file that it cannot write to.

    Parameters
    ----------
    status : int
        Exit status (dimensionless).
    """
    sys.stdout.flush()
    sys.stderr.flush()
    os._exit(status)
