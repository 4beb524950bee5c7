"""Rest before the first step: how still, how repeatable, and what is refused."""

import numpy as np
import pytest

from chainsim.errors import RunError
from chainsim.model.equilibrium import RESIDUAL_SHARE, frictionless, settle
from chainsim.model.lift import build_lift
from chainsim.model.packing import pack
from chainsim.model.stepping import inner_step
from chainsim.scenario import parse_scenario
from tests.unit.scenario_texts import BASE


@pytest.fixture(scope="module")
def lift():
    return build_lift(parse_scenario(BASE))


def packed_with_step(lift):
    packed = pack(lift)
    dt, _ = inner_step(
        packed.parts, lift.laid.pin, lift.laid.seat, lift.laid.wheel_center,
        lift.scenario.chain.link_damping,
    )  # fmt: skip
    return packed, dt


def test_rest_leaves_less_than_asked_for(lift):
    packed, dt = packed_with_step(lift)
    rest = settle(lift, packed, dt)
    weight = lift.scenario.chain.link_mass * lift.scenario.frame.gravity
    assert rest.target == pytest.approx(RESIDUAL_SHARE * weight)
    assert 0.0 <= rest.residual < rest.target
    assert not packed.state.vx.any() and not packed.state.w.any()
    assert not packed.state.ledger.any()


def test_rest_has_the_same_bits_twice(lift):
    places = []
    for _ in range(2):
        packed, dt = packed_with_step(lift)
        settle(lift, packed, dt)
        places.append(packed.flat.copy())
    np.testing.assert_array_equal(*places)


def test_hung_tail_is_carried_by_the_chain(lift):
    packed, dt = packed_with_step(lift)
    settle(lift, packed, dt, share=1e-4)
    hung = lift.scenario.sprocket[1].mount.mass
    push = packed.work.frames.fy[1]
    assert push == pytest.approx(hung * lift.scenario.frame.gravity, rel=1e-3)


def test_what_does_not_come_to_rest_is_refused_with_the_force_that_is_left(lift):
    packed, dt = packed_with_step(lift)
    with pytest.raises(RunError, match=r"does not come to rest.*N stay unbalanced"):
        settle(lift, packed, dt, most=64)


def test_friction_is_left_out_of_a_copy_only(lift):
    packed, _ = packed_with_step(lift)
    before = packed.parts.wheels["friction"].copy()
    free = frictionless(packed)
    assert not free.wheels["friction"].any() and free.chain.joint_stiffness == 0.0
    np.testing.assert_array_equal(packed.parts.wheels["friction"], before)
