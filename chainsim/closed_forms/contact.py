"""Contact laws: how deep, how long, how lively."""

from __future__ import annotations

import math
from typing import Literal, NamedTuple

from chainsim.errors import CallError

HERTZ_DURATION = 2.943275184
"""`(4/5) √π Γ(2/5) / Γ(9/10)` (dimensionless): duration of a Hertz impact over δ/v."""

_LOSS_OF_NEARLY_ALL = 38.0
"""`D v` (dimensionless) from which on `D e v` is 1 within rounding: it is 1 − (1 + D v)
exp(−1 − D v) there."""


class Impact(NamedTuple):
    """A sphere that strikes a plane without loss.

    Attributes
    ----------
    depth : float
        Largest approach [m].
    duration : float
        Duration of the contact [s].
    force : float
        Largest force [N].
    """

    depth: float
    duration: float
    force: float


def combined_modulus(
    modulus_a: float, poisson_a: float, modulus_b: float, poisson_b: float
) -> float:
    """Contact modulus of two materials.

    Parameters
    ----------
    modulus_a, modulus_b : float
        Young's moduli [Pa].
    poisson_a, poisson_b : float
        Poisson's ratios (dimensionless).

    Returns
    -------
    float
        `E*` [Pa].

    References
    ----------
    K. L. Johnson, *Contact Mechanics*, 1985, chapter 4 (from memory).
    """
    return 1.0 / ((1.0 - poisson_a**2) / modulus_a + (1.0 - poisson_b**2) / modulus_b)


def hertz_stiffness(modulus: float, radius: float) -> float:
    """Stiffness of a sphere on a plane in `F = K δ^1.5`.

    Parameters
    ----------
    modulus : float
        Contact modulus `E*` [Pa].
    radius : float
        Radius of the sphere [m].

    Returns
    -------
    float
        `(4/3) E* √R` [N/m^1.5].
    """
    return 4.0 / 3.0 * modulus * math.sqrt(radius)


def hertz_impact(stiffness: float, mass: float, speed: float) -> Impact:
    """Impact of a sphere on a plane.

    Parameters
    ----------
    stiffness : float
        Stiffness `K` in `F = K δ^1.5` [N/m^1.5].
    mass : float
        Mass of the sphere [kg].
    speed : float
        Speed of the impact [m/s].

    Returns
    -------
    Impact
        Its depth, duration and force.

    References
    ----------
    K. L. Johnson, *Contact Mechanics*, 1985, equation 11.24 (from memory).
    """
    depth = (1.25 * mass * speed**2 / stiffness) ** 0.4
    return Impact(depth, HERTZ_DURATION * depth / speed, stiffness * depth**1.5)


def dashpot_restitution(
    damping_ratio: float, ends: Literal["at rest length", "at no force"]
) -> float:
    """Restitution of a spring and dashpot side by side, no gravity.

    Parameters
    ----------
    damping_ratio : float
        `c / (2 sqrt(k m))` (dimensionless), below 1.
    ends : {"at rest length", "at no force"}
        Whether the contact lasts until the spring has its rest length again, and so pulls at
        last, or only until the force is zero (dimensionless).

    Returns
    -------
    float
        Speed after over speed before (dimensionless).

    References
    ----------
    T. Schwager and T. Pöschel, "Coefficient of restitution and linear-dashpot model
    revisited", *Granular Matter* 9, 2007 (from memory).
    """
    root = math.sqrt(1.0 - damping_ratio**2)
    phase = 0.0
    if ends == "at no force":
        phase = math.atan2(2.0 * damping_ratio * root, 1.0 - 2.0 * damping_ratio**2)
    return math.exp(-damping_ratio / root * (math.pi - phase))


def dashpot_damping_ratio(restitution: float) -> float:
    """Damping ratio that gives a restitution, contact ended at rest length.

    Parameters
    ----------
    restitution : float
        Coefficient of restitution (dimensionless), greater than 0.

    Returns
    -------
    float
        Damping ratio (dimensionless), the inverse of `dashpot_restitution`.
    """
    decrement = -math.log(restitution)
    return decrement / math.hypot(math.pi, decrement)


def depth_damping_restitution(damping: float, speed: float) -> float:
    """Restitution of a contact whose damping grows with its depth, against a wall.

    Solved for `D e v`, which stays below 1.

    Parameters
    ----------
    damping : float
        `D` in `F = K δⁿ (1 + D δ')` [s/m].
    speed : float
        Speed of the impact [m/s].

    Returns
    -------
    float
        Speed after over speed before (dimensionless), whatever K, n and the mass.

    References
    ----------
    Model: K. H. Hunt and F. R. E. Crossley, "Coefficient of restitution interpreted as damping
    in vibroimpact", *Journal of Applied Mechanics* 42, 1975 (from memory). The exact relation
    `D v (1 + e) = ln((1 + D v)/(1 − D e v))` follows by separating `v dv / (1 + D v)`.
    """
    from scipy.optimize import brentq

    product = damping * speed
    if product == 0.0:
        return 1.0
    if product > _LOSS_OF_NEARLY_ALL:
        return 1.0 / product
    given = product - math.log1p(product)

    def excess(returned: float) -> float:
        return -returned - math.log1p(-returned) - given

    return float(brentq(excess, 0.0, 1.0 - 2.0**-53, xtol=1e-16, rtol=1e-14)) / product


def depth_damping(restitution: float, speed: float) -> float:
    """Damping of a contact whose damping grows with its depth, from its restitution.

    Parameters
    ----------
    restitution : float
        Coefficient of restitution against a wall (dimensionless), above 0, at most 1.
    speed : float
        Speed of the impact at which it was measured [m/s].

    Returns
    -------
    float
        `D` in `F = K δⁿ (1 + D δ')` [s/m], the inverse of `depth_damping_restitution`.

    Raises
    ------
    CallError
        If the restitution is not above 0 and at most 1.
    """
    from scipy.optimize import brentq

    if not 0.0 < restitution <= 1.0:
        raise CallError(f"a restitution is above 0 and at most 1, not {restitution:g}")
    if restitution == 1.0:
        return 0.0

    def excess(product: float) -> float:
        return depth_damping_restitution(product, 1.0) - restitution

    high = 1.0
    while excess(high) > 0.0:
        high *= 2.0
    return float(brentq(excess, 0.0, high, xtol=1e-14, rtol=1e-13)) / speed


def contact_half_period(stiffness: float, mass: float) -> float:
    """Duration of an undamped contact on a linear spring, no gravity.

    Parameters
    ----------
    stiffness : float
        Stiffness of the contact [N/m].
    mass : float
        Mass that strikes [kg].

    Returns
    -------
    float
        `π sqrt(m/k)` [s].
    """
    return math.pi * math.sqrt(mass / stiffness)
