"""A piece of chain on the bench: an open strand or a free ring, with the lift's own kernels.

It shows what a chain does by itself, away from any lift: hung up, weighed down, plucked, dropped,
dragged over a wheel that does not turn.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from chainsim.closed_forms.statics import STANDARD_GRAVITY
from chainsim.errors import RunError
from chainsim.kernels.balls import FEATURE, BallLaw
from chainsim.kernels.drive import DRIVE
from chainsim.kernels.guides import GUIDE
from chainsim.kernels.layout import aligned, padded, section_sizes, view
from chainsim.kernels.links import Chain
from chainsim.kernels.march import march
from chainsim.kernels.motion import WORLD, Parts, close_loop
from chainsim.kernels.mounts import MOUNT
from chainsim.kernels.relax import stop
from chainsim.kernels.seats import POCKET
from chainsim.kernels.wheels import WHEEL
from chainsim.model import constants
from chainsim.model.equilibrium import clear
from chainsim.model.packing import Packed, new_work
from chainsim.model.packing_carriers import Hung, factored, link_map, mass_matrix_terms
from chainsim.model.stepping import stability_limit

IMMOVABLE = 1.0e30
"""Mass that stands for a pin that is held, in the mass matrix only [kg]."""

FAR_AWAY = 1.0e6
"""Place of the wheel that the kernels ask for where the bench has none [m]."""

LOOK_STEPS = 4000
"""Inner steps between two looks at the unbalanced force [dimensionless]."""


class Rider(NamedTuple):
    """A mass that is rigid on a link.

    Attributes
    ----------
    link : int
        (dimensionless).
    along, out : float
        Place of its center along the link from its first pin, and across it to the right of the
        link's direction [m].
    mass : float
        [kg].
    inertia : float
        About its own center [kg m2].
    """

    link: int
    along: float
    out: float
    mass: float
    inertia: float = 0.0


def bench_strand(
    pins: np.ndarray,
    *,
    pitch: float,
    link_mass: float,
    link_stiffness: float,
    link_damping: float = 0.0,
    play: float = 0.0,
    closed: bool = False,
    fixed: Sequence[int] = (),
    end_mass: float = 0.0,
    pin_mass: np.ndarray | None = None,
    riders: Sequence[Rider] = (),
    joint_moment: float = 0.0,
    joint_radius: float = 0.0,
    joint_stiffness: float = 0.0,
    air_damping: float = 0.0,
    gravity: tuple[float, float] = (0.0, -STANDARD_GRAVITY),
    wheels: np.ndarray | None = None,
    mounts: np.ndarray | None = None,
) -> Packed:
    """Pack a strand of chain, at rest where its pins are laid.

    Parameters
    ----------
    pins : ndarray, shape (n_pins, 2)
        Where the pins lie [m].  An open strand has one link less than pins.
    pitch : float
        Unstretched length of a link [m].
    link_mass : float
        Mass of a link, half of it on each of its pins [kg].
    link_stiffness : float
        [N/m].
    link_damping : float
        Share of critical in the highest axial mode: ``c = zeta sqrt(k m)`` (dimensionless).
    play : float
        Total axial play of a joint [m].
    closed : bool
        Whether a last link joins the last pin to pin 0.
    fixed : sequence of int
        Pins that are held; one that is given a velocity keeps it (dimensionless).
    end_mass : float
        Added to the last pin [kg].
    pin_mass : ndarray, shape (n_pins,), or None
        Masses on the pins, in place of those that follow from `link_mass` [kg].
    riders : sequence of Rider
        Masses rigid on links.
    joint_moment : float
        Constant part of the joints' friction [N m].
    joint_radius : float
        Coefficient of joint friction times pin radius [m].
    joint_stiffness : float
        Of the joints' friction while it holds [N m/rad]; 0: no friction.
    air_damping : float
        Of sideways motion, per pin [N s/m].
    gravity : tuple of float, shape (2,)
        Right and up [m/s2].
    wheels, mounts : ndarray of WHEEL and of MOUNT, shape (n_wheels,), or None
        Wheels that the chain may touch, and how they are held.

    Returns
    -------
    Packed
        For `chainsim.kernels.march.march` and `rest_strand`.  Tension of link i is
        ``packed.work.links.tension[i]`` after a step.
    """
    n = len(pins)
    mass = _pin_masses(n, link_mass, closed, end_mass) if pin_mass is None else np.array(pin_mass)
    hung = Hung(
        np.array([rider.link for rider in riders], np.int64),
        np.array([link_map(rider.along, rider.out, pitch) for rider in riders], complex),
        np.array([rider.mass for rider in riders], float),
        np.array([rider.inertia for rider in riders], float),
    )
    diagonal, coupling, moment = mass_matrix_terms(mass, pitch, hung)
    held = diagonal.copy()
    held[list(fixed)] = IMMOVABLE
    masses = factored(held, coupling, moment, hung.link)
    chain = _bench_chain(
        pitch,
        mass,
        (diagonal, coupling, moment),
        link_stiffness=link_stiffness,
        link_damping=link_damping * math.sqrt(link_stiffness * link_mass),
        play=play,
        joint=(joint_moment, joint_radius, joint_stiffness),
        air_damping=air_damping,
        gravity=gravity,
        closed=closed,
    )
    wheels = _far_wheel() if wheels is None else wheels
    mounts = _fixed_mounts(len(wheels)) if mounts is None else mounts
    parts = Parts(
        chain=chain,
        wheels=wheels,
        mounts=mounts,
        drive=_idle_drive(),
        world=_world(gravity, pitch),
        blocks=masses.blocks,
        bands=masses.bands,
        guides=np.zeros(0, GUIDE),
        features=np.zeros(0, FEATURE),
        law=BallLaw(1.0, 0.0, 1.0, 1.0, 0.0, 0.0, 1.0, 0.0, 0.0),
        pockets=np.zeros(0, POCKET),
        reach=np.ascontiguousarray(wheels["tip_radius"]),
        carrier_links=np.unique(hung.link),
    )
    ends = np.cumsum(section_sizes(n, len(wheels), 0))
    flat, rate_flat = aligned(int(ends[-1])), aligned(int(ends[-1]))
    state, rate = view(flat, ends), view(rate_flat, ends)
    state.x[:n], state.y[:n] = np.asarray(pins, float).T
    close_loop.py_func(state, n)
    work = new_work(n, len(wheels), 0, 0, len(hung.link))
    return Packed(parts, work, flat, rate_flat, ends, state, rate)


def _bench_chain(
    pitch, mass, terms, *, link_stiffness, link_damping, play, joint, air_damping, gravity, closed
) -> Chain:
    """Pack the chain; `terms` are those of `mass_matrix_terms`, `link_damping` is in N s/m."""
    n = len(mass)
    diagonal, coupling, moment = terms
    size = padded(n + 1)
    rows = [aligned(size) for _ in range(4)]
    for row, values in zip(rows, (pitch, 1.0 / mass, moment.real, moment.imag), strict=True):
        row[:n] = values
    return Chain(
        n=n,
        pitch=rows[0],
        stiffness=float(link_stiffness),
        damping=float(link_damping),
        play=float(play),
        inverse_mass=rows[1],
        weight_re=rows[2],
        weight_im=rows[3],
        mass=np.ascontiguousarray(diagonal),
        coupling_re=np.ascontiguousarray(coupling.real),
        coupling_im=np.ascontiguousarray(coupling.imag),
        gx=float(gravity[0]),
        gy=float(gravity[1]),
        gravity=math.hypot(*gravity),
        joint_moment=float(joint[0]),
        joint_radius=float(joint[1]),
        joint_stiffness=float(joint[2]),
        front_bend=0.0,
        back_bend=0.0,
        bend_stiffness=0.0,
        air=float(air_damping),
        open=int(not closed),
    )


def _pin_masses(n: int, link_mass: float, closed: bool, end_mass: float) -> np.ndarray:
    """Return the mass on each pin: half of each of its links [kg]."""
    mass = np.full(n, float(link_mass))
    if not closed:
        mass[0] *= 0.5
        mass[-1] *= 0.5
    mass[-1] += end_mass
    return mass


def _far_wheel() -> np.ndarray:
    """Return a smooth roller that nothing touches."""
    wheels = np.zeros(1, WHEEL)
    wheels["seat_radius"] = wheels["reach"] = wheels["tip_radius"] = 1.0e-3
    wheels["stiffness"] = wheels["grip_stiffness"] = wheels["inverse_mass"] = 1.0
    wheels["middle_x"] = wheels["side"] = 1.0
    return wheels


def _fixed_mounts(count: int) -> np.ndarray:
    """Return mounts that hold their wheels fast; for the far wheel, out of reach."""
    mounts = np.zeros(count, MOUNT)
    mounts["home_x"] = mounts["home_y"] = FAR_AWAY
    mounts["axis_y"] = mounts["mass"] = mounts["inertia"] = 1.0
    mounts["wheel_inertia"] = IMMOVABLE
    return mounts


def _idle_drive() -> np.ndarray:
    """Return a drive that gives no torque."""
    drive = np.zeros(1, DRIVE)
    drive["stiffness"] = drive["inertia"] = drive["free_rate"] = drive["forward"] = 1.0
    return drive


def _world(gravity: tuple[float, float], pitch: float) -> np.ndarray:
    """Pack the surroundings."""
    world = np.zeros(1, WORLD)
    world["gx"], world["gy"] = gravity
    world["zone_y"] = world["per_window"] = 1.0
    world["margin"] = constants.SEARCH_MARGIN * pitch
    return world


def strand_step(packed: Packed) -> float:
    """Return an inner step with the usual reserve for a strand [s].

    The stiffest mode is bounded by the rows of the stiffness matrix over the masses (Gershgorin).

    Parameters
    ----------
    packed : Packed
        From `bench_strand`.
    """
    chain, wheels = packed.parts.chain, packed.parts.wheels
    lightest = 1.0 / float(chain.inverse_mass[: chain.n].max())
    pair = 2.0 * chain.stiffness + 16.0 * chain.joint_stiffness / chain.pitch[0] ** 2
    if packed.parts.mounts["home_x"][0] < FAR_AWAY:
        pair += float(wheels["stiffness"].max())
    if chain.open == 1 and lightest < 0.75 / float(chain.inverse_mass[: chain.n].min()):
        # an end has half the mass of other pins, and half their links
        lightest *= 2.0
    zeta = chain.damping / math.sqrt(chain.stiffness * lightest)
    rate = math.sqrt(2.0 * pair / lightest)
    return constants.STEP_SHARE * stability_limit(rate, zeta)


def rest_strand(packed: Packed, dt: float, force: float, most: int = 4_000_000) -> float:
    """Bring a strand to rest in place; held pins may bear any force.

    Parameters
    ----------
    packed : Packed
        From `bench_strand`; its state is overwritten with the equilibrium.
    dt : float
        Inner step [s].
    force : float
        Largest unbalanced force to leave [N].
    most : int
        Limit of the number of steps (dimensionless).

    Returns
    -------
    float
        Largest unbalanced force that is left [N].

    Raises
    ------
    RunError
        If it does not come to rest.
    """
    n = packed.parts.chain.n
    moves = packed.parts.blocks.own[:n] > 1.0 / math.sqrt(IMMOVABLE)
    left = math.inf
    for _ in range(0, most, LOOK_STEPS):
        march(0.0, dt, LOOK_STEPS, packed.parts, packed.state, packed.rate, packed.work, 1.0e-300)
        links = packed.work.links
        left = float(np.hypot(links.fx[:n], links.fy[:n])[moves].max())
        if left < force:
            stop(packed.state)
            clear(packed)
            return left
    raise RunError(
        f"the strand does not come to rest: {left:.3g} N stay unbalanced, need {force:.3g} N"
    )
