"""A plan held against its scenarios, before anything runs."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from chainsim.errors import ChainsimError, Problem, ScenarioError
from chainsim.study.axes import Axis, Choice
from chainsim.study.plan import Plan

_NEAR_THE_ENDS = (0.001, 0.999)  # of an axis; a distribution has no ends to try


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
