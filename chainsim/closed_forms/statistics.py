"""How much a number of trials says, and how many are needed."""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.errors import CallError


class Interval(NamedTuple):
    """Range in which a share lies with a stated confidence.

    Attributes
    ----------
    low, high : float
        Bounds of the share (dimensionless).
    """

    low: float
    high: float


def pocket_rate(chain_speed: float, spacing: float) -> float:
    """Rate at which pockets come by, the most that a lift can deliver.

    Parameters
    ----------
    chain_speed : float
        Mean chain speed [m/s].
    spacing : float
        Distance from one pocket to the next along the chain [m].

    Returns
    -------
    float
        Pockets in a second [1/s].
    """
    return chain_speed / spacing


def failure_bound(trials: int, confidence: float = 0.95) -> float:
    """Upper bound of the failure rate after a number of trials without any failure.

    Parameters
    ----------
    trials : int
        Number of trials (dimensionless).
    confidence : float
        Confidence of the bound (dimensionless).

    Returns
    -------
    float
        `1 − (1 − confidence)^(1/n)` (dimensionless), a little below 3/n at 95 %.

    References
    ----------
    "Rule of three": B. D. Jovanovic and P. S. Levy, *The American Statistician* 51, 1997
    (abstract read).
    """
    return -math.expm1(math.log1p(-confidence) / trials)


def trials_without_failure(failure_rate: float, confidence: float = 0.95) -> int:
    """Number of trials, all good, that show a failure rate to be below a bound.

    Parameters
    ----------
    failure_rate : float
        The bound (dimensionless), between 0 and 1.
    confidence : float
        Confidence of the statement (dimensionless).

    Returns
    -------
    int
        Number of trials (dimensionless).
    """
    return math.ceil(math.log1p(-confidence) / math.log1p(-failure_rate))


def share_interval(count: int, trials: int, confidence: float = 0.95) -> Interval:
    """Exact two-sided interval of a share, after Clopper and Pearson.

    Parameters
    ----------
    count : int
        Number of trials with the outcome in question (dimensionless).
    trials : int
        Number of all trials (dimensionless).
    confidence : float
        Confidence of the interval (dimensionless).

    Returns
    -------
    Interval
        It covers the true share at least as often as the confidence says.

    Raises
    ------
    CallError
        If the count is not between 0 and the number of trials.

    References
    ----------
    C. J. Clopper and E. S. Pearson, "The use of confidence or fiducial limits", *Biometrika*
    26, 1934 (from memory).
    """
    from scipy.special import betaincinv

    if not 0 <= count <= trials or trials < 1:
        raise CallError(f"{count} of {trials} is not a share of trials")
    tail = 0.5 * (1.0 - confidence)
    low = 0.0 if count == 0 else float(betaincinv(count, trials - count + 1, tail))
    high = 1.0 if count == trials else float(betaincinv(count + 1, trials - count, 1.0 - tail))
    return Interval(low, high)


def halvings(width: float, tolerance: float) -> int:
    """Number of bisections that narrow a bracket to a tolerance.

    Parameters
    ----------
    width : float
        Width of the bracket (in any unit, dimensionless here).
    tolerance : float
        Width to reach, in the same unit (dimensionless here).

    Returns
    -------
    int
        `ceil(log2(width / tolerance))`, at least 0 (dimensionless).
    """
    return max(0, math.ceil(math.log2(width / tolerance)))
