"""Packs a lift into the arrays of the kernels: parts, state vector, scratch space."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from chainsim.kernels.balls import Touches
from chainsim.kernels.guides import NearGuides
from chainsim.kernels.layout import (
    PER_WHEEL,
    SPIN,
    State,
    aligned,
    padded,
    section_sizes,
    view,
)
from chainsim.kernels.links import Chain, ChainWork
from chainsim.kernels.motion import WORLD, Parts, Work, close_loop
from chainsim.kernels.seats import Seats
from chainsim.kernels.wheels import Frames, Near, Watch
from chainsim.model import constants
from chainsim.model.lift import Lift
from chainsim.model.packing_balls import pack_features, pack_law, pack_pockets, rolls
from chainsim.model.packing_carriers import PinMasses, pack_carriers
from chainsim.model.packing_wheels import (
    pack_drive,
    pack_guides,
    pack_mounts,
    pack_wheels,
    usual_pull,
)

LONGEST_WINDOW = 0.05
"""Longest averaging window of the seat reserve [s]."""


class Packed(NamedTuple):
    """A lift in arrays.

    Attributes
    ----------
    parts : Parts
    work : Work
    flat : ndarray, shape (n_state,)
        State vector (mixed SI).
    rate_flat : ndarray, shape (n_state,)
        Its derivative.
    ends : ndarray of int, shape (18,)
        Section ends (dimensionless).
    state, rate : State
        Views of both.
    """

    parts: Parts
    work: Work
    flat: np.ndarray
    rate_flat: np.ndarray
    ends: np.ndarray
    state: State
    rate: State


def seat_window(lift: Lift) -> float:
    """Return the averaging window of the seat reserve, half of sqrt(h/g) [s]; h the lip's height.

    Parameters
    ----------
    lift : Lift
    """
    if lift.scenario.carriers is None:
        return 0.01
    lip = max(lift.scenario.carriers.pocket.lip or 0.0, 0.5e-3)
    return min(LONGEST_WINDOW, 0.5 * math.sqrt(lip / lift.scenario.frame.gravity))


def ball_slots(lift: Lift) -> int:
    """Return how many balls the lift can have in play at one time (dimensionless)."""
    balls = lift.scenario.balls
    if balls is None or lift.pocket is None:
        return 0
    if not rolls(lift):
        return len(lift.carrier_links)
    queue = balls.feed.queue if balls.feed.kind == "trough" else 0
    return len(lift.carrier_links) + int(queue) + 6


def pack(lift: Lift, loaded: np.ndarray | None = None) -> Packed:
    """Pack a lift at its laid position, at rest.

    Parameters
    ----------
    lift : Lift
    loaded : ndarray of bool, shape (n_carriers,), or None
        Carriers that hold a ball rigidly.

    Returns
    -------
    Packed
    """
    loaded = np.zeros(len(lift.carrier_links), bool) if loaded is None else loaded
    parts = _parts(lift, loaded)
    slots = ball_slots(lift)
    n_wheels = len(lift.wheels)
    sizes = section_sizes(lift.n_links, n_wheels, slots)
    ends = np.cumsum(sizes)
    flat, rate_flat = aligned(int(ends[-1])), aligned(int(ends[-1]))
    state, rate = view(flat, ends), view(rate_flat, ends)
    _place(lift, state)
    work = new_work(
        lift.n_links, n_wheels, len(lift.scenario.guide), slots, len(lift.carrier_links)
    )
    return Packed(parts, work, flat, rate_flat, ends, state, rate)


def _parts(lift: Lift, loaded: np.ndarray) -> Parts:
    """Pack what the lift is made of."""
    masses = pack_carriers(lift, loaded)
    wheels = pack_wheels(lift)
    return Parts(
        chain=_chain(lift, masses),
        wheels=wheels,
        mounts=pack_mounts(lift),
        drive=pack_drive(lift),
        world=_world(lift),
        blocks=masses.blocks,
        bands=masses.bands,
        guides=pack_guides(lift),
        features=pack_features(lift),
        law=pack_law(lift),
        pockets=pack_pockets(lift),
        reach=np.ascontiguousarray(wheels["tip_radius"]),
        carrier_links=np.ascontiguousarray(lift.carrier_links),
    )


def _chain(lift: Lift, masses: PinMasses) -> Chain:
    """Pack the chain."""
    chain = lift.scenario.chain
    size = padded(lift.n_links + 1)
    mass = chain.link_mass
    radius = chain.joint.friction * chain.joint.pin_radius
    usual = chain.joint.moment + radius * usual_pull(lift)
    has_joint = chain.joint.moment > 0.0 or radius > 0.0
    inverse_mass, re, im = aligned(size), aligned(size), aligned(size)
    inverse_mass[: lift.n_links] = 1.0 / mass
    re[: lift.n_links], im[: lift.n_links] = masses.moment.real, masses.moment.imag
    gravity = scenario_gravity(lift)
    pitch = aligned(size)
    pitch[: lift.n_links] = lift.pitch
    bends = chain.front_bend or chain.back_bend
    return Chain(
        n=lift.n_links,
        pitch=pitch,
        stiffness=chain.link_stiffness,
        damping=chain.link_damping * math.sqrt(chain.link_stiffness * mass),
        play=chain.play,
        inverse_mass=inverse_mass,
        weight_re=re,
        weight_im=im,
        mass=np.ascontiguousarray(masses.diagonal),
        coupling_re=np.ascontiguousarray(masses.coupling.real),
        coupling_im=np.ascontiguousarray(masses.coupling.imag),
        gx=gravity[0],
        gy=gravity[1],
        gravity=lift.scenario.frame.gravity,
        joint_moment=chain.joint.moment,
        joint_radius=radius,
        joint_stiffness=usual / constants.SLIP_AT_JOINT if has_joint else 0.0,
        front_bend=chain.front_bend or 0.0,
        back_bend=chain.back_bend or 0.0,
        bend_stiffness=0.02 * chain.link_stiffness * chain.pitch**2 if bends else 0.0,
        air=chain.air_damping,
        open=0,
    )


def scenario_gravity(lift: Lift) -> tuple[float, float]:
    """Return gravity in the frame: right, up [m/s2].

    Parameters
    ----------
    lift : Lift
    """
    gravity = lift.scenario.frame.gravity
    return -gravity * lift.up[0], -gravity * lift.up[1]


def _world(lift: Lift) -> np.ndarray:
    """Pack the surroundings."""
    world = np.zeros(1, WORLD)
    world["gx"], world["gy"] = scenario_gravity(lift)
    world["zone_x"], world["zone_y"] = lift.up
    world["zone"] = lift.unload_height - 0.5 * lift.scenario.chain.pitch
    world["per_window"] = 1.0 / seat_window(lift)
    world["margin"] = constants.SEARCH_MARGIN * lift.scenario.chain.pitch
    return world


def new_work(n: int, n_wheels: int, n_guides: int, slots: int, n_carriers: int) -> Work:
    """Set up scratch space.

    Parameters
    ----------
    n, n_wheels, n_guides, slots, n_carriers : int
        Pins, wheels, guides, ball slots and carriers (dimensionless).
    """
    size = padded(n + 2)
    rows = [aligned(size) for _ in ChainWork._fields]
    links = ChainWork(*rows)
    links.tension_low[:] = np.inf
    links.tension_peak[:] = -np.inf
    near = n * max(1, n_wheels)
    n_guides = max(1, n_guides)
    slots_kept = max(1, slots)
    return Work(
        links=links,
        frames=Frames(*[np.zeros(n_wheels) for _ in Frames._fields]),
        near=Near(
            np.zeros(near, np.int64),
            np.zeros(near, np.int64),
            np.zeros(near),
            np.zeros(near),
            np.zeros(1, np.int64),
        ),
        near_guides=NearGuides(
            np.zeros(n * n_guides, np.int64),
            np.zeros(n * n_guides, np.int64),
            np.zeros(1, np.int64),
        ),
        touches=Touches(
            np.full((slots_kept, 8), -1, np.int64),
            np.zeros(slots_kept, np.int64),
            np.zeros(1, np.int64),
            np.zeros(slots_kept),
            np.zeros(slots_kept),
            np.zeros(slots_kept),
            np.zeros(slots_kept),
            np.zeros(max(1, n_carriers)),
        ),
        seats=Seats(
            np.full(slots_kept, -1, np.int64),
            np.zeros(slots_kept, np.int64),
            np.zeros(slots_kept, np.int64),
            np.zeros(1, np.int64),
            np.zeros((1, slots_kept)),
            np.zeros((1, slots_kept)),
            np.full(slots_kept, np.inf),
        ),
        watch=Watch(np.zeros(1), np.zeros(n_wheels), np.zeros(n_wheels), np.zeros(n_wheels)),
        reaction=np.zeros(n_wheels),
        stop_force=np.zeros(n_wheels),
        chain_torque=np.zeros(n_wheels),
        power=np.zeros(16),
        wheel_sums=np.zeros((n_wheels, 4)),
        drive_sums=np.zeros(4),
        search_in=np.zeros(1, np.int64),
        step=np.zeros(1),
    )


def _place(lift: Lift, state: State) -> None:
    """Write the laid position into a state at rest."""
    n = lift.n_links
    state.x[:n], state.y[:n] = lift.laid.pin[:, 0], lift.laid.pin[:, 1]
    close_loop(state, n)
    for s, sprocket in enumerate(lift.scenario.sprocket):
        base = PER_WHEEL * s
        state.q[base + SPIN] = lift.laid.wheel_angle[s]
        travel = float(lift.laid.travel[s])
        kind = sprocket.mount.kind
        if kind == "arm":
            pivot = lift.wheels[s].pivot or (0.0, 0.0)
            arm = np.subtract(lift.wheels[s].center, pivot)
            state.q[base + 2] = travel / float(np.hypot(*arm))
        elif kind == "hung":
            state.q[base] = -travel
        elif kind in ("sliding", "spring", "counterweight"):
            state.q[base] = travel
            if kind == "counterweight":
                state.q[base + 4] = travel
