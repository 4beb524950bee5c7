"""Packs everything a rolling ball can touch: pockets, walls, chute, trough, chain, other balls."""

from __future__ import annotations

import math

import numpy as np

from chainsim.closed_forms import depth_damping
from chainsim.kernels.balls import FEATURE, BallLaw
from chainsim.kernels.seats import POCKET
from chainsim.model import constants
from chainsim.model.lift import Lift
from chainsim.model.packing_carriers import link_map
from chainsim.model.packing_wheels import grip

WALL_HALF = 0.5e-3
"""Half the thickness of walls, chutes and troughs [m]; their drawn line is the surface."""


def rolls(lift: Lift) -> bool:
    """Say whether the lift carries rolling balls."""
    balls = lift.scenario.balls
    return balls is not None and balls.model == "rolling"


def pack_law(lift: Lift) -> BallLaw:
    """Return what all balls share (SI); a mass of zero says that no ball rolls."""
    if not rolls(lift):
        return BallLaw(1.0, 0.0, 1.0, 1.0, 0.0, 0.0, 1.0, 0.0, 0.0)
    balls = lift.scenario.balls
    radius = 0.5 * balls.diameter
    stiffness = ball_stiffness(lift)
    tangential, damping = grip(stiffness, balls.mass)
    return BallLaw(
        radius,
        balls.mass,
        0.4 * balls.mass * radius**2,
        stiffness,
        depth_damping(balls.restitution, balls.restitution_speed),
        balls.friction,
        tangential,
        damping,
        1.0 / balls.mass,
    )


def ball_stiffness(lift: Lift) -> float:
    """Return the contact stiffness of a ball [N/m]."""
    return constants.BALL_PER_LINK * lift.scenario.chain.link_stiffness


def pack_features(lift: Lift) -> np.ndarray:
    """Return one FEATURE record per straight piece of surface (SI)."""
    if not rolls(lift):
        return np.zeros(0, FEATURE)
    balls = lift.scenario.balls
    pieces: list[np.ndarray] = []
    pitch = lift.scenario.chain.pitch
    if lift.pocket is not None:
        pocket = lift.scenario.carriers.pocket
        mapped = [link_map(a, b, pitch) for a, b in lift.pocket.spine]
        ends = np.array([[c.real, c.imag] for c in mapped])
        for k, link in enumerate(lift.carrier_links):
            pieces.append(
                _pieces(
                    lift,
                    ends,
                    lift.pocket.half_wall,
                    pocket.friction,
                    pocket.restitution,
                    link=int(link),
                    carrier=k,
                )
            )
    for wall in lift.scenario.wall:
        line = _behind(np.asarray(wall.points, float))
        pieces.append(_pieces(lift, line, WALL_HALF, wall.friction, wall.restitution))
    for floor in (chute_line(lift), trough_line(lift)):
        if floor is not None:
            pieces.append(
                _pieces(lift, _behind(floor), WALL_HALF, balls.friction, balls.restitution)
            )
    along_link = np.array([[0.0, 0.0], [1.0, 0.0]])
    roller = 0.5 * lift.scenario.chain.roller_diameter
    for link in range(lift.n_links):
        pieces.append(
            _pieces(lift, along_link, roller, balls.friction, balls.restitution, link=link)
        )
    offset = 0
    for piece in pieces:
        piece["before"][piece["before"] >= 0] += offset
        piece["after"][piece["after"] >= 0] += offset
        offset += len(piece)
    features = np.concatenate(pieces)
    # neighboring links share their pin: the later link owns it
    links = features[-lift.n_links :]
    first = offset - lift.n_links
    links["before"] = first + (np.arange(lift.n_links) - 1) % lift.n_links
    links["after"] = first + (np.arange(lift.n_links) + 1) % lift.n_links
    return features


def _pieces(lift, points, half, friction, restitution, link=-1, carrier=-1) -> np.ndarray:
    """Return the pieces of one polyline."""
    count = len(points) - 1
    features = np.zeros(count, FEATURE)
    stiffness = ball_stiffness(lift)
    balls = lift.scenario.balls
    features["link"], features["carrier"] = link, carrier
    features["p_re"], features["p_im"] = points[:-1, 0], points[:-1, 1]
    features["q_re"], features["q_im"] = points[1:, 0], points[1:, 1]
    features["half"] = half
    features["before"] = np.arange(count) - 1
    features["after"] = np.where(np.arange(count) + 1 < count, np.arange(count) + 1, -1)
    features["stiffness"] = stiffness
    features["dissipation"] = depth_damping(restitution, balls.restitution_speed)
    features["friction"] = friction
    features["grip_stiffness"], features["grip_damping"] = grip(
        stiffness, min(balls.mass, lift.scenario.chain.link_mass)
    )
    lighter = min(balls.mass, lift.scenario.chain.link_mass) if link >= 0 else balls.mass
    features["inverse_mass"] = 1.0 / lighter
    return features


