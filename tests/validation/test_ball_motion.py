"""A ball that rolls, slides and bounces; what collides keeps its momentum."""

import math

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from chainsim.closed_forms import depth_damping
from chainsim.integration.loading import pin_velocities, times_masses
from tests.validation.rig import G, Rig, column, residual, rig_text
from tests.validation.test_ball_seat import RADIUS, turned, wall

ALPHA = math.radians(25.0)
ROLLS = 2.0 / 7.0 * math.tan(ALPHA)


def test_incline(claim):
    """Several inclines at once, each with a friction of its own."""
    frictions = [0.3, 0.08, *(ROLLS * share for share in (0.97, 0.99, 1.01, 1.03))]
    walls, starts = "", []
    for k, friction in enumerate(frictions):
        at = (0.4, 0.3 * k - 0.6)
        # down to the left: solid below, the way runs to the left
        walls += wall(f"w{k}", turned([(1.0, 0.0), (-0.4, 0.0)], ALPHA, at), friction)
        starts.append(turned([(0.9, RADIUS - 12e-6)], ALPHA, at)[0])
    rig = Rig(rig_text(more=walls))
    for x, y in starts:
        rig.ball(x, y)
    rig.gravity(0.0, -G)
    samples = rig.march(0.5)
    t = samples.time
    speed = np.hypot(column(samples, "vx"), column(samples, "vy"))
    angle = column(samples, "angle")
    late = t > 0.1
    rise = [np.polyfit(t[late], speed[late, k], 1)[0] for k in range(len(frictions))]
    source = "UY1 rolling motion, miniphysics.com: 5/7 g sin θ, 2/7 M g sin θ"
    why = "first-order step of 67 µs, soft contact"
    claim(
        "acceleration of a ball that rolls down 25°",
        source,
        2.96033527,
        rise[0],
        0.005,
        "m/s²",
        why,
    )
    claim(
        "acceleration of a ball that slides down 25°, friction 0.08",
        "g (sin θ - μ cos θ), any dynamics text (from memory)",
        3.43344192, rise[1], 0.005, "m/s²", why,
    )  # fmt: skip
    claim(
        "spin-up of that ball",
        "μ g cos θ / (2/5 r), any dynamics text (from memory)",
        177.756865,
        2.0 * np.polyfit(t[late], angle[late, 1], 2)[0],
        0.005,
        "rad/s²",
        why,
    )
    slip = speed[-1] - RADIUS * np.gradient(angle, t, axis=0)[-1]
    slides = [abs(slip[k]) > 5e-3 for k in range(2, 6)]
    assert slides == [True, True, False, False]
    claim(
        "friction at which a ball on 25° stops sliding",
        source,
        0.133230759,
        0.5 * (frictions[3] + frictions[4]),
        0.02,
        "",
        "the search steps by 2 %; below it slides, above it rolls",
    )


def test_sliding_start(claim):
    """A ball thrown along the flat slides until it rolls at 5/7 of its speed."""
    rig = Rig(rig_text(more=wall("flat", [(1.5, 0.0), (0.2, 0.0)], 0.15)))
    rig.ball(1.3, RADIUS - 12e-6, vx=-0.8)
    rig.gravity(0.0, -G)
    samples = rig.march(0.4)
    speed = -column(samples, "vx")[:, 0]
    claim(
        "speed at which a ball thrown at 0.8 m/s along the flat rolls on",
        "5/7 v, any dynamics text (from memory)",
        0.571428571, speed[-1], 0.002, "m/s", "angular momentum about the track is kept",
    )  # fmt: skip
    share = (0.8 - speed) / (0.8 - speed[-1])
    half = float(np.interp(0.5, share, samples.time))
    claim(
        "time until it rolls, friction 0.15",
        "2 v / (7 μ g), any dynamics text (from memory)",
        0.155385328, 2.0 * half, 0.01, "s", "twice the time of half the loss; samples of 1 ms",
    )  # fmt: skip


def bounce(rig, slot, speed):
    """Speed after a bounce on the wall at 0.3 m, and how long the contact lasts."""
    start, state = rig.time, rig.state
    gap = 2.0 * speed * rig.interval
    state.bx[slot], state.by[slot] = 0.3 - RADIUS - gap, 0.0
    state.bvx[slot], state.bvy[slot], state.bw[slot] = speed, 0.0, 0.0
    rig.packed.work.search_in[0] = 0
    rig.march(0.06)
    back = -float(state.bvx[slot])
    left = (0.3 - RADIUS - float(state.bx[slot])) / back
    return back, rig.time - start - gap / speed - left


