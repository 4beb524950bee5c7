"""Swinging frequencies of chains that hang from one end, all in Hz."""

from __future__ import annotations

import math


def hanging_chain_frequencies(length: float, count: int, gravity: float) -> tuple[float, ...]:
    """Swinging frequencies of a uniform chain that hangs from its upper end.

    Parameters
    ----------
    length : float
        Length of the chain [m].
    count : int
        How many frequencies, from the lowest (dimensionless).
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    tuple of float
        Frequencies [Hz]: `j₀ₙ/2 sqrt(g/L) / 2π` with the zeros of the Bessel function J₀.

    References
    ----------
    D. Bernoulli's hanging chain, e.g. G. N. Watson, *A Treatise on the Theory of Bessel
    Functions*, chapter 1 (from memory).
    """
    from scipy.special import jn_zeros

    unit = math.sqrt(gravity / length) / (4.0 * math.pi)
    return tuple(float(zero) * unit for zero in jn_zeros(0, count))


def hanging_beads_frequencies(n_beads: int, spacing: float, gravity: float) -> tuple[float, ...]:
    """Swinging frequencies of equal beads on a massless string that hangs from one end.

    Parameters
    ----------
    n_beads : int
        Number of beads, the last at the free end (dimensionless).
    spacing : float
        Distance of neighboring beads [m].
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    tuple of float
        All frequencies from the lowest [Hz]: `sqrt(x g / a) / 2π` with the zeros x of the
        Laguerre polynomial of degree n.

    References
    ----------
    Zeros: M. Abramowitz and I. A. Stegun, *Handbook of Mathematical Functions*, table 25.9.
    """
    from scipy.special import roots_laguerre

    zeros = roots_laguerre(n_beads)[0]
    return tuple(math.sqrt(zero * gravity / spacing) / (2.0 * math.pi) for zero in zeros)


def hanging_links_frequencies(
    n_links: int, pitch: float, link_mass: float, end_mass: float, gravity: float
) -> tuple[float, ...]:
    """Swinging frequencies of a chain of links with half their mass in each pin.

    Parameters
    ----------
    n_links : int
        Number of links (dimensionless).
    pitch : float
        Chain pitch [m].
    link_mass : float
        Mass of a link [kg].
    end_mass : float
        Mass hung from the lowest pin [kg].
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    tuple of float
        All frequencies from the lowest [Hz].

    Notes
    -----
    Eigenvalues of the string stiffness `T_j / p` against the pin masses, the tension of each
    link being the weight of the pins below it.
    """
    import numpy as np
    from scipy.linalg import eigh_tridiagonal

    mass = np.full(n_links, link_mass)
    mass[-1] = 0.5 * link_mass + end_mass
    stiffness = np.cumsum(mass[::-1])[::-1] * gravity / pitch
    diagonal = stiffness.copy()
    diagonal[:-1] += stiffness[1:]
    root = np.sqrt(mass)
    squares = eigh_tridiagonal(
        diagonal / mass, -stiffness[1:] / (root[1:] * root[:-1]), eigvals_only=True
    )
    return tuple(float(value) for value in np.sqrt(squares) / (2.0 * math.pi))


def loaded_hanging_chain_frequencies(
    length: float, mass_ratio: float, count: int, gravity: float
) -> tuple[float, ...]:
    """Swinging frequencies of a uniform chain with a mass at its lower end.

    Parameters
    ----------
    length : float
        Length of the chain [m].
    mass_ratio : float
        Mass at the end over that of the chain (dimensionless), greater than zero.
    count : int
        How many frequencies, from the lowest (dimensionless).
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    tuple of float
        Frequencies [Hz].

    Notes
    -----
    Roots of `J₀(s₁) Y₂(s₀) − J₂(s₀) Y₀(s₁)` with `s = 2 ω sqrt(α L/g)` at the mass and
    `2 ω sqrt((1 + α) L/g)` at the support.
    """
    from scipy.optimize import brentq
    from scipy.special import jv, yv

    def equation(speed: float) -> float:
        low = 2.0 * speed * math.sqrt(mass_ratio)
        high = 2.0 * speed * math.sqrt(1.0 + mass_ratio)
        return float(jv(0, high) * yv(2, low) - jv(2, low) * yv(0, high))

    # The modes are about pi / (2 (sqrt(1 + a) - sqrt(a))) apart; the scan is 200 times finer.
    step = 0.0025 * math.pi / (math.sqrt(1.0 + mass_ratio) - math.sqrt(mass_ratio))
    roots: list[float] = []
    speed = min(step, 0.1)
    while len(roots) < count:
        if equation(speed) * equation(speed + step) < 0.0:
            roots.append(float(brentq(equation, speed, speed + step, xtol=1e-14)))
        speed += step
    unit = math.sqrt(gravity / length) / (2.0 * math.pi)
    return tuple(root * unit for root in roots)


def pendulum_period_ratio(amplitude: float) -> float:
    """Period of a pendulum over that of a very small swing.

    Parameters
    ----------
    amplitude : float
        Largest angle from the vertical [rad], below π.

    Returns
    -------
    float
        `(2/π) K(sin²(θ/2))` (dimensionless).

    References
    ----------
    Complete elliptic integral of the first kind, M. Abramowitz and I. A. Stegun, *Handbook of
    Mathematical Functions*, chapter 17 (from memory).
    """
    from scipy.special import ellipk

    return float(ellipk(math.sin(0.5 * amplitude) ** 2)) * 2.0 / math.pi
