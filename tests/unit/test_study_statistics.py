"""Tolerances: confidence of a rate, and which tolerance matters."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import binomtest, sobol_indices, uniform

from chainsim.errors import CallError
from chainsim.study.rows import Failure, Row
from chainsim.study.sampling import index_design
from chainsim.study.tolerances import ensemble_verdict, influences, rate, result_values
from tests.unit.study_tasks import finding


def ishigami(x):
    """T. Ishigami and T. Homma, 1990, with a = 7 and b = 0.1 (the function of the scipy docs)."""
    return np.sin(x[0]) + 7.0 * np.sin(x[1]) ** 2 + 0.1 * x[2] ** 4 * np.sin(x[0])


def ishigami_runs(count, seed=1):
    design = index_design(count, 3, seed)
    return ishigami((2.0 * design.T - 1.0) * np.pi)


def test_sobol_indices_of_the_ishigami_function():
    # Exact values for a = 7, b = 0.1: S = 0.313905, 0.442411, 0; ST = 0.557589, 0.442411,
    # 0.243684 (closed form; scipy.stats.sobol_indices prints ST3 = 0.244, S3 = 0). Sampling
    # errors at 16384 base points stay below 1e-3 with any of several seeds.
    found, dropped = influences(ishigami_runs(16384), ("x1", "x2", "x3"), 16384)
    by_axis = {influence.axis: influence for influence in found}
    assert dropped == 0
    assert by_axis["x1"].alone == pytest.approx(0.313905, abs=1e-3)
    assert by_axis["x2"].alone == pytest.approx(0.442411, abs=1e-3)
    assert by_axis["x3"].alone == pytest.approx(0.0, abs=1e-3)
    assert by_axis["x1"].in_all == pytest.approx(0.557589, abs=1e-3)
    assert by_axis["x2"].in_all == pytest.approx(0.442411, abs=1e-3)
    assert by_axis["x3"].in_all == pytest.approx(0.243684, abs=1e-3)
    assert [influence.axis for influence in found] == ["x1", "x2", "x3"]


def test_sobol_indices_agree_with_scipy_on_the_same_runs():
    count = 256
    blocks = ishigami_runs(count).reshape(5, 1, count)
    theirs = sobol_indices(
        func={"f_A": blocks[0], "f_B": blocks[1], "f_AB": blocks[2:]},
        n=count,
        dists=[uniform(-np.pi, 2 * np.pi)] * 3,
    )
    ours, _ = influences(blocks.ravel(), ("0", "1", "2"), count)
    for influence in ours:
        k = int(influence.axis)
        # scipy centers and norms over A and B as well; 1e-3 covers its other denominators.
        assert influence.alone == pytest.approx(float(np.ravel(theirs.first_order)[k]), abs=2e-2)
        assert influence.in_all == pytest.approx(float(np.ravel(theirs.total_order)[k]), abs=2e-2)


def test_bootstrap_intervals_cover_their_index_and_narrow_with_more_runs():
    few, _ = influences(ishigami_runs(128), ("a", "b", "c"), 128)
    many, _ = influences(ishigami_runs(2048), ("a", "b", "c"), 2048)
    for influence in few + many:
        low, high = influence.in_all_range
        assert low <= influence.in_all <= high
    widths = [np.mean([i.in_all_range[1] - i.in_all_range[0] for i in s]) for s in (few, many)]
    assert widths[1] < 0.5 * widths[0]


def test_a_base_point_with_a_failed_run_is_left_out_and_told():
    values = ishigami_runs(512)
    values[512 * 3 + 7] = np.nan
    found, dropped = influences(values, ("x1", "x2", "x3"), 512)
    assert dropped == 1
    assert found[0].axis == "x1"


def test_a_result_that_does_not_vary_has_no_influences():
    with pytest.raises(CallError, match="same in every run"):
        influences(np.ones(5 * 8), ("a", "b", "c"), 8)


def test_rates_agree_with_an_outside_library():
    for count, trials, confidence in ((3, 20, 0.95), (12, 30, 0.9), (85, 120, 0.99), (0, 50, 0.95)):
        ours = rate(count, trials, confidence)
        theirs = binomtest(count, trials).proportion_ci(confidence, "exact")
        assert (ours.low, ours.high) == pytest.approx((theirs.low, theirs.high), abs=1e-8)


def row(i, outcome, lost=0):
    found = (finding("balls_stay_seated", 1.0 - lost, outcome),)
    return Row(str(i), "done", {}, "s", found, {"balls_ended": 40, "balls_lost": lost})


def test_an_ensemble_counts_failing_variants_and_lost_balls():
    rows = [row(i, "holds") for i in range(18)] + [row(18, "fails", 2), row(19, "fails", 1)]
    rows += [None, Row("x", "failed", {}, "s", failure=Failure("run", "no"))]
    told = ensemble_verdict(rows)
    assert (told.failing.count, told.failing.trials) == (2, 20)
    assert (told.losses.count, told.losses.trials) == (3, 800)
    assert told.not_completed == 2
    # A loss rate below one in 10,000 at 95 %: ln 0.05 / ln(1 - 1e-4), rounded up.
    assert told.further_balls == 29_956


def test_no_loss_is_told_with_the_rule_of_three():
    told = str(ensemble_verdict([row(i, "holds") for i in range(10)]).losses)
    assert told.startswith("0 of 400")
    assert "0.0075 (rule of three)" in told


def test_an_ensemble_without_a_completed_run_says_nothing():
    with pytest.raises(CallError, match="nothing can be counted"):
        ensemble_verdict([None])


def test_results_by_name():
    rows = [row(0, "holds"), None]
    assert result_values(rows, "balls_stay_seated")[0] == 1.0
    assert result_values(rows, "balls_lost")[0] == 0.0
    assert np.isnan(result_values(rows, "nothing")).all()
