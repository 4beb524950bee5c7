"""A chain that has grown: where it rides, what slack it leaves, when it is replaced."""

from __future__ import annotations

import math

from chainsim.closed_forms.sprockets import pitch_radius, standard_tip_radius


def ride_height(pitch: float, teeth: int, growth: float) -> float:
    """Height at which a grown chain rides above its seats, all pins carrying.

    Parameters
    ----------
    pitch : float
        Pitch of the new chain and of the sprocket [m].
    teeth : int
        Number of teeth (dimensionless).
    growth : float
        Growth of the pitch as a fraction (dimensionless).

    Returns
    -------
    float
        Rise of the pin centers over the pitch radius [m].

    Notes
    -----
    Follows from the polygon of the grown chain. A roller chain wears on every second pitch
    only, so its pins alternate about this mean.
    """
    return growth * pitch_radius(pitch, teeth)


def growth_at_tip(teeth: int) -> float:
    """Growth at which a pin reaches the tip of a standard tooth.

    Parameters
    ----------
    teeth : int
        Number of teeth (dimensionless).

    Returns
    -------
    float
        Growth of the pitch as a fraction (dimensionless).

    Notes
    -----
    Ride height equal to the standard tip radius of ASME B29.1: `0.6 sin(π/z) + cos(π/z) − 1`.
    """
    return standard_tip_radius(1.0, teeth) / pitch_radius(1.0, teeth) - 1.0


def wear_limit(teeth: int, fixed_centers: bool) -> float:
    """Growth at which a steel roller chain is replaced.

    Parameters
    ----------
    teeth : int
        Number of teeth of the largest sprocket (dimensionless).
    fixed_centers : bool
        Whether nothing takes up the slack (dimensionless).

    Returns
    -------
    float
        Growth as a fraction (dimensionless): 3 %, less than that above 66 teeth, 1.5 % at fixed
        centers. A rule for steel roller chain; moulded chain needs its maker's word.

    References
    ----------
    Service guides of chain makers: 3 %, `200/z` % above 66 teeth, 1.5 % at fixed centers
    (common practice of the trade, read on a maker's page of questions and answers).
    """
    limit = min(0.03, 2.0 / teeth)
    return min(limit, 0.015) if fixed_centers else limit


def slack_of_growth(n_links: float, pitch: float, growth: float) -> float:
    """Surplus length that the growth of a chain leaves at fixed centers.

    Parameters
    ----------
    n_links : float
        Number of links of the loop (dimensionless).
    pitch : float
        Pitch of the new chain [m].
    growth : float
        Growth of the pitch as a fraction (dimensionless).

    Returns
    -------
    float
        Surplus chain [m].
    """
    return n_links * pitch * growth


def sag_of_slack(span: float, slack: float) -> float:
    """Sag of a level strand that is longer than its span, shallow form.

    Parameters
    ----------
    span : float
        Distance of the supports [m].
    slack : float
        Length of the strand beyond the span [m].

    Returns
    -------
    float
        Sag [m]: `sqrt(3 C ΔL / 8)`; 1.4 % low at a slack of 4 % of the span.

    Notes
    -----
    Parabola; `catenary(span, span + slack, …)` is the exact form.
    """
    return math.sqrt(0.375 * span * slack)
