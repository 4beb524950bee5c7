"""The chain and its carriers on the build sheet: links, spares, places, the pocket to make."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from chainsim.report.build_case import Case
from chainsim.report.build_line import DRAWN, PRACTICE, Line, Part
from chainsim.report.build_pocket import pocket_svg, swept_radius
from chainsim.report.build_spares import spare_parts
from chainsim.units import format_si

ORIGIN_TEXTS = {
    "given": "stated in the scenario",
    "kind": "from chainsim's own kind of chain",
    "assumed": "assumed",
    "bench": "measured on the bench",
}

CHAIN_KEYS = (
    ("pitch, pin to pin", "chain.pitch", "m", "length"),
    (
        "diameter of the rollers or pins that touch the teeth",
        "chain.roller_diameter",
        "m",
        "length",
    ),
    ("mass of one link", "chain.link_mass", "kg", "mass"),
    ("stiffness of one link, along the chain", "chain.link_stiffness", "N/m", "stiffness"),
    ("tension a link must bear all day", "chain.allowable_tension", "N", "force"),
    ("radius of the pin in its joint", "chain.joint.pin_radius", "m", "length"),
    ("coefficient of friction in the joint", "chain.joint.friction", "1", ""),
)
"""Item, dotted key, unit on the sheet, kind of quantity of each property of the chain."""


def chain_part(case: Case) -> Part:
    """Write what the chain is and how many links it has.

    Parameters
    ----------
    case : Case
        The lift.
    """
    chain = case.scenario.chain
    kind = (
        f" The kind {chain.kind!r} is chainsim's own name for a class of chain, not a product: any "
        "chain that meets these figures will do, and one that does not asks for a new simulation."
        if chain.kind
        else ""
    )
    return Part(
        "chain",
        "Chain",
        f"One closed loop, all links alike.{kind}",
        (*_count_lines(case), *_property_lines(case)),
    )


def _count_lines(case: Case) -> Iterator[Line]:
    n = case.lift.n_links
    every = case.scenario.carriers.every if case.scenario.carriers is not None else 1
    spares = spare_parts(n, every)
    yield Line("links in the loop", n, "1", DRAWN, "count them twice before closing the loop")
    yield Line("spare links", spares, "1", PRACTICE, f"order {n + spares} in all")
    yield Line(
        "length of the loop, new",
        case.loop,
        "m",
        DRAWN,
        "measured taut, off the lift, between the pins that will be joined; links × pitch",
        digits=5,
    )
    mass = n * case.scenario.chain.link_mass
    yield Line("mass of the bare loop", mass, "kg", DRAWN, "a quick check of the count: weigh it")
    if n % 2:
        yield Line(
            "odd number of links", "yes", note="alternating inner and outer links cannot close it"
        )


def _property_lines(case: Case) -> Iterator[Line]:
    for item, key, unit, kind in CHAIN_KEYS:
        origin = case.scenario.origins().get(key)
        if origin is None or origin.typical is None:
            continue
        note, low, high = ORIGIN_TEXTS[origin.source], origin.low, origin.high
        is_open = low is None or high is None or low == high
        if key == "chain.allowable_tension":
            low, high = origin.typical, None
            note += "; a stronger chain is as good"
        elif is_open:
            low = high = None
        else:
            note += "; chains of this kind lie within the band"
        yield Line(item, origin.typical, unit, "scenario", note, low, high)


def carriers_part(case: Case) -> Part | None:
    """Write the carriers, their links, and the pocket to make.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    Part or None
        None for a lift without carriers.
    """
    carriers = case.scenario.carriers
    if carriers is None:
        return None
    drawings = ()
    if case.lift.pocket is not None:
        caption = (
            "The pocket in the frame of its link, for a strand that rises: the chain runs upward, "
            "a is upward from the link's lower pin, b is away from the loop."
        )
        drawings = ((caption, pocket_svg(case.lift, case.is_from_back)),)
    return Part(
        "carriers",
        "Carriers and their places",
        "Every carrier is rigid on one link and must neither touch the next link nor reach the "
        "sprocket. Links are counted in the direction of travel from any link; what counts is the "
        "spacing.",
        (*_place_lines(case), *_pocket_lines(case)),
        drawings,
    )


def _place_lines(case: Case) -> Iterator[Line]:
    carriers, links = case.scenario.carriers, case.lift.carrier_links
    count, spares = len(links), spare_parts(len(links))
    yield Line("carriers", count, "1", DRAWN)
    yield Line("spare carriers", spares, "1", PRACTICE, f"make {count + spares} in all")
    if carriers.at is None:
        yield Line("a carrier on every", f"{_ordinal(carriers.every)} link")
        pitch = case.scenario.chain.pitch
        yield Line("spacing of the carriers", carriers.every * pitch, "m", DRAWN)
        left_over = case.lift.n_links - count * carriers.every
        if left_over:
            yield Line("links left over in the last gap", left_over, "1", DRAWN)
    yield Line("links that hold a carrier", link_list(links), source=DRAWN, note="first link is 0")
    yield Line("mass of one carrier, empty", carriers.mass, "kg")


def _pocket_lines(case: Case) -> Iterator[Line]:
    pocket, form = case.scenario.carriers.pocket, case.lift.pocket
    if pocket.outline is None:
        yield Line("length of the floor, back to lip", pocket.floor, "m")
        yield Line("height of the lip over the floor", pocket.lip, "m")
        yield Line("height of the back over the floor", pocket.back, "m")
        yield Line("tilt of the floor, lip end up", pocket.tilt, "rad")
        yield Line("line of the pins to the back of the pocket", pocket.offset, "m")
    yield Line("thickness of the material", pocket.wall, "m")
    if form is None:
        return
    for number, (a, b) in enumerate(form.outline, 1):
        yield Line(
            f"inner corner {number} of the pocket: a, b",
            f"{1e3 * a:.2f}, {1e3 * b:.2f} mm",
            source=DRAWN,
            note="inner surface, on the side of the ball" if number == 1 else "",
        )
    yield Line(
        "center of a ball at rest: a, b",
        f"{1e3 * form.seat[0]:.2f}, {1e3 * form.seat[1]:.2f} mm",
        source=DRAWN,
    )
    yield Line("play of the ball along the floor", form.play, "m", DRAWN)
    for wheel in case.lift.wheels:
        yield Line(
            f"radius swept by carriers round {wheel.name}",
            swept_radius(case.lift, wheel),
            "m",
            DRAWN,
            "keep everything that stands outside it, balls not counted",
        )


def link_list(links: np.ndarray) -> str:
    """Write link numbers, an even row by its ends.

    Parameters
    ----------
    links : ndarray of int, shape (n_carriers,)
        Numbers of links (dimensionless).

    Returns
    -------
    str
        Such as ``"0, 4, 8, … 108"``.
    """
    steps = set(np.diff(links))
    if len(links) > 6 and len(steps) == 1:
        return f"{links[0]}, {links[1]}, {links[2]}, … {links[-1]}"
    return ", ".join(str(link) for link in links)


def _ordinal(number: int) -> str:
    endings = {1: "st", 2: "nd", 3: "rd"}
    ending = "th" if 10 <= number % 100 <= 20 else endings.get(number % 10, "th")
    return f"{number}{ending}"


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
        Line("way of feeding", balls.feed.kind),
    ]
    if balls.feed.rate is not None:
        lines.append(Line("balls fed", balls.feed.rate, "s-1", note=_jitter_text(balls.feed)))
    return Part(
        "balls",
        "Balls, feed and discharge",
        "Places are those of the drawing: right and up from its origin.",
        (*lines, *_feed_lines(case), *_discharge_lines(case)),
    )


def _jitter_text(feed) -> str:
    return f"each up to {format_si(feed.jitter, 'time')} early or late" if feed.jitter else ""


def _feed_lines(case: Case) -> Iterator[Line]:
    feed, lift = case.scenario.balls.feed, case.lift
    if feed.at is not None:
        x, y = case.across(feed.at[0]), feed.at[1]
        yield Line(f"{feed.kind}: mouth or lower end", _place(x, y))
    if feed.kind == "trough":
        yield Line("slope of the trough, down toward the chain", feed.slope, "rad")
    for strand in lift.strands:
        if not strand.carrying:
            continue
        for what, height in (("is set down", lift.load_height), ("leaves", lift.unload_height)):
            place = _ball_at(case, strand.start, height)
            yield Line(
                f"center of a ball where it {what}, strand {strand.name}",
                _place(case.across(place[0]), place[1]),
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
    return path.start[start] + (height - foot) / rise * along + lift.pocket.seat[1] * outward


def _discharge_lines(case: Case) -> Iterator[Line]:
    mouth = case.scenario.balls.discharge
    if mouth is None:
        yield Line("discharge chute", "not stated", note="simulated as one that suits the speed")
        return
    x, y = case.across(mouth.at[0]), mouth.at[1]
    yield Line("lower edge of the discharge mouth", _place(x, y))
    yield Line("opening, straight up from it", mouth.mouth, "m")
    yield Line("slope of the chute, down away from the lift", mouth.slope, "rad")
    lip = f"{math.degrees(mouth.slope):.1f}°"
    yield Line("floor of the chute", f"starts at the lower edge and falls at {lip}", source=DRAWN)


def _place(x: float, y: float) -> str:
    return f"{1e3 * x + 0.0:.1f}, {1e3 * y + 0.0:.1f} mm"
