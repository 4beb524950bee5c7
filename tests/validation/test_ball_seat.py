"""A ball behind a lip and in a V: the acceleration, and the pulse, that take it out of its seat."""

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from chainsim.model.packing_balls import WALL_HALF
from tests.validation.rig import G, Rig, column, rig_text

RADIUS = 10e-3
REACH = RADIUS + WALL_HALF
SHARES = (0.98, 0.99, 0.995, 1.005, 1.01, 1.02)
LIPS = (1e-3, 2e-3, 4e-3, 6e-3)
WHEEL_OVER_STEP = (
    "moment about the step's corner: Halliday and Resnick, ch. 12, wheel over a step (vaia.com)"
)


def wall(name, points, friction, restitution=0.1):
    """One wall as TOML; its solid side lies on the left of the way through the points."""
    line = ", ".join(f'["{x * 1e3:.6f} mm", "{y * 1e3:.6f} mm"]' for x, y in points)
    return (
        f'[[wall]]\nname = "{name}"\npoints = [{line}]\n'
        f"friction = {friction}\nrestitution = {restitution}\n"
    )


def turned(points, angle, at):
    """Points turned about the origin [rad], then shifted."""
    c, s = math.cos(angle), math.sin(angle)
    return [(at[0] + c * x - s * y, at[1] + s * x + c * y) for x, y in points]


def lip_limit(height):
    """Sideways over normal gravity at which a ball turns over a lip with a round edge."""
    up = REACH - height
    return math.sqrt(REACH**2 - up**2) / up


def lip(height):
    """Floor and lip, and where the ball stands against it."""
    rest = -WALL_HALF + math.sqrt(REACH**2 - (REACH - height) ** 2)
    return [(0.06, 0.0), (0.0, 0.0), (0.0, height)], (rest, RADIUS)


def hardened(text, factor=16.0):
    """A rig whose contacts are harder than usual: the textbook's are rigid.

    At the usual stiffness a ball of 30 g sinks in by 12 µm and rocks on that for some
    milliseconds, which moves the limit of a 1 mm lip by 0.7 % and a pulse's length by a tenth.
    """
    rig = Rig(text, 1.0 / math.sqrt(factor))
    for name in ("stiffness", "grip_stiffness"):
        rig.parts.features[name] *= factor
    rig.parts.features["grip_damping"] *= math.sqrt(factor)
    return rig


def lean_into(rig, seconds=0.4, back=0.12):
    """Let balls come to rest upright of their tilt, then lean them into it slowly.

    Near its limit a seat hardly damps: the law's damping falls with the load on the floor.
    """
    count = round(seconds / 2e-3)
    for k in range(2 * count):
        short = back * max(0.0, 1.0 - k / count) if k >= count else back
        rig.gravity(G * math.sin(short), -G * math.cos(short))
        rig.march(2e-3)


def threshold(shares, left):
    """Middle of the gap between what stays and what leaves; the two must not mix."""
    stay = [s for s, gone in zip(shares, left, strict=True) if not gone]
    gone = [s for s, gone in zip(shares, left, strict=True) if gone]
    assert stay, "every ball left"
    assert gone, "no ball left"
    assert max(stay) < min(gone), f"stays at {stay}, leaves at {gone}"
    return 0.5 * (max(stay) + min(gone))


def test_lip_and_v(claim):
    """Tilted gravity on a fixed pocket; every tilt is a pocket of its own in the same run."""
    places, walls, starts = [], "", []
    cases = [("lip", height, lip_limit(height)) for height in LIPS]
    cases += [("v", angle, math.tan(angle)) for angle in (math.radians(25), math.radians(35))]
    for row, (kind, size, limit) in enumerate(cases):
        for col, share in enumerate(SHARES):
            tilt = math.atan(share * limit)
            at = (0.3 + 0.2 * col, 0.3 * row - 0.9)
            if kind == "lip":
                points, start = lip(size)
            else:
                arm = (0.05 * math.cos(size), 0.05 * math.sin(size))
                points = [arm, (0.0, 0.0), (-arm[0], arm[1])]
                start = (0.0, RADIUS / math.cos(size))
            walls += wall(f"w{row}_{col}", turned(points, tilt, at), 0.3)
            starts.append(turned([start], tilt, at)[0])
            places.append((row, share))
    text = rig_text(more=walls).replace("queue = 24", "queue = 40")
    rig = hardened(text)
    for x, y in starts:
        rig.ball(x, y)
    lean_into(rig)
    rig.gravity(0.0, -G)
    samples = rig.march(0.6)
    x, y = column(samples, "x")[-1], column(samples, "y")[-1]
    for row, (kind, size, limit) in enumerate(cases):
        mine = [k for k, place in enumerate(places) if place[0] == row]
        left = [math.hypot(x[k] - starts[k][0], y[k] - starts[k][1]) > 2e-3 for k in mine]
        what = f"{size * 1e3:g} mm lip" if kind == "lip" else f"V of {math.degrees(size):g}°"
        claim(
            f"sideways acceleration over g that takes a 20 mm ball out of a {what}",
            f"{WHEEL_OVER_STEP}, edge rounded" if kind == "lip" else "tan of the wall's angle",
            limit,
            limit * threshold(SHARES, left),
            0.02,
            "",
            "contacts 16 times as stiff as usual; steps of the search are 0.5 to 1 %",
        )


