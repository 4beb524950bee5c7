"""Lines of the sizing sheet about balls, chain and frequencies."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import NamedTuple

import numpy as np

from chainsim import closed_forms as cf
from chainsim.analysis.free_body import ball_spacing
from chainsim.analysis.sized import (
    Sized,
    bounce_frequency,
    threshold_mass,
)
from chainsim.errors import CallError
from chainsim.model.wheels import down_of
from chainsim.units import format_si

SHALLOW = math.radians(5.0)
"""A strand that leans more than this off the plumb line [rad] is given a sag."""


class Row(NamedTuple):
    """One line of the sheet.

    Attributes
    ----------
    name : str
        What is measured.
    value : float
        In the SI unit of its kind; NaN where it does not exist.
    kind : str
        Kind of quantity, a key of `chainsim.units.UNITS`; empty for a count (dimensionless).
    source : str
        Formula or law it comes from.
    note : str
        What it means or leaves out.
    """

    name: str
    value: float
    kind: str
    source: str
    note: str = ""

    @property
    def text(self) -> str:
        """The value with a readable unit."""
        if math.isnan(self.value):
            return "–"
        return format_si(self.value, self.kind) if self.kind else f"{self.value:.4g}"


def rate_rows(sized: Sized) -> Iterator[Row]:
    """Yield ball rates and what is aboard.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    scenario, pitch = sized.scenario, sized.path.pitch
    carriers, balls = scenario.carriers, scenario.balls
    if carriers is None or balls is None:
        return
    places = carriers.every * (balls.spacing or 1) * pitch
    yield Row(
        "pocket rate",
        cf.pocket_rate(sized.speed, places),
        "rate",
        "v / spacing",
        f"one place every {format_si(places, 'length')}",
    )
    demand = scenario.limits.ball_rate or balls.feed.rate
    if demand is not None:
        yield Row(
            "chain speed for the demand",
            demand * places,
            "speed",
            "rate × spacing",
            f"{format_si(demand, 'rate')} wanted",
        )
    yield Row(
        "balls on the carrying strand",
        float(sized.load.balls.sum()),
        "",
        "loaded length / spacing",
        f"one every {format_si(ball_spacing(scenario, pitch), 'length')}",
    )
    yield Row("their weight", sized.payload, "force", "n m g")
    try:
        holds = cf.lip_acceleration(
            0.5 * balls.diameter,
            carriers.pocket.lip,
            scenario.frame.gravity,
            floor_tilt=carriers.pocket.tilt,
        )
    except CallError:
        return
    yield Row(
        "sideways acceleration the seat holds",
        holds,
        "acceleration",
        "g tan(θ + tilt)",
        "slow push, ball against the lip",
    )


def chordal_rows(sized: Sized) -> Iterator[Row]:
    """Yield tooth rate, speed variation and what an engaging pin does.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    pitch = sized.path.pitch
    yield Row("tooth rate", cf.tooth_rate(sized.speed, pitch), "frequency", "v / p")
    for wheel in sized.path.wheels:
        if wheel.teeth:
            rise = cf.polygon_rise(pitch, wheel.teeth)
            yield Row(
                f"speed variation from {wheel.name}",
                cf.speed_variation(wheel.teeth),
                "fraction",
                "(π/z)(1/sin(π/z) − 1/tan(π/z))",
                f"{wheel.teeth} teeth; strand to and fro by {format_si(rise, 'length')}",
            )
    yield Row("speed of the driven sprocket", sized.rate, "angular_speed", "2π v / (z p)")
    kick = cf.engagement_kick(sized.rate, pitch)
    yield Row("speed of a pin meeting its seat", kick.relative_speed, "speed", "ω p")
    yield Row(
        "jump of acceleration along the strand",
        kick.acceleration_jump,
        "acceleration",
        "ω² p",
        "rigid links; stretch softens it",
    )


def tension_rows(sized: Sized) -> Iterator[Row]:
    """Yield tensions at the ends of every strand, the slack threshold and the links' margin.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    if len(sized.path.wheels) == 1:
        return
    running, names = sized.running, sized.path.names
    source = f"free body, level from {running.level_from}"
    for k, name in enumerate(names):
        leaves, meets = name.split("-")
        note = f"empty {format_si(sized.empty.start[k], 'force')}"
        yield Row(
            f"tension of {name} leaving {leaves}",
            float(running.start[k]),
            "force",
            source,
            _slack_note(running.start[k], note),
        )
        note = f"empty {format_si(sized.empty.end[k], 'force')}"
        yield Row(
            f"tension of {name} meeting {meets}",
            float(running.end[k]),
            "force",
            source,
            _slack_note(running.end[k], note),
        )
    yield from _threshold_rows(sized)
    yield Row("pull of balls on the drive", running.driven_pull, "force", "free body")
    yield Row(
        "greatest tension over the allowable",
        running.most / sized.scenario.chain.allowable_tension,
        "fraction",
        "steady running",
        "starts, jams and teeth come on top",
    )
    yield from _sag_rows(sized)


