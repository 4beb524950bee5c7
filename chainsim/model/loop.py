"""Wheels as the route of the chain sees them, and the taut loop round them."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

FULL_TURN = 2.0 * math.pi


@dataclass(frozen=True)
class Wheel:
    """A wheel as the route of the chain sees it.

    Parameters
    ----------
    name : str
        Name used in every message.
    center : tuple of float, shape (2,)
        Axle (right, up) [m].
    radius : float
        Radius of the circle through the centers of the pins that lie on it [m].
    teeth : int
        Number of teeth (dimensionless); 0 for a smooth roller.
    side : int
        +1: inside the loop, the chain runs counterclockwise round it; −1: outside, clockwise
        (dimensionless).
    phase : float or None
        Angle of the wheel (that of seat 0) [rad]; None leaves it to the chain.
    movable : tuple of float, shape (2,), or None
        Direction in which the axle may be shifted to close the loop taut, of any length, made
        one (dimensionless); None for an axle at a fixed place.
    pivot : tuple of float, shape (2,), or None
        Where given [m], the axle swings about this point, starting out along `movable`.
    """

    name: str
    center: tuple[float, float]
    radius: float
    teeth: int
    side: int = 1
    phase: float | None = None
    movable: tuple[float, float] | None = None
    pivot: tuple[float, float] | None = None

    def __post_init__(self) -> None:
        if self.movable is not None:
            length = math.hypot(*self.movable)
            unit = (self.movable[0] / length, self.movable[1] / length)
            object.__setattr__(self, "movable", unit)

    def seat_step(self, pitch: float) -> float:
        """Return the angle between neighboring pins on the wheel.

        Parameters
        ----------
        pitch : float
            Pitch of the chain [m]; it counts on a smooth roller only.

        Returns
        -------
        float
            Angle [rad].
        """
        if self.teeth > 0:
            return FULL_TURN / self.teeth
        return 2.0 * math.asin(min(1.0, 0.5 * pitch / self.radius))

    def moved(self, travel: float) -> Wheel:
        """Return the wheel with its axle shifted along its way.

        Parameters
        ----------
        travel : float
            Shift [m]; along the arc of an axle that swings about a pivot.

        Returns
        -------
        Wheel
            The same wheel elsewhere.
        """
        if self.movable is None or travel == 0.0:
            return self
        center, axis = np.array(self.center), np.array(self.movable)
        if self.pivot is None:
            return replace(self, center=tuple(center + travel * axis))
        arm = center - self.pivot
        reach = math.hypot(*arm)
        turn = math.copysign(travel / reach, travel * (arm[0] * axis[1] - arm[1] * axis[0]))
        cos, sin = math.cos(turn), math.sin(turn)
        swung = np.array([cos * arm[0] - sin * arm[1], sin * arm[0] + cos * arm[1]])
        return replace(self, center=tuple(swung + self.pivot))


@dataclass(frozen=True)
class Route:
    """The taut loop: strand `i` leads from wheel `i` to the next one.

    Attributes
    ----------
    wheels : tuple of Wheel
        In the order of travel.
    pitch : float
        Pitch of the chain [m].
    names : tuple of str
        Name of each strand, such as `tail-head`.
    start, end : ndarray, shape (n_wheels, 2)
        Where each strand leaves its wheel and meets the next [m].
    direction : ndarray, shape (n_wheels, 2)
        Unit vector of each strand in the direction of travel (dimensionless).
    length : ndarray, shape (n_wheels,)
        Length of each strand [m]; NaN for the hanging loop under a single wheel.
    wrap_in, wrap_out : ndarray, shape (n_wheels,)
        Direction, seen from the axle, of the point where the chain meets and leaves each wheel
        [rad], each in (−π, π].
    wrap : ndarray, shape (n_wheels,)
        Angle over which the chain lies on each wheel [rad], never negative.
    links : float
        Length of the loop in links, seldom whole (dimensionless); NaN for a single wheel.
    """

    wheels: tuple[Wheel, ...]
    pitch: float
    names: tuple[str, ...]
    start: np.ndarray
    end: np.ndarray
    direction: np.ndarray
    length: np.ndarray
    wrap_in: np.ndarray
    wrap_out: np.ndarray
    wrap: np.ndarray
    links: float
