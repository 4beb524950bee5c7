"""Variants in order, and why the first one stands first.

Nothing is summed into a score: variants are ordered by their worst outcome, then by the
reserve of their weakest finding, then of the next weakest.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from chainsim.study.points import Point
from chainsim.study.rows import Row, outcome, relative_margin, severity, weakest

_COMPARED = 3  # weakest findings by which two variants are told apart


@dataclass(frozen=True)
class Ranked:
    """A variant in its place.

    Attributes
    ----------
    place : int
        Place, 1 for the best (dimensionless).
    point : Point
        The variant.
    row : Row
        Its result.
    outcome : str
        Its worst outcome.
    weakest : str
        Name of the finding with the least reserve; empty where nothing was judged.
    reserve : float
        Margin of that finding over its scale (dimensionless).
    """

    place: int
    point: Point
    row: Row
    outcome: str
    weakest: str
    reserve: float


def rank(pairs: Sequence[tuple[Point, Row]], names: tuple[str, ...] = ()) -> list[Ranked]:
    """Order variants from best to worst.

    Parameters
    ----------
    pairs : sequence of (Point, Row)
        Variants and their rows.
    names : tuple of str
        Findings that count; empty counts all.

    Returns
    -------
    list of Ranked
        Best first; equals stay in the order of the plan.
    """

    def order(pair: tuple[Point, Row]) -> tuple[float, ...]:
        worst = severity(pair[1], names)
        reserves = [-relative_margin(f) for f in weakest(pair[1], names)[:_COMPARED]]
        return (worst if worst else 3.5, *reserves, *[0.0] * (_COMPARED - len(reserves)))

    ranked = []
    for place, (point, row) in enumerate(sorted(pairs, key=order), 1):
        first = next(iter(weakest(row, names)), None)
        ranked.append(
            Ranked(
                place,
                point,
                row,
                outcome(row, names),
                first["name"] if first else "",
                relative_margin(first) if first else float("inf"),
            )
        )
    return ranked


def reason(ranked: Sequence[Ranked]) -> str:
    """Why the best variant is the best, in a sentence.

    Parameters
    ----------
    ranked : sequence of Ranked
        Variants, best first.

    Returns
    -------
    str
        The sentence.
    """
    if not ranked:
        return "No run was completed, so there is nothing to rank."
    best = ranked[0]
    name = choices_text(best.point.labels)
    if best.outcome == "fails":
        return f"Every variant fails; {name} fails by the least, in {_words(best.weakest)}."
    if not best.weakest:
        return "No finding could be judged in any variant."
    own = (
        f"{name} comes first: it {'is close' if best.outcome == 'close' else 'holds'}, and its "
        f"weakest finding, {_words(best.weakest)}, keeps {best.reserve:.0%} of its scale"
    )
    if len(ranked) == 1:
        return own + "."
    second = ranked[1]
    other = choices_text(second.point.labels)
    if second.outcome != best.outcome:
        return f"{own}; the next one, {other}, {_third(second.outcome)}."
    return f"{own}; the next one, {other}, keeps {second.reserve:.0%} in {_words(second.weakest)}."


def choices_text(labels: Mapping[str, str]) -> str:
    """Choices on axes in words.

    Parameters
    ----------
    labels : mapping of str to str
        Choices by axis name.

    Returns
    -------
    str
        Such as ``drive = tail, chain speed = 0.3 m/s``.
    """
    return ", ".join(
        f"{name.rpartition('.')[2].replace('_', ' ')} = {label}" for name, label in labels.items()
    )


def _words(finding: str) -> str:
    return finding.replace("_", " ")


def _third(word: str) -> str:
    return {"close": "is close", "holds": "holds", "fails": "fails"}.get(word, f"is {word}")
