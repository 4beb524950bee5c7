"""A long thin shaft: twist, torsional frequency, whirl and the distance of its supports."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Literal

Ends = Literal["pinned", "free end", "clamped and pinned", "clamped"]

MODE_NUMBERS: dict[str, float] = {
    "pinned": math.pi,
    "free end": 1.87510407,
    "clamped and pinned": 3.92660231,
    "clamped": 4.73004074,
}
"""First root of the frequency equation of a beam for each kind of ends (dimensionless).
R. D. Blevins, *Formulas for Natural Frequency and Mode Shape*, table 8-1 (from memory)."""


def torsional_stiffness(diameter: float, length: float, shear_modulus: float) -> float:
    """Torsional stiffness of a round shaft.

    Parameters
    ----------
    diameter : float
        Diameter [m].
    length : float
        Length between drive and sprocket [m].
    shear_modulus : float
        Shear modulus [Pa].

    Returns
    -------
    float
        `G π d⁴ / (32 L)` [N m/rad].

    References
    ----------
    W. C. Young and R. G. Budynas, *Roark's Formulas for Stress and Strain*, chapter on torsion
    (from memory).
    """
    return shear_modulus * math.pi * diameter**4 / (32.0 * length)


def torsional_stress(torque: float, diameter: float) -> float:
    """Shear stress at the surface of a twisted round shaft.

    Parameters
    ----------
    torque : float
        Torque [N m].
    diameter : float
        Diameter [m].

    Returns
    -------
    float
        `16 T / (π d³)` [Pa].
    """
    return 16.0 * torque / (math.pi * diameter**3)


def torsional_frequency(
    stiffness: float, inertia: float, far_inertia: float = math.inf, shaft_inertia: float = 0.0
) -> float:
    """Frequency of a disc at the end of a shaft.

    Parameters
    ----------
    stiffness : float
        Torsional stiffness of the shaft [N m/rad].
    inertia : float
        Inertia of the disc [kg m2].
    far_inertia : float
        Inertia at the other end [kg m2]; infinite where it is held.
    shaft_inertia : float
        Inertia of the shaft itself [kg m2]; a third of it counts.

    Returns
    -------
    float
        Frequency [Hz].

    References
    ----------
    J. P. Den Hartog, *Mechanical Vibrations*, two discs on a shaft, and Rayleigh's third (from
    memory).
    """
    disc = inertia + shaft_inertia / 3.0
    flexible = 1.0 / disc + (0.0 if math.isinf(far_inertia) else 1.0 / far_inertia)
    return math.sqrt(stiffness * flexible) / (2.0 * math.pi)


def whirl_speed(
    diameter: float, span: float, modulus: float, density: float, ends: Ends = "pinned"
) -> float:
    """First critical speed of a uniform round shaft between two supports.

    Parameters
    ----------
    diameter : float
        Diameter [m].
    span : float
        Distance of the supports [m].
    modulus : float
        Young's modulus [Pa].
    density : float
        Density [kg/m3].
    ends : {"pinned", "free end", "clamped and pinned", "clamped"}
        How the span is held (dimensionless); short bearings count as pinned.

    Returns
    -------
    float
        `(λ/L)² sqrt(E I / (ρ A))` [rad/s].

    References
    ----------
    *Shigley's Mechanical Engineering Design*, 9th edition, section 7-6, critical speeds for
    shafts.
    """
    return (MODE_NUMBERS[ends] / span) ** 2 * 0.25 * diameter * math.sqrt(modulus / density)


def support_distance(
    diameter: float, modulus: float, density: float, rate: float, margin: float = 2.0
) -> float:
    """Largest distance of the supports of a pinned round shaft.

    Parameters
    ----------
    diameter : float
        Diameter [m].
    modulus : float
        Young's modulus [Pa].
    density : float
        Density [kg/m3].
    rate : float
        Running speed of the shaft [rad/s].
    margin : float
        First critical speed over the running speed (dimensionless).

    Returns
    -------
    float
        Distance of the supports [m].

    References
    ----------
    Critical speed at least twice the running speed: *Shigley's Mechanical Engineering Design*,
    9th edition, p. 383.
    """
    wave = 0.25 * diameter * math.sqrt(modulus / density)
    return math.pi * math.sqrt(wave / (margin * rate))


def rayleigh_speed(weights: Sequence[float], deflections: Sequence[float], gravity: float) -> float:
    """Critical speed of a shaft with weights by Rayleigh's method, on the high side.

    Parameters
    ----------
    weights : sequence of float
        Weights on the shaft [N].
    deflections : sequence of float
        Deflection at each weight under all of them [m].
    gravity : float
        Acceleration of free fall [m/s2].

    Returns
    -------
    float
        `sqrt(g Σ w y / Σ w y²)` [rad/s].

    References
    ----------
    *Shigley's Mechanical Engineering Design*, 9th edition, equation 7-23.
    """
    pairs = list(zip(weights, deflections, strict=True))
    moment = sum(weight * deflection for weight, deflection in pairs)
    return math.sqrt(gravity * moment / sum(weight * y**2 for weight, y in pairs))


def dunkerley_speed(single_speeds: Sequence[float]) -> float:
    """Critical speed of a shaft with weights by Dunkerley's method, on the low side.

    Parameters
    ----------
    single_speeds : sequence of float
        Critical speed with each weight alone, and that of the bare shaft [rad/s].

    Returns
    -------
    float
        `1/ω² = Σ 1/ωᵢ²` [rad/s].

    References
    ----------
    *Shigley's Mechanical Engineering Design*, 9th edition, equation 7-32.
    """
    return 1.0 / math.sqrt(sum(1.0 / speed**2 for speed in single_speeds))


def beam_influence(
    span: float, at: float, load_at: float, modulus: float, second_moment: float
) -> float:
    """Deflection of a pinned beam at one place under a unit force at another.

    Parameters
    ----------
    span : float
        Distance of the supports [m].
    at, load_at : float
        Distances of the two places from the left support [m].
    modulus : float
        Young's modulus [Pa].
    second_moment : float
        Second moment of area of the section [m4].

    Returns
    -------
    float
        Deflection per force [m/N].

    References
    ----------
    *Shigley's Mechanical Engineering Design*, 9th edition, table A-9, simple supports with
    intermediate load.
    """
    near, far = sorted((at, load_at))
    right = span - far
    return right * near * (span**2 - right**2 - near**2) / (6.0 * modulus * second_moment * span)
