"""How many links: the nearest counts, and what each of them means for the lift."""

from __future__ import annotations

import math

from chainsim.errors import LayoutError
from chainsim.model.link_choice import SPARE_FOR_ASSEMBLY, LinkChoice
from chainsim.model.route import lay_chain
from chainsim.model.tangents import Route

__all__ = ["LinkChoice", "describe_links", "fitting_links", "link_choices"]


def link_choices(
    path: Route, carrier_every: int | None, down: tuple[float, float] = (0.0, -1.0)
) -> tuple[LinkChoice, ...]:
    """List the three whole numbers of links that are nearest to the taut loop.

    Parameters
    ----------
    path : Route
        The taut loop on the axles as drawn.
    carrier_every : int or None
        Links from one carrier to the next (dimensionless); None without carriers.
    down : tuple of float, shape (2,)
        Unit direction of gravity (dimensionless).

    Returns
    -------
    tuple of LinkChoice
        In ascending order of links.

    Raises
    ------
    LayoutError
        For a single wheel: its hanging loop takes any number of links.
    """
    nearest = _whole_part(path)
    return tuple(
        describe_links(path, count, carrier_every, down)
        for count in (nearest - 1, nearest, nearest + 1)
    )


def fitting_links(path: Route, carrier_every: int | None) -> int:
    """Choose the number of links that fits best.

    Parameters
    ----------
    path : Route
        The taut loop on the axles as drawn.
    carrier_every : int or None
        Links from one carrier to the next (dimensionless); None without carriers.

    Returns
    -------
    int
        With a movable axle the nearest count, a multiple of the carrier spacing where there are
        carriers; between fixed axles the least count that closes (dimensionless).
    """
    nearest = _whole_part(path)
    if any(wheel.movable is not None for wheel in path.wheels):
        every = carrier_every or 1
        return max(every * round(path.links / every), every)
    return max(nearest, math.ceil(path.links - SPARE_FOR_ASSEMBLY))


def describe_links(
    path: Route,
    count: int,
    carrier_every: int | None,
    down: tuple[float, float] = (0.0, -1.0),
) -> LinkChoice:
    """Say what one number of links means.

    Parameters
    ----------
    path : Route
        The taut loop on the axles as drawn.
    count : int
        Number of links (dimensionless).
    carrier_every : int or None
        Links from one carrier to the next (dimensionless); None without carriers.
    down : tuple of float, shape (2,)
        Unit direction of gravity (dimensionless).

    Returns
    -------
    LinkChoice
        Surplus, travel, carriers and partners.
    """
    every = carrier_every or 0
    movable = [i for i, wheel in enumerate(path.wheels) if wheel.movable is not None]
    travel: tuple[tuple[str, float], ...] = ()
    moves: tuple[tuple[str, float, float], ...] = ()
    fault = ""
    try:
        laid = lay_chain(path.wheels, path.pitch, count, down)
        travel = tuple((path.wheels[i].name, float(laid.travel[i])) for i in movable)
        shift = laid.wheel_center - [wheel.center for wheel in path.wheels]
        moves = tuple(
            (path.wheels[i].name, float(shift[i, 0]), float(shift[i, 1])) for i in movable
        )
    except LayoutError as error:
        fault = str(error)
    return LinkChoice(
        links=count,
        surplus=count - path.links,
        travel=travel,
        moves=moves,
        distance=_taut_distance(path, count),
        carriers=count // every if every else 0,
        left_over=count % every if every else 0,
        is_odd=count % 2 == 1,
        partners=tuple(
            (wheel.name, count // math.gcd(count, wheel.teeth))
            for wheel in path.wheels
            if wheel.teeth
        ),
        fault=fault,
    )


def _whole_part(path: Route) -> int:
    if math.isnan(path.links):
        raise LayoutError(
            "the hanging loop of a single sprocket takes any number of links: state chain.links"
        )
    return round(path.links)


def _taut_distance(path: Route, count: int) -> float | None:
    """Return the distance of two axles that takes so many links [m].

    Both strands grow alike with the distance; for two wheels it is found from the length of the
    loop, linear in the distance but for the lean of the strands, by Newton's method.
    """
    if len(path.wheels) != 2:
        return None
    (a, b), pitch = path.wheels, path.pitch
    difference = abs(a.side * a.radius - b.side * b.radius)
    distance = math.dist(a.center, b.center)
    for _ in range(50):
        lean = math.asin(min(1.0, difference / distance))
        turns = (math.pi - 2.0 * lean) / 2.0, (math.pi + 2.0 * lean) / 2.0
        small, large = sorted((a, b), key=lambda wheel: wheel.radius)
        wraps = 2.0 * turns[0] / small.seat_step(pitch) + 2.0 * turns[1] / large.seat_step(pitch)
        length = 2.0 * distance * math.cos(lean) / pitch + wraps
        change = (count - length) * pitch / (2.0 * math.cos(lean))
        distance += change
        if distance <= difference:
            return None
        if abs(change) < 1e-12:
            break
    return distance
