"""Balls on the build sheet: where they are set down on the chain, and where they leave it."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from chainsim.report.build_case import Case
from chainsim.report.build_line import DRAWN, Line, Part, place_text
from chainsim.report.build_pocket import pocket_of
from chainsim.scenario.schema_balls import Discharge, Feed
from chainsim.units import format_si

FEEDS = {
    "set down": "each ball is set down at rest in the next free pocket that passes",
    "chute": "each ball is let go from the chute, whether a pocket is there or not",
    "trough": "balls lie in a sloping trough, and the pockets scoop them",
    "every pocket": "every empty pocket that passes is filled",
}
"""What each way of feeding means for the feeder."""


def balls_part(case: Case) -> Part | None:
    """Write the balls, where they are set down and where they leave.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    Part or None
        None for a lift without balls.
    """
    balls = case.scenario.balls
    if balls is None or case.lift.pocket is None:
        return None
    lines = [
        Line("diameter of a ball", balls.diameter, "m"),
        Line("mass of a ball", balls.mass, "kg", note=balls.material or ""),
        Line("way of feeding", balls.feed.kind, note=FEEDS[balls.feed.kind]),
    ]
    if balls.feed.rate is not None:
        lines.append(Line("balls fed", balls.feed.rate, "s-1", note=_jitter_text(balls.feed)))
    return Part(
        "balls",
        "Balls, feed and discharge",
        "Places are those of the drawing: right and up from its origin.",
        (*lines, *_feed_lines(case, balls.feed), *_discharge_lines(case, balls.discharge)),
    )


def _jitter_text(feed: Feed) -> str:
    return f"each up to {format_si(feed.jitter, 'time')} early or late" if feed.jitter else ""


def _feed_lines(case: Case, feed: Feed) -> Iterator[Line]:
    lift = case.lift
    if feed.at is not None:
        x, y = case.across(feed.at[0]), feed.at[1]
        yield Line(f"{feed.kind}: mouth or lower end", place_text(x, y))
    if feed.kind == "trough":
        yield Line("slope of the trough, down toward the chain", feed.slope, "rad")
    for strand in lift.strands:
        if not strand.carrying:
            continue
        for what, height in (("is set down", lift.load_height), ("leaves", lift.unload_height)):
            place = _ball_at(case, strand.start, height)
            yield Line(
                f"center of a ball where it {what}, strand {strand.name}",
                place_text(case.across(place[0]), place[1]),
                source=DRAWN,
                note="in a pocket that passes this height, at rest in its seat",
            )


def _ball_at(case: Case, start: int, height: float) -> np.ndarray:
    """Return the center of a seated ball on a strand as laid, its link's middle at a height [m]."""
    sized, lift = case.sized, case.lift
    path = sized.path if sized is not None else lift.route
    along = path.direction[start]
    outward = np.array([along[1], -along[0]])
    rise = float(along @ np.asarray(lift.up))
    foot = float(path.start[start] @ np.asarray(lift.up))
    return path.start[start] + (height - foot) / rise * along + pocket_of(lift).seat[1] * outward


def _discharge_lines(case: Case, mouth: Discharge | None) -> Iterator[Line]:
    if mouth is None:
        yield Line("discharge chute", "not stated", note="simulated as one that suits the speed")
        return
    x, y = case.across(mouth.at[0]), mouth.at[1]
    yield Line("lower edge of the discharge mouth", place_text(x, y))
    yield Line("opening, straight up from it", mouth.mouth, "m")
    yield Line("slope of the chute, down away from the lift", mouth.slope, "rad")
    yield Line("floor of the chute", "starts at the lower edge of the mouth", source=DRAWN)
