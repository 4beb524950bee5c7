"""A recording made by kinematics alone, for tests of what reads recordings.

Two equal sprockets with an even number of teeth, a whole number of links apart and in phase: then
both strands stay straight and upright at every moment, and the chain's motion over the polygons is
exact. Tensions, reserves and energies are plausible, not simulated: nothing here is a check value.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from chainsim.integration.samples import BLOCK_SAMPLES, BallRow, Block, Ending, Event, Extreme
from chainsim.recording.memory import MemoryRecorder
from chainsim.recording.recorder import Recorder
from chainsim.recording.recording import Recording
from chainsim.recording.rows import ModeRow, Static, StrandRow
from chainsim.scenario import parse_scenario

GRAVITY = 9.80665
PITCH, TEETH, BALL_RADIUS, BALL_MASS = 0.010, 8, 0.008, 0.0168
LINK_MASS, CARRIER_MASS, HUNG_MASS, EVERY = 0.001, 0.002, 0.30, 4
SEAT_RADIUS = PITCH / (2 * np.sin(np.pi / TEETH))
BALL_IN_LINK = np.array([0.005, 0.013])
"""Center of a seated ball along t and n from the first pin of its link [m]."""
SEAT_HOLDS = 24.0
"""Lateral acceleration that the made-up seat holds at rest [m/s^2]."""

TEXT = """\
format = 1
title = "Synthetic lift, moved by kinematics"
[chain]
kind = "moulded_sturdy"
pitch = "10 mm"
link_mass = "1 g"
link_stiffness = "50 kN/m"
roller_diameter = "5 mm"
allowable_tension = "40 N"
links = {links}
[[sprocket]]
name = "head"
teeth = 8
center = ["0 mm", "{height} mm"]
[[sprocket]]
name = "tail"
teeth = 8
center = ["0 mm", "0 mm"]
mount = {{ kind = "hung", mass = "0.30 kg", free = "y", stops = ["-10 mm", "10 mm"] }}
[drive]
sprocket = "head"
kind = "speed"
chain_speed = "{speed} m/s"
ramp = "0.5 s"
[carriers]
every = 4
mass = "2 g"
pocket = {{ floor = "18 mm", lip = "5 mm", tilt = "0 deg", offset = "4 mm" }}
[balls]
diameter = "16 mm"
material = "steel"
feed = {{ kind = "set down", rate = "1 /s" }}
[run]
duration = "{duration} s"
settle = "2 s"
sample_rate = "{rate} Hz"
[limits]
clearance = {{ inward = "8 mm", outward = "15 mm" }}
ball_rate = "1 /s"
"""


@dataclass(frozen=True)
class Ride:
    """One ball's ride: when it was fed, seated and left, on which carrier, and its fate."""

    number: int
    carrier: int
    fed: int
    seated: int
    end: int
    fate: str
    slot: int


