"""Match a scenario to the bench: measurements in, values with intervals and a new scenario out.

For a command line or a notebook::

    result = fit(scenario, ["stretch.csv", "pluck.csv"])
    print(result.text())              # lines for the terminal
    json.dumps(result.as_json())      # the same as data, SI
    result.write("lift-fitted.toml")  # CallError where the file is there already

`fit` raises `ScenarioError` (exit status 2) with every fault of every file, each with its file,
line and column. Kinds of measurement, their columns and comment lines are in
`chainsim.study.fit_forms`; examples are in ``scenarios/bench``.

The bench set-ups are simulated with the lift's own links, joints and motor (`fit_benches`), and
compared by robust least squares (`fit_solve`). A value that the readings do not tell is named and
not claimed (`fit_claims`); ``hold`` keeps a parameter at the scenario's value, so that another
one that is told apart from it by nothing else can be found.
"""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Any

from chainsim.errors import CallError
from chainsim.study.fit_benches import BENCHES, Bench
from chainsim.study.fit_claims import Fitted, claims_of, pairs_of, remarks_of
from chainsim.study.fit_losses import Count, Counter, Trial, compared, count_balls, friction_trials
from chainsim.study.fit_parameters import PARAMETERS
from chainsim.study.fit_reading import Measurement, read_measurements
from chainsim.study.fit_result import FitResult
from chainsim.study.fit_solve import Problem, solve
from chainsim.study.fit_start import known_values, started


def fit(
    scenario: Any,
    measurement_files: Sequence[str | Path],
    *,
    confidence: float = 0.95,
    hold: Sequence[str] = (),
    counter: Counter = count_balls,
) -> FitResult:
    """Fit a scenario's values to bench measurements.

    Parameters
    ----------
    scenario : Scenario
        Supplies what is not fitted: pitch, masses, pin radius, gear ratio.
    measurement_files : sequence of str or path
        CSV files.
    confidence : float
        Of the intervals (dimensionless).
    hold : sequence of str
        Dotted keys to keep at the scenario's value.
    counter : callable
        Runs the lift for counted losses.

    Returns
    -------
    FitResult

    Raises
    ------
    ScenarioError
        With every fault of the files, or where one does not fit the scenario.
    CallError
        If there is no file, the confidence is not a share, or a held key is unknown.
    """
    _check_call(measurement_files, confidence, hold)
    measurements = read_measurements(measurement_files)
    return fit_measurements(scenario, measurements, confidence, hold, counter)


def fit_measurements(
    scenario: Any,
    measurements: Sequence[Measurement],
    confidence: float = 0.95,
    hold: Sequence[str] = (),
    counter: Counter = count_balls,
) -> FitResult:
    """Fit a scenario's values to measurements that have been read; see `fit`.

    Parameters
    ----------
    scenario : Scenario
    measurements : sequence of Measurement
    confidence : float
        Of the intervals (dimensionless).
    hold : sequence of str
        Dotted keys to keep at the scenario's value.
    counter : callable
        Runs the lift for counted losses.
    """
    benches = [BENCHES[m.kind](scenario, m) for m in measurements if m.kind in BENCHES]
    told = {key for bench in benches for key in bench.keys}
    keys = [key for key in PARAMETERS if key in told and key not in hold]
    fitted, pairs, remarks = _fit_benches(scenario, benches, keys, confidence)
    counted = [m for m in measurements if m.kind == "losses"]
    counts: tuple[Count, ...] = ()
    trials: tuple[Trial, ...] = ()
    if counted:
        values = {item.key: item.value for item in fitted if item.is_claimed}
        matched = scenario.with_values(values) if values else scenario
        counts = compared(matched, counted, confidence, counter)
        trials = friction_trials(matched, counted, confidence, counter)
    held = tuple(key for key in hold if key in told)
    return FitResult(scenario, confidence, fitted, held, pairs, counts, trials, remarks)


def _fit_benches(
    scenario: Any, benches: Sequence[Bench], keys: Sequence[str], confidence: float
) -> tuple[tuple[Fitted, ...], Any, tuple[str, ...]]:
    """Fit all parameters together; nothing where there is none to fit."""
    if not keys:
        return (), (), ()
    parameters = [PARAMETERS[key] for key in keys]
    values = started(scenario, benches, known_values(scenario), keys)
    solution = solve(Problem(scenario, benches, parameters, values), confidence)
    return (
        claims_of(scenario, parameters, benches, solution),
        pairs_of(parameters, solution),
        remarks_of(benches, solution),
    )


def _check_call(files: Sequence[str | Path], confidence: float, hold: Sequence[str]) -> None:
    """Refuse a call that cannot work."""
    if not files:
        raise CallError("fit: name one file of measurements or more")
    if not 0.5 <= confidence < 1.0:
        raise CallError(f"fit: confidence is {confidence:g}, need at least 0.5 and less than 1")
    unknown = [key for key in hold if key not in PARAMETERS]
    if unknown:
        raise CallError(f"fit: '{unknown[0]}' cannot be held; known: {', '.join(PARAMETERS)}")
