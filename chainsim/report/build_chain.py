"""Chain and carriers on the build sheet: links, spares, places, the pocket to make."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from chainsim.report.build_case import Case
from chainsim.report.build_line import DRAWN, PRACTICE, STATED, UNKNOWN, Line, Part, place_text
from chainsim.report.build_pocket import pocket_svg, swept_radius
from chainsim.report.build_spares import spare_parts
from chainsim.scenario.schema_balls import Carriers, Pocket

ORIGIN_TEXTS = {
    "given": "stated in the scenario",
    "kind": "from chainsim's own kind of chain",
    "assumed": "assumed",
    "bench": "measured on the bench",
}

SIDE_PLAY = 1e-3
"""Play of a ball across the plane in its pocket [m]; common practice, no source."""

CHAIN_KEYS = (
    ("pitch, pin to pin", "chain.pitch", "m"),
    ("diameter of what lies in the seats, rollers or pins", "chain.roller_diameter", "m"),
    ("mass of one link", "chain.link_mass", "kg"),
    ("stiffness of one link, along the chain", "chain.link_stiffness", "N/m"),
    ("tension a link must bear all day", "chain.allowable_tension", "N"),
    ("radius of the pin in its joint", "chain.joint.pin_radius", "m"),
    ("coefficient of friction in the joint", "chain.joint.friction", "1"),
)
"""Item, dotted key, and unit of each property of the chain."""


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
    for item, key, unit in CHAIN_KEYS:
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
        yield Line(item, origin.typical, unit, STATED, note, low, high, digits=5)


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
    drawings: tuple[tuple[str, str], ...] = ()
    if case.lift.pocket is not None:
        caption = (
            "The pocket in the frame of its link, for a strand that rises: the chain runs upward, "
            "a is upward from the link's lower pin, b is away from the loop."
        )
        drawings = (
            (
                caption,
                pocket_svg(case.lift, case.scenario.chain.roller_diameter, case.is_from_back),
            ),
        )
    return Part(
        "carriers",
        "Carriers and their places",
        "Every carrier is rigid on one link and must neither touch the next link nor reach the "
        "sprocket. Links are counted in the direction of travel from any link; what counts is the "
        "spacing.",
        (*_place_lines(case, carriers), *_pocket_lines(case, carriers.pocket)),
        drawings,
    )


def _place_lines(case: Case, carriers: Carriers) -> Iterator[Line]:
    links = case.lift.carrier_links
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
    note = "any link may be the first, number 0; counted in the direction of travel"
    yield Line("links that hold a carrier", link_list(links), source=DRAWN, note=note)
    yield Line("mass of one carrier, empty", carriers.mass, "kg")


def _pocket_lines(case: Case, pocket: Pocket) -> Iterator[Line]:
    form, balls = case.lift.pocket, case.scenario.balls
    if pocket.outline is None:
        yield Line("length of the floor, back to lip", pocket.floor, "m")
        yield Line("height of the lip over the floor", pocket.lip, "m")
        yield Line("height of the back over the floor", pocket.back, "m")
        yield Line("tilt of the floor, lip end up", pocket.tilt, "rad")
        yield Line("line of the pins to the back of the pocket", pocket.offset, "m")
    yield Line("thickness of the material", pocket.wall, "m")
    if form is None or balls is None:
        return
    yield from _width_lines(case, balls.diameter, pocket.friction)
    for number, (a, b) in enumerate(form.outline, 1):
        yield Line(
            f"inner corner {number}, (a, b)",
            place_text(a, b, 2),
            source=DRAWN,
            note="inner surface, on the side of the ball" if number == 1 else "",
        )
    yield Line(
        "center of a ball at rest, (a, b)",
        place_text(*form.seat, 2),
        source=DRAWN,
    )
    yield Line("play of the ball along the floor", form.play, "m", DRAWN)
    for wheel in case.lift.wheels:
        item = f"radius that carriers sweep round {wheel.name}"
        loaded = 1e3 * swept_radius(case.lift, wheel, loaded=True)
        note = f"empty; {loaded:.1f} mm with a ball; everything that stands keeps outside it"
        yield Line(item, swept_radius(case.lift, wheel), "m", DRAWN, note)


def _width_lines(case: Case, ball: float, friction: float) -> Iterator[Line]:
    """What the planar model leaves to the workshop."""
    note = (
        f"ball and {1e3 * SIDE_PLAY:g} mm; cheeks or a hollow floor keep it in; {UNKNOWN}: planar"
    )
    yield Line(
        "inside width of the pocket, across the plane", ball + SIDE_PLAY, "m", PRACTICE, note
    )
    note = "of a ball on the carrier; smooth hard plastic or metal is within it"
    origin = case.scenario.origins().get("carriers.pocket.friction")
    low, high = (origin.low, origin.high) if origin is not None else (None, None)
    is_open = low == high
    yield Line(
        "coefficient of friction, calculated with",
        friction,
        "1",
        STATED,
        note,
        None if is_open else low,
        None if is_open else high,
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