def _behind(line: np.ndarray) -> np.ndarray:
    """Return a polyline shifted into its solid side, the left of its way, by `WALL_HALF`."""
    steps = np.diff(line, axis=0)
    directions = steps / np.linalg.norm(steps, axis=1, keepdims=True)
    lefts = np.column_stack([-directions[:, 1], directions[:, 0]])
    moved = np.empty_like(line)
    moved[0] = line[0] + WALL_HALF * (lefts[0] + directions[0])
    moved[-1] = line[-1] + WALL_HALF * (lefts[-1] - directions[-1])
    for k in range(1, len(line) - 1):
        bisector = lefts[k - 1] + lefts[k]
        moved[k] = line[k] + WALL_HALF * bisector / (0.5 * bisector @ bisector)
    return moved


def discharge_side(lift: Lift) -> float:
    """Return +1 where balls leave to the right, -1 where they leave to the left."""
    at = lift.scenario.balls.discharge.at
    head = max(range(len(lift.wheels)), key=lambda s: np.dot(lift.wheels[s].center, lift.up))
    return 1.0 if at[0] > lift.wheels[head].center[0] else -1.0


def chute_line(lift: Lift) -> np.ndarray | None:
    """Return the floor of the discharge chute, solid on its left [m]; None without one."""
    balls = lift.scenario.balls
    if balls is None or balls.discharge is None:
        return None
    discharge = balls.discharge
    side = discharge_side(lift)
    length = 6.0 * balls.diameter
    lip = np.asarray(discharge.at, float)
    far = lip + length * np.array([side * math.cos(discharge.slope), -math.sin(discharge.slope)])
    return np.array([far, lip]) if side > 0 else np.array([lip, far])


def trough_line(lift: Lift) -> np.ndarray | None:
    """Return the floor of a feeding trough, solid on its left [m]; None without one.

    It slopes down to `at`, its lower end, toward the chain.
    """
    balls = lift.scenario.balls
    if balls is None or balls.feed.kind != "trough":
        return None
    feed = balls.feed
    low = np.asarray(feed.at, float)
    length = balls.diameter * (feed.queue + 2)
    tail = min(range(len(lift.wheels)), key=lambda s: np.dot(lift.wheels[s].center, lift.up))
    side = 1.0 if low[0] > lift.wheels[tail].center[0] else -1.0
    high = low + length * np.array([side * math.cos(feed.slope), math.sin(feed.slope)])
    return np.array([high, low]) if side > 0 else np.array([low, high])


def pack_pockets(lift: Lift) -> np.ndarray:
    """Return one POCKET record per carrier (SI)."""
    if lift.pocket is None:
        return np.zeros(0, POCKET)
    form = lift.pocket
    pitch = lift.scenario.chain.pitch
    seat = link_map(*form.seat, pitch)
    pockets = np.zeros(len(lift.carrier_links), POCKET)
    pockets["link"] = lift.carrier_links
    pockets["seat_re"], pockets["seat_im"] = seat.real, seat.imag
    pockets["lip_t"], pockets["lip_n"] = _toward(form.lip_slope)
    back_t, back_n = _toward(form.back_slope)
    pockets["back_t"], pockets["back_n"] = back_t, -back_n
    low, high = form.outline.min(axis=0), form.outline.max(axis=0)
    radius = lift.ball_radius
    pockets["low_t"] = low[0]
    pockets["high_t"] = max(high[0], form.seat[0]) + radius
    pockets["low_n"], pockets["high_n"] = low[1], high[1]
    return pockets


def _toward(slope: float) -> tuple[float, float]:
    """Return the direction (along t, along n) to an edge that is as steep as `slope`."""
    if math.isinf(slope):
        return 0.0, 1.0
    size = math.hypot(1.0, slope)
    return -1.0 / size, slope / size