def synthetic_recording(
    links: int = 60,
    duration: float = 12.0,
    rate: float = 250.0,
    chain_speed: float = 0.15,
    spilled_ball: int | None = None,
    noise: float = 0.02,
    jitter: float = 0.0,
    seed: int = 1,
    recorder: Recorder | None = None,
) -> Recording:
    """Make a recording of a head-driven lift with a hung tail.

    Parameters
    ----------
    links : int
        Links of the loop: 8 and an even number more [dimensionless].
    duration : float
        Length of the run [s].
    rate : float
        Samples per second [1/s].
    chain_speed : float
        Mean chain speed after the ramp [m/s].
    spilled_ball : int, optional
        Number of a ball that falls from its pocket at six tenths of the height.
    noise : float
        Standard deviation of the tensions' noise [N].
    jitter : float
        Standard deviation of noise of the pins' velocities [m/s]; a thousandth of it [m] of their
        positions. Spoils the exact pitch; for tests of size and speed.
    seed : int
        Seed of the noise [dimensionless].
    recorder : Recorder, optional
        Where to record; in memory by default.

    Returns
    -------
    Recording
        The recording, complete, without findings.
    """
    recorder = recorder or MemoryRecorder()
    strand_links = (links - TEETH) // 2
    height = strand_links * PITCH
    time = np.arange(round(duration * rate) + 1) / rate
    channels, rides = _channels(time, strand_links, chain_speed, spilled_ball, noise, seed)
    rng = np.random.default_rng(seed)
    for name, scale in (("pins/position", 1e-3 * jitter), ("pins/velocity", jitter)):
        channels[name] = channels[name] + scale * rng.standard_normal(channels[name].shape)
    text = TEXT.format(
        links=links, height=height * 1e3, speed=chain_speed, duration=duration, rate=rate
    )
    strands = (
        StrandRow("head-tail", "head", "tail", False),
        StrandRow("tail-head", "tail", "head", True),
    )
    attributes = {"seed": seed, "sample_rate": rate}
    static = Static(("head", "tail"), strands, attributes)
    recorder.begin(parse_scenario(text, file="synthetic.toml"), _geometry(links, height), static)
    for start in range(0, len(time), BLOCK_SAMPLES):
        window = slice(start, start + BLOCK_SAMPLES)
        recorder.append(Block(time[window], {k: v[window] for k, v in channels.items()}))
    recorder.finish(
        _events(time, rides, height),
        [_row(ride, time, channels["balls/position"]) for ride in rides],
        [_extreme(time, channels["links/tension"])],
        [
            ModeRow(11.8, "take-up tail"),
            ModeRow(31.0, "strand tail-head 1"),
            ModeRow(420.0, "other"),
        ],
        Ending("reached the end", True),
        {"situations_run": ["start empty", "steady"], "situations_not_run": ["stop", "jam"]},
    )
    return recorder.recording()


def _travel(time: np.ndarray, speed: float) -> tuple[np.ndarray, np.ndarray]:
    """Travel in pitches and its rate [1/s]: a smooth ramp of 0.5 s, then steady."""
    s = np.clip(time / 0.5, 0, 1)
    ramped = 0.5 * (s**3 - s**4 / 2) + np.maximum(time - 0.5, 0)
    return ramped * speed / PITCH, (3 * s**2 - 2 * s**3) * speed / PITCH