def pulse_length(height, peak, inertia):
    """Length of a half-sine pulse that just takes the ball over the lip, by its own equation."""
    rest = math.acos((REACH - height) / REACH)

    def tops(length):
        def rhs(t, state):
            push = peak * math.sin(math.pi * t / length) if t < length else 0.0
            lean = G * math.sin(state[0]) - push * math.cos(state[0])
            if state[0] >= rest and state[1] >= 0.0 and lean > 0.0:
                return [0.0, 0.0]
            return [state[1], lean / (inertia * REACH)]

        def top(t, state):
            return state[0]

        def back(t, state):
            return state[0] - rest - 1e-6

        top.terminal = back.terminal = True
        found = solve_ivp(
            rhs, (0.0, length + 0.5), [rest, 0.0], events=[top, back], max_step=length / 200,
            rtol=1e-9, atol=1e-10,
        )  # fmt: skip
        return 1.0 if len(found.t_events[0]) else -1.0

    return brentq(tops, 5e-3, 0.5, xtol=1e-5)


@pytest.mark.parametrize(("friction", "inertia"), [(0.0, 1.0), (1.0, 1.4)])
def test_pulse(claim, friction, inertia):
    """A knock of the frame: a ball leaves when the pulse is long enough for its inertia."""
    height = 3e-3
    peak = 2.0 * G * lip_limit(height)
    length = pulse_length(height, peak, inertia)
    points, start = lip(height)
    rig = hardened(rig_text(more=wall("lip", turned(points, 0.0, (0.3, 0.0)), friction)))
    slot = rig.ball(0.3 + start[0], start[1])
    saved = None
    left = []
    shares = (0.97, 0.985, 1.015, 1.03)
    for share in shares:
        for array in (rig.state.bvx, rig.state.bvy, rig.state.bw, rig.state.grip):
            array[:] = 0.0
        rig.state.bx[slot], rig.state.by[slot] = saved or (0.3 + start[0], start[1])
        rig.packed.work.search_in[0] = 0
        rig.gravity(-0.5, -G)
        rig.march(0.15)
        rig.gravity(0.0, -G)
        rig.march(0.01)
        saved = float(rig.state.bx[slot]), float(rig.state.by[slot])
        rig.world["knock_x"] = peak
        rig.world["knock_start"], rig.world["knock_time"] = rig.time, share * length
        rig.march(length + 0.25)
        left.append(rig.state.bx[slot] < 0.3 - 2e-3)
    grip = "rough" if friction else "smooth"
    claim(
        f"length of a pulse that takes a ball over a {grip} 3 mm lip, twice its limit",
        "equation of motion about the lip's edge, DOP853-class solver (derived here)",
        length * 1e3,
        length * 1e3 * threshold(shares, left),
        0.03,
        "ms",
        "contacts 16 times as stiff as usual; steps of the search are 1.5 %",
    )


def test_rest_in_trough():
    """A queue leans on an end stop for ten seconds; nothing creeps."""
    slope = math.radians(6)
    floor = turned([(0.25, 0.0), (0.0, 0.0), (0.0, 0.03)], slope, (0.3, 0.0))
    rig = Rig(rig_text(more=wall("trough", floor, 0.3)))
    for k in range(5):
        x, y = turned([((1.0 + 2.001 * k) * RADIUS, RADIUS)], slope, (0.3, 0.0))[0]
        rig.ball(x, y)
    rig.gravity(0.0, -G)
    rig.march(5.0)
    before = rig.state.bx[:5].copy(), rig.state.by[:5].copy(), rig.state.spin[:5].copy()
    samples = rig.march(10.0)
    moved = np.hypot(rig.state.bx[:5] - before[0], rig.state.by[:5] - before[1])
    assert moved.max() < 1e-7
    assert np.abs(rig.state.spin[:5] - before[2]).max() < 1e-5
    assert np.abs(column(samples, "vx")[-1, :5]).max() < 1e-6
