"""Free bodies of a vertical loop over two equal sprockets, balls on its rising strand.

Slow running, straight strands, no friction. `payload` is the weight of all balls on the
carrying strand, `strand_weight` that of one empty strand with its carriers.
"""

from __future__ import annotations

import math
from typing import Literal, NamedTuple

Driven = Literal["head", "tail"]


class LoopTensions(NamedTuple):
    """Forces in a vertical two-sprocket loop.

    Attributes
    ----------
    carrying_foot, carrying_head : float
        Tension of the rising strand at its lower and upper end [N].
    return_foot, return_head : float
        Tension of the falling strand at its lower and upper end [N].
    head_hub, tail_hub : float
        Pull of both strands on the upper and the lower sprocket [N].
    """

    carrying_foot: float
    carrying_head: float
    return_foot: float
    return_head: float
    head_hub: float
    tail_hub: float


class LoopTorque(NamedTuple):
    """Torque on the driven sprocket of a lift.

    Attributes
    ----------
    peak, mean : float
        Largest torque within a tooth, and its mean [N m].
    """

    peak: float
    mean: float


def hung_loop(
    hung_weight: float, strand_weight: float, payload: float, driven: Driven
) -> LoopTensions:
    """Loop whose lower sprocket hangs in it.

    Parameters
    ----------
    hung_weight : float
        Weight of all that hangs in the loop: mount, sprocket, chain on its wrap [N].
    strand_weight : float
        Weight of one empty strand [N].
    payload : float
        Weight of the balls on the carrying strand [N].
    driven : {"head", "tail"}
        Which sprocket is driven, its torque taken by the frame (dimensionless).

    Returns
    -------
    LoopTensions
        A negative `carrying_foot` means that the strand goes slack there.

    Notes
    -----
    An idler keeps both its strands at the same tension: `W/2` each at the tail of a
    head-driven loop; `(W ∓ P)/2` at the tail of a tail-driven one.
    """
    share = 0.5 * payload if driven == "tail" else 0.0
    carrying_foot = 0.5 * hung_weight - share
    return_foot = 0.5 * hung_weight + share
    carrying_head = carrying_foot + strand_weight + payload
    return_head = return_foot + strand_weight
    return LoopTensions(
        carrying_foot, carrying_head, return_foot, return_head,
        carrying_head + return_head, carrying_foot + return_foot,
    )  # fmt: skip


def lifted_loop(
    lifting_force: float, head_weight: float, strand_weight: float, payload: float, driven: Driven
) -> LoopTensions:
    """Loop whose upper sprocket is drawn up, by a counterweight or a spring.

    Parameters
    ----------
    lifting_force : float
        Pull of the take-up, upward [N].
    head_weight : float
        Weight that it lifts besides the strands: mount, sprocket, chain on its wrap [N].
    strand_weight : float
        Weight of one empty strand [N].
    payload : float
        Weight of the balls on the carrying strand [N].
    driven : {"head", "tail"}
        Which sprocket is driven, its torque taken by the frame (dimensionless).

    Returns
    -------
    LoopTensions
        A negative foot tension means that the take-up is too weak.
    """
    left_over = lifting_force - head_weight - 2.0 * strand_weight - payload
    return hung_loop(left_over, strand_weight, payload, driven)


def least_hung_weight(payload: float, driven: Driven) -> float:
    """Hung weight at which the carrying strand goes slack at its foot.

    Parameters
    ----------
    payload : float
        Weight of the balls on the carrying strand [N].
    driven : {"head", "tail"}
        Which sprocket is driven (dimensionless).

    Returns
    -------
    float
        Threshold of the hung weight [N]: that of the balls, driven at the tail; nothing,
        driven at the head. Chordal ripple and starting come on top.
    """
    return payload if driven == "tail" else 0.0


def least_lifting_force(
    head_weight: float, strand_weight: float, payload: float, driven: Driven
) -> float:
    """Pull on the upper sprocket at which the carrying strand goes slack at its foot.

    Parameters
    ----------
    head_weight : float
        Weight lifted besides the strands [N].
    strand_weight : float
        Weight of one empty strand [N].
    payload : float
        Weight of the balls on the carrying strand [N].
    driven : {"head", "tail"}
        Which sprocket is driven (dimensionless).

    Returns
    -------
    float
        Threshold of the lifting force [N]; it grows with both strands and the balls.
    """
    return head_weight + 2.0 * strand_weight + payload + least_hung_weight(payload, driven)


def lifting_torque(payload: float, pitch: float, teeth: int) -> LoopTorque:
    """Torque that lifts the balls, on the driven sprocket.

    Parameters
    ----------
    payload : float
        Weight of the balls on the carrying strand [N].
    pitch : float
        Chain pitch [m].
    teeth : int
        Number of teeth of the driven sprocket (dimensionless).

    Returns
    -------
    LoopTorque
        `P R` at most, `P z p / 2π` in the mean: a turn lifts the balls by z pitches.
    """
    radius = pitch / (2.0 * math.sin(math.pi / teeth))
    return LoopTorque(payload * radius, payload * teeth * pitch / (2.0 * math.pi))
