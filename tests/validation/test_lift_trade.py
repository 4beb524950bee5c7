"""Sayings of the trade on short runs of small lifts: common practice, no published source."""

from functools import cache

import numpy as np
import pytest

from chainsim.integration.start import prepare
from chainsim.model.lift import build_lift
from tests.validation.lifts import GRAVITY, PER_LENGTH, PITCH, hung, lift, recorded

PRACTICE = "common practice, no source"
RADIUS = PITCH / 2 / np.sin(np.pi / 8)


def at_rest(**changes):
    """Pins [m] and tensions [N] of an empty lift at rest."""
    prepared = prepare(build_lift(lift(carriers="", **changes)))
    packed = prepared.packed
    n = prepared.lift.n_links
    pins = np.column_stack([packed.state.x[:n], packed.state.y[:n]])
    return pins, packed.work.links.tension[:n].copy(), packed.state.q.copy()


@cache
def skipped(driven, mass=None, links=56):
    """Whole seats that the chain has skipped on the tail, in three seconds at 0.15 m/s."""
    tail = 'kind = "fixed"' if mass is None else hung(mass)
    recording = recorded(
        driven=driven, tail=tail, links=links, seconds=3.0, speed=0.15,
        tooth="tooth = { friction = 0.15 }",
    )  # fmt: skip
    return float(np.abs(recording["sprockets/skip"][:]).max())


@pytest.mark.parametrize("driven", ["head", "tail"])
def test_surplus_chain_ends_up_below(driven):
    """Four links too many between fixed axles: the bow hangs under the lower wheel."""
    pins, _, _ = at_rest(driven=driven, tail='kind = "fixed"', links=60)
    taut, _, _ = at_rest(driven=driven, tail='kind = "fixed"', links=56)
    # a bow of 40 mm hangs 20 mm lower; the upper wheel keeps its chain as it was
    assert taut[:, 1].min() - pins[:, 1].min() > 0.015
    assert pins[:, 1].max() == pytest.approx(taut[:, 1].max(), abs=1e-3)


def test_driven_tail_jumps_teeth_on_surplus_chain():
    assert skipped("tail", links=60) >= 1.0


def test_driven_head_gets_by_with_much_less_take_up(claim):
    """Balls of 0.12 kg on the strand; what hangs below weighs half of that, or a sixth."""
    for mass in (0.02, 0.06):
        claim(f"teeth skipped, tail driven with {1e3 * mass:g} g hung, 120 g of balls", PRACTICE,
              1.0, skipped("tail", mass), 0.0, "", "skips or not", sense="at least")  # fmt: skip
        claim(f"teeth skipped, head driven with {1e3 * mass:g} g hung, 120 g of balls", PRACTICE,
              0.1, skipped("head", mass), 0.0, "", "skips or not", sense="at most")  # fmt: skip
    claim("teeth skipped, tail driven with 300 g hung, 120 g of balls", PRACTICE, 0.1,
          skipped("tail", 0.3), 0.0, "", "skips or not", sense="at most")  # fmt: skip


def test_lift_at_the_head_must_grow_with_the_chain(claim):
    """A spring lifts the head: what it leaves at the foot falls by the weight of a strand."""
    feet = []
    for height in (240, 480):
        pins, tension, q = at_rest(
            height=height, links=56 + (height - 240) // 5, tail='kind = "fixed"', driven="tail",
            head='kind = "spring", mass = "0.05 kg", rate = "50 N/m", set_force = "3 N", '
            'axis = [0, 1]',
        )  # fmt: skip
        middle = 0.5 * (pins[:, 1] + np.roll(pins[:, 1], -1))
        low = np.abs(middle - 0.015) < 0.6 * PITCH
        # the spring gives way as the head sinks
        feet.append(tension[low].mean() + 0.5 * 50 * q[0])
    claim(
        "tension lost at the foot by 240 mm of height, head lifted by a constant force",
        "free body: F = 2 w H + 2 T, checks D5 (c)", 0.24 * 0.1 * GRAVITY, feet[0] - feet[1], 0.01,
        "N", "links stretch; tension read within half a link",
    )  # fmt: skip
    assert PER_LENGTH > 0.1


def test_axles_too_far_apart_are_pulled_by_the_chain(claim):
    """Half a millimeter too far: the loop's own stiffness bends the axles."""
    pull = []
    for shift in (0.1, 0.5):
        pins, tension, _ = at_rest(
            tail=f'kind = "screwed", shift = "-{shift} mm"', tooth='tooth.seat_clearance = "0 mm"'
        )  # fmt: skip
        middle = 0.5 * (pins[:, 1] + np.roll(pins[:, 1], -1))
        half = np.abs(middle - 0.12) < 0.6 * PITCH
        pull.append(2 * tension[half].mean())
    claim(
        "pull on axles moved apart by 0.4 mm", "two springs side by side, statics",
        2 * 50e3 / 24 * 0.4e-3, pull[1] - pull[0], 0.1, "N",
        "the wraps give way too",
        cause="the links up to the first loaded tooth and the pins in their seats are in series "
        "with the strands: two more links' worth",
    )  # fmt: skip
