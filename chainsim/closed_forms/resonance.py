"""Where the tooth rate meets a strand or a take-up."""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.errors import CallError


class Window(NamedTuple):
    """A range of excitation in which a strand with a pulsing tension grows restless.

    Attributes
    ----------
    low, high : float
        Excitation rate over the natural frequency of the strand (dimensionless).
    """

    low: float
    high: float


def parametric_window(ripple: float, order: int = 1) -> Window:
    """Excitation rates at which a pulsing tension makes a strand swing up, without damping.

    Parameters
    ----------
    ripple : float
        Amplitude of the tension over its mean (dimensionless), between 0 and 1.
    order : int
        1 for the window near twice the strand's frequency, 2 for the one near the frequency
        itself (dimensionless).

    Returns
    -------
    Window
        Its borders.

    Raises
    ------
    CallError
        If the ripple is not between 0 and 1.

    Notes
    -----
    `y'' + ω₀² (1 + ε cos Ω t) y = 0` is Mathieu's equation with `a = 4 ω₀²/Ω²` and `q = ε a/2`;
    the window of order n lies between its characteristic values bₙ(q) and aₙ(q).

    References
    ----------
    M. Abramowitz and I. A. Stegun, *Handbook of Mathematical Functions*, chapter 20.
    """
    from scipy.optimize import brentq
    from scipy.special import mathieu_a, mathieu_b

    if not 0.0 < ripple < 1.0:
        raise CallError(f"a tension ripple is a share between 0 and 1, not {ripple:g}")

    def border(characteristic) -> float:
        def excess(value: float) -> float:
            return float(characteristic(order, 0.5 * ripple * value)) - value

        value = brentq(excess, 0.2 * order**2, 4.0 * order**2, xtol=1e-14, rtol=1e-13)
        return 2.0 / math.sqrt(value)

    borders = border(mathieu_a), border(mathieu_b)
    return Window(min(borders), max(borders))


def parametric_damping_threshold(ripple: float) -> float:
    """Damping ratio above which the window near twice the frequency closes, first order.

    Parameters
    ----------
    ripple : float
        Amplitude of the tension over its mean (dimensionless).

    Returns
    -------
    float
        Damping ratio `ε/4` (dimensionless); the exact value is 0.05 % lower at ε = 0.2.

    References
    ----------
    A. H. Nayfeh and D. T. Mook, *Nonlinear Oscillations*, chapter 5 (from memory).
    """
    return 0.25 * ripple


def take_up_bounce_frequency(
    hung_mass: float, strand_mass: float, payload_mass: float, links: float, link_stiffness: float
) -> float:
    """Estimate of the frequency at which a hung take-up bounces on its two strands.

    Parameters
    ----------
    hung_mass : float
        Mass of all that hangs in the loop [kg].
    strand_mass : float
        Mass of one empty strand [kg].
    payload_mass : float
        Mass of the balls on the carrying strand [kg].
    links : float
        Number of links of one strand (dimensionless).
    link_stiffness : float
        Axial stiffness of a link [N/m].

    Returns
    -------
    float
        Frequency [Hz].

    Notes
    -----
    Two springs of n links side by side, a third of what hangs along them added to the mass
    (Rayleigh's rule for a spring with mass). The seats give way too, so the true value is
    lower; the eigenvalues of the whole lift are what a run is judged by.
    """
    stiffness = 2.0 * link_stiffness / links
    mass = hung_mass + (2.0 * strand_mass + payload_mass) / 3.0
    return math.sqrt(stiffness / mass) / (2.0 * math.pi)
