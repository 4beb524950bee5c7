"""What an ensemble says: how often balls are lost, how surely, and which tolerance matters."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from chainsim.closed_forms import share_interval, trials_without_failure
from chainsim.errors import CallError
from chainsim.study.rows import DONE, Row, outcome, relative_margin

ONE_IN_TEN_THOUSAND = 1e-4
_BOOTSTRAP_DRAWS = 400


@dataclass(frozen=True)
class Rate:
    """A share that was counted, with the interval in which it lies.

    Attributes
    ----------
    count, trials : int
        Number counted, and number of trials (dimensionless).
    low, high : float
        Clopper-Pearson bounds of the share (dimensionless).
    confidence : float
        Confidence of the interval (dimensionless).
    """

    count: int
    trials: int
    low: float
    high: float
    confidence: float

    def __str__(self) -> str:
        text = (
            f"{self.count} of {self.trials} ({self.confidence:.0%} interval "
            f"{self.low:.3g} to {self.high:.3g})"
        )
        if self.count == 0:
            # One-sided, as the rule of three has it: nothing was lost, so only the upper
            # bound means anything.
            text += f"; none lost: at most about {3 / self.trials:.2g} (rule of three)"
        return text


def rate(count: int, trials: int, confidence: float = 0.95) -> Rate:
    """Share of trials with its confidence interval.

    Parameters
    ----------
    count, trials : int
        Number counted, and number of trials, at least 1 (dimensionless).
    confidence : float
        Confidence of the interval (dimensionless).

    Returns
    -------
    Rate
        The share.

    Raises
    ------
    CallError
        If there were no trials.
    """
    low, high = share_interval(count, trials, confidence)
    return Rate(count, trials, low, high, confidence)


@dataclass(frozen=True)
class EnsembleVerdict:
    """What an ensemble says as a whole.

    Attributes
    ----------
    failing : Rate
        Share of variants of which a finding fails.
    losses : Rate or None
        Share of balls that were lost; None where no ball was counted.
    further_balls : int
        Balls without a loss that show a rate below one in 10,000 at 95 % (dimensionless).
    not_completed : int
        Runs that could not be completed and are counted nowhere (dimensionless).
    """

    failing: Rate
    losses: Rate | None
    further_balls: int
    not_completed: int


def ensemble_verdict(rows: Sequence[Row | None], names: tuple[str, ...] = ()) -> EnsembleVerdict:
    """Count failing variants and lost balls over an ensemble.

    Parameters
    ----------
    rows : sequence of (Row or None)
        Rows of the ensemble.
    names : tuple of str
        Findings that count; empty counts all.

    Returns
    -------
    EnsembleVerdict
        Rates with their intervals.

    Raises
    ------
    CallError
        If no run was completed.
    """
    done = [row for row in rows if row is not None and row.state == DONE]
    if not done:
        raise CallError("no run of the ensemble was completed: nothing can be counted")
    failing = sum(outcome(row, names) == "fails" for row in done)
    ended = sum(int(row.summary.get("balls_ended") or 0) for row in done)
    lost = sum(int(row.summary.get("balls_lost") or 0) for row in done)
    return EnsembleVerdict(
        rate(failing, len(done)),
        rate(lost, ended) if ended else None,
        trials_without_failure(ONE_IN_TEN_THOUSAND),
        sum(row is None or row.state != DONE for row in rows),
    )


@dataclass(frozen=True)
class Influence:
    """How much of the scatter of a result is due to one axis.

    Attributes
    ----------
    axis : str
        Name of the axis.
    alone, in_all : float
        First-order and total Sobol index (dimensionless): the share of the variance that the
        axis causes by itself, and together with all others.
    alone_range, in_all_range : tuple of float
        Their 95 % bootstrap intervals (dimensionless).
    """

    axis: str
    alone: float
    in_all: float
    alone_range: tuple[float, float]
    in_all_range: tuple[float, float]


def influences(
    values: NDArray[np.float64], axes: Sequence[str], count: int, seed: int = 0
) -> tuple[list[Influence], int]:
    """Sobol indices from the runs of an `indices` design.

    Parameters
    ----------
    values : ndarray, shape ((n_axes + 2) * count,)
        Result of every run in the order of the design [any one unit]; NaN where there is none.
    axes : sequence of str
        Names of the axes.
    count : int
        Base points of the design (dimensionless).
    seed : int
        Seed of the bootstrap (dimensionless).

    Returns
    -------
    list of Influence
        One per axis, the largest total index first.
    dropped : int
        Base points left out because one of their runs has no result (dimensionless).

    Raises
    ------
    CallError
        If fewer than two base points are complete, or the result does not vary.

    References
    ----------
    First order: Saltelli et al., Computer Physics Communications 181 (2010), table 2, row b.
    Total: M. J. W. Jansen, Computer Physics Communications 117 (1999), as table 2, row f
    there. Both from memory; compared with scipy.stats.sobol_indices in the tests.
    """
    blocks = np.asarray(values, dtype=float).reshape(len(axes) + 2, count)
    whole = np.isfinite(blocks).all(axis=0)
    blocks = blocks[:, whole]
    n_whole = blocks.shape[1]
    if n_whole < 2 or np.ptp(blocks) == 0.0:
        raise CallError(
            "the influence of the axes cannot be told: "
            + ("the result is the same in every run" if n_whole > 1 else "too few complete runs")
        )
    draws = np.random.default_rng(seed).integers(0, n_whole, (_BOOTSTRAP_DRAWS, n_whole))
    own = _indices(blocks)
    spread = np.array([_indices(blocks[:, draw]) for draw in draws])
    low, high = np.percentile(spread, (2.5, 97.5), axis=0)
    found = [
        Influence(
            name,
            own[0, i],
            own[1, i],
            (low[0, i], high[0, i]),
            (low[1, i], high[1, i]),
        )
        for i, name in enumerate(axes)
    ]
    return sorted(found, key=lambda influence: -influence.in_all), count - n_whole


def _indices(blocks: NDArray[np.float64]) -> NDArray[np.float64]:
    """First-order and total indices of all axes, shape (2, n_axes) (dimensionless)."""
    blocks = blocks - blocks[:2].mean()
    first, second, mixed = blocks[0], blocks[1], blocks[2:]
    variance = np.concatenate((first, second)).var()
    alone = (second * (mixed - first)).mean(axis=1) / variance
    in_all = ((first - mixed) ** 2).mean(axis=1) / (2.0 * variance)
    return np.stack((alone, in_all))


def result_values(rows: Sequence[Row | None], name: str) -> NDArray[np.float64]:
    """One number of every row.

    Parameters
    ----------
    rows : sequence of (Row or None)
        The rows.
    name : str
        Name of a finding (then its margin over its scale) or of a summary value.

    Returns
    -------
    ndarray, shape (n_rows,)
        Numbers [dimensionless for a finding, else the unit of the summary value]; NaN where
        there is none.
    """
    return np.array([np.nan if row is None else _number(row, name) for row in rows])


def _number(row: Row, name: str) -> float:
    finding = row.finding(name)
    if finding is not None:
        share = relative_margin(finding)
        return share if np.isfinite(share) else np.nan
    value = row.summary.get(name)
    return float(value) if isinstance(value, int | float) else np.nan
