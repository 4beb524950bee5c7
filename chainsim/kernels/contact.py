"""One contact law and one friction law, used by every contact and every friction element."""

from chainsim.kernels.jit import inlined, kernel

#: how fast a deflection beyond its slip limit returns to it when a general method integrates [1/s]
RELAXATION = 5.0e3


@inlined
def normal_force(depth, closing, stiffness, dissipation, yielding):
    """Return the push between two bodies in contact, and the part of it that dissipates.

    A linear spring whose dissipation grows with depth, so that the force has no jump at touch or
    release; it never pulls::

        F = max(0, k d (1 + D v))

    Parameters
    ----------
    depth : float
        Overlap ``d`` [m], positive in contact.
    closing : float
        Rate ``v`` at which the overlap grows [m/s].
    stiffness : float
        ``k`` [N/m].
    dissipation : float
        ``D`` [s/m]; from the coefficient of restitution by the exact logarithmic relation
        (`chainsim.closed_forms`).
    yielding : float
        Inner step over the smaller mass of the pair [s/kg]; 0 for a general method.  The damper is
        then taken at the velocity that it leaves, ``c v / (1 + c yielding)``, so that a deep
        contact can't overshoot; the law above is its limit for small steps.

    Returns
    -------
    force : float
        Push on either body [N].
    damped : float
        Its dissipating part [N].

    References
    ----------
    K. H. Hunt and F. R. E. Crossley, J. Appl. Mech. 42 (1975) 440, with exponent 1 (from memory).
    """
    elastic = stiffness * depth
    damping = elastic * dissipation
    share = 1.0 / (1.0 + damping * yielding)
    damped = damping * closing * share
    if elastic + damped < 0.0:
        damped = -elastic
    # the damper slows the pair within the step: it works at the mean of both rates
    return elastic + damped, damped * 0.5 * (1.0 + share)


@kernel
def hold(deflection, slip_rate, low, high, stiffness, damping, dt):
    """Return what a friction element does: a stiff spring that slips at its limits.

    Parameters
    ----------
    deflection : float
        Its deflection, a state [m or rad].
    slip_rate : float
        Relative velocity of the two sides [m/s or rad/s].
    low, high : float
        Limits of the force [N or N m]; ``low <= 0 <= high``.  ``low = 0`` makes it one-sided.
    stiffness, damping : float
        Of the spring while it holds [N/m or N m/rad; N s/m or N m s/rad].
    dt : float
        Inner step [s], or 0 for a general method (see the package docstring).

    Returns
    -------
    force : float
        Force by which the element resists positive slip [N or N m].
    deflection : float
        New deflection (unchanged where ``dt == 0``).
    rate : float
        Its rate of change, for a general method.
    power : float
        Dissipated power [W].

    Notes
    -----
    Below its limit it holds for ever: nothing creeps.

    References
    ----------
    Elasto-plastic presliding: P. Dupont, V. Hayward, B. Armstrong and F. Altpeter, IEEE Trans.
    Autom. Control 47 (2002) 787 (from memory), with a sharp yield.
    """
    trial = deflection + slip_rate * dt
    elastic = stiffness * trial
    if elastic > high:
        elastic = high
    elif elastic < low:
        elastic = low
    force = elastic + damping * slip_rate
    if force > high:
        force = high
    elif force < low:
        force = low
    settled = elastic / stiffness
    if dt > 0.0:
        # what slips, at the mean pull of the step; a spring that only holds loses nothing
        slipping = slip_rate - (settled - deflection) / dt
        mean = 0.5 * stiffness * (settled + deflection)
        return force, settled, 0.0, mean * slipping + (force - elastic) * slip_rate
    rate = slip_rate - RELAXATION * (deflection - settled)
    return force, deflection, rate, force * slip_rate - elastic * rate


@kernel
def one_sided_stop(travel, rate, low, high, stiffness, damping):
    """Return the force of the end stops on a coordinate, and what their damper dissipates.

    Parameters
    ----------
    travel, rate : float
        Coordinate and its velocity [m, m/s].
    low, high : float
        Where the stops stand [m].
    stiffness, damping : float
        Of a stop [N/m, N s/m]; the damper works only in contact and never pulls.

    Returns
    -------
    force : float
        On the coordinate [N].
    power : float
        Dissipated power [W].
    """
    depth = 0.0
    sign = 0.0
    if travel < low:
        depth, sign = low - travel, 1.0
    elif travel > high:
        depth, sign = travel - high, -1.0
    if sign == 0.0:
        return 0.0, 0.0
    push = stiffness * depth - sign * damping * rate
    if push < 0.0:
        push = 0.0
    return sign * push, -sign * (push - stiffness * depth) * rate