def test_restitution(claim):
    """Exact relation of the law, at speeds around the stated one, and the time in contact."""
    damping = depth_damping(0.5, 0.3)
    found = {}
    for scale in (1.0, 0.125):
        rig = Rig(rig_text(more=wall("stop", [(0.3, 0.1), (0.3, -0.1)], 0.0, 0.5)), scale)
        rig.afloat()
        slot = rig.ball(0.2, 0.0)
        for speed in (0.05, 0.3, 1.0):
            found[scale, speed] = bounce(rig, slot, speed)
    stiffness = float(rig.parts.law.stiffness)
    for (scale, speed), (back, lasted) in found.items():
        step = "usual step" if scale == 1.0 else "an eighth of the step"
        d = damping * speed
        exact = brentq(
            lambda e, d=d: d * (1.0 + e) - math.log((1.0 + d) / (1.0 - d * e)),
            1e-6,
            min(1.0, 1.0 / d) - 1e-12,
        )
        why = (
            "first order: about 50 steps in a contact, a strong damper at first touch"
            if scale == 1.0
            else "first order"
        )
        claim(
            f"restitution of a ball at {speed:g} m/s, 0.5 at 0.3 m/s, {step}",
            "K. H. Hunt and F. R. E. Crossley, J. Appl. Mech. 42 (1975) 440; exact relation",
            exact, back / speed, 0.08 if scale == 1.0 else 0.01, "", why,
        )  # fmt: skip
        claim(
            f"time in contact of a ball at {speed:g} m/s, {step}",
            "the same law, DOP853 at 1e-10",
            contact_time(stiffness, 0.03, damping, speed) * 1e3,
            lasted * 1e3, 0.08 if scale == 1.0 else 0.01, "ms", why,
        )  # fmt: skip


def contact_time(stiffness, mass, damping, speed):
    """Time from touch to release by the law itself."""

    def rhs(t, s):
        return [s[1], -stiffness / mass * s[0] * (1.0 + damping * s[1])]

    def out(t, s):
        return s[0]

    out.terminal, out.direction = True, -1
    found = solve_ivp(
        rhs, (0.0, 1.0), [1e-15, speed], method="DOP853", events=out, rtol=1e-10, atol=1e-14,
        max_step=1e-4,
    )  # fmt: skip
    return float(found.t_events[0][0])


def momentum(rig, masses):
    """Linear momentum, angular momentum about the origin, of pins and balls."""
    state, n = rig.state, rig.n
    pin = times_masses(masses, pin_velocities(state, n))
    place = state.x[:n] + 1j * state.y[:n]
    count = int(rig.packed.work.touches.used[0])
    ball = 0.03 * (state.bvx[:count] + 1j * state.bvy[:count])
    at = state.bx[:count] + 1j * state.by[:count]
    spin = float(rig.parts.law.inertia * state.bw[:count].sum())
    turning = np.sum(np.imag(np.conj(place) * pin)) + np.sum(np.imag(np.conj(at) * ball)) + spin
    total = complex(pin.sum() + ball.sum())
    return np.array([total.real, total.imag, turning])


def test_momentum_of_collisions():
    """Two balls hit each other and a chain with carriers, far from everything else."""
    rig = Rig(rig_text(), 0.125).afloat()
    masses = rig.masses()
    rig.ball(-1.0, 0.012, vx=-1.0, spin=40.0)
    rig.ball(-1.3, 0.0, vx=0.6, vy=0.02)
    rig.ball(-2.02, 0.3, vy=-1.5, spin=-30.0)
    before = momentum(rig, masses)
    samples = rig.march(0.6)
    after = momentum(rig, masses)
    speeds = np.hypot(rig.state.bvx[:3], rig.state.bvy[:3])
    assert np.abs(speeds - [1.0, 0.6003, 1.5]).min() > 1e-2, "every ball must have hit something"
    assert np.hypot(rig.state.vx[: rig.n], rig.state.vy[: rig.n]).max() > 0.05
    np.testing.assert_allclose(after, before, rtol=0.0, atol=1e-12)
    left, flows = residual(samples)
    assert abs(left[-1]) < 1e-2 * flows
