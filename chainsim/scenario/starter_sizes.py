"""Work out the sizes of a first lift from the demand alone: height, ball, ball rate."""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.errors import CallError
from chainsim.scenario.kinds import ball_mass, chain_properties
from chainsim.units import format_si

TEETH = 8
USUAL_PITCHES_MM = (4, 5, 6, 8, 10, 12, 15, 20)
LIGHT_UP_TO = 6e-3  # m, pitch up to which moulded_light is proposed
BALL_OVER_PITCH = 1.6
SPACING_OVER_BALL = 2.2  # room for ball, floor and the way in
POCKETS_OVER_BALLS = 1.5  # pockets that come by for each ball that arrives
SMALLEST_BALL, LARGEST_BALL = 5e-3, 80e-3
FEWEST_CARRIERS = 3  # on the carrying strand
CARRIER_OVER_BALL_MASS = 0.15
HUNG_OVER_BALLS_AT_HEAD = 1.2  # hung mass over balls on the strand, driven at the head
HUNG_OVER_BALLS_AT_TAIL = 2.0  # the same, driven at the tail: slack comes at 1
UNIT_OVER_BALL_MASS = 6.0  # slide, axle and sprocket of a head on a counterweight
GRAVITY = 9.81


class Sizes(NamedTuple):
    """Sizes of a first lift.

    Attributes
    ----------
    kind : str
        Kind of chain.
    pitch, distance, ball : float
        Pitch, distance between the axles, ball diameter [m].
    every, links : int
        Links from carrier to carrier, links of the chain (dimensionless).
    speed, rate : float
        Chain speed [m/s], balls per second [1/s].
    carrier_mass : float
        Mass of a carrier [kg].
    balls_mass : float
        Mass of the balls on a carrying strand with every pocket full [kg].
    chain_mass : float
        Mass of the chain with its carriers [kg].
    """

    kind: str
    pitch: float
    distance: float
    ball: float
    every: int
    links: int
    speed: float
    rate: float
    carrier_mass: float
    balls_mass: float
    chain_mass: float

    @property
    def hung_at_head(self) -> float:
        """Hung mass for a lift driven at the head [kg]."""
        return self.balls_mass * HUNG_OVER_BALLS_AT_HEAD

    @property
    def hung_at_tail(self) -> float:
        """Hung mass for a lift driven at the tail [kg]."""
        return self.balls_mass * HUNG_OVER_BALLS_AT_TAIL

    @property
    def head_unit(self) -> float:
        """Mass of a head that moves on a slide [kg]."""
        return UNIT_OVER_BALL_MASS * ball_mass("steel", self.ball).typical

    @property
    def counterweight(self) -> float:
        """Mass that lifts head, chain, balls and leaves a pull at the foot [kg]."""
        return self.head_unit + self.chain_mass + self.balls_mass + self.hung_at_tail

    @property
    def spring_force(self) -> float:
        """Pull of a spring on the tail [N]."""
        return self.hung_at_head * GRAVITY


def sizes_for(height: float, ball: float, rate: float) -> Sizes:
    """Work out the sizes of a lift.

    Parameters
    ----------
    height : float
        Least distance between the axles, along the lift [m].
    ball : float
        Diameter of a ball [m].
    rate : float
        Balls per second [1/s].

    Returns
    -------
    Sizes
        A loop that carriers divide evenly.

    Raises
    ------
    CallError
        The demand is outside what a small lift can be.
    """
    if not SMALLEST_BALL <= ball <= LARGEST_BALL:
        span = f"{format_si(SMALLEST_BALL, 'length')} to {format_si(LARGEST_BALL, 'length')}"
        raise CallError(f"ball is {format_si(ball, 'length')}; {span} is due")
    if rate <= 0.0:
        raise CallError(f"rate is {format_si(rate, 'rate')}; more than nothing is due")
    pitch = _usual_pitch(ball)
    every = math.ceil(SPACING_OVER_BALL * ball / pitch)
    lowest = FEWEST_CARRIERS * every * pitch
    if not lowest <= height <= 100.0 * lowest:
        span = f"{format_si(lowest, 'length')} to {format_si(100.0 * lowest, 'length')}"
        raise CallError(f"height is {format_si(height, 'length')}; for this ball, {span} is due")
    links = every * math.ceil(round((2.0 * height / pitch + TEETH) / every, 9))
    return _weighed(ball, rate, pitch, every, links)


def _weighed(ball: float, rate: float, pitch: float, every: int, links: int) -> Sizes:
    """Join the sizes with the masses that follow from them."""
    kind = "moulded_light" if pitch <= LIGHT_UP_TO else "moulded_sturdy"
    distance = (links - TEETH) * pitch / 2.0
    one_ball = ball_mass("steel", ball).typical
    carrier = CARRIER_OVER_BALL_MASS * one_ball
    link = chain_properties(kind, pitch)["link_mass"].typical
    return Sizes(
        kind=kind,
        pitch=pitch,
        distance=distance,
        ball=ball,
        every=every,
        links=links,
        speed=POCKETS_OVER_BALLS * rate * every * pitch,
        rate=rate,
        carrier_mass=carrier,
        balls_mass=one_ball * distance / (every * pitch),
        chain_mass=links * (link + carrier / every),
    )


def _usual_pitch(ball: float) -> float:
    """Usual pitch nearest to what suits a ball [m]."""
    wanted = 1e3 * ball / BALL_OVER_PITCH
    return 1e-3 * min(USUAL_PITCHES_MM, key=lambda pitch: abs(math.log(pitch / wanted)))
