"""Our stepper behind scipy's interface, against scipy's own methods on the same right-hand side."""

import numpy as np
import pytest

from chainsim.errors import CallError
from chainsim.integration.solvers import InnerStepper, integrate, right_hand_side, sparsity
from chainsim.integration.start import prepare
from chainsim.model.lift import build_lift
from chainsim.scenario import parse_scenario

SMALL = """
format = 1
[chain]
pitch = "10 mm"
link_mass = "1 g"
link_stiffness = "20 kN/m"
link_damping = 0.1
roller_diameter = "5 mm"
[[sprocket]]
name = "head"
teeth = 8
center = ["0 mm", "120 mm"]
[[sprocket]]
name = "tail"
teeth = 8
center = ["0 mm", "0 mm"]
mount = { kind = "hung", mass = "0.2 kg", free = "y" }
[drive]
sprocket = "head"
kind = "speed"
chain_speed = "0.1 m/s"
[run]
duration = "1 s"
"""


def running(step_scale: float = 1.0):
    """Return a small lift whose drive runs at a steady rate from the start."""
    prepared = prepare(build_lift(parse_scenario(SMALL)), step_scale)
    drive = prepared.packed.parts.drive
    drive["rate_from"] = drive["rate_to"] = 0.1 / drive["speed_per_rate"]
    return prepared


@pytest.fixture(scope="module")
def reference():
    """The state after 30 ms by RK45, tight."""
    return integrate(running(), 0.03, "RK45", rtol=1e-8).copy()


def distance(prepared, reference) -> float:
    """Return the largest distance of a pin from its place in the reference [m]."""
    n = prepared.lift.n_links
    ends = prepared.packed.ends
    here = prepared.packed.flat
    dx = here[:n] - reference[:n]
    dy = here[ends[0] : ends[0] + n] - reference[ends[0] : ends[0] + n]
    return float(np.hypot(dx, dy).max())


def test_stepper_converges_to_a_stock_method(reference):
    coarse, fine = running(), running(0.25)
    integrate(coarse, 0.03)
    integrate(fine, 0.03)
    far, near = distance(coarse, reference), distance(fine, reference)
    # first order: a quarter of the step leaves about a quarter of the error
    assert near < 0.45 * far
    assert far < 30e-6  # of 3 mm traveled


def test_right_hand_side_depends_on_time_and_state_only():
    prepared = running()
    fun = right_hand_side(prepared.packed)
    y = prepared.packed.flat.copy()
    first = fun(0.0, y)
    fun(0.0, y + 1e-4)
    assert np.array_equal(fun(0.0, y), first)


def test_sparsity_covers_the_jacobian():
    prepared = running()
    fun = right_hand_side(prepared.packed)
    y = prepared.packed.flat.copy()
    pattern = sparsity(prepared.packed)
    base = fun(0.0, y)
    for column in (0, 5, int(prepared.packed.ends[0]) + 7, int(prepared.packed.ends[3])):
        moved = y.copy()
        moved[column] += 1e-7
        felt = set(np.flatnonzero(np.abs(fun(0.0, moved) - base) > 1e-9))
        assert felt <= set(pattern[:, [column]].nonzero()[0])


def test_solve_ivp_takes_the_stepper():
    from scipy.integrate import solve_ivp

    prepared = running()
    found = solve_ivp(
        right_hand_side(prepared.packed), (0.0, 0.01), prepared.packed.flat.copy(),
        method=InnerStepper, prepared=prepared, t_eval=np.linspace(0.0, 0.01, 6),
    )  # fmt: skip
    assert found.success
    assert found.y.shape == (len(prepared.packed.flat), 6)


def test_an_unknown_method_is_refused():
    with pytest.raises(CallError, match="need chainsim or one of RK23"):
        integrate(running(), 0.01, "Euler")
