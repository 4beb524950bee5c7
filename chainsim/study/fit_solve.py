"""Robust least squares over all benches at one time, with what is known about each value.

Readings of one kind in one file have the same unknown scatter. It is found together with the
values, and one wild reading counts no more than a reading at the edge of what is usual.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any, NamedTuple

import numpy as np
from scipy.optimize import least_squares
from scipy.stats import norm, t

from chainsim.errors import RunError
from chainsim.study.fit_benches import Bench
from chainsim.study.fit_parameters import Parameter

EDGE = 2.0
"""Scatters beyond which a reading's pull no longer grows [dimensionless]; costs 1 % of efficiency
with normal noise (P. J. Huber, Robust Statistics, Wiley 1981, ch. 4, from memory)."""

STEP = 2e-3
"""Step of a variable for its derivative [dimensionless]; variables are of size one."""

PASSES = 4
"""Passes of fitting and of finding the scatter anew, at most [dimensionless]."""

STEADY = 0.05
"""Change of a scatter, as a share, below which it has been found [dimensionless]."""

FIRST_SCATTER = 0.03
"""Scatter to start from, as a share of the largest reading [dimensionless]."""

ALIKE = 1e-6
"""Difference between simulated readings, as a share, below which one reading was taken again and
again [dimensionless]."""

FAINT = 1e-8
"""Information that keeps the matrix regular where readings say nothing [dimensionless]."""


class Solution(NamedTuple):
    """What the readings say.

    Attributes
    ----------
    variables : ndarray, shape (n_variables,)
        Parameters first, then each bench's own (dimensionless).
    spread : ndarray, shape (n_variables, n_variables)
        Covariance (dimensionless).
    half : ndarray, shape (n_variables,)
        Half width of each confidence interval (dimensionless).
    scatter : ndarray, shape (n_groups,)
        Scatter of the readings of each group [SI].
    unexplained : ndarray, shape (n_groups,)
        Share of the readings' variance that the model leaves (dimensionless).
    trend : ndarray, shape (n_groups,)
        Correlation of each deviation with the next, where there are enough (dimensionless).
    """

    variables: np.ndarray
    spread: np.ndarray
    half: np.ndarray
    scatter: np.ndarray
    unexplained: np.ndarray
    trend: np.ndarray


class Problem(NamedTuple):
    """A fit to be done.

    Attributes
    ----------
    scenario : Scenario
    benches : sequence of Bench
    parameters : sequence of Parameter
        What is to be found.
    values : mapping of str to float
        Every value that a bench may ask for, as it stands in the scenario [SI].
    """

    scenario: Any
    benches: Sequence[Bench]
    parameters: Sequence[Parameter]
    values: Mapping[str, float]


class _Variables:
    """Maps the vector of variables to values and to each bench's own numbers."""

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        self.sizes = [
            np.array([(own.high - own.low) / 6.0 for own in bench.own]) for bench in problem.benches
        ]
        self.ends = np.cumsum([len(problem.parameters), *map(len, self.sizes)])

    def start(self) -> np.ndarray:
        scenario = self.problem.scenario
        inside = [p.inside(self.problem.values[p.key], scenario) for p in self.problem.parameters]
        own = [o.start for bench in self.problem.benches for o in bench.own]
        return np.concatenate([inside, np.array(own) / np.concatenate([*self.sizes, []])])

    def bounds(self) -> tuple[np.ndarray, np.ndarray]:
        scenario, sizes = self.problem.scenario, np.concatenate([*self.sizes, []])
        ends = []
        for side in ("low", "high"):
            inside = [p.inside(getattr(p, side), scenario) for p in self.problem.parameters]
            own = [getattr(o, side) for bench in self.problem.benches for o in bench.own]
            ends.append(np.concatenate([inside, np.array(own) / sizes]))
        return ends[0], ends[1]

    def values(self, x: np.ndarray) -> dict[str, float]:
        found = dict(self.problem.values)
        for p, variable in zip(self.problem.parameters, x, strict=False):
            found[p.key] = p.outside(float(variable), self.problem.scenario)
        return found

    def own(self, x: np.ndarray, bench: int) -> np.ndarray:
        return x[self.ends[bench] : self.ends[bench + 1]] * self.sizes[bench]

    def feels(self, bench: int) -> np.ndarray:
        """Indices of the variables that a bench depends on."""
        keys = self.problem.benches[bench].keys
        shared = [i for i, p in enumerate(self.problem.parameters) if p.key in keys]
        return np.array([*shared, *range(self.ends[bench], self.ends[bench + 1])], int)


