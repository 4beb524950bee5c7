"""How many links: the nearest counts, and what each of them means for the lift."""

from __future__ import annotations

import math
from dataclasses import dataclass

from chainsim.errors import LayoutError
from chainsim.model.route import lay_chain
from chainsim.model.tangents import Route

SPARE_FOR_ASSEMBLY = 0.02
"""Share of a link by which a loop between fixed axles may be short (dimensionless): a chain is
joined by hand with that much stretch; common practice, no source."""

UNMOVED = 5e-6
"""Travel [m] that is printed as none: it would read 0.00 mm."""


@dataclass(frozen=True)
class LinkChoice:
    """One number of links and what it brings.

    Attributes
    ----------
    links : int
        Number of links (dimensionless).
    surplus : float
        Links more than the taut loop takes on the axles as drawn (dimensionless).
    travel : tuple of (str, float)
        Name of each movable axle and its travel along its way that closes the loop taut [m].
    moves : tuple of (str, float, float)
        Name of each movable axle and by how much it moves to the right and up [m].
    distance : float or None
        Distance of the two axles at which the loop closes taut [m]; None for more than two.
    carriers : int
        Carriers at the wanted spacing (dimensionless); 0 without carriers.
    left_over : int
        Links left over after them (dimensionless): the last gap is longer by that many.
    is_odd : bool
        Whether the count is odd.
    partners : tuple of (str, int)
        Name of each sprocket and the number of links that each of its teeth meets
        (dimensionless).
    fault : str
        Why it cannot be laid; empty where it can.
    """

    links: int
    surplus: float
    travel: tuple[tuple[str, float], ...]
    moves: tuple[tuple[str, float, float], ...]
    distance: float | None
    carriers: int
    left_over: int
    is_odd: bool
    partners: tuple[tuple[str, int], ...]
    fault: str = ""

    @property
    def text(self) -> str:
        """What the count means, in one line."""
        if self.fault:
            return f"{self.links} links: {self.fault}"
        parts = [_travel_text(self), _carrier_text(self), _partner_text(self)]
        if self.is_odd:
            parts.append("odd: a chain of inner and outer links needs an offset link")
        return f"{self.links} links: " + "; ".join(part for part in parts if part)


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


def _travel_text(choice: LinkChoice) -> str:
    """Say where the axles come to stand."""
    if choice.moves:
        if all(math.hypot(right, up) < UNMOVED for _, right, up in choice.moves):
            return "closes taut with the axles as drawn"
        return ", ".join(_move_text(*move) for move in choice.moves)
    if math.isnan(choice.surplus):
        return "hangs free below its sprocket"
    if abs(choice.surplus) < SPARE_FOR_ASSEMBLY:
        return "closes taut on the axles as drawn"
    spare = "too many" if choice.surplus > 0.0 else "too few"
    text = f"{abs(choice.surplus):.2f} links {spare} for the axles as drawn"
    if choice.distance is not None:
        text += f" (taut at {1e3 * choice.distance:.2f} mm between them)"
    return text


def _move_text(name: str, right: float, up: float) -> str:
    """Say where one axle moves, in the words of the longer part of its way."""
    way = math.hypot(right, up)
    if abs(up) >= abs(right):
        word = "up" if up > 0.0 else "down"
    else:
        word = "to the right" if right > 0.0 else "to the left"
    return f"{name} moves {1e3 * way:.2f} mm {word}"


def _carrier_text(choice: LinkChoice) -> str:
    if not choice.carriers:
        return ""
    if not choice.left_over:
        return f"{choice.carriers} carriers evenly spaced"
    links = "link" if choice.left_over == 1 else "links"
    return f"{choice.carriers} carriers and {choice.left_over} {links} left over"


def _partner_text(choice: LinkChoice) -> str:
    """Say how evenly wear spreads: each tooth meets count/gcd different links."""
    hunting = [name for name, partners in choice.partners if partners == choice.links]
    if len(hunting) == len(choice.partners):
        return "every tooth meets every link"
    return ", ".join(
        f"a tooth of {name} meets only one link in {choice.links // partners}"
        for name, partners in choice.partners
        if partners != choice.links
    )