def _slack_note(tension: float, note: str) -> str:
    return f"SLACK; {note}" if tension < 0.0 else note


def _threshold_rows(sized: Sized) -> Iterator[Row]:
    threshold = threshold_mass(sized)
    if math.isnan(threshold):
        return
    k = [i for i, wheel in enumerate(sized.path.wheels) if wheel.movable is not None][-1]
    mass = sized.scenario.sprocket[k].mount.mass
    name = sized.path.wheels[k].name
    yield Row(
        "hung mass at which a strand goes slack",
        threshold,
        "mass",
        "free body: least tension zero",
        f"{format_si(mass, 'mass')} hang at {name}",
    )


def _sag_rows(sized: Sized) -> Iterator[Row]:
    """Yield the sag of strands that lean."""
    across = np.array([-down_of(sized.scenario)[1], down_of(sized.scenario)[0]])
    for k, name in enumerate(sized.path.names):
        lean = abs(float(sized.path.direction[k] @ across))
        tension = 0.5 * float(sized.empty.start[k] + sized.empty.end[k])
        if lean > math.sin(SHALLOW) and tension > 0.0:
            sag = sized.load.chain_weight * lean * sized.path.length[k] ** 2 / (8.0 * tension)
            yield Row(f"sag of {name}, empty", sag, "length", "w L² / (8 T), shallow parabola")


def frequency_rows(sized: Sized) -> Iterator[Row]:
    """Yield the frequencies of strands and take-up beside the tooth rate.

    Parameters
    ----------
    sized : Sized
        The lift.
    """
    gravity, path = sized.scenario.frame.gravity, sized.path
    teeth = cf.tooth_rate(sized.speed, path.pitch)
    for k, name in enumerate(path.names):
        tension = 0.5 * float(sized.running.start[k] + sized.running.end[k])
        if math.isnan(path.length[k]) or tension <= 0.0:
            continue
        balls = sized.load.balls[k] * sized.load.ball_weight / path.length[k]
        line = (sized.load.chain_weight + balls) / gravity
        try:
            value = cf.moving_strand_frequency(path.length[k], tension, line, sized.speed, 1)
        except CallError:
            continue
        yield Row(
            f"first frequency of {name}",
            value,
            "frequency",
            "c (1 − v²/c²) / (2 L)",
            f"{value / teeth:.2f} of the tooth rate; mean tension",
        )
    bounce = bounce_frequency(sized)
    if not math.isnan(bounce):
        yield Row(
            "take-up bouncing on the chain",
            bounce,
            "frequency",
            "sqrt(2 k / n / (M + strands/3)) / 2π",
            f"{bounce / teeth:.2f} of the tooth rate; stiff seats, so the true one is lower",
        )