class _Model:
    """Readings of all benches, and their derivatives, as functions of the variables."""

    def __init__(self, variables: _Variables) -> None:
        self.variables = variables
        self.benches = variables.problem.benches
        sizes = [len(bench.observed) for bench in self.benches]
        self.rows = np.cumsum([0, *sizes])
        self.observed = np.concatenate([bench.observed for bench in self.benches])
        self.early = np.concatenate([bench.early for bench in self.benches])
        counts = np.cumsum([0, *[int(bench.groups.max()) + 1 for bench in self.benches]])
        self.group = np.concatenate(
            [bench.groups + first for bench, first in zip(self.benches, counts, strict=False)]
        )
        self.n_groups = int(counts[-1])
        self._kept: tuple[bytes, np.ndarray] = (b"", np.zeros(0))

    def one(self, x: np.ndarray, bench: int) -> np.ndarray:
        """Readings of one bench; not a number where these values can't be simulated."""
        values = self.variables.values(x)
        try:
            return self.benches[bench].predicted(values, self.variables.own(x, bench))
        except RunError:
            return np.full(len(self.benches[bench].observed), np.nan)

    def all(self, x: np.ndarray) -> np.ndarray:
        if self._kept[0] != x.tobytes():
            found = [self.one(x, bench) for bench in range(len(self.benches))]
            self._kept = (x.tobytes(), np.concatenate(found))
        return self._kept[1]

    def slopes(self, x: np.ndarray) -> np.ndarray:
        high = self.variables.bounds()[1]
        base = self.all(x)
        slopes = np.zeros((len(base), len(x)))
        for bench in range(len(self.benches)):
            rows = slice(self.rows[bench], self.rows[bench + 1])
            for i in self.variables.feels(bench):
                moved = x.copy()
                moved[i] += STEP if x[i] + STEP <= high[i] else -STEP
                change = (self.one(moved, bench) - base[rows]) / (moved[i] - x[i])
                # a step to where nothing can be simulated says nothing
                slopes[rows, i] = np.nan_to_num(change, posinf=0.0, neginf=0.0)
        return slopes


def solve(problem: Problem, confidence: float) -> Solution:
    """Fit all benches together.

    Parameters
    ----------
    problem : Problem
    confidence : float
        Of the intervals (dimensionless).

    Returns
    -------
    Solution

    Raises
    ------
    RunError
        If a bench cannot be simulated with the values to start from.

    References
    ----------
    Huber's proposal 2 for values and scatter, and the covariance of an M-estimate: P. J. Huber,
    *Robust Statistics*, Wiley 1981, ch. 6 and 7 (from memory).  Degrees of freedom where files
    differ in scatter: F. E. Satterthwaite, Biometrics Bulletin 2 (1946) 110 (from memory).
    """
    variables = _Variables(problem)
    model = _Model(variables)
    bounds = variables.bounds()
    x = np.clip(variables.start(), *bounds)
    if not np.isfinite(model.all(x)).all():
        raise RunError("the bench cannot be simulated with the scenario's own values")
    scatter = FIRST_SCATTER * _per_group(model, lambda rows: np.abs(model.observed[rows]).max())
    if not model.early.all():
        x = _fitted(model, x, bounds, scatter, model.early)
    for _ in range(PASSES):
        x = _fitted(model, x, bounds, scatter, np.ones_like(model.early))
        slopes = model.slopes(x)
        before, scatter = scatter, _scatter(model, x, slopes, scatter)
        if np.all(np.abs(scatter - before) <= STEADY * before):
            break
    return _judged(model, x, slopes, scatter, confidence)


def _per_group(model: _Model, value) -> np.ndarray:
    return np.array([value(model.group == g) for g in range(model.n_groups)])


