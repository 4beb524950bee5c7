"""The points of a plan: every combination or sample of its axes, each with its run id."""

from __future__ import annotations

import hashlib
import itertools
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

from chainsim import __version__
from chainsim.errors import CallError, ChainsimError
from chainsim.study.axes import Choice, RangeAxis
from chainsim.study.plan import Plan
from chainsim.study.plan_checks import BaseScenarios, check_axes
from chainsim.study.sampling import index_design, point_seed, shares

# Raised by one whenever rows gain or change a meaning; old rows are then run again.
RESULTS_FORMAT = 1
MOST_POINTS = 200_000
"""Most points that one driver lists, which takes it about an hour (dimensionless)."""
_ID_DIGITS = 16


@dataclass(frozen=True)
class Point:
    """One run of a study.

    Attributes
    ----------
    index : int
        Number in the plan, from 0 (dimensionless).
    id : str
        Run id: the same for the same resolved scenario, seed and version.
    labels : mapping of str to str
        Choice on each axis, by axis name.
    values : mapping of str to object
        Scenario values to set, by dotted key.
    scenario : str
        Scenario file, or its name for messages.
    text : str
        Text of the scenario before the values are set.
    refusal : str or None
        Why the scenario is refused with these values; None where it is accepted.
    """

    index: int
    id: str
    labels: Mapping[str, str]
    values: Mapping[str, Any]
    scenario: str
    text: str
    refusal: str | None = field(default=None)


def run_id(resolved: str) -> str:
    """Run id of a resolved scenario.

    Parameters
    ----------
    resolved : str
        Every value of the scenario as JSON, its seed included.

    Returns
    -------
    str, 16 hexadecimal digits
        First digits of a SHA-256 over the scenario, the version of the results and the
        version of chainsim.
    """
    whole = json.dumps(
        {"scenario": json.loads(resolved), "results": RESULTS_FORMAT, "chainsim": __version__},
        sort_keys=True,
    )
    return hashlib.sha256(whole.encode()).hexdigest()[:_ID_DIGITS]


def number_of_points(plan: Plan) -> int:
    """How many runs a plan asks for, without listing them.

    Parameters
    ----------
    plan : Plan
        The plan.

    Returns
    -------
    int
        Number of points (dimensionless).
    """
    if plan.sample.kind == "indices":
        return plan.sample.count * (len(plan.axes) + 2)
    if plan.sample.kind != "grid":
        return plan.sample.count
    total = 1
    for axis in plan.axes:
        total *= axis.count if isinstance(axis, RangeAxis) else len(axis.choices or ())
    return total


def points(plan: Plan, part: tuple[int, int] | None = None) -> Iterator[Point]:
    """List the points of a plan, in an order that never changes.

    Parameters
    ----------
    plan : Plan
        The plan.
    part : tuple of int or None
        (i, n): only every n-th point, starting at the i-th (1 to n); None for all.

    Yields
    ------
    Point
        A point whose scenario is accepted, or refused with the reason.

    Raises
    ------
    CallError
        If `part` is not 1 to n of n, or the plan asks for more than `MOST_POINTS` runs.
    ScenarioError
        If a key of the plan is wrong by itself (see `check_axes`).
    """
    first, step = part or (1, 1)
    if not 1 <= first <= step:
        raise CallError(f"part {first}/{step}: needs a number from 1 to {step}")
    if number_of_points(plan) > MOST_POINTS * step:
        raise CallError(
            f"{plan.file}: the plan asks for {number_of_points(plan):,} runs, and a driver takes "
            f"{MOST_POINTS:,} at most; thin the axes, take a [sample], or divide it with --part"
        )
    scenarios = BaseScenarios(plan.folder)
    check_axes(plan, scenarios)
    for index, choices in enumerate(combinations(plan)):
        if index % step == first - 1:
            yield _point(plan, index, choices, scenarios)


def combinations(plan: Plan) -> Iterator[tuple[Choice, ...]]:
    """Choices on all axes, point by point.

    Parameters
    ----------
    plan : Plan
        The plan.

    Yields
    ------
    tuple of Choice, length n_axes
        One choice per axis, in the order of the plan's axes.
    """
    kind, count, n_axes = plan.sample.kind, plan.sample.count, len(plan.axes)
    if kind == "grid":
        yield from itertools.product(*(axis.choices or () for axis in plan.axes))
        return
    seed = plan.seed or 0
    design = index_design if kind == "indices" else None
    rows = design(count, n_axes, seed) if design else shares(kind, count, n_axes, seed)
    for row in rows:
        yield tuple(axis.at(float(share)) for axis, share in zip(plan.axes, row, strict=True))


def _point(plan: Plan, index: int, choices: tuple[Choice, ...], scenarios: BaseScenarios) -> Point:
    values: dict[str, Any] = dict(plan.fixed)
    name = plan.scenario
    for choice in choices:
        values.update(choice.values)
        name = choice.scenario or name
    if plan.seed is not None:
        values["run.seed"] = (
            plan.seed if plan.sample.kind == "grid" else point_seed(plan.seed, index)
        )
    labels = {axis.name: c.label for axis, c in zip(plan.axes, choices, strict=True)}
    base = scenarios[name]
    return make_point(index, labels, values, name, base, base.text)


def make_point(
    index: int,
    labels: Mapping[str, str],
    values: Mapping[str, Any],
    name: str,
    base: Any,
    text: str,
) -> Point:
    """Point from a base scenario and the values to set in it.

    Parameters
    ----------
    index : int
        Number of the point (dimensionless).
    labels : mapping of str to str
        Names for tables.
    values : mapping of str to object
        Values to set, by dotted key.
    name : str
        Name of the scenario for messages.
    base : Scenario
        The scenario before they are set.
    text : str
        Text from which a worker reads that scenario.

    Returns
    -------
    Point
        With its run id; a refused combination keeps the reason.
    """
    refusal = None
    try:
        resolved = base.with_values(values).resolved_json()
    except ChainsimError as error:
        refusal = str(error)
        resolved = json.dumps({"refused": dict(values), "text": text}, default=str)
    return Point(index, run_id(resolved), labels, dict(values), name, text, refusal)
