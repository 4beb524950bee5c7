"""How fast a chain grows: by a measurement, or by the law of sliding wear with a measured rate."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np

from chainsim.analysis.free_body import free_body, load_of
from chainsim.errors import CallError
from chainsim.model.route import lay_chain, route
from chainsim.model.wheels import chain_pitch, down_of, wheels_of
from chainsim.scenario import Scenario


@dataclass(frozen=True)
class GrowthRule:
    """How much the pitch grows in one turn of the chain.

    Parameters
    ----------
    growth_per_turn : float
        As a fraction of the pitch (dimensionless), greater than zero.
    source : str
        Where it is from: what was measured, or the law and its rate; never empty.

    Raises
    ------
    CallError
        If the growth is not positive, or nothing is said of where it is from.
    """

    growth_per_turn: float
    source: str

    def __post_init__(self) -> None:
        if not (0.0 < self.growth_per_turn < math.inf):
            raise CallError(f"growth per turn of the chain: {self.growth_per_turn:g}; need above 0")
        if not self.source.strip():
            raise CallError("a rule of growth needs its source: what was measured, and how")

    @property
    def text(self) -> str:
        """The rule in words."""
        million = 1e6 * self.growth_per_turn
        return f"the pitch grows by {million:.3g} millionths a turn of the chain: {self.source}"

    def turns(self, growth: float) -> float:
        """Return after how many turns a chain has grown.

        Parameters
        ----------
        growth : float
            As a fraction (dimensionless).

        Returns
        -------
        float
            Turns of the chain (dimensionless).
        """
        return growth / self.growth_per_turn


def measured_growth(growth: float, turns: float, source: str) -> GrowthRule:
    """Return the rule of a chain whose growth was measured.

    Parameters
    ----------
    growth : float
        Measured growth as a fraction (dimensionless).
    turns : float
        Turns of the chain that it took (dimensionless).
    source : str
        What was measured, and how.

    Returns
    -------
    GrowthRule
        Growth in proportion to turns.

    Raises
    ------
    CallError
        If either is not positive.
    """
    if not turns > 0.0:
        raise CallError(f"turns of the chain that were counted: {turns:g}; need above 0")
    return GrowthRule(growth / turns, source)


def sliding_growth(
    scenario: Scenario, wear_rate: float, joint_width: float, source: str
) -> GrowthRule:
    """Return the rule of joints that wear as they slide under load.

    Parameters
    ----------
    scenario : Scenario
        The lift; tensions are those of its free body in steady running.
    wear_rate : float
        Volume worn off per load and sliding distance, both parts of a joint together [m2/N].
    joint_width : float
        Length of the pin in its joint [m].
    source : str
        Where the wear rate was measured.

    Returns
    -------
    GrowthRule
        Growth in proportion to turns, at the wear of the first turn.

    Raises
    ------
    CallError
        If the layout has no closed form, or a number is not positive.

    Notes
    -----
    A joint bends by ``2π/z`` as it comes onto a wheel and again as it leaves, under the tension
    there, and slides by ``r`` times that. The worn depth is spread over the pin's shadow ``2 r w``,
    and adds to the pitch once for each joint::

        growth = k Σ T (2π/z) r / (2 r w p) = k Σ T (2π/z) / (2 w p)

    References
    ----------
    J. F. Archard, "Contact and rubbing of flat surfaces", *Journal of Applied Physics* 24, 1953,
    p. 981: volume in proportion to load and distance (from memory). Its use on the joint is ours.
    """
    if not (wear_rate > 0.0 and joint_width > 0.0):
        raise CallError("wear rate and width of a joint must be above 0")
    bent = _tension_times_angle(scenario)
    growth = wear_rate * bent / (2.0 * joint_width * scenario.chain.pitch)
    return GrowthRule(growth, f"sliding wear at {wear_rate:.3g} m2/N, {source}")


def _tension_times_angle(scenario: Any) -> float:
    """Sum of tension times angle over every bend of a joint in one turn [N rad]."""
    down = down_of(scenario)
    path = route(wheels_of(scenario), chain_pitch(scenario), down)
    if len(path.wheels) < 2:
        raise CallError("a loop that hangs on a single sprocket has no closed form")
    count = scenario.chain.links or math.ceil(path.links)
    laid = lay_chain(path.wheels, path.pitch, count, down)
    moved = tuple(w.moved(d) for w, d in zip(path.wheels, laid.travel, strict=True))
    path = route(moved, path.pitch, down)
    body = free_body(scenario, path, load_of(scenario, path), laid.surplus)
    angle = np.array([wheel.seat_step(path.pitch) for wheel in path.wheels])
    entering = np.maximum(np.roll(body.end, 1), 0.0)
    return float(np.sum((entering + np.maximum(body.start, 0.0)) * angle))
