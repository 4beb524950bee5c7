"""`chainsim limit`: where a lift stops to hold, and the smallest change that mends one."""

from __future__ import annotations

from typing import Any

import click

from chainsim.cli.frame import HOLDS, command, json_option, print_json, set_option
from chainsim.cli.quantities import as_recorded
from chainsim.cli.repeats import bench_for
from chainsim.cli.screen import say, show, tell_remarks
from chainsim.errors import CallError


@command("limit", short_help="Find where a lift stops to hold.")
@click.argument("file", type=click.Path())
@click.argument("what", required=False, metavar="[takeup|speed|height|wear|slack|KEY]")
@click.option("--from", "low", metavar="VALUE", help="Start of the range to scan, with its unit.")
@click.option("--to", "high", metavar="VALUE", help="End of the range to scan, with its unit.")
@click.option("--finding", "findings", multiple=True, metavar="NAME", help="Finding that counts; "
              "may be repeated, all count by default.")  # fmt: skip
@click.option("--tolerance", default=0.01, show_default=True, type=click.FloatRange(1e-4, 0.5),
              help="Width of the answer over its value.")  # fmt: skip
@click.option("--mend", is_flag=True, help="Search the smallest single change that turns FILE.")
@click.option("--free", multiple=True, metavar="KEY", help="Key that --mend may change; may be "
              "repeated.")  # fmt: skip
@click.option("--out", metavar="DIR", help="Keep the runs there; the search goes on from them.")
@set_option
@click.option("--quiet", is_flag=True, help="Say nothing on standard error but errors.")
@json_option
def limit(
    file: str,
    what: str | None,
    low: str | None,
    high: str | None,
    findings: tuple[str, ...],
    tolerance: float,
    mend: bool,
    free: tuple[str, ...],
    out: str | None,
    changes: tuple[str, ...],
    quiet: bool,
    as_json: bool,
) -> int:
    """Find where a lift fails, and where it stops to hold with its reserve.

    takeup: smallest hung mass, weight or spring force; speed: highest chain speed; height: tallest
    lift, links added and nothing else changed; wear: most growth of the pitch; slack: most surplus
    chain between fixed axles; KEY: any number of the scenario, such as carriers.pocket.lip.
    """
    from chainsim.scenario import read_scenario

    if mend == (what is not None):
        raise CallError("limit: name what varies (takeup, speed, …, a key), or ask for --mend")
    _check_names(findings)
    scenario = read_scenario(file, changes)
    if not quiet:
        tell_remarks(file, scenario.remarks)
    with bench_for(scenario, quiet, out) as bench:
        if mend:
            data = _mended(scenario, bench, free, findings, as_json)
        else:
            ends = (low, high)
            data = _limits(scenario, bench, str(what), ends, findings, tolerance, as_json)
        if not quiet:
            say(f"{bench.n_runs} runs")
    if as_json:
        print_json({"file": file, **data})
    return HOLDS


def _check_names(names: tuple[str, ...]) -> None:
    """Refuse a finding that does not exist, with the nearest that does."""
    from chainsim.findings.table import ROWS
    from chainsim.scenario.paths import nearest

    known = [row.judge.__name__ for row in ROWS]
    for name in names:
        if name not in known:
            near = nearest(name, known)
            hint = f"did you mean '{near}'?" if near else f"there is {', '.join(known)}"
            raise CallError(f"--finding '{name}': no finding is called so; {hint}")


def _mended(
    scenario: Any, bench: Any, free: tuple[str, ...], findings: tuple[str, ...], as_json: bool
) -> dict[str, Any]:
    """Search the smallest change that mends the lift; print it, or return it as plain data."""
    from chainsim.report.study_tables import mend_table
    from chainsim.study.as_data import mend_data
    from chainsim.study.mend import mend

    found = mend(scenario, bench, free, findings)
    if not as_json:
        show("", mend_table(found))
    return {"mends": mend_data(found)}


def _limits(
    scenario: Any,
    bench: Any,
    what: str,
    ends: tuple[str | None, str | None],
    findings: tuple[str, ...],
    tolerance: float,
    as_json: bool,
) -> dict[str, Any]:
    """Answer the question, for a key both ways; print it, or return it as plain data."""
    from chainsim.report.study_tables import limit_table
    from chainsim.study.as_data import limit_data
    from chainsim.study.limit_estimates import estimate
    from chainsim.study.limit_questions import questions
    from chainsim.study.limits import find_limit

    answers = []
    for question in questions(scenario, what, *ends):
        found = find_limit(question, bench, findings, tolerance)
        beside = estimate(scenario, question.name)
        data = limit_data(found, beside)
        answers.append(data | {"unit": as_recorded(data["unit"])})
        if not as_json:
            show("", limit_table(found, beside))
    return answers[0] if len(answers) == 1 else {"question": what, "answers": answers}
