"""Balls, contacts and restitution, against worked numbers and independent integration."""

import math

import pytest
from scipy.integrate import quad, solve_ivp
from scipy.special import gamma

from chainsim import closed_forms as cf
from chainsim.errors import CallError

G = 9.80665


@pytest.mark.parametrize(
    ("radius", "lip", "tilt", "lifting", "acceleration"),
    [
        (0.010, 0.004, 0.0, 0.0, 13.0755333),
        (0.008, 0.003, 0.0, 0.0, 12.2485019),
        (0.008, 0.003, -5.0, 0.0, 1.04709176 * G),
        (0.008, 0.003, 5.0, 0.0, 1.50044708 * G),
        (0.008, 0.003, 0.0, 2.0, 14.7465011),
        (0.008, 0.003, 0.0, -2.0, 9.75050272),
        (0.009525, 0.002, 0.0, 0.0, 0.776016017 * G),
    ],
)
def test_ball_turns_over_its_lip(radius, lip, tilt, lifting, acceleration):
    # Wheel over a curb: Giancoli, problem 9-59(b), F = M g sqrt(h (2 R − h)) / (R − h)
    # (from memory).
    found = cf.lip_acceleration(
        radius, lip, G, floor_tilt=math.radians(tilt), lifting_acceleration=lifting
    )
    assert found == pytest.approx(acceleration, rel=1e-8)


def test_rounded_lip_holds_as_a_larger_ball_behind_a_sharp_one():
    # The round of the lip has its center ρ below the top; the ball's center is r + ρ away from it
    # and r above the floor: cos θ = (r − h + ρ)/(r + ρ).
    angle = cf.lip_angle(0.008, 0.003, 0.001)
    assert math.cos(angle) == pytest.approx(6.0 / 9.0)
    assert angle < cf.lip_angle(0.008, 0.003)


def test_lip_that_leans_over_the_ball_never_lets_go():
    assert cf.lip_acceleration(0.010, 0.009, G, floor_tilt=math.radians(20)) == math.inf
    with pytest.raises(CallError, match="no edge"):
        cf.lip_angle(0.008, 0.008)


def test_ball_in_a_groove():
    slope = math.radians(35.0)
    assert cf.groove_acceleration(slope, G) == pytest.approx(6.86669025, rel=1e-8)
    assert cf.groove_forces(0.05, slope, 0.3 * G, G) == pytest.approx(
        (0.427523022, 0.171062434), rel=1e-8
    )
    at_limit = cf.groove_forces(0.05, slope, cf.groove_acceleration(slope, G), G)
    assert at_limit[1] == pytest.approx(0.0, abs=1e-15)


@pytest.mark.parametrize(("degrees", "factor"), [(35.0, 0.626520786), (45.0, 5 / 9)])
def test_ball_rolls_along_a_groove(degrees, factor):
    inertia = cf.groove_inertia(math.radians(degrees))
    slope = math.radians(10.0)
    found = cf.rolling(slope, 1.0, 0.01, G, inertia)
    assert found.acceleration == pytest.approx(factor * G * math.sin(slope), rel=1e-8)


@pytest.mark.parametrize(
    ("inertia", "acceleration", "least"),
    [
        (2 / 5, 2.96033527, 0.133230759),
        (1 / 2, 2.76297958, 0.155435886),
        (1.0, 2.07223469, 0.233153829),
        (2 / 3, 2.48668163, 0.186523063),
    ],
)
def test_round_bodies_roll_down_a_slope(inertia, acceleration, least):
    found = cf.rolling(math.radians(25.0), 0.5, 0.01, G, inertia)
    assert found.rolls
    assert found.acceleration == pytest.approx(acceleration, rel=1e-8)
    assert found.least_friction == pytest.approx(least, rel=1e-8)


def test_ball_slides_with_too_little_friction():
    found = cf.rolling(math.radians(25.0), 0.08, 0.01, G)
    assert not found.rolls
    assert found.acceleration == pytest.approx(3.43344192, rel=1e-8)
    assert found.spin_acceleration == pytest.approx(177.756865, rel=1e-8)


def test_ball_slides_until_it_rolls():
    found = cf.slide_to_roll(0.8, 0.15, G)
    assert found == pytest.approx((0.571428571, 0.155385328, 0.106549939), rel=1e-8)


def test_bouncing_ball():
    assert cf.bouncing_time(0.3, 0.7, G) == pytest.approx(1.40166089, rel=1e-8)
    # Printed worked example: 2 m, e = 0.5, second bounce 0.125 m.
    assert cf.bounce_height(2.0, 0.5, 2) == 0.125


