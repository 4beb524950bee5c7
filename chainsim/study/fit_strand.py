"""Bench set-ups of a piece of chain, simulated with the lift's own links and joints."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any, NamedTuple

import numpy as np

from chainsim.errors import RunError
from chainsim.kernels.march import march
from chainsim.model import constants
from chainsim.model.packing import Packed
from chainsim.model.strand import Rider, bench_strand, rest_strand, strand_step

STILL = 1e-3
"""Unbalanced force that counts as rest, in weights of one link [dimensionless]."""

SET_DOWN = 1e-2
"""The same for a strand whose joints hold it in place with a weight on its arm [dimensionless]."""


CALM = 0.1
"""Damping of a link, share of critical, where only rest is asked for [dimensionless]."""


class Piece(NamedTuple):
    """A straight piece of chain that hangs from its first pin.

    Attributes
    ----------
    n_links : int
        (dimensionless).
    pitch, play, pin_radius : float
        [m].
    link_mass : float
        [kg].
    gravity : float
        [m/s2].
    """

    n_links: int
    pitch: float
    play: float
    pin_radius: float
    link_mass: float
    gravity: float


class Trace(NamedTuple):
    """Motion of the watched point on an even grid of times.

    Attributes
    ----------
    interval : float
        [s].
    place, speed : ndarray, shape (n_samples,)
        Displacement [m] and its rate [m/s]; the first sample is at 0 s.
    """

    interval: float
    place: np.ndarray
    speed: np.ndarray

    def at(self, time: np.ndarray) -> np.ndarray:
        """Displacement at any times, cubic between samples; before the first, that one's [m].

        Parameters
        ----------
        time : ndarray, shape (n_times,)
            Times [s].
        """
        last = len(self.place) - 1
        position = np.clip(time / self.interval, 0.0, last)
        i = np.minimum(position.astype(int), last - 1)
        s = position - i
        start, end = self.place[i], self.place[i + 1]
        leaving, arriving = self.interval * self.speed[i], self.interval * self.speed[i + 1]
        return (
            start * (1.0 + 2.0 * s) * (1.0 - s) ** 2
            + leaving * s * (1.0 - s) ** 2
            + end * s**2 * (3.0 - 2.0 * s)
            - arriving * s**2 * (1.0 - s)
        )


def piece_of(scenario: Any, length: float) -> Piece:
    """Cut a piece of the scenario's chain.

    Parameters
    ----------
    scenario : Scenario
    length : float
        Length [m], rounded to whole links.
    """
    chain = scenario.chain
    pitch = chain.pitch * (1.0 + chain.growth)
    return Piece(
        n_links=round(length / pitch),
        pitch=pitch,
        play=chain.play,
        pin_radius=chain.joint.pin_radius,
        link_mass=chain.link_mass,
        gravity=scenario.frame.gravity,
    )


def tensions(piece: Piece, load: float) -> np.ndarray:
    """Return the tension of each link at rest, from the top down [N].

    Parameters
    ----------
    piece : Piece
    load : float
        Force on the lower end [N].
    """
    below = piece.n_links - 0.5 - np.arange(piece.n_links)
    return load + below * piece.link_mass * piece.gravity


def hang(
    piece: Piece,
    values: Mapping[str, float],
    load: float,
    *,
    riders: tuple[Rider, ...] = (),
    joints: bool = False,
    clamped: bool = False,
    air: float | None = None,
) -> Packed:
    """Hang a piece of chain, laid where it will come to rest.

    Parameters
    ----------
    piece : Piece
    values : mapping of str to float
        Dotted key -> value of what is fitted [SI].
    load : float
        Force on its lower end [N].
    riders : tuple of Rider
        Weights on its links.
    joints : bool
        Whether the joints rub.
    clamped : bool
        Whether the lower end is held once the load hangs.
    air : float or None
        Air damping of each pin [N s/m]; None takes that of `values`.
    """
    stiffness = values["chain.link_stiffness"]
    lengths = piece.pitch + 0.5 * piece.play + tensions(piece, load) / stiffness
    pins = np.zeros((piece.n_links + 1, 2))
    pins[1:, 1] = -np.cumsum(lengths)
    moment = values["chain.joint.moment"] if joints else 0.0
    radius = values["chain.joint.friction"] * piece.pin_radius if joints else 0.0
    usual = moment + radius * float(tensions(piece, load).mean())
    return bench_strand(
        pins,
        pitch=piece.pitch,
        link_mass=piece.link_mass,
        link_stiffness=stiffness,
        link_damping=values["chain.link_damping"],
        play=piece.play,
        fixed=(0, piece.n_links) if clamped else (0,),
        end_mass=load / piece.gravity,
        riders=riders,
        joint_moment=moment,
        joint_radius=radius,
        joint_stiffness=usual / constants.SLIP_AT_JOINT,
        air_damping=values["chain.air_damping"] if air is None else air,
        gravity=(0.0, -piece.gravity),
    )


def growth(piece: Piece, values: Mapping[str, float], loads: np.ndarray) -> np.ndarray:
    """Return by how much each load lengthens a hung piece of chain [m].

    Parameters
    ----------
    piece : Piece
    values : mapping of str to float
        What is fitted [SI].
    loads : ndarray, shape (n_loads,)
        Forces [N].
    """
    ends = [_end_at_rest(piece, values, float(load)) for load in (0.0, *loads)]
    return ends[0] - np.array(ends[1:])


def _end_at_rest(piece: Piece, values: Mapping[str, float], load: float) -> float:
    """Height of the lower end at rest [m]."""
    packed = hang(piece, {**values, "chain.link_damping": CALM}, load)
    still = STILL * piece.link_mass * piece.gravity
    rest_strand(packed, strand_step(packed), still)
    return float(packed.state.y[piece.n_links])


def bounce(
    piece: Piece,
    values: Mapping[str, float],
    load: float,
    pulled: float,
    interval: float,
    n_samples: int,
) -> Trace:
    """Let go a load that was pulled down.

    Parameters
    ----------
    piece : Piece
    values : mapping of str to float
        What is fitted [SI].
    load : float
        Weight of the load [N].
    pulled : float
        How far it was pulled [m].
    interval : float
        Between samples [s].
    n_samples : int
        Number of samples (dimensionless).

    Returns
    -------
    Trace
        Of the load, positive the way it was pulled.
    """
    packed = hang(piece, values, load)
    n = piece.n_links
    home = float(packed.state.y[n])
    packed.state.y[: n + 1] -= pulled * np.arange(n + 1) / n
    return _trace(packed, packed.state.y, packed.state.vy, n, home, -1.0, interval, n_samples)


def pluck(
    piece: Piece,
    values: Mapping[str, float],
    load: float,
    at: float,
    pulled: float,
    interval: float,
    n_samples: int,
) -> Trace:
    """Let go a strand that was pulled sideways between its held ends.

    Parameters
    ----------
    piece : Piece
    values : mapping of str to float
        What is fitted [SI].
    load : float
        Weight that tensioned it before its lower end was clamped [N].
    at : float
        Where it was plucked and is watched, from its upper end [m].
    pulled : float
        How far [m].
    interval : float
        Between samples [s].
    n_samples : int
        Number of samples (dimensionless).

    Returns
    -------
    Trace
        Of the pin where it was plucked.
    """
    packed = hang(piece, values, load, joints=True, clamped=True)
    n = piece.n_links
    pin = min(max(round(at / piece.pitch), 1), n - 1)
    share = np.arange(n + 1, dtype=float)
    packed.state.x[: n + 1] = pulled * np.minimum(share / pin, (n - share) / (n - pin))
    return _trace(packed, packed.state.x, packed.state.vx, pin, 0.0, 1.0, interval, n_samples)


def _trace(
    packed: Packed,
    place: np.ndarray,
    speed: np.ndarray,
    pin: int,
    home: float,
    sign: float,
    interval: float,
    n_samples: int,
) -> Trace:
    """March, and keep one coordinate of one pin."""
    _close(packed)
    steps = math.ceil(interval / strand_step(packed))
    dt = interval / steps
    found = np.empty((2, n_samples))
    for k in range(n_samples):
        found[:, k] = sign * (place[pin] - home), sign * speed[pin]
        march(k * interval, dt, steps, packed.parts, packed.state, packed.rate, packed.work, 0.0)
    if not np.isfinite(found).all():
        raise RunError("the strand on the bench moves beyond all bounds with the values tried")
    return Trace(interval, found[0], found[1])


def _close(packed: Packed) -> None:
    """Copy pin 0 to the ghost pin behind the last."""
    n = packed.parts.chain.n
    packed.state.x[n], packed.state.y[n] = packed.state.x[0], packed.state.y[0]


def tilts(
    piece: Piece, values: Mapping[str, float], loads: np.ndarray, weight: float, arm: float
) -> np.ndarray:
    """Return the tilt of a strand's middle link under a weight set down gently on its arm [rad].

    Parameters
    ----------
    piece : Piece
    values : mapping of str to float
        What is fitted [SI].
    loads : ndarray, shape (n_loads,)
        Forces on the lower end [N].
    weight : float
        Force of the weight [N].
    arm : float
        Distance of its center from the line of the pins [m].
    """
    return np.array([_tilt(piece, values, float(load), weight, arm) for load in loads])


def _tilt(
    piece: Piece, values: Mapping[str, float], load: float, weight: float, arm: float
) -> float:
    """Tilt of the middle link at rest [rad].

    All speed is taken out where the motion would turn back, as by a careful hand: the weight
    never swings past its rest, so that friction in the joints stands against it.
    """
    middle = piece.n_links // 2
    rider = Rider(middle, 0.5 * piece.pitch, arm, weight / piece.gravity)
    packed = hang(piece, values, load, riders=(rider,), joints=True, air=0.0)
    rest_strand(packed, strand_step(packed), SET_DOWN * piece.link_mass * piece.gravity)
    dx = packed.state.x[middle + 1] - packed.state.x[middle]
    dy = packed.state.y[middle + 1] - packed.state.y[middle]
    return abs(math.atan2(dx, -dy))
