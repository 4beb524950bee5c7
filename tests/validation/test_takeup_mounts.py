"""Take-ups alone: a slide whose friction holds, stops, a spring, a counterweight, an arm."""

import math
from types import SimpleNamespace

import numpy as np
from numba import njit

from chainsim.integration.timeline import Action
from chainsim.kernels.contact import hold
from chainsim.kernels.layout import HOLD_SHIFT_0, HOLDS
from chainsim.kernels.sample import WHEEL_COLUMNS
from tests.validation.rig import PER_WHEEL, G, Rig, rig_text
from tests.validation.test_drive_motor import frequency

TURN_AT, DROP_AT = 2, 4
SLIDE = 'kind = "sliding"\nmass = "0.5 kg"\naxis = [0, 1]\n'


def bare(mount):
    """A wheel on its mount under gravity; the chain is laid aside and weighs nothing."""
    lines = ", ".join(line for line in mount.strip().splitlines())
    rig = Rig(rig_text(mount=lines)).afloat()
    rig.gravity(0.0, -G)
    rig.parts.chain.weight_re[:] = rig.parts.chain.weight_im[:] = 0.0
    base = rig.wheel("tail")[1]
    rig.state.q[base : base + 3] = 0.0
    rig.state.q[base + DROP_AT] = 0.0
    return rig, base


def travel(rig, samples, name="travel"):
    """A coordinate of the tail's mount."""
    return samples.wheel[:, rig.wheel("tail")[0], WHEEL_COLUMNS.index(name)]


def test_slide_stays_for_a_minute(claim):
    """A slide loaded at half its friction limit: it gives by half its spring, and stays there."""
    rig, base = bare(SLIDE + f'friction = "{2.0 * 0.5 * G:.6f} N"')
    rig.state.q[base] = -10e-6
    rig.state.held[HOLDS * rig.wheel("tail")[0] + HOLD_SHIFT_0] = -10e-6
    moved = travel(rig, rig.march(60.0))
    claim(
        "creep within 60 s of a slide loaded at half its friction limit",
        "Coulomb: a load below the limit stays put",
        0.0,
        np.ptp(moved) * 1e6,
        0.01,
        "µm",
        "load to six digits; it starts at its elastic give of 10 µm",
        absolute=True,
    )


@njit
def _an_hour(mass, load, limit, stiffness, shake, dt, steps):
    """March a mass on a friction element under a load that shakes; returns place and extreme."""
    x = v = deflection = most = 0.0
    for k in range(steps):
        push = load + shake * math.sin(50.0 * k * dt)
        force, deflection, _, _ = hold(deflection, v, -limit, limit, stiffness, 0.0, dt)
        v += dt * (push - force) / mass
        x += dt * v
        most = max(most, abs(x))
    return x, most


def test_slide_stays_for_an_hour(claim):
    """The same by its equations for an hour, the load shaking by a tenth all the while."""
    load = 0.5 * G
    stiffness = 2.0 * load / 20e-6
    _, most = _an_hour(0.5, load, 2.0 * load, stiffness, 0.1 * load, 1e-4, 36_000_000)
    claim(
        "farthest that a slide at half its limit, shaken by a tenth, gets within an hour",
        "Coulomb: a load below the limit stays put",
        22.0,
        most * 1e6,
        0.0,
        "µm",
        "twice its elastic give of 11 µm: it was let go from rest without damping",
        sense="at most",
    )


def test_slide_slips_beyond_its_limit(claim):
    rig, _ = bare(SLIDE + f'friction = "{0.5 * 0.5 * G:.6f} N"')
    samples = rig.march(0.3)
    fit = np.polyfit(samples.time, travel(rig, samples), 2)
    claim(
        "acceleration of a slide loaded at twice its friction limit",
        "free body: g - F/m",
        -0.5 * G,
        2.0 * fit[0],
        0.002,
        "m/s²",
        "the first 20 µm are elastic",
    )


def test_stop(claim):
    rig, _ = bare(SLIDE + 'stops = ["-3 mm", "3 mm"]')
    samples = rig.march(2.0)
    stiffness = float(rig.mount("tail")["stop_stiffness"])
    claim(
        "depth by which half a kilogram rests in a stop",
        "m g/k (free body)",
        0.5 * G / stiffness * 1e3,
        -(travel(rig, samples)[-1] + 3e-3) * 1e3,
        0.005,
        "mm",
        "settled",
    )
    push = travel(rig, samples, "stop")
    assert push[0] == 0.0
    assert push[-1] > 0.9 * 0.5 * G