def test_discharge_window_is_the_flight_through_both_edges():
    window = cf.discharge_speeds(0.05, -0.004, -0.03, G, math.radians(10.0))
    for speed, height in ((window.low, -0.03), (window.high, -0.004)):
        time = 0.05 / (speed * math.cos(math.radians(10.0)))
        flight = speed * math.sin(math.radians(10.0)) * time - 0.5 * G * time**2
        assert flight == pytest.approx(height, rel=1e-12)
    assert cf.discharge_speeds(0.05, 0.001, -0.03, G).high == math.inf


def test_discharge_without_a_way_through_is_refused():
    with pytest.raises(CallError, match="too low for the ball"):
        cf.discharge_speeds(0.05, -0.03, -0.02, G)
    with pytest.raises(CallError, match="above every flight"):
        cf.discharge_speeds(0.05, 0.03, 0.02, G)


def test_hertz_impact_of_a_steel_ball():
    # Steel on steel, radius 10 mm; Johnson, Contact Mechanics, eq. 11.24 (from memory).
    modulus = cf.combined_modulus(210e9, 0.3, 210e9, 0.3)
    stiffness = cf.hertz_stiffness(modulus, 0.010)
    assert stiffness == pytest.approx(1.53846154e10, rel=1e-8)
    found = cf.hertz_impact(stiffness, 0.0328820031, 0.5)
    assert found == pytest.approx((1.34861709e-5, 7.93870241e-5, 761.937994), rel=1e-8)
    slower = cf.hertz_impact(stiffness, 0.0328820031, 0.05)
    assert slower.duration / found.duration == pytest.approx(10**0.2, rel=1e-12)


def test_hertz_duration_constant():
    by_gamma = 0.8 * math.sqrt(math.pi) * gamma(0.4) / gamma(0.9)
    # Substituting x = 1 − u² takes the root out of the end of 2 ∫ dx / sqrt(1 − x^2.5).
    by_quadrature = 2 * quad(lambda u: 2 * u / math.sqrt(1 - (1 - u * u) ** 2.5), 0.0, 1.0)[0]
    duration = cf.HERTZ_DURATION
    assert duration == pytest.approx(by_gamma, rel=1e-9)
    assert duration == pytest.approx(by_quadrature, rel=1e-7)


@pytest.mark.parametrize(
    ("ratio", "rest_length", "no_force"),
    [
        (0.05, 0.854467893, 0.858758102),
        (0.2, 0.526620599, 0.571740028),
        (0.4, 0.253826722, 0.363526861),
    ],
)
def test_spring_and_dashpot(ratio, rest_length, no_force):
    assert cf.dashpot_restitution(ratio, "at rest length") == pytest.approx(rest_length, rel=1e-8)
    assert cf.dashpot_restitution(ratio, "at no force") == pytest.approx(no_force, rel=1e-8)
    assert cf.dashpot_damping_ratio(rest_length) == pytest.approx(ratio, rel=1e-7)


@pytest.mark.parametrize(
    ("product", "restitution"),
    [(0.2, 0.882189986), (0.5, 0.748434932), (1.5, 0.487741256), (3.0, 0.306896798)],
)
def test_damping_that_grows_with_depth(product, restitution):
    assert cf.depth_damping_restitution(product / 0.3, 0.3) == pytest.approx(restitution, rel=1e-8)
    assert cf.depth_damping(restitution, 0.3) * 0.3 == pytest.approx(product, rel=1e-7)


@pytest.mark.parametrize("power", [1.0, 1.5])
def test_damping_that_grows_with_depth_by_integration(power):
    # F = K δⁿ (1 + D v), no gravity; the stop at force zero is the stop at depth zero.
    def rate(_, state):
        depth, speed = state
        return [speed, -(1e6 * max(depth, 0.0) ** power) * (1 + 2.0 * speed)]

    def parted(_, state):
        return state[0]

    parted.terminal, parted.direction = True, -1
    out = solve_ivp(rate, (0, 1), [1e-12, 0.4], events=parted, rtol=1e-10, atol=1e-14)
    expected = cf.depth_damping_restitution(2.0, 0.4)
    assert -out.y[1, -1] / 0.4 == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("restitution", [1e-3, 0.05, 0.999999])
def test_damping_from_restitution_holds_at_the_ends(restitution):
    damping = cf.depth_damping(restitution, 0.3)
    assert cf.depth_damping_restitution(damping, 0.3) == pytest.approx(restitution, rel=1e-6)


def test_restitution_out_of_range_is_refused():
    assert cf.depth_damping(1.0, 0.3) == 0.0
    assert cf.depth_damping_restitution(0.0, 0.3) == 1.0
    with pytest.raises(CallError, match="above 0 and at most 1"):
        cf.depth_damping(0.0, 0.3)


def test_contact_half_period():
    assert cf.contact_half_period(1e4, 0.05) == pytest.approx(math.pi * math.sqrt(5e-6))
