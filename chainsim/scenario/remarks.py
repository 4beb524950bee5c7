"""Cautions about values that are legal but look unlikely."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from chainsim.errors import Remark
from chainsim.scenario.quantity import PLAIN_NUMBER, Quantity
from chainsim.scenario.schema import Document
from chainsim.scenario.table import Leaf, hints, leaves
from chainsim.units import format_si


def remarks_on(document: Document) -> tuple[Remark, ...]:
    """Find what a careful reader would ask about.

    Parameters
    ----------
    document : Document
        A completed scenario.

    Returns
    -------
    tuple of Remark
        In the order of the schema, then what concerns several values.
    """
    unusual = [remark for leaf in leaves(document) for remark in _on_value(leaf)]
    return (*unusual, *(remark for find in _REMARKS for remark in find(document)))


def _on_value(leaf: Leaf) -> Iterator[Remark]:
    """Compare one number with its usual range."""
    usual = hints(leaf.field).get("usual")
    if usual is None or isinstance(leaf.value, bool) or not isinstance(leaf.value, (int, float)):
        return
    kind = leaf.unit_kind or PLAIN_NUMBER
    low, high = (Quantity(kind).read(end) for end in usual)
    if not low <= leaf.value <= high:
        value = _text(leaf.value, leaf.unit_kind)
        span = f"{usual[0]} to {usual[1]}"
        yield Remark(leaf.key, f"{value} is unusual (usual: {span}); is the unit right?")


def _text(value: float, unit_kind: str | None) -> str:
    if unit_kind is None or unit_kind == PLAIN_NUMBER:
        return f"{value:g}"
    return format_si(value, unit_kind)


def _on_pocket(document: Document) -> Iterator[Remark]:
    carriers, balls = document.carriers, document.balls
    if carriers is None or balls is None or carriers.pocket.outline is not None:
        return
    pocket, path = carriers.pocket, "carriers.pocket"
    radius = balls.diameter / 2.0
    if pocket.lip >= radius:
        yield Remark(
            f"{path}.lip",
            "the lip is as high as the ball's center: the ball may not roll out at the head",
        )
    if pocket.lip == 0.0 and pocket.tilt <= 0.0:
        yield Remark(f"{path}.lip", "neither lip nor tilt holds the ball in its pocket")
    if pocket.floor > 1.6 * balls.diameter:
        yield Remark(
            f"{path}.floor",
            "the floor is much wider than the ball, which will roll to and fro on it",
        )
    if pocket.back < 0.5 * radius:
        yield Remark(f"{path}.back", "the back is so low that the ball may fall inward behind it")
    spacing = carriers.every * document.chain.pitch * (balls.spacing or 1)
    if spacing < balls.diameter + pocket.wall:
        yield Remark(
            "carriers.every",
            f"carriers stand {format_si(spacing, 'length')} apart, less than ball and floor need: "
            "balls will touch",
        )


def _on_balls(document: Document) -> Iterator[Remark]:
    carriers, links = document.carriers, document.chain.links
    if (
        carriers is not None
        and links is not None
        and carriers.at is None
        and links % carriers.every
    ):
        yield Remark(
            "chain.links",
            f"{links} links are no multiple of {carriers.every}: one spacing of carriers is odd",
        )
    balls, drive = document.balls, document.drive
    if balls is None or carriers is None or balls.feed.rate is None or drive.chain_speed is None:
        return
    passing = drive.chain_speed / (carriers.every * document.chain.pitch * (balls.spacing or 1))
    if passing < balls.feed.rate:
        yield Remark(
            "balls.feed.rate",
            f"only {passing:.3g} pockets come by in a second, {balls.feed.rate:.3g} balls arrive: "
            "balls will wait",
        )


def _on_drive(document: Document) -> Iterator[Remark]:
    drive = document.drive
    if drive.kind == "speed" and drive.motor is not None:
        yield Remark("drive.motor", 'not used with kind = "speed"')
    for sprocket in document.sprocket:
        mount = sprocket.mount
        hangs = mount.kind == "hung" and sprocket.name == drive.sprocket
        if hangs and drive.reaction == "mount" and mount.center_of_mass == (0.0, 0.0):
            yield Remark(
                f"sprocket.{sprocket.name}.mount.center_of_mass",
                "the unit hangs from its own axle, so its weight cannot balance the drive's torque",
            )
        if mount.stops is not None and not mount.stops[0] <= 0.0 <= mount.stops[1]:
            yield Remark(
                f"sprocket.{sprocket.name}.mount.stops",
                "the place on the drawing lies beyond a stop",
            )
        if sprocket.pitch is not None and abs(sprocket.pitch / document.chain.pitch - 1.0) > 0.03:
            yield Remark(
                f"sprocket.{sprocket.name}.pitch", "differs by more than 3 % from the chain's pitch"
            )


def _on_run(document: Document) -> Iterator[Remark]:
    run = document.run
    if run.duration is None:
        return
    if run.settle >= run.duration:
        yield Remark("run.settle", "the run ends before it counts as steady: little can be judged")
    for i, event in enumerate(document.event):
        if event.at >= run.duration:
            yield Remark(f"event.{i}.at", "lies after the end of the run")


_REMARKS: tuple[Callable[[Document], Iterator[Remark]], ...] = (
    _on_pocket,
    _on_balls,
    _on_drive,
    _on_run,
)
