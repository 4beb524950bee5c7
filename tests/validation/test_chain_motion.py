"""Chains in free motion: pendulums, a falling folded chain, a spinning ring, what is conserved."""

import numpy as np
import pytest
from scipy.special import beta, ellipk

from chainsim.model.strand import Rider, bench_strand, strand_step
from tests.validation.bench import (
    AXIAL,
    GRAVITY,
    LINK_MASS,
    MASS_PER_LENGTH,
    PITCH,
    advance,
    fitted_rate,
    follow,
)


def pendulum(angles, gravity=9.81, stiffness=1e7):
    """Points of 1 kg on stiff arms of 1 m, hung from the origin, at angles from the vertical."""
    arms = np.column_stack([np.sin(angles), -np.cos(angles)])
    pins = np.vstack([[0.0, 0.0], np.cumsum(arms, axis=0)])
    return bench_strand(
        pins, pitch=1.0, link_mass=1.0, link_stiffness=stiffness, fixed=(0,),
        pin_mass=np.ones(len(pins)), gravity=(0.0, -gravity),
    )  # fmt: skip


def angles_of(packed):
    n = packed.parts.chain.n
    return np.arctan2(np.diff(packed.state.x[:n]), -np.diff(packed.state.y[:n]))


@pytest.mark.parametrize(("degrees", "expected"), [(60, 1.0731820071), (150, 1.7622037295)])
def test_period_of_a_pendulum(claim, degrees, expected):
    start = np.radians(degrees)
    assert 2 / np.pi * ellipk(np.sin(start / 2) ** 2) == pytest.approx(expected)
    packed = pendulum([start], 9.81, 1e6)
    period = expected * 2 * np.pi / np.sqrt(9.81)
    t, x = follow(packed, 3.2 * period, 1600, lambda p: angles_of(p)[0], dt=2e-5)
    down = np.flatnonzero((x[:-1] > 0) & (x[1:] <= 0))
    cross = t[down] + x[down] / (x[down] - x[down + 1]) * (t[1] - t[0])
    claim(
        f"period of a pendulum let go at {degrees} deg, over the small one",
        "complete elliptic integral, from memory", expected,
        np.diff(cross).mean() / (2 * np.pi / np.sqrt(9.81)), 1e-4, "",
        "arm stretches by up to 3e-5; crossings between samples",
    )  # fmt: skip


#: angles from the vertical [rad] by scipy's DOP853, relative tolerance 1e-13
DOUBLE = [
    ((0.1, 0.1), 1.0, (-0.049827013, -0.106943559), 1e-4),
    ((0.1, 0.1), 2.0, (0.014703312, -0.001684906), 1e-4),
    ((np.pi / 2, np.pi / 2), 1.0, (-0.625087700, -1.034585086), 1e-3),
    ((np.pi / 2, np.pi / 2), 2.0, (-0.482971534, -1.324048712), 1e-3),
]


@pytest.mark.parametrize(("start", "seconds", "expected", "tolerance"), DOUBLE)
def test_double_pendulum(claim, start, seconds, expected, tolerance):
    packed = pendulum(np.array(start))
    advance(packed, seconds, 5e-6)
    worst = np.abs(angles_of(packed) - expected).max()
    claim(
        f"double pendulum from {np.degrees(start[0]):.0f} deg after {seconds:g} s, worst angle",
        "Lagrange's equations of two points, solved by DOP853", 0.0, worst, tolerance, "rad",
        "first-order step of 5 us; arms stretch by 1e-6", absolute=True,
    )  # fmt: skip


def test_double_pendulum_swings_at_the_printed_rates(claim):
    for k, (ratio, expected) in enumerate(((np.sqrt(2), 2.397199398), (-np.sqrt(2), 5.787351298))):
        packed = pendulum(np.array([1e-4, ratio * 1e-4]), stiffness=1e5)
        t, x = follow(packed, 20.0, 400, lambda p: angles_of(p)[0], dt=1e-4)
        claim(
            f"rate of mode {k + 1} of a double pendulum, 1 m arms",
            "Kibble & Berkshire, Classical Mechanics, eq. 11.21", expected,
            fitted_rate(t, x, expected), 2e-4, "rad/s", "arms stretch by 2e-4 of the upper",
        )  # fmt: skip


