"""Laws of contact and friction, link and outline kernels, against hand values."""

import math

import numpy as np
import pytest

from chainsim.kernels.contact import hold, normal_force, one_sided_stop
from chainsim.kernels.guides import GUIDE, closest_on_guide
from chainsim.kernels.wheels import WHEEL, tooth_gap
from chainsim.model.packing_wheels import write_tooth
from chainsim.model.tooth import gap, tooth_form

press = normal_force.py_func


@pytest.mark.parametrize(
    ("depth", "closing", "yielding", "expected"),
    [
        (1e-3, 0.0, 0.0, (10.0, 0.0)),
        (1e-3, 0.2, 0.0, (11.0, 1.0)),  # k d (1 + D v), D = 0.5 s/m
        (1e-3, -0.2, 0.0, (9.0, -1.0)),
        (1e-3, -4.0, 0.0, (0.0, -10.0)),  # it never pulls
        (0.0, 5.0, 0.0, (0.0, 0.0)),  # nothing at touch, however fast
        # damper at the speed that it leaves; it dissipates at the mean of both speeds
        (1e-3, 0.2, 0.1, (10.0 + 1.0 / 1.5, 1.0 / 1.5 * 0.5 * (1.0 + 1.0 / 1.5))),
    ],
)
def test_normal_force(depth, closing, yielding, expected):
    assert press(depth, closing, 1e4, 0.5, yielding) == pytest.approx(expected)


def test_friction_holds_below_its_limit_and_slips_above():
    kernel = hold.py_func
    # 100 N/m, limit 1 N: slips beyond 10 mm
    force, deflection, _, power = kernel(0.0, 0.1, -1.0, 1.0, 100.0, 0.0, 0.05)
    assert (force, deflection) == pytest.approx((0.5, 0.005))
    assert power == pytest.approx(0.0, abs=1e-15)  # all of its work is stored
    force, deflection, _, power = kernel(0.0095, 0.1, -1.0, 1.0, 100.0, 0.0, 0.05)
    assert (force, deflection) == pytest.approx((1.0, 0.01))
    # 5 mm of travel, 0.5 mm of it into the spring, the rest slips at the mean of 0.95 and 1 N
    assert power * 0.05 == pytest.approx(4.5e-3 * 0.975)


def test_friction_at_rest_does_not_creep():
    deflection = 0.004
    for _ in range(1000):
        force, deflection, _, power = hold.py_func(deflection, 0.0, -1.0, 1.0, 100.0, 0.0, 1e-3)
    assert (force, deflection, power) == pytest.approx((0.4, 0.004, 0.0))


def test_one_way_friction_lets_go():
    force, deflection, _, _ = hold.py_func(0.0, -1.0, 0.0, 1.0, 100.0, 0.0, 0.01)
    assert (force, deflection) == (0.0, 0.0)


def test_friction_for_general_methods_reads_only():
    force, deflection, rate, _ = hold.py_func(0.02, 0.1, -1.0, 1.0, 100.0, 0.0, 0.0)
    assert (force, deflection) == (1.0, 0.02)
    assert rate == pytest.approx(0.1 - 5e3 * 0.01)  # returns to its slip limit


@pytest.mark.parametrize(
    ("travel", "rate", "expected"),
    [
        (0.0, 1.0, (0.0, 0.0)),
        (0.012, 0.0, (-2.0, 0.0)),
        (0.012, 0.1, (-2.5, 0.05)),
        (0.012, -1.0, (0.0, 2.0)),  # leaves with the damper stuck: it does not pull
        (-0.011, 0.0, (1.0, 0.0)),
    ],
)
def test_stop(travel, rate, expected):
    got = one_sided_stop.py_func(travel, rate, -0.01, 0.01, 1000.0, 5.0)
    assert got == pytest.approx(expected)


def record_of(form, roller):
    wheels = np.zeros(1, WHEEL)
    wheels["teeth"] = form.teeth
    write_tooth(wheels[0], form, roller)
    return wheels[0].view(np.recarray)


@pytest.mark.parametrize("teeth", [6, 8, 16])
def test_gap_to_a_tooth_is_that_of_the_drawn_outline(teeth):
    """The compiled distance against the one of the drawing, all over a pitch."""
    form = tooth_form(teeth, 0.01, 0.005)
    record = record_of(form, 0.0025)
    rng = np.random.default_rng(teeth)
    for _ in range(200):
        radius = form.seat_radius + rng.uniform(-0.1, 0.5) * 0.01
        angle = rng.uniform(-math.pi, math.pi) / teeth
        u, w = radius * math.cos(angle) - form.seat_radius, radius * math.sin(angle)
        kernel, nu, nw = tooth_gap.py_func(record, u, abs(w))
        assert math.hypot(nu, nw) == pytest.approx(1.0)
        drawn = gap(form, np.array([form.seat_radius + u, w]))
        assert kernel == pytest.approx(drawn.distance, abs=1e-12)


def test_gap_changes_as_its_normal_says():
    """The force is the gradient of one distance: slopes of the gap are the normal."""
    form = tooth_form(8, 0.01, 0.005)
    record = record_of(form, 0.0025)
    h = 1e-9
    for u in np.linspace(-1e-3, 4e-3, 23):
        for w in np.linspace(1e-4, 4e-3, 21):
            here, nu, nw = tooth_gap.py_func(record, u, w)
            du = tooth_gap.py_func(record, u + h, w)[0] - here
            dw = tooth_gap.py_func(record, u, w + h)[0] - here
            if here < 0.5e-3:
                assert (du / h, dw / h) == pytest.approx((nu, nw), abs=2e-4)


def test_closest_point_on_guides():
    guides = np.zeros(2, GUIDE).view(np.recarray)
    guides[0].bx = 1.0
    guides[1].arc, guides[1].radius = 1, 1.0
    guides[1].middle_x, guides[1].cos_half = 1.0, math.cos(0.5)
    closest = closest_on_guide.py_func
    assert closest(guides[0], 0.3, 0.7) == pytest.approx((0.3, 0.0))
    assert closest(guides[0], -2.0, 0.7) == pytest.approx((0.0, 0.0))
    assert closest(guides[1], 2.0, 0.0) == pytest.approx((1.0, 0.0))
    # beyond the end of the arc: its end point, on the right side
    assert closest(guides[1], 0.0, 3.0) == pytest.approx((math.cos(0.5), math.sin(0.5)))