def _pins(
    travel: np.ndarray, rate: np.ndarray, m: int
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Positions, velocities and places in the loop of all pins; m links in a strand."""
    half, n = TEETH // 2, TEETH + 2 * m
    shift = np.rint(travel)
    phase = (travel - shift)[:, None] * 2 * np.pi / TEETH
    omega = rate[:, None] * 2 * np.pi / TEETH
    place = (m + half + np.arange(n) + shift[:, None].astype(int)) % n
    seat = np.select(
        [place <= m, place <= m + half, place <= 2 * m + half],
        [0, place - m, half],
        place - 2 * m,
    )
    rise = np.select(
        [place <= m, place <= m + half, place <= 2 * m + half],
        [place, m, 2 * m + half - place],
        0,
    )
    angle = phase + 2 * np.pi * seat / TEETH
    x, y = SEAT_RADIUS * np.cos(angle), SEAT_RADIUS * np.sin(angle)
    position = np.stack([x, y + rise * PITCH], axis=-1)
    return position, np.stack([-y * omega, x * omega], axis=-1), place


def _channels(time, m, speed, spilled_ball, noise, seed):
    travel, rate = _travel(time, speed)
    position, velocity, place = _pins(travel, rate, m)
    n, height = TEETH + 2 * m, m * PITCH
    balls, rides = _balls(time, position, height, spilled_ball)
    loaded = balls.pop("carriers/loaded")
    tension = _tension(place, m, loaded, noise, seed)
    rows = np.arange(len(time))
    foot_right, foot_left = (np.argmax(place == q, axis=1) for q in (0, 2 * m + TEETH // 2 - 1))
    top_right, top_left = (np.argmax(place == q, axis=1) for q in (m - 1, m + TEETH // 2))
    right = tension[rows, foot_right], tension[rows, top_right]
    left = tension[rows, foot_left], tension[rows, top_left]
    lever = SEAT_RADIUS * np.cos((travel - np.rint(travel)) * 2 * np.pi / TEETH)
    angle, omega = travel * 2 * np.pi / TEETH, rate * 2 * np.pi / TEETH
    head_torque, tail_torque = lever * (left[1] - right[1]), lever * (right[0] - left[0])
    bounce = 2e-5 * np.sin(2 * np.pi * 11.8 * time)
    zero = np.zeros_like(time)
    pull = np.stack([-right[1] - left[1], right[0] + left[0]], axis=1)
    channels = {
        "pins/position": position,
        "pins/velocity": velocity,
        "links/tension": tension,
        "sprockets/angle": np.stack([angle, angle], 1),
        "sprockets/rate": np.stack([omega, omega], 1),
        "sprockets/torque": np.stack([head_torque, tail_torque], 1),
        "sprockets/center": np.stack(
            [np.stack([zero, zero], 1), np.stack([zero + height, bounce], 1)], 2
        ),
        "sprockets/force": np.stack([np.zeros_like(pull), pull], 2),
        "sprockets/skip": np.zeros((len(time), 2)),
        "sprockets/ride_height": np.full((len(time), 2), 2e-5),
        "sprockets/engaged": np.full((len(time), 2), TEETH // 2 + 1),
        "mounts/angle": np.zeros((len(time), 2)),
        "mounts/travel": np.stack([zero, bounce], 1),
        "mounts/weight": np.full((len(time), 2), np.nan),
        "drive/torque": -head_torque + 2e-3 * np.sign(omega),
        "drive/rate": omega,
        "drive/power": (-head_torque + 2e-3) * omega,
        "drive/current": np.full_like(time, np.nan),
        "drive/set_speed": rate * PITCH,
        "contacts/penetration": zero + 1e-5,
        "strands/excursion": np.stack([lever - SEAT_RADIUS] * 2, 1),
        "strands/sag": np.zeros((len(time), 2)),
        "strands/tension_start": np.stack([left[1], right[0]], 1),
        "strands/tension_end": np.stack([left[0], right[1]], 1),
        "carriers/loaded": np.zeros((len(time), n // EVERY)),
    }
    return channels | balls | _energy(time, channels, balls), rides


def _tension(place: np.ndarray, m: int, loaded: np.ndarray, noise: float, seed: int) -> np.ndarray:
    """Static tensions by free body: half the hung weight at the foot, and all that hangs below."""
    half, n = TEETH // 2, TEETH + 2 * m
    link_weight = (LINK_MASS + CARRIER_MASS / EVERY) * GRAVITY
    foot = (HUNG_MASS * GRAVITY + half * link_weight) / 2
    load = np.zeros(place.shape)
    load[:, : loaded.shape[1] * EVERY : EVERY] = loaded * BALL_MASS * GRAVITY
    along = np.argsort(place, axis=1)
    carried = np.cumsum(np.take_along_axis(load, along, 1), axis=1)
    q = np.arange(n)
    right, left = foot + q * link_weight + carried, foot + (2 * m + half - 1 - q) * link_weight
    top, bottom = (q - m + 0.5) / half, (q - 2 * m - half + 0.5) / half
    at_top = (1 - top) * right[:, [m - 1]] + top * left[m + half]
    at_foot = (1 - bottom) * left[2 * m + half - 1] + bottom * right[:, [0]]
    sorted_tension = np.select(
        [q < m, q < m + half, q < 2 * m + half], [right, at_top, left + 0 * right], at_foot
    )
    tension = np.empty(place.shape)
    np.put_along_axis(tension, along, sorted_tension, 1)
    return tension + noise * np.random.default_rng(seed).standard_normal(place.shape)


def _balls(time, position, height, spilled_ball):
    """Trajectories of the balls in their slots, which carriers are loaded, and the rides."""
    last = EVERY * (position.shape[1] // EVERY)
    first, second = position[:, :last:EVERY], np.roll(position, -1, axis=1)[:, :last:EVERY]
    along = (second - first) / np.linalg.norm(second - first, axis=2, keepdims=True)
    outward = np.stack([along[..., 1], -along[..., 0]], axis=-1)
    seats = first + BALL_IN_LINK[0] * along + BALL_IN_LINK[1] * outward
    rides = _rides(time, seats, height, spilled_ball)
    slots = 1 + max((ride.slot for ride in rides), default=0)
    place = np.full((len(time), slots, 2), np.nan)
    number = np.full((len(time), slots), -1)
    pocket, state = number.copy(), np.zeros((len(time), slots), dtype=int)
    axes = np.full((len(time), slots, 2, 2), np.nan)
    loaded = np.zeros(seats.shape[:2])
    for ride in rides:
        waiting, seated = slice(ride.fed, ride.seated), slice(ride.seated, ride.end)
        place[waiting, ride.slot] = seats[ride.seated, ride.carrier]
        place[seated, ride.slot] = seats[seated, ride.carrier]
        number[ride.fed : ride.end, ride.slot] = ride.number
        pocket[seated, ride.slot] = ride.carrier
        state[waiting, ride.slot], state[seated, ride.slot] = 1, 3
        axes[seated, ride.slot, 0], axes[seated, ride.slot, 1] = (
            outward[seated, ride.carrier],
            along[seated, ride.carrier],
        )
        loaded[seated, ride.carrier] = 1
    channels = _ball_channels(time, place, axes, number, pocket, state)
    for ride in rides:
        if ride.fate == "spilled":
            before = slice(ride.end - 10, ride.end)
            channels["balls/seat_reserve"][before, ride.slot] = np.linspace(SEAT_HOLDS, -1, 10)
    return channels | {"carriers/loaded": loaded}, rides


def _ball_channels(time, place, axes, number, pocket, state):
    velocity = np.gradient(place, time, axis=0)
    felt = np.gradient(velocity, time, axis=0)
    inside = state == 3
    for shift in (-2, -1, 1, 2):  # neighbors that the two differences above reach
        inside &= np.roll(state, shift, axis=0) == 3
    acceleration = np.where(
        inside[..., None],
        np.einsum("tsca,tsa->tsc", axes, felt),
        np.where(axes[..., 0] > -2, 0, np.nan),
    )
    reserve = SEAT_HOLDS - np.abs(acceleration[..., 0])
    return {
        "balls/position": place,
        "balls/velocity": velocity,
        "balls/acceleration": acceleration,
        "balls/angle": np.where(number < 0, np.nan, 0.1 * number),
        "balls/seat_reserve": np.where(state == 3, reserve, np.nan),
        "balls/raw_peak": np.where(state == 3, 8 * np.abs(acceleration[..., 0]), np.nan),
        "balls/play": np.where(state == 3, 2e-3, np.nan),
        "balls/number": number,
        "balls/pocket": pocket,
        "balls/state": state,
    }


def _rides(time, seats, height, spilled_ball):
    """One ball a second, each into the next empty carrier that passes the foot."""
    up = seats[:, :, 0] > 0
    foot, top = 0.03, height + 0.005
    rides: list[Ride] = []
    for number, moment in enumerate(np.arange(0.6, time[-1], 1.0)):
        fed = int(np.searchsorted(time, moment))
        crossing = (seats[:-1, :, 1] < foot) & (seats[1:, :, 1] >= foot) & up[1:]
        later = np.argwhere(crossing[fed:])
        if not len(later):
            break
        seated, carrier = fed + 1 + int(later[0, 0]), int(later[0, 1])
        spills = number == spilled_ball
        goal = 0.6 * height if spills else top
        passed = np.flatnonzero(seats[seated:, carrier, 1] >= goal)
        end = seated + int(passed[0]) if len(passed) else len(time)
        fate = "aboard" if end == len(time) else "spilled" if spills else "delivered"
        taken = {ride.slot for ride in rides if ride.end >= fed}
        slot = next(s for s in range(len(time)) if s not in taken)
        rides.append(Ride(number, carrier, fed, seated, end, fate, slot))
    return rides


def _energy(time, channels, balls):
    v, y = channels["pins/velocity"], channels["pins/position"][..., 1]
    link = LINK_MASS + CARRIER_MASS / EVERY
    aboard = balls["balls/state"] > 0
    ball_y = np.where(aboard, np.nan_to_num(balls["balls/position"][..., 1]), 0)
    speed2 = np.nansum(balls["balls/velocity"] ** 2, axis=2)
    kinetic = 0.5 * link * (v**2).sum((1, 2)) + 0.5 * BALL_MASS * (speed2 * aboard).sum(1)
    potential = GRAVITY * (link * y.sum(1) + BALL_MASS * ball_y.sum(1))
    change = np.diff(aboard.astype(int), axis=0)
    energy = BALL_MASS * GRAVITY * ball_y
    came, left = (change > 0) * energy[1:], (change < 0) * energy[:-1]
    balls_in, balls_out = (np.r_[0, np.cumsum(a.sum(1))] for a in (came, left))
    loss = np.r_[0, np.cumsum(0.002 * np.abs(channels["drive/rate"][1:]) * np.diff(time))]
    stored = np.full_like(time, 0.01)
    residual = 1e-6 * np.sin(time)
    total = kinetic + potential
    work = total - total[0] + loss + balls_out - balls_in + residual
    return {
        "energy/work_drive": work,
        "energy/work_knock": np.zeros_like(time),
        "energy/balls_in": balls_in,
        "energy/balls_out": balls_out,
        "energy/kinetic": kinetic,
        "energy/potential": potential,
        "energy/stored": stored,
        "energy/loss_joints": loss,
        "energy/residual": residual,
    }


def _geometry(links: int, height: float) -> dict[str, np.ndarray]:
    angle = np.arange(16 * TEETH + 1) * 2 * np.pi / (16 * TEETH)
    radius = SEAT_RADIUS - 0.0025 + 0.003 * (1 - np.cos(TEETH * angle))
    wheel = np.stack([radius * np.cos(angle), radius * np.sin(angle)], axis=1)
    pocket = np.array([[13.0, 4.0], [-3.0, 4.0], [-3.0, 22.0], [2.0, 22.0]]) * 1e-3
    carriers = np.arange(0, links - EVERY + 1, EVERY)
    return {
        "geometry/tooth_outline": np.stack([wheel, wheel]),
        "geometry/seat_radius": np.full(2, SEAT_RADIUS),
        "geometry/teeth": np.full(2, TEETH),
        "geometry/pocket_outline": np.repeat(pocket[None], len(carriers), axis=0),
        "geometry/carrier_link": carriers,
        "geometry/walls/guard": np.array([[0.06, 0.0], [0.06, 0.8 * height]]),
        "geometry/chute": np.array([[0.045, height], [0.12, height - 0.02]]),
        "geometry/trough": np.array([[0.15, 0.03], [0.045, 0.01]]),
        "geometry/ball_radius": np.array(BALL_RADIUS),
        "geometry/roller_radius": np.array(0.0025),
        "geometry/pitch": np.full(links, PITCH),
    }


def _events(time: np.ndarray, rides: list[Ride], height: float) -> list[Event]:
    events = [Event(0.0, "start", "head", np.nan, "", "drive starts, ramp of 0.5 s")]
    for ride in rides:
        if ride.fate != "aboard":
            text = f"ball {ride.number} {ride.fate}"
            y = height if ride.fate == "delivered" else 0.6 * height
            events.append(Event(time[ride.end], ride.fate, f"ball {ride.number}", y, "m", text))
    return sorted(events, key=lambda event: event.time)


def _row(ride: Ride, time: np.ndarray, position: np.ndarray) -> BallRow:
    ended = ride.fate != "aboard"
    end_x, end_y = position[ride.end - 1, ride.slot] if ended else (np.nan, np.nan)
    return BallRow(
        ride.number,
        float(time[ride.fed]),
        float(time[ride.seated]),
        float(time[ride.end]) if ended else np.nan,
        float(end_x),
        float(end_y),
        ride.carrier,
        ride.fate,
        "left over the lip" if ride.fate == "spilled" else "",
    )


def _extreme(time: np.ndarray, tension: np.ndarray) -> Extreme:
    sample, link = np.unravel_index(np.argmax(tension), tension.shape)
    return Extreme("link_tension", float(tension.max()), "N", float(time[sample]), f"link {link}")
