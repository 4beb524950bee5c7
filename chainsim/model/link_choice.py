"""One number of links: what it brings, in figures and in words."""

from __future__ import annotations

import math
from dataclasses import dataclass

SPARE_FOR_ASSEMBLY = 0.02
"""Share of a link by which a loop between fixed axles may be short (dimensionless): a chain is
joined by hand with that much stretch; common practice, no source."""

UNMOVED = 5e-6
"""Travel [m] that is printed as none: it would read 0.00 mm."""


@dataclass(frozen=True)
class LinkChoice:
    """One number of links and what it brings.

    Attributes
    ----------
    links : int
        Number of links (dimensionless).
    surplus : float
        Links more than the taut loop takes on the axles as drawn (dimensionless).
    travel : tuple of (str, float)
        Name of each movable axle and its travel along its way that closes the loop taut [m].
    moves : tuple of (str, float, float)
        Name of each movable axle and by how much it moves to the right and up [m].
    distance : float or None
        Distance of the two axles at which the loop closes taut [m]; None for more than two.
    carriers : int
        Carriers at the wanted spacing (dimensionless); 0 without carriers.
    left_over : int
        Links left over after them (dimensionless): the last gap is longer by that many.
    is_odd : bool
        Whether the count is odd.
    partners : tuple of (str, int)
        Name of each sprocket and the number of links that each of its teeth meets
        (dimensionless).
    fault : str
        Why it cannot be laid; empty where it can.
    """

    links: int
    surplus: float
    travel: tuple[tuple[str, float], ...]
    moves: tuple[tuple[str, float, float], ...]
    distance: float | None
    carriers: int
    left_over: int
    is_odd: bool
    partners: tuple[tuple[str, int], ...]
    fault: str = ""

    @property
    def text(self) -> str:
        """What the count means, in one line."""
        if self.fault:
            return f"{self.links} links: {self.fault}"
        parts = [_travel_text(self), _carrier_text(self), _partner_text(self)]
        if self.is_odd:
            parts.append("odd: a chain of inner and outer links needs an offset link")
        return f"{self.links} links: " + "; ".join(part for part in parts if part)


def _travel_text(choice: LinkChoice) -> str:
    """Say where the axles come to stand."""
    if choice.moves:
        if all(math.hypot(right, up) < UNMOVED for _, right, up in choice.moves):
            return "closes taut with the axles as drawn"
        return ", ".join(_move_text(*move) for move in choice.moves)
    if math.isnan(choice.surplus):
        return "hangs free below its sprocket"
    if abs(choice.surplus) < SPARE_FOR_ASSEMBLY:
        return "closes taut on the axles as drawn"
    spare = "too many" if choice.surplus > 0.0 else "too few"
    text = f"{abs(choice.surplus):.2f} links {spare} for the axles as drawn"
    if choice.distance is not None:
        text += f" (taut at {1e3 * choice.distance:.2f} mm between them)"
    return text


def _move_text(name: str, right: float, up: float) -> str:
    """Say where one axle moves, in the words of the longer part of its way."""
    way = math.hypot(right, up)
    if abs(up) >= abs(right):
        word = "up" if up > 0.0 else "down"
    else:
        word = "to the right" if right > 0.0 else "to the left"
    return f"{name} moves {1e3 * way:.2f} mm {word}"


def _carrier_text(choice: LinkChoice) -> str:
    if not choice.carriers:
        return ""
    if not choice.left_over:
        return f"{choice.carriers} carriers evenly spaced"
    links = "link" if choice.left_over == 1 else "links"
    return f"{choice.carriers} carriers and {choice.left_over} {links} left over"


def _partner_text(choice: LinkChoice) -> str:
    """Say how evenly wear spreads: each tooth meets count/gcd different links."""
    hunting = [name for name, partners in choice.partners if partners == choice.links]
    if len(hunting) == len(choice.partners):
        return "every tooth meets every link"
    return ", ".join(
        f"a tooth of {name} meets only one link in {choice.links // partners}"
        for name, partners in choice.partners
        if partners != choice.links
    )
