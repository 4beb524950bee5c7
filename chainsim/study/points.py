"""The points of a plan: every combination or sample of its axes, each with its run id."""

from __future__ import annotations

import hashlib
import itertools
import json
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from chainsim import __version__
from chainsim.errors import CallError, ChainsimError, Problem, ScenarioError
from chainsim.study.axes import Axis, Choice, RangeAxis
from chainsim.study.plan import Plan
from chainsim.study.sampling import index_design, point_seed, shares

# Raised by one whenever rows gain or change a meaning; old rows are then run again.
RESULTS_FORMAT = 1
MOST_POINTS = 200_000
"""Most points that one driver lists, which takes it about an hour (dimensionless)."""
_ID_DIGITS = 16
_NEAR_THE_ENDS = (0.001, 0.999)  # of an axis; a distribution has no ends to try


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


class BaseScenarios:
    """Scenario files of a plan, each read once.

    Parameters
    ----------
    folder : Path
        Folder from which their paths are taken.
    """

    def __init__(self, folder: Path) -> None:
        self._folder = folder
        self._read: dict[str, Any] = {}

    def __getitem__(self, name: str) -> Any:
        """Scenario of a file, before anything is set."""
        if name not in self._read:
            from chainsim.scenario import read_scenario

            self._read[name] = read_scenario(self._folder / name)
        return self._read[name]


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


def check_axes(plan: Plan, scenarios: BaseScenarios) -> None:
    """Refuse a plan of which an axis can never work, before anything runs.

    Parameters
    ----------
    plan : Plan
        The plan.
    scenarios : BaseScenarios
        Its scenario files.

    Raises
    ------
    ScenarioError
        If an axis taken alone is refused at every one of its tried choices (its first and
        its last): a key that does not exist, a wrong unit, an impossible value.
    """
    _ = scenarios[plan.scenario]  # a scenario that is wrong by itself is no fault of an axis
    problems = _missing_units(plan, scenarios)
    for axis in plan.axes:
        refusals = [
            refusal
            for choice in _ends(axis)
            if (refusal := _refusal(plan, choice, scenarios)) is not None
        ]
        if len(refusals) == len(_ends(axis)):
            problems += _relocated(plan, axis, refusals[0])
    if problems:
        raise ScenarioError(problems)


def _missing_units(plan: Plan, scenarios: BaseScenarios) -> list[Problem]:
    """Bare numbers where a scenario file would need a unit; a plan is no less strict."""
    from chainsim.scenario.table import kind_needs_unit, leaves

    kinds = {leaf.key: leaf.unit_kind for leaf in leaves(scenarios[plan.scenario])}
    stated: list[tuple[str | None, str, Any]] = [
        (None, key, value) for key, value in plan.fixed.items()
    ]
    for axis in plan.axes:
        stated += [(axis.name, k, v) for choice in _ends(axis) for k, v in choice.values.items()]
    lacking = {
        (name, key): value
        for name, key, value in stated
        if kind_needs_unit(kinds.get(key)) and isinstance(value, int | float)
    }
    return [
        Problem(
            plan.file,
            plan.lines.get(name or ""),
            key,
            repr(value),
            f"needs a {kinds[key]} with its unit",
        )
        for (name, key), value in lacking.items()
    ]


def _ends(axis: Axis) -> list[Choice]:
    return [axis.at(share) for share in _NEAR_THE_ENDS]


def _refusal(plan: Plan, choice: Choice, scenarios: BaseScenarios) -> ChainsimError | None:
    try:
        base = scenarios[choice.scenario or plan.scenario]
        base.with_values({**plan.fixed, **choice.values})
    except ChainsimError as error:
        return error
    return None


def _relocated(plan: Plan, axis: Axis, error: ChainsimError) -> list[Problem]:
    """Problems of a scenario, told at the axis of the plan that causes them."""
    line = plan.lines.get(axis.name)
    if isinstance(error, ScenarioError):
        return [Problem(plan.file, line, p.key, p.found, p.rule) for p in error.problems]
    return [Problem(plan.file, line, axis.name, "", str(error))]


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
