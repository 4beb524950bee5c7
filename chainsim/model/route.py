"""Where every pin lies before the first step: in seats on the wraps, evenly on the strands.

The chain is walked once round the loop from a reference wheel.  Each wheel turns until the pin
that arrives finds a seat, so strands are whole numbers of links long and nothing is strained.
What the loop is too long or too short by is then taken up where it would be in the workshop:
movable axles are shifted until the loop closes taut; between fixed axles surplus links bow out in
the lowest place, and a small shortage stretches the strands.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
from scipy.optimize import brentq

from chainsim.errors import LayoutError
from chainsim.model.bow import bow_out
from chainsim.model.closing import closing_travel
from chainsim.model.tangents import Route, Wheel, route
from chainsim.model.walk import Walk, entry_place, evenly, on_wheel, walk_round

__all__ = ["Laid", "Route", "Wheel", "lay_chain", "route"]

LARGEST_STRETCH = 0.03
"""Share of the pitch by which the strands may be stretched to close a short loop
(dimensionless): beyond it the force would break a small chain, and the count is refused."""

SEATED = 0.15
"""A pin of a bow counts as seated when nearer to a seat than this share of the pitch
(dimensionless)."""

FOOT_LINKS = 10
"""Links over which a strand bows out at its foot (dimensionless), few, for surplus sinks."""

HANGING = math.cos(math.radians(45.0))
"""The wrap of the lowest wheel takes the surplus when its middle points down within 45°
(dimensionless cosine); else the lowest strand does."""


class Laid(NamedTuple):
    """A chain laid round its wheels.

    Attributes
    ----------
    pin : ndarray, shape (n_links, 2)
        Pin centers in the direction of travel [m]; pin 0 is the one on the first wheel nearest
        its exit.
    wheel_angle : ndarray, shape (n_wheels,)
        Angle of seat 0 of each wheel, from +x, counterclockwise [rad].
    seat : ndarray of int, shape (n_links,)
        Wheel on which each pin is seated (dimensionless), −1 for none.
    wheel_center : ndarray, shape (n_wheels, 2)
        Axles, movable ones shifted [m].
    travel : ndarray, shape (n_wheels,)
        Shift of each axle along its way [m].
    surplus : float
        Links too many for fixed axles, negative for a stretched loop (dimensionless).
    """

    pin: np.ndarray
    wheel_angle: np.ndarray
    seat: np.ndarray
    wheel_center: np.ndarray
    travel: np.ndarray
    surplus: float


def lay_chain(
    wheels: Sequence[Wheel],
    pitch: float,
    n_links: int,
    down: tuple[float, float] = (0.0, -1.0),
) -> Laid:
    """Place every pin of a chain of `n_links` round the wheels.

    Parameters
    ----------
    wheels : sequence of Wheel
        In the order of travel; see `route` for what is refused.
    pitch : float
        Pitch of the chain, growth included [m].
    n_links : int
        Number of links (dimensionless).
    down : tuple of float, shape (2,)
        Unit direction of gravity (dimensionless): surplus chain goes there.

    Returns
    -------
    Laid
        Pins, wheel angles, seats and axles.

    Raises
    ------
    LayoutError
        If the loop is too short to close with 3 % of stretch, or no shift of the movable axles
        closes it, or the route itself is impossible.

    Notes
    -----
    `Wheel.phase` is kept by the wheel where the walk starts: the first one, unless surplus chain
    has to bow out elsewhere.  Other wheels keep it up to the nearest seat.
    """
    wheels = tuple(wheels)
    movable = any(wheel.movable is not None for wheel in wheels)
    travel = np.zeros(len(wheels))
    if movable and len(wheels) > 1:
        travel = closing_travel(wheels, pitch, n_links, down)
        wheels = tuple(w.moved(d) for w, d in zip(wheels, travel, strict=True))
    path = route(wheels, pitch, down)
    if len(wheels) == 1:
        return _number_pins(path, _lay_hanging(path, n_links, down), travel, math.nan)
    walk = walk_round(path, n_links, 0, pitch)
    surplus = walk.links_left - walk.gap / pitch
    if movable or surplus <= 0.0:
        return _number_pins(path, _lay_taut(path, n_links, walk), travel, surplus)
    return _number_pins(path, _lay_slack(path, n_links, down), travel, surplus)


def _lay_taut(path: Route, n_links: int, walk: Walk) -> Walk:
    """Close the last strand straight, stretching all strands alike where the loop is short."""
    pitch = path.pitch
    missing = walk.gap / pitch - walk.links_left
    if missing > 1e-9:
        widest = pitch * (1.0 + LARGEST_STRETCH)

        def excess(spacing: float) -> float:
            trial = walk_round(path, n_links, 0, spacing)
            return trial.gap - trial.links_left * spacing

        if walk.links_left < 1 or excess(widest) > 0.0:
            short = max(1, math.ceil(missing - 1e-9))
            raise LayoutError(
                f"chain too short by {short} link{'s' * (short > 1)}: {n_links} links, the taut "
                f"loop between these axles needs {path.links:.2f}"
            )
        walk = walk_round(path, n_links, 0, float(brentq(excess, pitch, widest, xtol=1e-16)))
    return _close(walk, path, 0, evenly(walk.last, walk.first, walk.links_left))


def _lay_slack(path: Route, n_links: int, down: tuple[float, float]) -> Walk:
    """Let the surplus hang under the lowest wheel, or sag in the lowest strand.

    Under a wheel, pins stay seated where the chain meets and leaves it, so that no tooth stands
    in a pin: whole links hang below, the rest of one bows out at the foot of the arriving strand.
    """
    k = _lowest_wheel(path, down)
    if k is None:
        middle = 0.5 * (path.start + path.end) @ np.array(down)
        k = (int(np.argmax(middle)) + 1) % len(path.wheels)
        walk = walk_round(path, n_links, k, path.pitch)
        bow = bow_out(walk.last, walk.first, walk.links_left, path.pitch, down)
        return _close(walk, path, k, bow)
    walk = walk_round(path, n_links, k, path.pitch)
    links = math.ceil(walk.gap / path.pitch - 1e-9)
    strand = _strand_with_foot(walk, links, path.pitch)
    _, held = entry_place(path, k, walk.seat_angle[k])
    hanging = held + walk.links_left - links
    loop = bow_out(walk.first, walk.pin[0], hanging, path.pitch, down)
    seats = [k if _is_seated(path, k, walk.seat_angle[k], pin) else -1 for pin in loop]
    return walk._replace(
        pin=[*walk.pin, *strand, walk.first, *loop],
        seat=walk.seat + [-1] * len(strand) + [k] + seats,
    )


def _strand_with_foot(walk: Walk, links: int, pitch: float) -> np.ndarray:
    """Place the inner pins of a strand that is less than a link too long: it bows at its end."""
    foot = min(links, FOOT_LINKS)
    along = (walk.first - walk.last) / walk.gap
    straight = walk.last + pitch * np.arange(1, links - foot + 1)[:, None] * along
    start = straight[-1] if len(straight) else walk.last
    outward = (float(along[1]), float(-along[0]))
    return np.vstack([straight, bow_out(start, walk.first, foot, pitch, outward)])


def _lay_hanging(path: Route, n_links: int, down: tuple[float, float]) -> Walk:
    """Hang the loop of a single wheel from the pins on its upper half."""
    walk = walk_round(path, n_links, 0, path.pitch)
    apart = walk.gap / path.pitch
    if walk.links_left < apart:
        short = math.ceil(apart - walk.links_left)
        raise LayoutError(f"chain too short by {short} links to hang round its sprocket")
    return _close(walk, path, 0, bow_out(walk.last, walk.first, walk.links_left, path.pitch, down))


def _lowest_wheel(path: Route, down: tuple[float, float]) -> int | None:
    """Return the inside wheel under which surplus chain hangs, or None (dimensionless)."""
    depth = [np.array(wheel.center) @ np.array(down) + wheel.radius for wheel in path.wheels]
    k = int(np.argmax(depth))
    if path.wheels[k].side != 1 or path.wrap[k] < path.wheels[k].seat_step(path.pitch):
        return None
    middle = path.wrap_in[k] + 0.5 * path.wrap[k]
    drop = math.cos(middle) * down[0] + math.sin(middle) * down[1]
    return k if drop >= HANGING else None


def _is_seated(path: Route, k: int, seat_angle: float, pin: np.ndarray) -> bool:
    wheel = path.wheels[k]
    offset = pin - np.array(wheel.center)
    step = wheel.seat_step(path.pitch)
    away = math.remainder(wheel.side * math.atan2(offset[1], offset[0]) - seat_angle, step)
    radial = float(np.hypot(*offset)) - wheel.radius
    return math.hypot(radial, wheel.radius * away) < SEATED * path.pitch


def _close(walk: Walk, path: Route, reference: int, inner: np.ndarray) -> Walk:
    """Add the pins of the closing stretch and those of the wrap of the reference wheel."""
    wheel = path.wheels[reference]
    leaving = walk.seat_angle[reference]
    entry, held = entry_place(path, reference, leaving)
    step = wheel.seat_step(path.pitch)
    wrap = [on_wheel(wheel, entry + step * i) for i in range(held)]
    return walk._replace(
        pin=walk.pin + list(inner) + wrap,
        seat=walk.seat + [-1] * len(inner) + [reference] * len(wrap),
    )


def _number_pins(path: Route, walk: Walk, travel: np.ndarray, surplus: float) -> Laid:
    """Start the count at the pin of the first wheel that is nearest its exit."""
    pin, seat = np.array(walk.pin), np.array(walk.seat)
    on_first = np.flatnonzero(seat == 0)
    if on_first.size == 0:
        on_first = np.arange(len(pin))
    exit_point = path.start[0]
    shift = on_first[int(np.argmin(np.linalg.norm(pin[on_first] - exit_point, axis=1)))]
    angle = np.zeros(len(path.wheels))
    for k, wheel in enumerate(path.wheels):
        wanted = wheel.phase or 0.0
        known = wheel.side * walk.seat_angle[k]
        step = wheel.seat_step(path.pitch) if wheel.teeth else 2.0 * math.pi
        angle[k] = wanted + math.remainder(known - wanted, step)
    return Laid(
        pin=np.ascontiguousarray(np.roll(pin, -shift, axis=0)),
        wheel_angle=angle,
        seat=np.roll(seat, -shift),
        wheel_center=np.array([wheel.center for wheel in path.wheels], dtype=float),
        travel=travel,
        surplus=surplus,
    )
