"""The sizing sheet: what closed forms say about a lift before anything is simulated."""

from __future__ import annotations

from chainsim.analysis.sheet_chain import (
    Row,
    chordal_rows,
    frequency_rows,
    rate_rows,
    tension_rows,
)
from chainsim.analysis.sheet_drive import drive_rows, energy_rows, shaft_rows
from chainsim.analysis.sized import Sized, size_up
from chainsim.model.tangents import Route
from chainsim.scenario import Scenario

__all__ = ["Row", "Sized", "size_up", "sizing_sheet"]


def sizing_sheet(scenario: Scenario, path: Route, n_links: int) -> list[Row]:
    """Work out the sizing sheet of a lift.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    path : Route
        The taut loop on the axles as drawn.
    n_links : int
        Number of links (dimensionless).

    Returns
    -------
    list of Row
        Rates, tensions, frequencies, drive, shaft, energies; rows that do not apply are left out.
    """
    sized = size_up(scenario, path, n_links)
    return [
        *rate_rows(sized),
        *chordal_rows(sized),
        *tension_rows(sized),
        *frequency_rows(sized),
        *drive_rows(sized),
        *shaft_rows(sized),
        *energy_rows(sized),
    ]