def _fitted(
    model: _Model, x: np.ndarray, bounds: Any, scatter: np.ndarray, counts: np.ndarray
) -> np.ndarray:
    """Least squares over the readings that count, with a loss that is linear for wild ones."""
    weight = counts / scatter[model.group]
    found = least_squares(
        lambda x: (model.all(x) - model.observed) * weight,
        x,
        jac=lambda x: model.slopes(x) * weight[:, None],
        bounds=bounds,
        loss="huber",
        f_scale=EDGE,
        x_scale="jac",
        xtol=1e-5,
        ftol=1e-6,
        max_nfev=25,
    )
    return found.x


def _freedom(model: _Model, slopes: np.ndarray, scatter: np.ndarray) -> np.ndarray:
    """Readings of each group less the variables they were spent on (dimensionless)."""
    weighted = slopes / scatter[model.group][:, None]
    inverse = np.linalg.inv(weighted.T @ weighted + FAINT * np.eye(slopes.shape[1]))
    leverage = np.einsum("ij,jk,ik->i", weighted, inverse, weighted)
    return _per_group(model, lambda rows: max(rows.sum() - leverage[rows].sum(), 0.1))


def _scatter(model: _Model, x: np.ndarray, slopes: np.ndarray, scatter: np.ndarray) -> np.ndarray:
    """Scatter of each group from deviations cut at the edge."""
    # mean square of a unit normal number cut at the edge
    usual = norm.cdf(EDGE) - norm.cdf(-EDGE) - 2.0 * EDGE * norm.pdf(EDGE)
    usual += EDGE**2 * 2.0 * norm.sf(EDGE)
    freedom = _freedom(model, slopes, scatter)
    deviation = model.all(x) - model.observed
    for _ in range(60):
        cut = np.clip(deviation / scatter[model.group], -EDGE, EDGE)
        square = _per_group(model, lambda rows, cut=cut: float((cut[rows] ** 2).sum()))
        floor = 1e-9 * _per_group(model, lambda rows: np.abs(model.observed[rows]).max() + 1e-30)
        scatter = np.maximum(scatter * np.sqrt(square / (usual * freedom)), floor)
    return scatter


def _judged(
    model: _Model, x: np.ndarray, slopes: np.ndarray, scatter: np.ndarray, confidence: float
) -> Solution:
    """Covariance, intervals, and how well the model follows."""
    deviation = (model.all(x) - model.observed) / scatter[model.group]
    weighted = slopes / scatter[model.group][:, None]
    freedom = _freedom(model, slopes, scatter)
    size = slopes.shape[1]
    inside = FAINT * np.eye(size)
    shares = []
    for g in range(model.n_groups):
        rows = model.group == g
        square = weighted[rows].T @ weighted[rows]
        cut = np.clip(deviation[rows], -EDGE, EDGE)
        inside += max(float((np.abs(deviation[rows]) < EDGE).mean()), 0.1) * square
        shares.append(float((cut**2).sum()) / freedom[g] * square)
    inverse = np.linalg.inv(inside)
    parts = np.array([inverse @ share @ inverse for share in shares])
    spread = parts.sum(axis=0) + FAINT * inverse @ inverse
    variances = np.maximum(np.diagonal(parts, axis1=1, axis2=2), 0.0)
    total = variances.sum(axis=0)
    degrees = total**2 / np.maximum((variances**2 / freedom[:, None]).sum(axis=0), 1e-300)
    quantile = t.ppf(0.5 + 0.5 * confidence, np.clip(degrees, 0.5, None))
    half = quantile * np.sqrt(np.diagonal(spread))
    made = model.all(x)
    spreads = _per_group(model, lambda rows: _size(model.observed[rows], made[rows]))
    trend = _per_group(model, lambda rows: _trend(deviation[rows]))
    return Solution(x, spread, half, scatter, scatter**2 / spreads, trend)


def _size(observed: np.ndarray, made: np.ndarray) -> float:
    """Mean square of what a model has to follow: about the mean, unless nothing was varied."""
    repeated = np.ptp(made) < ALIKE * np.abs(made).max()
    return max(float((observed**2).mean() if repeated else np.var(observed)), 1e-300)


def _trend(deviation: np.ndarray) -> float:
    """Correlation of each deviation with the next; 0 where there are too few."""
    if len(deviation) < 20:
        return 0.0
    return float((deviation[1:] * deviation[:-1]).sum() / (deviation**2).sum())
