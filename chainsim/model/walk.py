"""One walk round the loop, pin by pin, that turns every wheel until the arriving pin finds a seat.

Angles on a wheel are travel angles: they grow in the direction of travel, so that the walk reads
the same for wheels inside and outside the loop.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from chainsim.model.tangents import Route, Wheel


class Walk(NamedTuple):
    """Pins placed in order from the exit of the reference wheel round to the last known one.

    Attributes
    ----------
    pin : list of ndarray, shape (2,)
        Pin centers in order [m].
    seat : list of int
        Wheel on which each pin sits, −1 for none (dimensionless).
    seat_angle : dict of int to float
        Travel angle of a seat of each wheel [rad].
    first, last : ndarray, shape (2,)
        Pin at the far and at the near side of the stretch that is still open [m].
    gap : float
        Straight distance between them [m].
    links_left : int
        Links for that stretch (dimensionless).
    """

    pin: list[np.ndarray]
    seat: list[int]
    seat_angle: dict[int, float]
    first: np.ndarray
    last: np.ndarray
    gap: float
    links_left: int


def walk_round(path: Route, n_links: int, reference: int, spacing: float) -> Walk:
    """Walk from the exit of the reference wheel round to where the loop has to close.

    What is left open is the last strand, up to the first seat of the reference wheel.

    Parameters
    ----------
    path : Route
        The taut loop.
    n_links : int
        Number of links of the chain (dimensionless).
    reference : int
        Wheel at whose exit the walk starts (dimensionless).
    spacing : float
        Pin distance on the strands [m]: the pitch, or more where they are stretched.

    Returns
    -------
    Walk
        What was placed, and what is left to close.
    """
    count = len(path.wheels)
    leaving = _exit_place(path, reference, None)
    first = on_wheel(path.wheels[reference], leaving)
    pins, seats, seat_angle = [first], [reference], {reference: leaving}
    for hop in range(1, count):
        k = (reference + hop) % count
        links, arriving = _arrival(path, k, pins[-1], spacing)
        stop = on_wheel(path.wheels[k], arriving)
        pins += [*evenly(pins[-1], stop, links), stop]
        seats += [-1] * (links - 1) + [k]
        seat_angle[k] = arriving
        following = _wrap_places(path, k, arriving)
        pins += [on_wheel(path.wheels[k], angle) for angle in following]
        seats += [k] * len(following)
    entry_angle, held = entry_place(path, reference, leaving)
    first = on_wheel(path.wheels[reference], entry_angle)
    used = len(pins) - 1 + held
    gap = float(np.linalg.norm(first - pins[-1]))
    return Walk(pins, seats, seat_angle, first, pins[-1], gap, n_links - used)


def on_wheel(wheel: Wheel, travel_angle: float) -> np.ndarray:
    """Return the place of a pin on a wheel.

    Parameters
    ----------
    wheel : Wheel
        The wheel.
    travel_angle : float
        Angle in the direction of travel [rad].

    Returns
    -------
    ndarray, shape (2,)
        Pin center [m].
    """
    angle = wheel.side * travel_angle
    return np.array(wheel.center) + wheel.radius * np.array([math.cos(angle), math.sin(angle)])


def entry_place(path: Route, k: int, leaving: float) -> tuple[float, int]:
    """Find the seat of a wheel on which an arriving strand bears.

    Parameters
    ----------
    path : Route
        The taut loop.
    k : int
        Index of the wheel (dimensionless).
    leaving : float
        Travel angle of the seat at the exit [rad].

    Returns
    -------
    angle : float
        Travel angle of the first seat that supports the strand [rad].
    held : int
        Links from there to the exit (dimensionless).
    """
    step = path.wheels[k].seat_step(path.pitch)
    entering = _travel_angle(path, k, entering=True)
    held = max(0, math.floor((leaving - entering + 0.5 * step) / step - 1e-9))
    return leaving - held * step, held


def evenly(start: np.ndarray, end: np.ndarray, links: int) -> np.ndarray:
    """Space the inner pins of a straight stretch evenly.

    Parameters
    ----------
    start, end : ndarray, shape (2,)
        Pins at its ends [m].
    links : int
        Links between them (dimensionless).

    Returns
    -------
    ndarray, shape (links - 1, 2)
        Pin centers [m].
    """
    share = np.arange(1, links)[:, None] / links
    return start + share * (end - start)


def _travel_angle(path: Route, k: int, entering: bool) -> float:
    """Return the angle of entry, or of exit, growing in the direction of travel [rad]."""
    start = path.wheels[k].side * path.wrap_in[k]
    return float(start if entering else start + path.wrap[k])


def _exit_place(path: Route, k: int, known_seat: float | None) -> float:
    """Return the travel angle of the last seat that supports the leaving strand [rad]."""
    wheel = path.wheels[k]
    leaving = _travel_angle(path, k, entering=False)
    if known_seat is None:
        if wheel.phase is None:
            return leaving
        known_seat = wheel.side * wheel.phase
    step = wheel.seat_step(path.pitch)
    return known_seat + step * math.floor((leaving + 0.5 * step - known_seat) / step + 1e-9)


def _wrap_places(path: Route, k: int, arriving: float) -> list[float]:
    """Return the travel angles of the pins that follow the arriving one on a wheel [rad]."""
    step = path.wheels[k].seat_step(path.pitch)
    held = round((_exit_place(path, k, arriving) - arriving) / step)
    return [arriving + step * i for i in range(1, held + 1)]


def _arrival(path: Route, k: int, here: np.ndarray, spacing: float) -> tuple[int, float]:
    """Return links and travel angle [rad] of the pin that reaches wheel `k` from `here`.

    The pin lies where the circle of a whole number of links about `here` cuts the pin circle of
    the wheel, at the crossing nearest to the tangent point.
    """
    wheel = path.wheels[k]
    entering = _travel_angle(path, k, entering=True)
    links = max(1, round(float(np.linalg.norm(on_wheel(wheel, entering) - here)) / spacing))
    offset = here - np.array(wheel.center)
    distance = float(np.hypot(*offset))
    reach = links * spacing
    cosine = (distance**2 + wheel.radius**2 - reach**2) / (2.0 * distance * wheel.radius)
    spread = math.acos(min(1.0, max(-1.0, cosine)))
    toward = wheel.side * math.atan2(offset[1], offset[0])
    candidates = (toward + spread, toward - spread)
    turns = [math.remainder(angle - entering, 2.0 * math.pi) for angle in candidates]
    return links, entering + min(turns, key=abs)
