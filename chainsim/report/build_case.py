"""What a build sheet is made from: a scenario alone, or a recording with what its run showed."""

from __future__ import annotations

import math
from collections.abc import Callable
from contextlib import suppress
from dataclasses import dataclass
from typing import Any

import numpy as np

from chainsim.analysis.sized import Sized, size_up
from chainsim.analysis.survey import Survey, survey
from chainsim.errors import ChainsimError, LayoutError
from chainsim.findings import situations
from chainsim.model.lift import Lift, build_lift
from chainsim.model.tangents import route
from chainsim.model.wheels import chain_pitch, down_of, wheels_of
from chainsim.report.text import findings_of
from chainsim.scenario import Scenario
from chainsim.scenario.schema_run import SITUATIONS
from chainsim.study.wear import WearStudy


@dataclass(frozen=True)
class Case:
    """A lift whose build sheet is written.

    Attributes
    ----------
    scenario : Scenario
        What it is.
    lift : Lift
        Its parts and places.
    sized : Sized or None
        Its closed forms; None where the layout has none.
    run : Survey or None
        What its run showed; None for a scenario that was not run.
    findings : tuple of Finding
        Findings of the run, none without one.
    situations_run, situations_not_run : tuple of str
        Situations that were simulated, and those that were not.
    wear : WearStudy or None
        What runs with the chain grown showed; None where there were none.
    """

    scenario: Scenario
    lift: Lift
    sized: Sized | None
    run: Survey | None
    findings: tuple[Any, ...]
    situations_run: tuple[str, ...]
    situations_not_run: tuple[str, ...]
    wear: WearStudy | None = None

    @property
    def closed(self) -> Sized:
        """Its closed forms.

        Raises
        ------
        LayoutError
            If the layout has none; `simulated` and `reckoned` take it for a missing value.
        """
        if self.sized is None:
            raise LayoutError("a loop that hangs on a single sprocket has no closed form")
        return self.sized

    @property
    def is_from_back(self) -> bool:
        """Whether it is drawn and listed as seen from behind."""
        return self.scenario.view == "back"

    @property
    def driven(self) -> int:
        """Index of the driven sprocket (dimensionless)."""
        return self.lift.driven

    @property
    def speed(self) -> float:
        """Mean chain speed [m/s]."""
        return float(self.scenario.drive.chain_speed)

    @property
    def rate(self) -> float:
        """Speed of the driven sprocket that belongs to `speed` [rad/s]."""
        wheel = self.lift.wheels[self.driven]
        return self.speed / self.lift.route.pitch * wheel.seat_step(self.lift.route.pitch)

    @property
    def loop(self) -> float:
        """Length of the new chain [m]."""
        return self.lift.n_links * self.scenario.chain.pitch

    def across(self, x: float) -> float:
        """Return a place across the lift as the sheet lists it: from behind left is right.

        Parameters
        ----------
        x : float
            To the right, seen from the front [m].

        Returns
        -------
        float
            To the right, seen as the sheet's view says [m].
        """
        return -x + 0.0 if self.is_from_back else x

    def extreme(self, name: str) -> float | None:
        """Return an extreme over every inner step of the run.

        Parameters
        ----------
        name : str
            Its name in the recording, such as ``"link_tension"``.

        Returns
        -------
        float or None
            In its unit; None where it was not kept.
        """
        found = self.run.extremes.get(name) if self.run is not None else None
        return float(found.value) if found is not None else None

    def mode(self, kind: str) -> float | None:
        """Return the frequency of a mode of the lift at rest.

        Parameters
        ----------
        kind : str
            Such as ``"take-up tail"``.

        Returns
        -------
        float or None
            The lowest of its kind [Hz]; None where it was not worked out.
        """
        rows = self.run.rec.modes if self.run is not None else ()
        return min((float(row.frequency) for row in rows if row.kind == kind), default=None)

    def simulated(self, measure: Callable[[Survey], Any]) -> Any:
        """Take a measure from the run.

        Parameters
        ----------
        measure : callable
            Takes the survey of the run.

        Returns
        -------
        object
            What it found; None without a run, or where the run keeps too little for it.
        """
        if self.run is None:
            return None
        with suppress(ChainsimError, KeyError, ValueError, IndexError):
            return measure(self.run)
        return None


def case_of(source: Any, wear: WearStudy | None = None) -> Case:
    """Gather what a build sheet is made from.

    Parameters
    ----------
    source : Scenario or Recording
        A lift, or one that was run.
    wear : WearStudy, optional
        What runs with its chain grown showed.

    Returns
    -------
    Case
        All that the parts of the sheet look at.

    Raises
    ------
    LayoutError
        If the layout is impossible.
    """
    is_scenario = isinstance(source, Scenario)
    scenario = source if is_scenario else source.scenario
    lift = build_lift(scenario)
    run = None if is_scenario else survey(source)
    seen = situations(run) if run is not None else None
    return Case(
        scenario=scenario,
        lift=lift,
        sized=_sized(scenario, lift.n_links),
        run=run,
        findings=() if is_scenario else tuple(findings_of(source)),
        situations_run=tuple(seen.run) if seen else (),
        situations_not_run=tuple(seen.not_run) if seen else SITUATIONS,
        wear=wear,
    )


def _sized(scenario: Scenario, n_links: int) -> Sized | None:
    """Closed forms of a lift; None where the layout has none."""
    with suppress(ChainsimError):
        path = route(wheels_of(scenario), chain_pitch(scenario), down_of(scenario))
        if len(path.wheels) > 1:
            return size_up(scenario, path, n_links)
    return None


def steady_mean(s: Survey, name: str, column: int | None = None) -> float:
    """Return the mean of a channel in steady running.

    Parameters
    ----------
    s : Survey
        The run.
    name : str
        Path of the channel.
    column : int or None
        Which column of it (dimensionless); None for a channel with one.

    Returns
    -------
    float
        In the channel's unit; NaN where nothing ran steadily or it was not recorded.
    """
    values = s.channel(name)
    if values is None or not s.steady:
        return math.nan
    values = np.asarray(values, dtype=float)
    chosen = values[s.is_steady] if column is None else values[s.is_steady, column]
    return float(np.nanmean(chosen)) if np.isfinite(chosen).any() else math.nan
