"""What the rows of a sizing sheet are made of, and what several of them need."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from chainsim.analysis.survey import Survey


class SizingRow(NamedTuple):
    """One quantity, worked out two ways.

    Attributes
    ----------
    name : str
        What it is.
    closed_form, simulated : str
        Both values with their unit; ``"–"`` where one does not exist.
    remark : str
        What the closed form leaves out.
    """

    name: str
    closed_form: str
    simulated: str
    remark: str


def balls_on_strand(s: Survey) -> float:
    """Return how many balls ride at once by the demand, from rate, speed and strand length."""
    scenario = s.scenario
    if scenario.balls is None or scenario.carriers is None or not scenario.drive.chain_speed:
        return 0.0
    speed = scenario.drive.chain_speed
    pockets = speed / (s.pitch * scenario.carriers.every)
    demand = scenario.balls.feed.rate or pockets
    return min(demand, pockets) * carrying_length(s) / speed


def carrying_length(s: Survey) -> float:
    """Return the distance between the axles at the ends of the carrying strands [m]."""
    strands = [s.strands[k] for k in s.carrying]
    return sum(float(np.linalg.norm(s.center[0, k.end] - s.center[0, k.start])) for k in strands)


def mass_per_length(s: Survey) -> float:
    """Return the mass of the empty chain with its carriers per length [kg/m]."""
    scenario = s.scenario
    carriers = 0.0
    if scenario.carriers is not None:
        carriers = scenario.carriers.mass / scenario.carriers.every
    return (scenario.chain.link_mass + carriers) / s.pitch


def payload(s: Survey) -> float:
    """Return the weight of the balls on the carrying strand by the demand [N]."""
    if s.scenario.balls is None:
        return 0.0
    return balls_on_strand(s) * s.scenario.balls.mass * s.scenario.frame.gravity


def steady_mean(s: Survey, values: np.ndarray) -> float:
    """Return the mean over steady running, in the unit of the values; NaN where there is none."""
    chosen = np.asarray(values, dtype=float)[s.is_steady]
    chosen = chosen[np.isfinite(chosen)]
    return float(chosen.mean()) if chosen.size else float("nan")