def test_inner_step_is_of_first_order(claim):
    """Two pins fall: the error of the scheme is known to the last digit."""
    packed = bench_strand(
        [[0.0, 0.0], [0.1, 0.0]], pitch=0.1, link_mass=0.1, link_stiffness=1e3
    )  # fmt: skip
    advance(packed, 0.1, 1e-4)
    claim(
        "fall in 0.1 s by steps of 0.1 ms, its error included",
        "-(g/2) t (t + dt), semi-implicit Euler scheme, derived", -0.0490822833,
        packed.state.y[0], 1e-9, "m", "printed digits", absolute=True,
    )  # fmt: skip
    errors = []
    for dt in (1e-4, 5e-5):
        swing = pendulum(np.array([0.1, 0.1]), stiffness=1e6)
        advance(swing, 1.0, dt)
        errors.append(np.abs(angles_of(swing) - DOUBLE[0][2]).max())
    claim(
        "error of a double pendulum at half the step, over the error at the full one",
        "order of the semi-implicit Euler scheme, from memory", 0.5, errors[1] / errors[0], 0.1,
        "", "stretch of the arms is left over", absolute=True,
    )  # fmt: skip


def decay(zeta_of_link, share):
    """Growth of a pin on one spring over many steps at a share of the stability limit."""
    mass, stiffness = 1.0, 1e4
    packed = bench_strand(
        [[0.0, 0.0], [1.0, 0.0]], pitch=1.0, link_mass=mass, link_stiffness=stiffness,
        link_damping=zeta_of_link, fixed=(0,), pin_mass=[mass, mass], gravity=(0.0, 0.0),
    )  # fmt: skip
    zeta = 0.5 * zeta_of_link
    limit = 2 / np.sqrt(stiffness / mass) * (np.sqrt(1 + zeta**2) - zeta)
    packed.state.x[1] += 1e-9
    dt = share * limit
    advance(packed, 400 * dt, dt)
    return abs(packed.state.x[1] - 1.0) / 1e-9


@pytest.mark.parametrize("zeta", [0.0, 0.1, 0.6])
def test_stability_limit_of_the_inner_step(zeta):
    assert decay(zeta, 0.98) < 30.0
    assert decay(zeta, 1.05) > 1e6


def test_chain_is_stable_up_to_the_limit_of_its_step():
    """The step of a strand is bounded by rows; a ring has just that mode."""
    sizes = []
    for share in (0.98, 1.05):
        packed = ring(20, 0.0, damping=0.0)
        n = 20
        packed.state.x[:n] += 1e-9 * np.random.default_rng(1).standard_normal(n)
        packed.state.x[n] = packed.state.x[0]
        before = packed.state.x[:n].copy()
        dt = strand_step(packed) / 0.6 * share
        advance(packed, 600 * dt, dt)
        sizes.append(np.abs(packed.state.x[:n] - before).max())
    assert sizes[0] < 1e-5
    assert not sizes[1] < 1e-3


def ring(n, omega, damping=0.2, pitch=PITCH, **more):
    """Free ring of n links that turns at `omega`, stretched as its pull asks."""
    radius = pitch / 2 / np.sin(np.pi / n)
    stiffness = AXIAL / pitch
    pull = LINK_MASS * omega**2 * radius / 2 / np.sin(np.pi / n)
    angle = 2 * np.pi * np.arange(n) / n
    pins = radius * np.column_stack([np.cos(angle), np.sin(angle)])
    packed = bench_strand(
        pins, pitch=pitch - pull / stiffness, link_mass=LINK_MASS, link_stiffness=stiffness,
        link_damping=damping, closed=True, gravity=(0.0, 0.0), **more,
    )  # fmt: skip
    packed.state.vx[:n], packed.state.vy[:n] = -omega * pins[:, 1], omega * pins[:, 0]
    packed.state.vx[n], packed.state.vy[n] = packed.state.vx[0], packed.state.vy[0]
    return packed


def test_centrifugal_tension(claim):
    packed = ring(12, 100.0)
    advance(packed, 0.5)
    tension = packed.work.links.tension[:12]
    claim(
        "tension of a free ring of 12 links at 100 rad/s",
        "m v^2 with the speed of the pins; Machinery's Handbook, from memory", 3.85243184,
        tension.mean(), 1e-5, "N", "first-order step",
    )  # fmt: skip
    assert np.ptp(tension) < 1e-5


def momenta(packed, mass):
    """Linear momentum (complex), angular momentum about the origin, and kinetic energy."""
    n = packed.parts.chain.n
    z = packed.state.x[:n] + 1j * packed.state.y[:n]
    w = packed.state.vx[:n] + 1j * packed.state.vy[:n]
    share = packed.parts.chain.weight_re[:n] - 1j * packed.parts.chain.weight_im[:n]
    push = mass @ w
    return share @ w, np.imag(z.conj() @ push), 0.5 * np.real(w.conj() @ push)


