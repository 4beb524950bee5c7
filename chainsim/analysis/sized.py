"""A lift before its first run: loop, loads, tensions, and the figures worked out from them."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from chainsim import closed_forms as cf
from chainsim.analysis.free_body import FreeBody, Load, free_body, load_of
from chainsim.analysis.materials import SHAFT_MATERIALS
from chainsim.model.route import lay_chain
from chainsim.model.tangents import Route, route
from chainsim.model.wheels import down_of
from chainsim.scenario import Scenario


@dataclass(frozen=True)
class Sized:
    """A lift as the sheet sees it.

    Attributes
    ----------
    scenario : Scenario
        The lift.
    path : Route
        The taut loop, movable axles where they come to stand.
    n_links : int
        Number of links (dimensionless).
    surplus : float
        Links too many for fixed axles (dimensionless), NaN for a single wheel.
    load : Load
        What hangs on the chain in steady running.
    running, empty : FreeBody
        Tensions with the balls and without them.
    """

    scenario: Scenario
    path: Route
    n_links: int
    surplus: float
    load: Load
    running: FreeBody
    empty: FreeBody

    @property
    def speed(self) -> float:
        """Mean chain speed [m/s]."""
        return self.scenario.drive.chain_speed

    @property
    def payload(self) -> float:
        """Weight of all balls on the carrying strand [N]."""
        return float(self.load.balls.sum()) * self.load.ball_weight

    @property
    def driven(self) -> int:
        """Number of the driven wheel (dimensionless)."""
        return [wheel.name for wheel in self.path.wheels].index(self.scenario.drive.sprocket)

    @property
    def rate(self) -> float:
        """Speed of the driven wheel [rad/s]."""
        wheel = self.path.wheels[self.driven]
        return self.speed / self.path.pitch * wheel.seat_step(self.path.pitch)


def size_up(scenario: Scenario, path: Route, n_links: int) -> Sized:
    """Gather what the sheet and the advice are worked out from.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    path : Route
        The taut loop on the axles as drawn.
    n_links : int
        Number of links (dimensionless).

    Returns
    -------
    Sized
        Route on the axles where they come to stand, loads and tensions.

    Raises
    ------
    LayoutError
        If so many links cannot be laid.
    """
    down = down_of(scenario)
    laid = lay_chain(path.wheels, path.pitch, n_links, down)
    wheels = tuple(w.moved(d) for w, d in zip(path.wheels, laid.travel, strict=True))
    path = route(wheels, path.pitch, down)
    load = load_of(scenario, path)
    empty = load._replace(balls=np.zeros_like(load.balls))
    return Sized(
        scenario=scenario,
        path=path,
        n_links=n_links,
        surplus=laid.surplus,
        load=load,
        running=free_body(scenario, path, load, laid.surplus),
        empty=free_body(scenario, path, empty, laid.surplus),
    )


def threshold_mass(sized: Sized) -> float:
    """Return the hung mass at which the loop goes slack, the rest of the lift unchanged.

    Parameters
    ----------
    sized : Sized
        A lift with a take-up that hangs.

    Returns
    -------
    float
        Mass of the mount [kg], never negative; NaN where no weight sets the tension.

    Notes
    -----
    Every tension grows with the hung weight alike, by the share that the strands at the take-up
    bear: half of it each where both are in line with its way.
    """
    weight = sized.running.hung_weight
    movable = [k for k, wheel in enumerate(sized.path.wheels) if wheel.movable is not None]
    if not movable or math.isnan(weight):
        return math.nan
    k = movable[-1]
    mount = sized.scenario.sprocket[k].mount
    if mount.kind in ("spring", "counterweight") or mount.mass <= 0.0:
        return math.nan
    way = sized.path.wheels[k].movable or (0.0, 1.0)
    share = abs(float((sized.path.direction[k] - sized.path.direction[k - 1]) @ np.array(way)))
    along = abs(float(np.array(down_of(sized.scenario)) @ np.array(way)))
    spare = sized.running.least * share / (along * sized.scenario.frame.gravity)
    return max(0.0, mount.mass - spare)


def bounce_frequency(sized: Sized) -> float:
    """Return the frequency at which a take-up bounces on its two strands.

    Parameters
    ----------
    sized : Sized
        The lift.

    Returns
    -------
    float
        Estimate [Hz]; NaN for other than two wheels or without a movable axle.
    """
    movable = [k for k, wheel in enumerate(sized.path.wheels) if wheel.movable is not None]
    if len(sized.path.wheels) != 2 or not movable:
        return math.nan
    mount, gravity = sized.scenario.sprocket[movable[-1]].mount, sized.scenario.frame.gravity
    mass = mount.mass + (mount.weight or 0.0)
    if mass <= 0.0:
        return math.nan
    length = float(sized.path.length.mean())
    return cf.take_up_bounce_frequency(
        mass,
        sized.load.chain_weight * length / gravity,
        sized.payload / gravity,
        length / sized.path.pitch,
        sized.scenario.chain.link_stiffness,
    )


def bearing_power(sized: Sized) -> float:
    """Return the power that all bearings take.

    Parameters
    ----------
    sized : Sized
        The lift.

    Returns
    -------
    float
        Sum of ``(M0 + μ r |hub force|) ω`` over the wheels [W].
    """
    power = 0.0
    for k, sprocket in enumerate(sized.scenario.sprocket):
        rate = sized.speed / sized.path.pitch * sized.path.wheels[k].seat_step(sized.path.pitch)
        hub = float(np.hypot(*sized.running.hub[k]))
        friction = 0.5 * sprocket.axle_diameter * sprocket.bearing_friction * hub
        power += rate * (sprocket.bearing_drag + friction)
    return power


def sprocket_torque(sized: Sized) -> float:
    """Return the mean torque on the driven sprocket in steady running.

    Parameters
    ----------
    sized : Sized
        The lift.

    Returns
    -------
    float
        From the power of lifting and of the bearings [N m].
    """
    lifting = sized.running.driven_pull * sized.speed
    return (lifting + bearing_power(sized)) / sized.rate


def starting_pull(sized: Sized) -> float:
    """Return the pull that speeds up chain, carriers and balls on the ramp.

    Parameters
    ----------
    sized : Sized
        The lift.

    Returns
    -------
    float
        Greatest pull [N]; a smooth ramp, half a cosine, peaks at π/2 of its mean.
    """
    drive, gravity = sized.scenario.drive, sized.scenario.frame.gravity
    chain = sized.load.chain_weight * sized.n_links * sized.path.pitch
    mass = (chain + sized.payload) / gravity
    peak = 0.5 * math.pi if drive.ramp_shape == "smooth" else 1.0
    return mass * sized.speed / drive.ramp * peak


def whirl_margin(sized: Sized) -> float:
    """Return the first critical speed of the shaft over its running speed.

    Parameters
    ----------
    sized : Sized
        The lift.

    Returns
    -------
    float
        Ratio (dimensionless); NaN where the shaft has no length or diameter.
    """
    shaft = sized.scenario.drive.shaft
    if shaft.length is None or shaft.diameter is None:
        return math.nan
    material = SHAFT_MATERIALS[shaft.material or "steel"]
    span = shaft.length / (shaft.supports - 1)
    critical = cf.whirl_speed(shaft.diameter, span, material.modulus, material.density)
    return critical / sized.rate