def test_spring(claim):
    mount = SLIDE.replace("sliding", "spring") + 'rate = "200 N/m"\nset_force = "3 N"'
    rig, _ = bare(mount)
    samples = rig.march(4.0)
    moved = travel(rig, samples)
    claim(
        "middle of the swing of a take-up on a spring",
        "(F - m g)/k (free body)",
        (3.0 - 0.5 * G) / 200.0 * 1e3,
        0.5 * (moved.max() + moved.min()) * 1e3,
        0.002,
        "mm",
        "undamped; samples of 1 ms",
    )
    claim(
        "frequency of a take-up on a spring",
        "sqrt(k/m)/2π, any text",
        math.sqrt(200.0 / 0.5) / (2.0 * math.pi),
        frequency(samples.time, moved),
        0.002,
        "Hz",
        "a dozen swings",
    )


COUNTERWEIGHT = """kind = "counterweight"
mass = "0.15 kg"
axis = [0, 1]
weight = "0.9 kg"
cord_stiffness = "15 kN/m"
cord_damping = "4 N s/m"
pulley_drag = "0.5 N"
"""


def test_counterweight(claim):
    """Atwood's machine with a pulley that drags; and a cord that only pulls."""
    rig, base = bare(COUNTERWEIGHT)
    samples = rig.march(0.3)
    fit = np.polyfit(samples.time, travel(rig, samples), 2)
    claim(
        "acceleration of a mount that a counterweight lifts over a dragging pulley",
        "Atwood's machine: ((M - m) g - D)/(M + m)",
        (0.75 * G - 0.5) / 1.05,
        2.0 * fit[0],
        0.003,
        "m/s²",
        "the cord stretches by 0.1 mm",
    )
    rig, base = bare(COUNTERWEIGHT)
    rig.state.w[base] = 2.0
    samples = rig.march(0.1)
    claim(
        "way up of a mount thrown upward, its cord slack",
        "free fall: v t - g t²/2",
        (2.0 * 0.1 - 0.5 * G * 0.01) * 1e3,
        travel(rig, samples)[-1] * 1e3,
        0.002,
        "mm",
        "a slack cord does nothing",
    )


ARM = """kind = "arm"
mass = "0.3 kg"
inertia = "1 kg cm2"
pivot = ["-90 mm", "0 mm"]
"""


def test_arm(claim):
    """An arm that nothing holds is a pendulum: small swings, and a quarter turn."""
    inertia = 1e-4 + 0.3 * 0.09**2
    small = 2.0 * math.pi * math.sqrt(inertia / (0.3 * G * 0.09))
    for start, factor, what in ((0.02, 1.0, "small"), (0.5 * math.pi, 1.1803405990, "90°")):
        rig, base = bare(ARM)
        rig.state.q[base + TURN_AT] = -0.5 * math.pi + start
        samples = rig.march(6.0)
        claim(
            f"period of an arm that swings freely, {what}",
            "pendulum, complete elliptic integral (from memory)",
            small * factor,
            1.0 / frequency(samples.time, travel(rig, samples, "turn")),
            0.002,
            "s",
            "first-order step of 67 µs, symplectic",
        )


def test_block_and_free_again():
    """A blocked take-up stays where it stands until it is freed."""
    rig, base = bare(SLIDE)
    rig.march(0.05)
    conductor = rig.conductor()
    rig.state.w[base] = 0.0
    here = float(rig.state.q[base])
    conductor.carry_out(
        Action(rig.time, "takeup_blocked", SimpleNamespace(sprocket="tail")), rig.time
    )
    moved = travel(rig, rig.march(0.5))
    stiffness = float(rig.mount("tail")["block_stiffness"])
    assert np.abs(moved - here).max() < 2.1 * 0.5 * G / stiffness
    conductor.carry_out(Action(rig.time, "unblock", None), rig.time)
    assert travel(rig, rig.march(0.2))[-1] < here - 0.1


def test_screwed_mount_stands_where_it_is_set():
    rig = Rig(rig_text(mount='kind = "screwed", shift = "0.4 mm", axis = [0, 1]'))
    s = rig.wheel("tail")[0]
    samples = rig.march(0.01)
    assert samples.wheel[-1, s, WHEEL_COLUMNS.index("center_y")] == 0.4e-3
    assert PER_WHEEL * s == rig.wheel("tail")[1]
