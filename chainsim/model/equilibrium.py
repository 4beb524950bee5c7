"""Static equilibrium before the first step: driven sprocket held, friction zero, same forces."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from chainsim.errors import RunError
from chainsim.kernels.march import march
from chainsim.kernels.relax import stop
from chainsim.model.lift import Lift
from chainsim.model.packing import Packed

RESIDUAL_SHARE = 1.0e-2
"""Largest unbalanced force that counts as rest, in weights of one link [dimensionless]."""

IMPERFECTION = 1.0e-4
"""Size of the seeded imperfection in pitches [dimensionless]: a straight pushed strand must be able
to choose the way it buckles."""

MOST_STEPS = 4_000_000
"""Inner steps after which relaxation gives up [dimensionless]."""


class Rest(NamedTuple):
    """How well a lift came to rest.

    Attributes
    ----------
    residual : float
        Largest unbalanced force that is left [N].
    target : float
        What was asked for [N].
    """

    residual: float
    target: float


def settle(
    lift: Lift, packed: Packed, dt: float, share: float = RESIDUAL_SHARE, most: int = MOST_STEPS
) -> Rest:
    """Bring a packed lift to rest in place.

    Parameters
    ----------
    lift : Lift
    packed : Packed
        Its state is overwritten with the equilibrium.
    dt : float
        Inner step [s].
    share : float
        Largest unbalanced force in weights of one link (dimensionless).
    most : int
        Limit of the number of steps (dimensionless).

    Returns
    -------
    Rest

    Raises
    ------
    RunError
        If the lift does not come to rest; the message gives the force that is left.
    """
    scenario = lift.scenario
    target = share * scenario.chain.link_mass * scenario.frame.gravity
    n = lift.n_links
    rng = np.random.default_rng([scenario.run.seed, 2])
    size = IMPERFECTION * scenario.chain.pitch
    packed.state.x[:n] += size * rng.uniform(-1.0, 1.0, n)
    packed.state.y[:n] += size * rng.uniform(-1.0, 1.0, n)
    packed.state.x[n], packed.state.y[n] = packed.state.x[0], packed.state.y[0]
    free = frictionless(packed)
    packed.work.search_in[0] = 0
    left = march(0.0, dt, most, free, packed.state, packed.rate, packed.work, target)
    if not left < target:
        raise RunError(
            f"the lift does not come to rest before the first step: {left:.3g} N stay unbalanced, "
            f"need less than {target:.3g} N; look for a mount that nothing holds"
        )
    stop(packed.state)
    clear(packed)
    return Rest(float(left), target)


def frictionless(packed: Packed):
    """Return the parts without any friction; what they share is left alone.

    Parameters
    ----------
    packed : Packed
    """
    parts = packed.parts
    wheels, mounts, guides = parts.wheels.copy(), parts.mounts.copy(), parts.guides.copy()
    features, drive = parts.features.copy(), parts.drive.copy()
    wheels["friction"] = 0.0
    for name in ("friction", "bearing_drag", "bearing_radius", "pulley_drag"):
        mounts[name] = 0.0
    guides["friction"] = 0.0
    features["friction"] = 0.0
    drive["motor"] = 0
    drive["rate_from"] = drive["rate_to"] = 0.0
    drive["low"], drive["high"] = -1.0e9, 1.0e9
    drive["backlash"] = 0.0
    return parts._replace(
        wheels=wheels,
        mounts=mounts,
        guides=guides,
        features=features,
        drive=drive,
        law=parts.law._replace(friction=0.0),
        chain=parts.chain._replace(joint_stiffness=0.0, play=0.0),
    )


def clear(packed: Packed) -> None:
    """Empty the ledger, sums and extremes that relaxation has used.

    Parameters
    ----------
    packed : Packed
    """
    work = packed.work
    packed.state.ledger[:] = 0.0
    for name in ("loss", "loss_joint", "tension_sum"):
        getattr(work.links, name)[:] = 0.0
    work.links.tension_peak[:] = -np.inf
    work.links.tension_low[:] = np.inf
    work.links.damper[:] = 0.0
    work.links.rate[:] = 0.0
    work.wheel_sums[:] = 0.0
    work.drive_sums[:] = 0.0
    for array in work.watch:
        array[:] = 0.0
    work.touches.peak[:] = 0.0
    work.touches.carrier_n[:] = 0.0
    work.seats.reserve[:] = np.inf
    work.search_in[0] = 0
