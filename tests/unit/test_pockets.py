"""Pockets: where a ball rests in them, and the cone that holds it."""

import math
from types import SimpleNamespace

import pytest

from chainsim.errors import LayoutError
from chainsim.model.pockets import pocket_form

RADIUS, PITCH = 8e-3, 10e-3


def tray(**changes):
    """A shallow tray without tilt."""
    values = {
        "outline": None, "floor": 18e-3, "lip": 3e-3, "tilt": 0.0, "offset": 4e-3,
        "back": 14e-3, "wall": 1e-3,
    }  # fmt: skip
    return SimpleNamespace(**(values | changes))


@pytest.mark.parametrize("lip", [2e-3, 3e-3, 5e-3])
def test_lip_holds_like_a_step(lip):
    """The cone's slope is the wheel over a step, its edge rounded by half the wall."""
    reach, up = RADIUS + 0.5e-3, RADIUS + 0.5e-3 - lip
    form = pocket_form(tray(lip=lip), RADIUS, PITCH)
    assert form.lip_slope == pytest.approx(math.sqrt(reach**2 - up**2) / up, rel=0.02)


def test_ball_rests_at_the_middle_of_its_link():
    form = pocket_form(tray(tilt=math.radians(5)), RADIUS, PITCH)
    assert form.seat[0] == pytest.approx(0.5 * PITCH, abs=1e-4)
    assert form.seat[1] == pytest.approx(4e-3 + RADIUS, abs=1e-4)


def test_tall_back_is_a_wall():
    assert math.isinf(pocket_form(tray(), RADIUS, PITCH).back_slope)


def test_play_is_the_floor_less_what_the_ball_takes():
    wide = pocket_form(tray(floor=24e-3), RADIUS, PITCH)
    narrow = pocket_form(tray(floor=20e-3), RADIUS, PITCH)
    assert wide.play - narrow.play == pytest.approx(4e-3, abs=2e-4)


def test_pocket_without_a_lip_holds_nothing():
    with pytest.raises(LayoutError, match="no place to rest"):
        pocket_form(tray(lip=0.0, tilt=math.radians(-10)), RADIUS, PITCH)
