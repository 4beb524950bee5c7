"""Tensions of a loaded loop with its tail hung in it, against sums over free bodies."""

from functools import cache

import numpy as np
import pytest

from tests.validation.lifts import (
    BALL,
    EVERY,
    GRAVITY,
    PER_LENGTH,
    PITCH,
    hung,
    recorded,
    steady,
    upward_pull,
)

SPEED, SPACING = 0.04, EVERY * PITCH
#: the strands are cut this far from the axles, where no pin touches a wheel [m]
CUT = 0.012
WEIGHT = PER_LENGTH * GRAVITY
SOURCE = "free bodies of a two-sprocket loop, statics"
WHY = "mean of three whole carrier spacings; take-up and links still ring a little"


@cache
def pulls(driven, mass, height=0.24):
    """Mean pulls of the carrying and the empty strand, below and above [N], and the torque [N m].

    Each pull is carried on to the height of the next axle.
    """
    links = round(2 * height / PITCH) + 8
    recording = recorded(
        driven=driven, tail=hung(mass), height=1e3 * height, links=links, speed=SPEED, seconds=4.5
    )
    part = steady(recording, 3, SPEED)
    beyond = CUT * WEIGHT + CUT / SPACING * BALL * GRAVITY
    found = {
        "carrying, foot": upward_pull(recording, part, CUT, True).mean() - beyond,
        "empty, foot": upward_pull(recording, part, CUT, False).mean() - CUT * WEIGHT,
        "carrying, top": upward_pull(recording, part, height - CUT, True).mean() + beyond,
        "empty, top": upward_pull(recording, part, height - CUT, False).mean() + CUT * WEIGHT,
    }
    return found, float(recording["drive/torque"][part].mean())


def hung_weight(mass):
    """Weight of the mount and of the chain with its carriers below the tail's axle [N]."""
    return (mass + 4 * PITCH * PER_LENGTH) * GRAVITY


def payload(height=0.24):
    """Weight of the balls on the carrying strand [N]."""
    return height / SPACING * BALL * GRAVITY


def free_bodies(driven, mass, height=0.24):
    """The same pulls by statics: an idle wheel has equal pulls, a driven one differs by P."""
    weight, load = hung_weight(mass), payload(height)
    if driven == "head":
        carrying = empty = weight / 2
    else:
        carrying, empty = (weight - load) / 2, (weight + load) / 2
    return {
        "carrying, foot": carrying,
        "empty, foot": empty,
        "carrying, top": carrying + WEIGHT * height + load,
        "empty, top": empty + WEIGHT * height,
    }


@pytest.mark.parametrize("driven", ["head", "tail"])
def test_tensions_agree_with_free_bodies(claim, driven):
    found, torque = pulls(driven, 0.3)
    for place, expected in free_bodies(driven, 0.3).items():
        claim(f"pull of the strand {place}, {driven} driven", SOURCE, expected, found[place], 0.01,
              "N", WHY)  # fmt: skip
    claim(
        f"mean torque, {driven} driven: payload times rise a turn over a turn",
        "work of a turn, P N p = 2 pi T", payload() * 8 * PITCH / 2 / np.pi, torque, 0.01, "N m",
        WHY,
    )  # fmt: skip


@pytest.mark.parametrize("height", [0.24, 0.32])
def test_slack_threshold_of_a_driven_tail(claim, height):
    """The foot of the carrying strand falls slack where the hung weight is that of the balls."""
    load = payload(height)
    masses = [share * load / GRAVITY for share in (1.3, 2.0, 3.0)]
    weights = [hung_weight(mass) for mass in masses]
    feet = [pulls("tail", mass, height)[0]["carrying, foot"] for mass in masses]
    slope, offset = np.polyfit(weights, feet, 1)
    claim(
        f"hung weight at which a driven tail leaves its foot slack, {height:g} m",
        SOURCE, load, -offset / slope, 0.03, "N", WHY,
    )  # fmt: skip


@pytest.mark.parametrize("share", [0.6, 2.0])
def test_driven_head_leaves_half_the_hung_weight_at_the_foot(claim, share):
    mass = share * payload() / GRAVITY
    claim(
        f"pull at the foot, head driven, {share:g} times the balls' weight hung below",
        SOURCE, hung_weight(mass) / 2, pulls("head", mass)[0]["carrying, foot"], 0.03, "N", WHY,
    )  # fmt: skip


def test_driven_tail_takes_tension_out_of_the_carrying_strand():
    """Common practice, no source: a driven tail shoves its chain into the carrying strand."""
    assert pulls("tail", 0.3)[0]["carrying, foot"] < 0.65 * pulls("head", 0.3)[0]["carrying, foot"]


def test_small_weight_at_the_tail_need_not_grow_with_the_chain(claim):
    """Common practice, no source: driven at the head, the foot of a taller chain is as taut."""
    low, high = (pulls("head", 0.3, height)[0]["carrying, foot"] for height in (0.24, 0.32))
    claim("pull at the foot of a taller lift, head driven, same hung weight",
          "common practice, no source", low, high, 0.01, "N", WHY)  # fmt: skip
