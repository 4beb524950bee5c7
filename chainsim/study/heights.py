"""A taller lift with nothing else changed: links added, all that stands above moved up."""

from __future__ import annotations

import math
from typing import Any


def height_of(scenario: Any) -> float:
    """Height from the lowest to the highest axle.

    Parameters
    ----------
    scenario : Scenario
        The lift.

    Returns
    -------
    float
        Height [m].
    """
    heights = [sprocket.center[1] for sprocket in scenario.sprocket]
    return max(heights) - min(heights)


def raising_step(scenario: Any) -> tuple[float, int]:
    """Smallest rise that keeps carriers evenly spaced all round the loop.

    Parameters
    ----------
    scenario : Scenario
        The lift.

    Returns
    -------
    step : float
        Rise [m]: so many whole links in each strand that the links added are a multiple of
        the carrier spacing.
    n_links : int
        Links of the present loop (dimensionless).
    """
    from chainsim.model.lift import build_lift

    lift = build_lift(scenario)
    carriers = scenario.carriers
    every = carriers.every if carriers is not None and carriers.at is None else 1
    return every // math.gcd(every, 2) * scenario.chain.pitch, lift.n_links


def raised(scenario: Any, rise: float, n_links: int) -> dict[str, Any]:
    """Values that make a lift taller.

    Parameters
    ----------
    scenario : Scenario
        The present lift.
    rise : float
        Rise of everything above the middle [m], a whole number of pitches.
    n_links : int
        Links of the present loop (dimensionless).

    Returns
    -------
    dict of str to object
        Scenario values by dotted key [SI].
    """
    heights = [sprocket.center[1] for sprocket in scenario.sprocket]
    middle = 0.5 * (max(heights) + min(heights))

    def moved(point: tuple[float, float]) -> list[float]:
        return [point[0], point[1] + rise if point[1] > middle else point[1]]

    values: dict[str, Any] = {"chain.links": n_links + 2 * round(rise / scenario.chain.pitch)}
    for sprocket in scenario.sprocket:
        if sprocket.center[1] > middle:
            values[f"sprocket.{sprocket.name}.center"] = moved(sprocket.center)
    for wall in scenario.wall:
        values[f"wall.{wall.name}.points"] = [moved(point) for point in wall.points]
    for guide in scenario.guide:
        for key, point in (("from", guide.start), ("to", guide.end), ("center", guide.center)):
            if point is not None:
                values[f"guide.{guide.name}.{key}"] = moved(point)
    values.update(_moved_balls(scenario.balls, moved, scenario))
    return values


def _moved_balls(balls: Any, moved: Any, scenario: Any) -> dict[str, Any]:
    """Where balls come and go, as far as the scenario states it itself."""
    if balls is None:
        return {}
    values: dict[str, Any] = {}
    for key in ("load_at", "unload_at"):
        if scenario.origin(f"balls.{key}").source == "given":
            values[f"balls.{key}"] = moved((0.0, getattr(balls, key)))[1]
    if balls.discharge is not None:
        values["balls.discharge.at"] = moved(balls.discharge.at)
    if balls.feed.at is not None:
        values["balls.feed.at"] = moved(balls.feed.at)
    return values
