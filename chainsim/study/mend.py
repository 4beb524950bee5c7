"""The smallest single change that mends a lift that fails."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from chainsim.errors import CallError
from chainsim.study.bench import Bench, Variant
from chainsim.study.limit_answer import FAILS, Probe
from chainsim.study.scenario_numbers import number_at
from chainsim.units import format_si

# Factors tried on both sides of the present value; counts move by whole steps instead.
_FACTORS = (1.1, 1.25, 1.5, 2.0, 3.0, 5.0)
_STEPS = (1, 2, 3, 4, 6, 8)
_PRECISION = 0.05  # of the change that is found, over the value
_SENSIBLE = (  # what a builder would turn first, where the user marks nothing as free
    "drive.chain_speed",
    "drive.ramp",
    "carriers.pocket.lip",
    "carriers.every",
    "chain.links",
)
_TAKEUP = ("mass", "weight", "set_force")


@dataclass(frozen=True)
class Mend:
    """A single change that turns a failing lift.

    Attributes
    ----------
    key : str
        What is changed.
    present, value : float
        Its value now and the value that no longer fails [SI unit of the key].
    text : str
        The change in words.
    size : float
        Size of the change: the logarithm of the ratio of the values, without its sign
        (dimensionless).
    proof : tuple of Probe
        The run that still fails and the run that no longer does.
    outcome : str
        Outcome of the latter, for the findings that count: `holds` or `close`.
    """

    key: str
    present: float
    value: float
    text: str
    size: float
    proof: tuple[Probe, Probe]
    outcome: str


def mend(
    scenario: Any, bench: Bench, keys: Sequence[str] = (), names: tuple[str, ...] = ()
) -> list[Mend]:
    """Search the smallest single change that turns a failing lift.

    Parameters
    ----------
    scenario : Scenario
        The lift that fails.
    bench : Bench
        Does the runs.
    keys : sequence of str
        Keys that may be changed; empty takes those that the scenario marks as free, else a
        sensible few.
    names : tuple of str
        Findings that count; empty counts all.

    Returns
    -------
    list of Mend
        Every change that helps, the smallest first; empty where no single one does.

    Raises
    ------
    CallError
        If the lift does not fail, or a key is no number that can be changed.
    """
    present = Probe(0.0, bench.rows([Variant("as it is", {})])[0])
    if present.outcome(names) != FAILS:
        raise CallError("this lift does not fail, so there is nothing to mend")
    chosen = tuple(keys) or scenario.study.free or sensible_keys(scenario)
    found = [_mend_by(scenario, bench, key, names, present) for key in chosen]
    return sorted((m for m in found if m is not None), key=lambda m: m.size)


def sensible_keys(scenario: Any) -> tuple[str, ...]:
    """Keys that a builder would turn first.

    Parameters
    ----------
    scenario : Scenario
        The lift.

    Returns
    -------
    tuple of str
        Take-ups first; only keys that this lift has as numbers above zero.
    """
    takeups = [
        f"sprocket.{sprocket.name}.mount.{name}"
        for sprocket in scenario.sprocket
        for name in _TAKEUP
    ]
    return tuple(key for key in (*takeups, *_SENSIBLE) if _is_positive(scenario, key))


def _is_positive(scenario: Any, key: str) -> bool:
    try:
        return number_at(scenario, key).value > 0
    except CallError:
        return False


def _mend_by(
    scenario: Any, bench: Bench, key: str, names: tuple[str, ...], present: Probe
) -> Mend | None:
    leaf = number_at(scenario, key)
    value, whole = leaf.value, isinstance(leaf.value, int)
    before = Probe(float(value), present.row)
    steps: Sequence[float] = _STEPS if whole else _FACTORS
    bad = {+1: before, -1: before}
    for step in steps:
        pair = {way: _moved(value, step, way, whole) for way in (+1, -1)}
        pair = {way: moved for way, moved in pair.items() if moved > 0}
        variants = [Variant(f"{key} = {moved:g}", {key: moved}) for moved in pair.values()]
        rows = bench.rows(variants)
        tried = {
            way: Probe(float(moved), row)
            for (way, moved), row in zip(pair.items(), rows, strict=True)
        }
        good = [way for way, probe in tried.items() if probe.outcome(names) != FAILS]
        if good:
            ends = [_narrowed(bench, key, names, bad[w], tried[w], whole) for w in good]
            return min(
                (_told(leaf, float(value), names, *pair_) for pair_ in ends), key=lambda m: m.size
            )
        bad.update(tried)
    return None


def _moved(value: float, step: float, way: int, whole: bool) -> float:
    return value + way * int(step) if whole else value * step**way


def _narrowed(
    bench: Bench, key: str, names: tuple[str, ...], bad: Probe, good: Probe, whole: bool
) -> tuple[Probe, Probe]:
    """Halve the way between a value that fails and one that does not."""
    while abs(good.value - bad.value) > (1.0 if whole else _PRECISION * good.value):
        middle = 0.5 * (good.value + bad.value)
        middle = round(middle) if whole else middle
        row = bench.rows([Variant(f"{key} = {middle:g}", {key: middle})])[0]
        probe = Probe(float(middle), row)
        if probe.outcome(names) == FAILS:
            bad = probe
        else:
            good = probe
    return bad, good


def _told(leaf: Any, present: float, names: tuple[str, ...], bad: Probe, good: Probe) -> Mend:
    kind = leaf.unit_kind
    before, after = (
        (format_si(present, kind), format_si(good.value, kind))
        if kind
        else (f"{present:g}", f"{good.value:g}")
    )
    return Mend(
        key=leaf.key,
        present=present,
        value=good.value,
        text=f"{leaf.key}: {before} → {after}",
        size=abs(math.log(good.value / present)),
        proof=(bad, good),
        outcome=good.outcome(names),
    )
