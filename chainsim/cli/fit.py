"""`chainsim fit`: match a scenario to bench measurements."""

from __future__ import annotations

import click

from chainsim.cli.files import free_name, writable_folder
from chainsim.cli.frame import (
    HOLDS,
    command,
    force_option,
    json_option,
    out_option,
    print_json,
    set_option,
)
from chainsim.cli.quantities import as_recorded
from chainsim.cli.screen import show, shown_path, tell_remarks


@command("fit", short_help="Match a scenario to bench measurements.")
@click.argument("file", type=click.Path())
@click.argument("measurements", nargs=-1, required=True, type=click.Path(), metavar="MEASUREMENTS…")
@out_option("out", "Where the fitted scenario goes, as FILE's name with -fitted.")
@click.option(
    "--hold", multiple=True, metavar="KEY", help="Keep this value as FILE has it; may be repeated."
)
@click.option(
    "--confidence",
    default=0.95,
    show_default=True,
    type=click.FloatRange(0.5, 0.999),
    help="Confidence of the intervals.",
)
@set_option
@force_option
@json_option
def fit(
    file: str,
    measurements: tuple[str, ...],
    out: str,
    hold: tuple[str, ...],
    confidence: float,
    changes: tuple[str, ...],
    force: bool,
    as_json: bool,
) -> int:
    """Find stiffness, damping, friction and motor line from simple bench measurements.

    MEASUREMENTS are CSV files: stretch of a strand under weights, a plucked strand that dies away,
    the tilt of a carrier, a motor that runs and stalls, counted losses. The fitted scenario keeps
    the comments of FILE, and says where each value came from.
    """
    from chainsim.scenario import read_scenario
    from chainsim.study.fit import fit as match

    folder = writable_folder(out)
    scenario = read_scenario(file, changes)
    tell_remarks(file, scenario.remarks)
    result = match(scenario, measurements, confidence=confidence, hold=hold)
    place = free_name(folder, f"{scenario.stem}-fitted.toml", force)
    result.write(place, force)
    if as_json:
        data = result.as_json()
        for item in data["parameters"]:
            item["unit"] = as_recorded(item["unit"])
        print_json({"file": file, "scenario": str(place.absolute()), **data})
    else:
        show(result.text(), "", f"Fitted scenario  {shown_path(place)}")
    return HOLDS
