"""Natural frequencies of strands, across and along, all in Hz."""

from __future__ import annotations

import math

from chainsim.errors import CallError


def string_frequency(length: float, tension: float, mass_per_length: float, order: int) -> float:
    """Frequency of a taut string between two fixed points.

    Parameters
    ----------
    length : float
        Distance of the points [m].
    tension : float
        Tension [N].
    mass_per_length : float
        Mass per length [kg/m].
    order : int
        Number of half waves (dimensionless).

    Returns
    -------
    float
        `k/(2 L) sqrt(T/m)` [Hz].

    References
    ----------
    Mersenne's laws; Lord Rayleigh, *The Theory of Sound*, chapter 6 (from memory).
    """
    return 0.5 * order / length * math.sqrt(tension / mass_per_length)


def beaded_string_frequency(
    n_beads: int, spacing: float, tension: float, bead_mass: float, order: int
) -> float:
    """Frequency of equal beads on a taut massless string between two fixed points.

    Parameters
    ----------
    n_beads : int
        Number of beads (dimensionless).
    spacing : float
        Distance of neighboring beads, and of the outer ones to the fixed points [m].
    tension : float
        Tension [N].
    bead_mass : float
        Mass of a bead [kg].
    order : int
        Number of half waves (dimensionless), at most `n_beads`.

    Returns
    -------
    float
        `(1/π) sqrt(T/(m a)) sin(k π / (2 (n + 1)))` [Hz].

    References
    ----------
    Lagrange's loaded string: Lord Rayleigh, *The Theory of Sound*, chapter 6 (from memory).
    """
    speed = 2.0 * math.sqrt(tension / (bead_mass * spacing))
    return speed * math.sin(0.5 * order * math.pi / (n_beads + 1)) / (2.0 * math.pi)


def longitudinal_frequency(
    length: float, axial_stiffness: float, mass_per_length: float, order: int
) -> float:
    """Frequency at which a chain with one free end stretches along itself.

    Parameters
    ----------
    length : float
        Length of the chain [m].
    axial_stiffness : float
        Force per relative stretch, `EA`; link stiffness times pitch [N].
    mass_per_length : float
        Mass per length [kg/m].
    order : int
        Number of the mode, from 1 (dimensionless).

    Returns
    -------
    float
        `(2 k − 1) c / (4 L)` with `c = sqrt(EA/m)` [Hz].
    """
    return (2 * order - 1) * math.sqrt(axial_stiffness / mass_per_length) / (4.0 * length)


def highest_link_frequency(link_stiffness: float, link_mass: float) -> float:
    """Upper bound of the frequencies of a uniform chain of links along itself.

    Parameters
    ----------
    link_stiffness : float
        Axial stiffness of a link [N/m].
    link_mass : float
        Mass of a link [kg].

    Returns
    -------
    float
        `sqrt(k/m) / π` [Hz]; it bounds the step of an explicit method.
    """
    return math.sqrt(link_stiffness / link_mass) / math.pi


def moving_strand_frequency(
    length: float, tension: float, mass_per_length: float, speed: float, order: int
) -> float:
    """Frequency of a strand that runs along itself between two eyes.

    Parameters
    ----------
    length : float
        Distance of the eyes [m].
    tension : float
        Tension in the running strand, its centrifugal share included [N].
    mass_per_length : float
        Mass per length [kg/m].
    speed : float
        Speed of the strand [m/s].
    order : int
        Number of half waves (dimensionless).

    Returns
    -------
    float
        `k c (1 − v²/c²) / (2 L)` with `c = sqrt(T/m)` [Hz].

    Raises
    ------
    CallError
        If the strand runs at its critical speed or faster.

    References
    ----------
    F. R. Archibald and A. G. Emslie, "The vibration of a string having a uniform motion along
    its length", *Journal of Applied Mechanics* 25, 1958, p. 347 (from memory).
    """
    wave = math.sqrt(tension / mass_per_length)
    if abs(speed) >= wave:
        raise CallError(
            f"a strand at {speed:.3g} m/s is not slower than its waves ({wave:.3g} m/s): "
            "it has no natural frequency"
        )
    return 0.5 * order * wave * (1.0 - (speed / wave) ** 2) / length
