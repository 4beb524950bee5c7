"""What is known about a lift without running it, gathered for `chainsim check`."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any, NamedTuple

from chainsim.analysis.advice import advice
from chainsim.analysis.sizing import sizing_sheet
from chainsim.cli.quantities import recording_unit
from chainsim.cli.screen import remark_data
from chainsim.errors import LayoutError
from chainsim.model.lift import Lift, build_lift
from chainsim.model.links import LinkChoice, describe_links, link_choices
from chainsim.model.wheels import down_of
from chainsim.scenario.table import leaves


class Sheet(NamedTuple):
    """A lift and what closed forms say about it.

    Attributes
    ----------
    lift : Lift
        The lift, its chain laid.
    choices : sequence of LinkChoice
        The nearest numbers of links, and the one that is used.
    rows : sequence of Row
        The sizing sheet.
    advice : sequence of Advice
        Changes that would help, the best first.
    """

    lift: Lift
    choices: Sequence[LinkChoice]
    rows: Sequence[Any]
    advice: Sequence[Any]


def sheet_of(scenario: Any) -> Sheet:
    """Gather the sheet of a scenario."""
    lift = build_lift(scenario)
    return Sheet(
        lift,
        _choices(scenario, lift),
        sizing_sheet(scenario, lift.route, lift.n_links),
        advice(scenario, lift.route, lift.n_links),
    )


def _choices(scenario: Any, lift: Lift) -> list[LinkChoice]:
    """Nearest numbers of links; none are nearest for a loop that hangs from one wheel."""
    every = scenario.carriers.every if scenario.carriers is not None else None
    down = down_of(scenario)
    try:
        choices = list(link_choices(lift.route, every, down))
    except LayoutError:
        choices = []
    if lift.n_links not in [choice.links for choice in choices]:
        choices.append(describe_links(lift.route, lift.n_links, every, down))
    return sorted(choices, key=lambda choice: choice.links)


def sheet_data(
    file: str, scenario: Any, sheet: Sheet, full: bool, drawing: Path | None
) -> dict[str, Any]:
    """Return a sheet as plain data, in the units of the recording.

    Parameters
    ----------
    file : str
        The scenario file, as it was given.
    scenario : Scenario
        What it describes.
    sheet : Sheet
        Its sheet.
    full : bool
        Whether every value of the scenario is listed.
    drawing : Path or None
        The drawing that was written.
    """
    data = {
        "file": file,
        "title": scenario.title,
        "sha256": scenario.sha256,
        "remarks": remark_data(scenario.remarks),
        "links": sheet.lift.n_links,
        "link_choices": [_choice_data(choice) for choice in sheet.choices],
        "sizing": [_row_data(row) for row in sheet.rows],
        "advice": [
            {"key": item.key, "text": item.text, "urgency": item.urgency} for item in sheet.advice
        ],
        "drawing": str(drawing.absolute()) if drawing else None,
    }
    return data | ({"values": list(map(_value_data, *_known(scenario)))} if full else {})


def _choice_data(choice: LinkChoice) -> dict[str, Any]:
    names = ("links", "carriers", "left_over", "is_odd", "surplus", "text")
    return {name: getattr(choice, name) for name in names}


def _row_data(row: Any) -> dict[str, Any]:
    return {
        "name": row.name,
        "value": row.value,
        "unit": recording_unit(row.kind),
        "source": row.source,
        "note": row.note,
    }


def _known(scenario: Any) -> tuple[list[Any], list[Any]]:
    """Every value that has an origin, and the origins."""
    origins = scenario.origins()
    known = [leaf for leaf in leaves(scenario) if leaf.key in origins]
    return known, [origins[leaf.key] for leaf in known]


def _value_data(leaf: Any, origin: Any) -> dict[str, Any]:
    return {
        "key": leaf.key,
        "value": leaf.value,
        "unit": recording_unit(leaf.unit_kind),
        "source": origin.source,
        "low": origin.low,
        "high": origin.high,
        "note": origin.note,
    }
