"""Tensions of a lift that runs slowly, from free bodies: strands, idle wheels, the take-up.

Frictionless and steady.  Along a strand tension grows by the weight that hangs on it, round an idle
wheel it changes only with height, the driven wheel takes the difference that is left when one has
gone round the loop, and what holds the take-up sets the level.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from chainsim.model.tangents import Route
from chainsim.model.wheels import down_of
from chainsim.scenario import Scenario

RISING = 0.2
"""A strand carries balls where its direction points up by more than this (dimensionless)."""


class Load(NamedTuple):
    """What hangs on the chain.

    Attributes
    ----------
    chain_weight : float
        Weight of chain and empty carriers per length [N/m].
    ball_weight : float
        Weight of one ball [N].
    balls : ndarray, shape (n_strands,)
        Balls on each strand in steady running (dimensionless), not a whole number.
    carrying : ndarray of bool, shape (n_strands,)
        Which strands carry them.
    """

    chain_weight: float
    ball_weight: float
    balls: np.ndarray
    carrying: np.ndarray


@dataclass(frozen=True)
class FreeBody:
    """Forces in the loop.

    Attributes
    ----------
    start, end : ndarray, shape (n_strands,)
        Tension where each strand leaves its wheel and where it meets the next [N].
    driven_pull : float
        Tension by which the chain pulls back on the driven wheel [N].
    hub : ndarray, shape (n_wheels, 2)
        Pull of the chain on each wheel [N].
    level_from : str
        What sets the level of tension.
    hung_weight : float
        Weight of take-up, wheel and chain on its wrap along the take-up's way [N]; NaN without
        a movable axle.
    """

    start: np.ndarray
    end: np.ndarray
    driven_pull: float
    hub: np.ndarray
    level_from: str
    hung_weight: float

    @property
    def least(self) -> float:
        """Least tension in the loop [N]."""
        return float(min(self.start.min(), self.end.min()))

    @property
    def most(self) -> float:
        """Greatest tension in the loop [N]."""
        return float(max(self.start.max(), self.end.max()))


def load_of(scenario: Scenario, path: Route) -> Load:
    """Work out what the chain carries in steady running.

    Parameters
    ----------
    scenario : Scenario
        Chain, carriers, balls and feed.
    path : Route
        The taut loop.

    Returns
    -------
    Load
        Weights, and balls by strand: every place filled, or as many as the feed brings.
    """
    gravity, carriers, balls = scenario.frame.gravity, scenario.carriers, scenario.balls
    line = scenario.chain.link_mass / path.pitch
    if carriers is not None:
        line += carriers.mass / (carriers.every * path.pitch)
    up = -np.array(down_of(scenario))
    carrying = path.direction @ up > RISING
    count = np.zeros(len(path.wheels))
    if balls is not None and carriers is not None:
        length = np.array([_loaded_length(scenario, path, k) for k in range(len(count))])
        count = np.where(carrying, length / ball_spacing(scenario, path.pitch), 0.0)
    weight = balls.mass * gravity if balls is not None else 0.0
    return Load(line * gravity, weight, count, carrying)


def ball_spacing(scenario: Scenario, pitch: float) -> float:
    """Return the mean distance of balls along the carrying strand.

    Parameters
    ----------
    scenario : Scenario
        Carriers, feed and speed.
    pitch : float
        Pitch of the chain as it runs [m].

    Returns
    -------
    float
        That of the places, or more where the feed brings fewer balls [m].
    """
    carriers, balls = scenario.carriers, scenario.balls
    assert carriers is not None and balls is not None  # the caller has looked
    places = carriers.every * (balls.spacing or 1) * pitch
    filled = balls.start == "loaded" or balls.feed.kind == "every pocket"
    if filled or balls.feed.rate is None:
        return places
    return max(places, scenario.drive.chain_speed / balls.feed.rate)


def _loaded_length(scenario: Scenario, path: Route, k: int) -> float:
    """Return the length of strand `k` between the heights of loading and unloading [m]."""
    balls = scenario.balls
    assert balls is not None  # the caller has looked
    low, high = sorted((balls.load_at, balls.unload_at))
    foot, head = sorted((float(path.start[k, 1]), float(path.end[k, 1])))
    inside = max(0.0, min(high, head) - max(low, foot))
    return inside / (head - foot) * float(path.length[k]) if head > foot else 0.0


def free_body(scenario: Scenario, path: Route, load: Load, surplus: float = 0.0) -> FreeBody:
    """Work out the tension at both ends of every strand.

    Parameters
    ----------
    scenario : Scenario
        Mounts and drive.
    path : Route
        The taut loop, movable axles where they come to stand.
    load : Load
        What hangs on the chain; no balls for the empty lift.
    surplus : float
        Links more than the loop takes on fixed axles (dimensionless).

    Returns
    -------
    FreeBody
        Tensions, hub pulls, and what sets their level.
    """
    driven = [wheel.name for wheel in path.wheels].index(scenario.drive.sprocket)
    down = np.array(down_of(scenario))
    start, end, pull = _relative_tensions(path, load, driven, down)
    level, level_from, hung = _level(scenario, path, load, (start, end), surplus)
    start, end = start + level, end + level
    arriving = np.roll(end, 1)[:, None] * np.roll(path.direction, 1, axis=0)
    hub = start[:, None] * path.direction - arriving
    return FreeBody(start, end, pull, hub, level_from, hung)


def _relative_tensions(
    path: Route, load: Load, driven: int, down: np.ndarray
) -> tuple[np.ndarray, np.ndarray, float]:
    """Return tensions against that at the exit of the driven wheel, and the driven pull [N]."""
    count = len(path.wheels)
    start, end = np.zeros(count), np.zeros(count)
    tension = 0.0
    for hop in range(count):
        k, following = (driven + hop) % count, (driven + hop + 1) % count
        start[k] = tension
        rise = -float(path.direction[k] @ down)
        if math.isnan(path.length[k]):
            return start, end, 0.0
        line = load.chain_weight * path.length[k] + load.ball_weight * load.balls[k]
        tension += line * rise
        end[k] = tension
        if following != driven:
            lift = -float((path.start[following] - path.end[k]) @ down)
            tension += load.chain_weight * lift
    lift = -float((path.start[driven] - path.end[(driven - 1) % count]) @ down)
    return start, end, tension + load.chain_weight * lift


def _level(
    scenario: Scenario,
    path: Route,
    load: Load,
    relative: tuple[np.ndarray, np.ndarray],
    surplus: float,
) -> tuple[float, str, float]:
    """Return the level of tension [N], what sets it, and the hung weight [N]."""
    start, end = relative
    movable = [k for k, wheel in enumerate(path.wheels) if wheel.movable is not None]
    if len(path.wheels) == 1 or not movable:
        if surplus < 0.0:
            stretch = -surplus * path.pitch / float(path.length.sum())
            pull = scenario.chain.link_stiffness * path.pitch * stretch
            return pull - 0.5 * float(start.mean() + end.mean()), "stretch between axles", math.nan
        return -float(min(start.min(), end.min())), "nothing but the chain's weight", math.nan
    k = movable[-1]
    axis = _axis_now(path, k)
    weight, force = _take_up_force(scenario, path, load, k, axis)
    leaving, arriving = path.direction[k] @ axis, path.direction[k - 1] @ axis
    held = float(start[k] * leaving - end[k - 1] * arriving)
    name = f"take-up at {path.wheels[k].name!r}"
    return -(force + held) / float(leaving - arriving), name, weight


def _axis_now(path: Route, k: int) -> np.ndarray:
    """Return the direction in which an axle moves where it stands (dimensionless)."""
    wheel = path.wheels[k]
    if wheel.pivot is None:
        return np.array(wheel.movable, dtype=float)
    arm = np.array(wheel.center) - wheel.pivot
    return np.array([-arm[1], arm[0]]) / np.hypot(*arm)


def _take_up_force(
    scenario: Scenario, path: Route, load: Load, k: int, axis: np.ndarray
) -> tuple[float, float]:
    """Return the hung weight [N] and the whole force along the axle's way but the chain's [N]."""
    mount, wheel = scenario.sprocket[k].mount, path.wheels[k]
    down = np.array(down_of(scenario))
    on_wrap = load.chain_weight * path.pitch * path.wrap[k] / wheel.seat_step(path.pitch)
    weight = (mount.mass * scenario.frame.gravity + on_wrap) * float(down @ axis)
    force = weight
    if mount.kind == "spring":
        travel = float((np.array(wheel.center) - scenario.sprocket[k].center) @ axis)
        force += mount.set_force - (mount.rate or 0.0) * travel
    elif mount.kind == "counterweight":
        force += (mount.weight or 0.0) * scenario.frame.gravity
    return abs(weight), force
