"""Chains and cables at rest: hanging straight down, and hanging between two supports."""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.errors import CallError

STANDARD_GRAVITY = 9.80665
"""Standard acceleration of free fall [m/s2] (3rd General Conference on Weights and Measures,
1901, from memory)."""


class Catenary(NamedTuple):
    """A strand hanging between two supports of equal height.

    Attributes
    ----------
    horizontal_tension : float
        Tension at the lowest point [N].
    sag : float
        Depth of the lowest point below the supports [m].
    end_tension : float
        Tension at the supports [N].
    length : float
        Length of the strand as it hangs [m].
    """

    horizontal_tension: float
    sag: float
    end_tension: float
    length: float


def vertical_chain_tension(
    links_below: float, pitch: float, mass_per_length: float, end_force: float, gravity: float
) -> float:
    """Tension in the middle of a link of a chain that hangs straight down.

    Parameters
    ----------
    links_below : float
        Number of whole links below this one (dimensionless).
    pitch : float
        Chain pitch [m].
    mass_per_length : float
        Mass of the chain per length [kg/m].
    end_force : float
        Weight hung from the lowest pin [N].
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    float
        `(j − 1/2) m p g + W` with `j = links_below + 1` [N]; exact both for a continuous chain
        and for one whose links put half their mass into each pin.
    """
    return (links_below + 0.5) * mass_per_length * pitch * gravity + end_force


def vertical_chain_stretch(
    length: float, axial_stiffness: float, weight: float, end_force: float
) -> float:
    """Growth of a chain that hangs straight down, by its own weight and one at its end.

    Parameters
    ----------
    length : float
        Length of the chain without load [m].
    axial_stiffness : float
        Force per relative stretch, `EA`; link stiffness times pitch [N].
    weight : float
        Weight of the whole chain [N].
    end_force : float
        Weight hung from its end [N].

    Returns
    -------
    float
        Growth of its length [m].
    """
    return (0.5 * weight + end_force) * length / axial_stiffness


def catenary(span: float, length: float, weight_per_length: float) -> Catenary:
    """Strand of a given length that hangs between level supports.

    Parameters
    ----------
    span : float
        Distance of the supports [m].
    length : float
        Length of the strand [m], longer than the span.
    weight_per_length : float
        Weight of the strand per length [N/m].

    Returns
    -------
    Catenary
        Its sag and tensions.

    Raises
    ------
    CallError
        If the strand does not reach from one support to the other.

    References
    ----------
    H. M. Irvine, *Cable Structures*, 1981, chapter 1 (from memory).
    """
    from scipy.optimize import brentq

    if length <= span:
        raise CallError(f"a strand of {length:g} m cannot hang across a span of {span:g} m")
    ratio = length / span

    def excess(half: float) -> float:
        return math.sinh(half) / half - ratio

    high = 1.0
    while excess(high) < 0.0:
        high *= 2.0
    half = float(brentq(excess, 1e-9, high, xtol=1e-15, rtol=1e-14))
    parameter = span / (2.0 * half)
    sag = parameter * (math.cosh(half) - 1.0)
    horizontal = weight_per_length * parameter
    return Catenary(horizontal, sag, horizontal + weight_per_length * sag, length)


def catenary_of_sag(span: float, sag: float, weight_per_length: float) -> Catenary:
    """Strand with a given sag that hangs between level supports.

    Parameters
    ----------
    span : float
        Distance of the supports [m].
    sag : float
        Depth of its lowest point below the supports [m], greater than zero.
    weight_per_length : float
        Weight of the strand per length [N/m].

    Returns
    -------
    Catenary
        Its tensions and its length.

    References
    ----------
    H. M. Irvine, *Cable Structures*, 1981, chapter 1 (from memory).
    """
    from scipy.optimize import brentq

    def excess(half: float) -> float:
        return (math.cosh(half) - 1.0) / (2.0 * half) - sag / span

    high = 1.0
    while excess(high) < 0.0:
        high *= 2.0
    half = float(brentq(excess, 1e-12, high, xtol=1e-16, rtol=1e-14))
    parameter = span / (2.0 * half)
    horizontal = weight_per_length * parameter
    return Catenary(
        horizontal, sag, horizontal + weight_per_length * sag, 2.0 * parameter * math.sinh(half)
    )


def link_catenary(n_links: int, pitch: float, span: float, weight_per_length: float) -> Catenary:
    """Chain of rigid links that hangs between level supports.

    Parameters
    ----------
    n_links : int
        Number of links (dimensionless).
    pitch : float
        Chain pitch [m].
    span : float
        Distance of the supports [m].
    weight_per_length : float
        Weight of the chain per length [N/m].

    Returns
    -------
    Catenary
        Its sag and tensions; `end_tension` is that of the end link itself.

    Raises
    ------
    CallError
        If the chain does not reach from one support to the other.

    Notes
    -----
    Force polygon of a string with equal loads at its pins: `tan θ_k = (w p / H)
    (k − (n − 1)/2)`. Exact for uniform rigid links and for half their mass in each pin.
    """
    from scipy.optimize import brentq

    if span >= n_links * pitch:
        raise CallError(f"{n_links} links of {pitch:g} m cannot hang across {span:g} m")

    def angles(slope: float) -> list[float]:
        return [math.atan(slope * (k - 0.5 * (n_links - 1))) for k in range(n_links)]

    def excess(slope: float) -> float:
        return pitch * sum(math.cos(angle) for angle in angles(slope)) - span

    high = 1.0
    while excess(high) > 0.0:
        high *= 2.0
    slope = float(brentq(excess, 0.0, high, xtol=1e-15, rtol=1e-14))
    horizontal = weight_per_length * pitch / slope
    height, lowest = 0.0, 0.0
    for angle in angles(slope):
        height += pitch * math.sin(angle)
        lowest = min(lowest, height)
    end = horizontal / math.cos(angles(slope)[-1])
    return Catenary(horizontal, -lowest, end, n_links * pitch)


def elastic_catenary(
    span: float, length: float, weight_per_length: float, axial_stiffness: float
) -> Catenary:
    """Strand that stretches and hangs between level supports.

    Parameters
    ----------
    span : float
        Distance of the supports [m].
    length : float
        Length of the strand without load [m]; it may be shorter than the span.
    weight_per_length : float
        Weight per unstretched length [N/m].
    axial_stiffness : float
        Force per relative stretch, `EA`; link stiffness times pitch [N].

    Returns
    -------
    Catenary
        Its sag and tensions; `length` is the unstretched one.

    References
    ----------
    H. M. Irvine, *Cable Structures*, 1981, chapter 1: the elastic catenary (from memory).
    """
    from scipy.optimize import brentq

    weight = weight_per_length * length

    def excess(horizontal: float) -> float:
        hang = 2.0 * horizontal / weight_per_length * math.asinh(0.5 * weight / horizontal)
        return horizontal * length / axial_stiffness + hang - span

    high = weight
    while excess(high) < 0.0:
        high *= 2.0
    horizontal = float(brentq(excess, 1e-12 * weight, high, xtol=1e-15, rtol=1e-14))
    end = math.hypot(horizontal, 0.5 * weight)
    sag = weight * length / (8.0 * axial_stiffness) + (end - horizontal) / weight_per_length
    return Catenary(horizontal, sag, end, length)
