"""What balls that sit off the pin line do to their links and to a hung tail."""

from __future__ import annotations

import math

from chainsim.closed_forms.loop import LoopTensions
from chainsim.errors import CallError


def loaded_link_tilt(
    tension_below: float, ball_weight: float, offset: float, along: float, pitch: float
) -> float:
    """Tilt of a link whose ball sits off the pin line, on a long straight strand.

    Parameters
    ----------
    tension_below : float
        Tension of the strand just below the link [N].
    ball_weight : float
        Weight of the ball [N].
    offset : float
        Distance of the ball from the pin line [m].
    along : float
        Distance of the ball above the middle of the link, along it [m].
    pitch : float
        Chain pitch [m].

    Returns
    -------
    float
        Angle of the link from its strand [rad].

    Raises
    ------
    CallError
        If the tension cannot right the link.

    Notes
    -----
    Moments on the link: `(T + m g/2) p sin φ = m g (e cos φ + d sin φ)`. With a loaded
    carrier on every q-th link the link's tilt against its leaning strand is (1 − 1/q) of it.
    """
    righting = (tension_below + 0.5 * ball_weight) * pitch - ball_weight * along
    if righting <= 0.0:
        raise CallError(
            f"a tension of {tension_below:.3g} N cannot right a link whose ball of "
            f"{ball_weight:.3g} N sits {along:.3g} m above its middle"
        )
    return math.atan(ball_weight * offset / righting)


def tail_out_of_plumb(
    tensions: LoopTensions,
    strand_length: float,
    strand_weight: float,
    payload: float,
    offset: float,
) -> float:
    """Sideways swing of a free hung tail under balls that sit off the pin line.

    Parameters
    ----------
    tensions : LoopTensions
        Forces in the loop; both foot tensions must be positive.
    strand_length : float
        Length of a strand [m].
    strand_weight : float
        Weight of one empty strand [N].
    payload : float
        Weight of the balls on the carrying strand [N], spread evenly.
    offset : float
        Distance of the balls from the pin line, outward [m].

    Returns
    -------
    float
        Displacement of the tail, toward the return strand [m].

    Raises
    ------
    CallError
        If a strand is slack, so that it cannot hold the tail.

    Notes
    -----
    Small angles, strands as continuous. The balls put a couple `c = P e / L` per length on
    the carrying strand. Moments on a piece of it give its slope `(F + c) / T(z)` with `F` the
    horizontal force, constant along it; on the return strand the slope is `−F / T(z)`, since
    nothing pushes the tail sideways. Both strands join the same wheels, so with the
    compliances `a = ∫ dz / T` the swing is `c a₁ a₂ / (a₁ + a₂)`. Where the tension hardly
    varies this is `P e / (W + w L + P/2)`, the moment balance about the head axle for straight
    strands.
    """  # fmt: skip
    if min(tensions.carrying_foot, tensions.return_foot) <= 0.0:
        raise CallError("a slack strand holds no tail: one foot tension is not above zero")
    carrying = _lateral_compliance(tensions.carrying_foot, strand_weight + payload, strand_length)
    returning = _lateral_compliance(tensions.return_foot, strand_weight, strand_length)
    couple = payload * offset / strand_length
    return couple * carrying * returning / (carrying + returning)


def _lateral_compliance(foot_tension: float, weight: float, length: float) -> float:
    """Integral of 1/T over a strand whose tension grows evenly from its foot [m/N]."""
    if weight == 0.0:
        return length / foot_tension
    return length / weight * math.log1p(weight / foot_tension)
