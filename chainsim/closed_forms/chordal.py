"""Chordal action: the chain lies on its sprocket as a polygon, so its speed rises and falls.

All for one sprocket that turns at constant speed and a straight, stiff strand that leaves it
tangent to the mean direction.
"""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.closed_forms.sprockets import pitch_radius


class EngagementKick(NamedTuple):
    """What happens at the instant at which a pin seats.

    Attributes
    ----------
    transverse_speed : float
        Speed of the strand across its own line just before [m/s]; just after it is the same
        the other way.
    relative_speed : float
        Speed of the arriving pin against its seat [m/s].
    acceleration_jump : float
        Jump of the strand's acceleration along its line [m/s2].
    """

    transverse_speed: float
    relative_speed: float
    acceleration_jump: float


def sprocket_speed(chain_speed: float, pitch: float, teeth: int) -> float:
    """Angular speed of a sprocket for a mean chain speed.

    Parameters
    ----------
    chain_speed : float
        Mean chain speed over a tooth [m/s].
    pitch : float
        Chain pitch [m].
    teeth : int
        Number of teeth (dimensionless).

    Returns
    -------
    float
        Angular speed [rad/s]: one turn moves `teeth` pitches of chain.
    """
    return 2.0 * math.pi * chain_speed / (teeth * pitch)


def strand_speed(angle: float, rate: float, pitch: float, teeth: int) -> float:
    """Speed of a straight strand while one pin carries it round.

    Parameters
    ----------
    angle : float
        Angle of the leading seated pin from the normal of the strand [rad], between −π/z
        and π/z.
    rate : float
        Angular speed of the sprocket [rad/s].
    pitch : float
        Chain pitch [m].
    teeth : int
        Number of teeth (dimensionless).

    Returns
    -------
    float
        Speed of the strand along its line [m/s].

    References
    ----------
    *Shigley's Mechanical Engineering Design*, section on roller chain: chordal speed variation
    (from memory).
    """
    return rate * pitch_radius(pitch, teeth) * math.cos(angle)


def speed_variation(teeth: int) -> float:
    """Peak-to-peak variation of the chain speed over its mean.

    Parameters
    ----------
    teeth : int
        Number of teeth (dimensionless).

    Returns
    -------
    float
        `(vmax − vmin) / vmean` (dimensionless): 14.0 % at six teeth.

    References
    ----------
    `(π/z) (1/sin(π/z) − 1/tan(π/z))`: *Shigley's Mechanical Engineering Design*, section on
    roller chain, chordal speed variation (from memory).
    """
    half = math.pi / teeth
    return half * (1.0 / math.sin(half) - 1.0 / math.tan(half))


def speed_harmonic(teeth: int, order: int) -> float:
    """Amplitude of one harmonic of the tooth rate in the chain speed.

    Parameters
    ----------
    teeth : int
        Number of teeth (dimensionless).
    order : int
        Number of the harmonic (dimensionless), 1 for the tooth rate itself.

    Returns
    -------
    float
        Amplitude over the mean speed (dimensionless); its sign is the phase against the
        middle of a tooth.

    Notes
    -----
    Fourier series of `cos` over one tooth: `2 (−1)^(k+1) / ((k z)² − 1)`.
    """
    return 2.0 * (-1.0) ** (order + 1) / ((order * teeth) ** 2 - 1.0)


def polygon_rise(pitch: float, teeth: int) -> float:
    """Rise and fall of the strand across its line, once a tooth.

    Parameters
    ----------
    pitch : float
        Chain pitch [m].
    teeth : int
        Number of teeth (dimensionless).

    Returns
    -------
    float
        `R (1 − cos(π/z))` [m].
    """
    return pitch_radius(pitch, teeth) * (1.0 - math.cos(math.pi / teeth))


def engagement_kick(rate: float, pitch: float) -> EngagementKick:
    """Speeds at which a pin arrives on its seat.

    Parameters
    ----------
    rate : float
        Angular speed of the sprocket [rad/s].
    pitch : float
        Chain pitch [m].

    Returns
    -------
    EngagementKick
        The same for any number of teeth.

    Notes
    -----
    From the speed of the strand at ±π/z: `ω p / 2` across it, `ω p` between pin and seat,
    and a jump of `ω² p` in acceleration.
    """
    return EngagementKick(0.5 * rate * pitch, rate * pitch, rate**2 * pitch)


def tooth_rate(chain_speed: float, pitch: float) -> float:
    """Number of teeth that pass in a second: the rate of all chordal action.

    Parameters
    ----------
    chain_speed : float
        Mean chain speed [m/s].
    pitch : float
        Chain pitch [m].

    Returns
    -------
    float
        Tooth rate [Hz].
    """
    return chain_speed / pitch