def mass_matrix(packed):
    """Dense Hermitian mass matrix of the pins [kg]."""
    chain = packed.parts.chain
    n = chain.n
    matrix = np.diag(chain.mass[:n]).astype(complex)
    for i in range(n):
        entry = chain.coupling_re[i] + 1j * chain.coupling_im[i]
        matrix[i, (i + 1) % n] += entry
        matrix[(i + 1) % n, i] += np.conj(entry)
    return matrix


def test_free_ring_with_carriers_keeps_its_momenta(claim):
    riders = [Rider(k, 0.4 * PITCH, 9e-3, 0.02, 1e-6) for k in (2, 7, 8, 9, 15)]
    packed = ring(
        20, 30.0, riders=riders, joint_moment=2e-4, joint_radius=3e-4, joint_stiffness=0.5,
    )  # fmt: skip
    n = 20
    rng = np.random.default_rng(3)
    for speed, drift in ((packed.state.vx, 0.3), (packed.state.vy, -0.2)):
        speed[:n] += drift + 0.3 * rng.standard_normal(n)
        speed[n] = speed[0]
    mass = mass_matrix(packed)
    push, spin, energy = momenta(packed, mass)
    advance(packed, 0.3)
    push_after, spin_after, energy_after = momenta(packed, mass)
    source = "conservation of momentum in an isolated system"
    for name, before, after in (
        ("momentum", push, push_after),
        ("angular momentum", spin, spin_after),
    ):
        claim(
            f"change of {name} of a free chain with carriers, over itself", source, 0.0,
            abs(after - before) / abs(before), 1e-11, "", "rounding in 24000 steps", absolute=True,
        )  # fmt: skip
    assert energy_after < 0.99 * energy


def folded(n):
    """Chain of n links and unit length, both ends level, one level link in the fold; end held."""
    pitch = 1.0 / n
    half = (n - 1) // 2
    down = np.column_stack([np.zeros(half + 1), -pitch * np.arange(half + 1)])
    up = np.column_stack([np.full(half + 1, pitch), -pitch * np.arange(half, -1, -1.0)])
    return bench_strand(
        np.vstack([down, up]), pitch=pitch, link_mass=MASS_PER_LENGTH * pitch,
        link_stiffness=AXIAL / pitch, fixed=(0,),
    )  # fmt: skip


#: fall of the tip over L, time over sqrt(L/g)
FALLS = {0.25: 0.690809259, 0.5: 0.948025319, 0.75: 1.113656209, 0.9: 1.177012991}


def test_falling_folded_chain(claim):
    n = 81
    packed = folded(n)
    t, y = follow(packed, 1.25 * np.sqrt(1 / GRAVITY), 2500, lambda p: p.state.y[n])
    for fall, expected in FALLS.items():
        at = int(np.argmax(y < -fall))
        time = np.interp(fall, -y[at - 1 : at + 1], t[at - 1 : at + 1]) * np.sqrt(GRAVITY)
        claim(
            f"time of a folded chain's tip to fall {fall:g} L, in sqrt(L/g)",
            "M. G. Calkin and R. H. March, Am. J. Phys. 57 (1989) 154, law re-derived", expected,
            time, 0.015, "", "81 links for a thin chain; error falls as 1/n",
        )  # fmt: skip
        if fall >= 0.5:
            assert time < np.sqrt(2 * fall)
    assert FALLS[0.5] < 1.0 < 1.19814023 * 2
    assert 0.5 * beta(0.75, 0.5) == pytest.approx(1.19814023)


def test_joint_friction_holds_a_strand_out_level():
    """A joint holds the weight of a link below its limit for ever, and gives way above it."""
    drops = []
    for limit in (2.5, 0.8):
        moment = limit * LINK_MASS * GRAVITY * PITCH
        stiffness = moment / 0.01
        packed = bench_strand(
            [[-PITCH, 0.0], [0.0, 0.0], [PITCH, 0.0]], pitch=PITCH, link_mass=LINK_MASS,
            link_stiffness=2e4, link_damping=0.5, fixed=(0, 1), pin_mass=[LINK_MASS] * 3,
            joint_moment=moment, joint_stiffness=stiffness, air_damping=0.3,
        )  # fmt: skip
        advance(packed, 1.0)
        early = packed.state.y[2]
        advance(packed, 5.0)
        drops.append((early, packed.state.y[2]))
    held, gone = drops
    # a spring of moment / 0.01 rad under m g p gives way by 0.01 / 2.5 rad
    assert held[0] == pytest.approx(-0.004 * PITCH, rel=1e-3)
    assert abs(held[1] - held[0]) < 1e-12
    assert gone[1] < -0.5 * PITCH
