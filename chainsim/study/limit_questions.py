"""The questions of `chainsim limit`: what varies, over which range, and which way is harder."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

from chainsim.errors import CallError
from chainsim.study.heights import height_of, raised, raising_step
from chainsim.study.limit_question import Question
from chainsim.study.scenario_numbers import TAKEUP_KEYS, number_at, takeup_sprocket
from chainsim.units import to_si

_FIXED_KINDS = ("fixed", "screwed")
_LARGEST_GROWTH = 0.05  # beyond any chain that still runs
_MOST_SURPLUS = 6.0  # pitches of surplus chain at the far end of the scan


def question(scenario: Any, name: str, low: str | None = None, high: str | None = None) -> Question:
    """Question of a name.

    Parameters
    ----------
    scenario : Scenario
        The scenario from which the search starts.
    name : str
        `takeup`, `speed`, `height`, `wear`, `slack`, or any dotted key of a number.
    low, high : str or None
        Ends of the range to scan, with their unit; None takes a range that suits.

    Returns
    -------
    Question
        The question.

    Raises
    ------
    CallError
        If the question does not apply to this lift, or the range is no range.
    """
    asked = _BY_NAME.get(name, lambda lift: _any_key(lift, name))(scenario)
    asked = replace(
        asked,
        low=asked.low if low is None else _end(name, low, asked.unit_kind),
        high=asked.high if high is None else _end(name, high, asked.unit_kind),
    )
    if not asked.low < asked.high or (asked.log and asked.low <= 0):
        raise CallError(f"limit {name}: the range must rise, and start above zero")
    return asked


def _end(name: str, text: str, unit_kind: str) -> float:
    try:
        return to_si(text, unit_kind)
    except ValueError as error:
        raise CallError(f"limit {name}: the range: {error}") from None


def questions(
    scenario: Any, name: str, low: str | None = None, high: str | None = None
) -> list[Question]:
    """Questions that answer a name: one, or for a key one each way.

    Parameters
    ----------
    scenario : Scenario
        The scenario from which the search starts.
    name : str
        `takeup`, `speed`, `height`, `wear`, `slack`, or any dotted key of a number.
    low, high : str or None
        Ends of the range to scan, with their unit; None takes a range that suits.

    Returns
    -------
    list of Question
        Of a key nobody knows which way is harder, so it is asked upward and downward; both
        scans are the same runs.

    Raises
    ------
    CallError
        If the question does not apply to this lift, or the range is no range.
    """
    asked = question(scenario, name, low, high)
    if name in _BY_NAME:
        return [asked]
    return [
        replace(asked, title=f"{name}, upward", harder=+1),
        replace(asked, title=f"{name}, downward", harder=-1),
    ]


def _takeup(scenario: Any) -> Question:
    sprocket = takeup_sprocket(scenario)
    kind = TAKEUP_KEYS[sprocket.mount.kind]
    key = f"sprocket.{sprocket.name}.mount.{kind}"
    present = getattr(sprocket.mount, kind)
    if not present:
        raise CallError(f"limit takeup: {key} is zero, so there is nothing to scan around")
    return Question(
        "takeup", f"take-up: {kind.replace('_', ' ')} at {sprocket.name}",
        "force" if kind == "set_force" else "mass",
        present / 16, present * 4, True, -1, present, lambda value: {key: value},
    )  # fmt: skip


def _speed(scenario: Any) -> Question:
    if scenario.drive.kind != "speed":
        raise CallError(
            "limit speed: a motor finds its own speed; "
            "ask for a key, such as drive.motor.gear_ratio"
        )
    present = scenario.drive.chain_speed
    return Question(
        "speed", "chain speed", "speed", present / 2, present * 8, True, +1, present,
        lambda value: {"drive.chain_speed": value},
    )  # fmt: skip


def _height(scenario: Any) -> Question:
    present, step, n_links = height_of(scenario), *raising_step(scenario)
    least = present - step * math.floor(0.5 * present / step)
    return Question(
        "height", "height from the lowest to the highest axle", "length",
        max(least, present - 2 * step), present + 6 * step * max(1, round(0.5 * present / step)),
        False, +1, present, lambda value: raised(scenario, value - present, n_links), step, least,
    )  # fmt: skip


def _wear(scenario: Any) -> Question:
    present = scenario.chain.growth
    return Question(
        "wear", "growth of the pitch by wear", "fraction", present, present + _LARGEST_GROWTH,
        False, +1, present, lambda value: {"chain.growth": value}, None, present,
    )  # fmt: skip


def _slack(scenario: Any) -> Question:
    if any(sprocket.mount.kind not in _FIXED_KINDS for sprocket in scenario.sprocket):
        raise CallError("limit slack: this lift takes up its own slack; ask for `takeup` instead")
    tail = min(scenario.sprocket, key=lambda sprocket: sprocket.center[1])
    x, y = tail.center
    from chainsim.model.lift import build_lift

    n_links = build_lift(scenario).n_links

    def values(surplus: float) -> dict[str, Any]:
        # The tail comes nearer by half the surplus, since both strands grow slack by it.
        return {f"sprocket.{tail.name}.center": [x, y + 0.5 * surplus], "chain.links": n_links}

    return Question(
        "slack", "surplus chain", "length", 0.0, _MOST_SURPLUS * scenario.chain.pitch,
        False, +1, 0.0, values, None, 0.0,
    )  # fmt: skip


def _any_key(scenario: Any, name: str) -> Question:
    leaf = number_at(scenario, name)
    present = float(leaf.value)
    whole = isinstance(leaf.value, int)
    low, high = (present / 4, present * 4) if present > 0 else (present - 1.0, present + 1.0)
    return Question(
        name, name, leaf.unit_kind or "fraction", max(1.0, low) if whole else low, high,
        present > 0 and not whole, +1, present,
        (lambda value: {name: round(value)}) if whole else (lambda value: {name: value}),
        1.0 if whole else None,
    )  # fmt: skip


_BY_NAME: dict[str, Callable[[Any], Question]] = {
    "takeup": _takeup,
    "speed": _speed,
    "height": _height,
    "wear": _wear,
    "slack": _slack,
}
