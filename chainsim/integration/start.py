"""Prepares a run: packed arrays, inner step, equilibrium, and what sampling remembers."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from chainsim.errors import Problem, ScenarioError
from chainsim.kernels.balls import SEATED
from chainsim.kernels.layout import PER_WHEEL, SPIN
from chainsim.kernels.sample import Memory
from chainsim.kernels.seats import Seats, seat_place
from chainsim.kernels.watch import EXITS, FEEDING, BallWatch
from chainsim.model.equilibrium import Rest, settle
from chainsim.model.lift import Lift
from chainsim.model.packing import Packed, pack, seat_window
from chainsim.model.packing_balls import discharge_side, rolls
from chainsim.model.packing_carriers import link_map
from chainsim.model.stepping import inner_step

BOX_MARGIN = 0.5
"""How far beyond the lift a ball is followed, as a share of the lift's height [dimensionless]."""


@dataclass
class Prepared:
    """A lift at rest, ready to march.

    Attributes
    ----------
    lift : Lift
    packed : Packed
    memory : Memory
    watch : BallWatch
    rest : Rest
        How well it came to rest.
    dt : float
        Inner step [s].
    steps : int
        Inner steps per sample (dimensionless).
    limit : float
        Largest inner step that the stiffest mode allows [s], reserve included.
    stiffest : float
        Angular frequency of that mode [rad/s].
    """

    lift: Lift
    packed: Packed
    memory: Memory
    watch: BallWatch
    rest: Rest
    dt: float
    steps: int
    limit: float
    stiffest: float


def loaded_at_start(lift: Lift) -> np.ndarray:
    """Return which carriers start with a ball: those on the carrying strand, if asked for.

    Parameters
    ----------
    lift : Lift

    Returns
    -------
    ndarray of bool, shape (n_carriers,)
    """
    loaded = np.zeros(len(lift.carrier_links), bool)
    balls = lift.scenario.balls
    if balls is None or lift.pocket is None or balls.start != "loaded":
        return loaded
    up = np.asarray(lift.up)
    spacing = balls.spacing or 1
    rank = 0
    for k, link in enumerate(lift.carrier_links):
        i, j = int(link), (int(link) + 1) % lift.n_links
        step = lift.laid.pin[j] - lift.laid.pin[i]
        height = float(0.5 * (lift.laid.pin[i] + lift.laid.pin[j]) @ up)
        rising = float(step @ up) > 0.5 * float(np.hypot(*step))
        if rising and lift.load_height <= height < lift.unload_height:
            loaded[k] = rank % spacing == 0
            rank += 1
    return loaded


def prepare(lift: Lift, step_scale: float = 1.0) -> Prepared:
    """Pack a lift, choose its inner step and bring it to rest.

    Parameters
    ----------
    lift : Lift
    step_scale : float
        Share of the usual inner step (dimensionless); a half for the step check.

    Returns
    -------
    Prepared

    Raises
    ------
    ScenarioError
        If the scenario asks for a step beyond the limit without allowing it.
    RunError
        If the lift does not come to rest.
    """
    loaded = loaded_at_start(lift)
    held = not rolls(lift)
    packed = pack(lift, loaded if held else None)
    limit, stiffest = inner_step(
        packed.parts,
        lift.laid.pin,
        lift.laid.seat,
        lift.laid.wheel_center,
        lift.scenario.chain.link_damping,
    )
    dt, steps = choose_step(lift, limit, step_scale)
    packed = packed._replace(work=packed.work._replace(seats=_ring(lift, packed, dt)))
    _seat_balls(lift, packed, loaded, held)
    rest = settle(lift, packed, min(limit, dt))
    memory = _memory(lift, packed, loaded if held else np.zeros_like(loaded))
    return Prepared(lift, packed, memory, _watch(lift, packed), rest, dt, steps, limit, stiffest)


def choose_step(lift: Lift, limit: float, step_scale: float) -> tuple[float, int]:
    """Return the inner step [s] and how many make a sample interval.

    Parameters
    ----------
    lift : Lift
    limit : float
        Largest step that the stiffest mode allows, reserve included [s].
    step_scale : float
        (dimensionless)
    """
    run = lift.scenario.run
    interval = 1.0 / run.sample_rate
    wanted = limit
    if run.step is not None:
        if run.step > limit and not run.allow_coarse_step:
            rule = (
                f"need at most {limit * 1e6:.3g} us, set by the stiffest mode of chain and "
                "contacts; leave it out, or set run.allow_coarse_step = true"
            )
            found = f"{run.step * 1e6:.3g} us"
            raise ScenarioError([Problem(str(lift.scenario.file), None, "run.step", found, rule)])
        wanted = run.step
    steps = max(1, math.ceil(interval / wanted - 1e-9))
    steps = max(1, round(steps / step_scale))
    return interval / steps, steps


def _ring(lift: Lift, packed: Packed, dt: float) -> Seats:
    """Return the seats with a ring as long as the averaging window."""
    window = max(1, round(seat_window(lift) / dt))
    packed.parts.world["per_window"] = 1.0 / (window * dt)
    slots = packed.work.seats.pocket.shape[0]
    return packed.work.seats._replace(
        ring_x=np.zeros((window, slots)), ring_y=np.zeros((window, slots))
    )


