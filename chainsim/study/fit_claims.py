"""What a fit may claim: a value is known, or it is said why the readings cannot tell it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np

from chainsim.study.fit_benches import Bench
from chainsim.study.fit_parameters import Parameter
from chainsim.study.fit_solve import Solution

TOLD_APART = 0.9
"""Correlation from which two unknown parameters count as not told apart [dimensionless]."""

MATTERS = 0.7
"""Least correlation that is reported [dimensionless]."""

FOLLOWED = 0.3
"""Largest share of the readings' variance that the model may leave [dimensionless]."""

PATTERN = 0.5
"""Correlation of neighboring deviations from which they show a pattern [dimensionless]."""

BOUND_REACHED = 1e-3
"""Distance from a bound that counts as being at it [dimensionless]."""


class Fitted(NamedTuple):
    """One parameter and what the bench says of it.

    Attributes
    ----------
    key, name, unit_kind : str
        Dotted key, its name in words, and its unit kind.
    value, low, high : float or None
        Value and confidence interval [SI]; None where nothing is claimed.
    why : str
        Why nothing is claimed; empty for a claimed value.
    files : tuple of str
        Files that it rests on.
    """

    key: str
    name: str
    unit_kind: str
    value: float | None
    low: float | None
    high: float | None
    why: str
    files: tuple[str, ...]

    @property
    def is_claimed(self) -> bool:
        """Whether the readings tell its value."""
        return self.value is not None


class Pair(NamedTuple):
    """Two parameters whose errors go together.

    Attributes
    ----------
    first, second : str
        Dotted keys.
    correlation : float
        Of their errors (dimensionless).
    """

    first: str
    second: str
    correlation: float


def pairs_of(parameters: Sequence[Parameter], solution: Solution) -> tuple[Pair, ...]:
    """List the correlations that matter.

    Parameters
    ----------
    parameters : sequence of Parameter
    solution : Solution
    """
    correlation = _correlation(solution)
    return tuple(
        Pair(parameters[i].key, parameters[j].key, float(correlation[i, j]))
        for i in range(len(parameters))
        for j in range(i + 1, len(parameters))
        if abs(correlation[i, j]) >= MATTERS
    )


def _correlation(solution: Solution) -> np.ndarray:
    size = np.sqrt(np.diagonal(solution.spread))
    return solution.spread / np.outer(size, size)


def claims_of(
    scenario: Any, parameters: Sequence[Parameter], benches: Sequence[Bench], solution: Solution
) -> tuple[Fitted, ...]:
    """Say for every parameter what it is, or why that can't be known.

    Parameters
    ----------
    scenario : Scenario
    parameters : sequence of Parameter
        In the order of the variables.
    benches : sequence of Bench
    solution : Solution
    """
    lost = _not_followed(benches, solution)
    found = []
    for i, parameter in enumerate(parameters):
        speaking = [bench for bench in benches if parameter.key in bench.keys]
        files = tuple(bench.measurement.file for bench in speaking)
        middle, half = float(solution.variables[i]), float(solution.half[i])
        broken = [Path(file).name for file in files if file in lost]
        at_bound = _at_bound(parameter, middle, scenario)
        if broken:
            why = f"the model does not follow the readings of {', '.join(broken)}"
        elif at_bound:
            why = f"the fit runs into its bound of {at_bound}"
        elif not parameter.is_known(middle, half):
            why = _why_unknown(parameters, solution, i)
        else:
            ends = [middle, middle - half, middle + half]
            value, low, high = (_outside(parameter, end, scenario) for end in ends)
            found.append(Fitted(*_names(parameter), value, low, high, "", files))
            continue
        found.append(Fitted(*_names(parameter), None, None, None, why, files))
    return tuple(found)


def _names(parameter: Parameter) -> tuple[str, str, str]:
    return parameter.key, parameter.name, parameter.unit_kind


def _outside(parameter: Parameter, variable: float, scenario: Any) -> float:
    """Value of a parameter, kept inside its bounds [SI]."""
    value = parameter.outside(min(variable, 700.0), scenario)
    return min(max(value, parameter.low), parameter.high)


def _at_bound(parameter: Parameter, middle: float, scenario: Any) -> str:
    """Text of the bound that a fit ran into; zero, where it is possible, is a value like others."""
    for bound in (parameter.low, parameter.high):
        if parameter.from_zero and bound == parameter.low:
            continue
        if abs(middle - parameter.inside(bound, scenario)) < BOUND_REACHED:
            return f"{bound:g}"
    return ""


def _not_followed(benches: Sequence[Bench], solution: Solution) -> set[str]:
    """Files whose readings the model does not follow."""
    return {
        bench.measurement.file
        for bench, group in _groups(benches)
        if solution.unexplained[group] > FOLLOWED
    }


def _groups(benches: Sequence[Bench]) -> list[tuple[Bench, int]]:
    """Bench of each group of readings, in the order of the groups."""
    found = [bench for bench in benches for _ in range(int(bench.groups.max()) + 1)]
    return list(zip(found, range(len(found)), strict=True))


def _why_unknown(parameters: Sequence[Parameter], solution: Solution, i: int) -> str:
    """Say what stands in the way of a value."""
    correlation = _correlation(solution)[i, : len(parameters)]
    partners = [
        parameters[j].key
        for j in range(len(parameters))
        if j != i and abs(correlation[j]) >= TOLD_APART
    ]
    if partners:
        return f"the readings cannot tell it apart from {' and '.join(partners)}"
    half = float(solution.half[i])
    if parameters[i].from_zero:
        middle = float(solution.variables[i])
        return f"its interval is {half / max(middle, 0.5) * 100:.0f} % to either side"
    return f"its interval spans a factor of {math.exp(min(2.0 * half, 99.0)):.3g}"


def remarks_of(benches: Sequence[Bench], solution: Solution) -> tuple[str, ...]:
    """Say where intervals are to be taken with care.

    Parameters
    ----------
    benches : sequence of Bench
    solution : Solution
    """
    return tuple(
        f"{Path(bench.measurement.file).name}: the readings depart from the model in a pattern, "
        "not by chance; the intervals are too narrow"
        for bench, group in _groups(benches)
        if solution.trend[group] > PATTERN
    )