def _seat_balls(lift: Lift, packed: Packed, loaded: np.ndarray, held: bool) -> None:
    """Put the balls of a loaded start into their pockets."""
    touches, seats = packed.work.touches, packed.work.seats
    if lift.pocket is None:
        return
    if held:
        touches.used[0] = len(loaded)
        seats.pocket[: len(loaded)] = np.arange(len(loaded))
        touches.state[: len(loaded)] = np.where(loaded, SEATED, 0)
        seats.judged[: len(loaded)] = loaded
        return
    for slot, k in enumerate(np.flatnonzero(loaded)):
        place_ball(packed, slot, int(k))
        seats.judged[slot] = 1
        touches.state[slot] = SEATED


def place_ball(packed: Packed, slot: int, carrier: int) -> None:
    """Set a ball down in a pocket, at rest against it (writes the state).

    Parameters
    ----------
    packed : Packed
    slot, carrier : int
        (dimensionless)
    """
    state, pocket = packed.state, packed.parts.pockets[carrier]
    x, y = seat_place(pocket, state)
    i = int(pocket["link"])
    state.bx[slot], state.by[slot] = x, y
    state.bvx[slot], state.bvy[slot] = state.vx[i], state.vy[i]
    state.bw[slot] = state.spin[slot] = 0.0
    state.grip[slot * 8 : slot * 8 + 8] = 0.0
    touches, seats = packed.work.touches, packed.work.seats
    touches.what[slot, :] = -1
    touches.used[0] = max(touches.used[0], slot + 1)
    seats.pocket[slot] = carrier
    seats.age[slot] = 0
    packed.work.search_in[0] = 0


def _memory(lift: Lift, packed: Packed, loaded: np.ndarray) -> Memory:
    """Set up what sampling remembers."""
    n_wheels, slots = len(lift.wheels), packed.work.seats.pocket.shape[0]
    strand = np.zeros((len(lift.strands), 8))
    path = lift.route
    for k, one in enumerate(lift.strands):
        strand[k, 0], strand[k, 1] = one.start, one.end
        strand[k, 2:4] = path.start[k] - np.asarray(path.wheels[one.start].center)
        strand[k, 4:6] = path.end[k] - np.asarray(path.wheels[one.end].center)
        strand[k, 6:8] = path.direction[k]
    numbers = np.full(slots, -1, np.int64)
    angles = np.array([packed.state.q[PER_WHEEL * s + SPIN] for s in range(n_wheels)])
    return Memory(
        through=np.full(n_wheels, -1.0),
        travel=np.zeros(n_wheels),
        first_angle=angles,
        ball_vx=np.zeros(slots),
        ball_vy=np.zeros(slots),
        number=numbers,
        strand=strand,
        carrier_pull=_carrier_pull(lift),
        loaded=loaded.astype(np.int64),
        link_peak=np.array([-np.inf, -1.0, np.inf, -1.0]),
        seat_low=np.array([np.inf, -1.0, 0.0]),
    )


def _carrier_pull(lift: Lift) -> np.ndarray:
    """Return (b/p) m of carrier and held ball [kg]: what their weight across adds to the spring."""
    pull = np.zeros((max(1, len(lift.carrier_links)), 2))
    carriers = lift.scenario.carriers
    if carriers is None:
        return pull
    pitch = lift.scenario.chain.pitch
    out = carriers.pocket.offset + 0.5 * (carriers.pocket.floor or 0.0)
    pull[:, 0] = carriers.mass * out / pitch
    if lift.pocket is not None and not rolls(lift):
        pull[:, 1] = -lift.scenario.balls.mass * link_map(*lift.pocket.seat, pitch).imag
    return pull


def _watch(lift: Lift, packed: Packed) -> BallWatch:
    """Set up where balls leave, and where they are fed."""
    slots = packed.work.seats.pocket.shape[0]
    pockets = packed.parts.pockets
    up = np.asarray(lift.up)
    heights = [float(np.dot(seat_place(p, packed.state), up)) for p in pockets]
    return BallWatch(
        last_x=packed.state.bx[:slots].copy(),
        last_y=packed.state.by[:slots].copy(),
        still=np.zeros(slots, np.int64),
        happened=np.zeros(slots, np.int64),
        cross_y=np.zeros(slots),
        exits=_exits(lift),
        feeding=_feeding(lift),
        last_heights=np.array(heights) if heights else np.zeros(1),
    )


def _exits(lift: Lift) -> np.ndarray:
    """Pack the mouth of the chute and the box in which balls are followed."""
    exits = np.zeros(1, EXITS)
    entry = exits[0]
    low, high = lift.laid.pin.min(axis=0), lift.laid.pin.max(axis=0)
    margin = BOX_MARGIN * float(np.max(high - low)) + 10.0 * lift.ball_radius
    entry["box_left"], entry["box_right"] = low[0] - margin, high[0] + margin
    entry["box_low"], entry["box_high"] = low[1] - 0.4 * margin, high[1] + margin
    balls = lift.scenario.balls
    if balls is not None and balls.discharge is not None:
        discharge = balls.discharge
        entry["has_mouth"] = 1
        entry["mouth_x"] = discharge.at[0]
        entry["mouth_low"] = discharge.at[1]
        entry["mouth_high"] = discharge.at[1] + discharge.mouth
        entry["mouth_side"] = discharge_side(lift)
    return exits


def _feeding(lift: Lift) -> np.ndarray:
    """Pack the heights at which pockets are filled and held balls unloaded."""
    feeding = np.zeros(1, FEEDING)
    entry = feeding[0]
    entry["held"] = int(not rolls(lift) and lift.pocket is not None)
    entry["up_x"], entry["up_y"] = lift.up
    entry["load"], entry["unload"] = lift.load_height, lift.unload_height
    entry["found"] = entry["leaving"] = -1
    return feeding
