"""How far each finding moves when the time step is halved, and with what order."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from chainsim.errors import RunError

_NEGLIGIBLE = 1e-9  # of the scale: two steps agree to rounding, no order can be told


@dataclass(frozen=True)
class Drift:
    """Drift of one finding with the step.

    Attributes
    ----------
    name, unit : str
        The finding and its unit.
    full, half, quarter : float or None
        Its value at the full, half and quarter step [`unit`].
    moved : float or None
        Change from full to half step over the finding's scale (dimensionless).
    order : float or None
        Observed order (dimensionless); None where the drift is down to rounding, or does not
        shrink.
    outcomes : tuple of str
        Outcome at the three steps.
    """

    name: str
    unit: str
    full: float | None
    half: float | None
    quarter: float | None
    moved: float | None
    order: float | None
    outcomes: tuple[str, str, str]

    @property
    def turned(self) -> bool:
        """True where the outcome is not the same at all three steps."""
        return len(set(self.outcomes)) > 1


def verify_step(scenario: Any, run: Callable[[Any], Any]) -> list[Drift]:
    """Run at the full, half and quarter step and compare the findings.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    run : callable
        Takes a scenario and gives a recording that has `findings` and, among its `attrs`,
        `inner_step`: the step that was used [s].

    Returns
    -------
    list of Drift
        One per finding.

    Raises
    ------
    RunError
        If the recording does not tell its step.
    """
    full = run(scenario)
    step = full.attrs.get("inner_step")
    if not step:
        raise RunError("the recording does not tell its step, so it cannot be halved")
    recordings = [full]
    for share in (2.0, 4.0):
        recordings.append(run(scenario.with_values({"run.step": float(step) / share})))
    triples = zip(*(recording.findings for recording in recordings), strict=True)
    return [_drift(*triple) for triple in triples]


def _drift(full: Any, half: Any, quarter: Any) -> Drift:
    values = (full.value, half.value, quarter.value)
    scale = abs(full.scale) if full.scale else None
    moved = order = None
    if scale and values[0] is not None and values[1] is not None:
        moved = abs(values[0] - values[1]) / scale
    if scale and None not in values:
        order = observed_order(*values, scale)
    return Drift(
        full.name, full.unit, *values, moved, order, (full.outcome, half.outcome, quarter.outcome)
    )


def observed_order(full: float, half: float, quarter: float, scale: float) -> float | None:
    """Order of convergence from values at three steps.

    Parameters
    ----------
    full, half, quarter : float
        A value at the full, half and quarter step [any one unit].
    scale : float
        What counts as large for it [the same unit].

    Returns
    -------
    float or None
        ``log2(|full - half| / |half - quarter|)`` (dimensionless); None where either
        difference is down to rounding.

    References
    ----------
    P. J. Roache, *Verification and Validation in Computational Science and Engineering*,
    Hermosa, 1998, section on grid convergence (from memory).
    """
    first, second = abs(full - half), abs(half - quarter)
    if min(first, second) <= _NEGLIGIBLE * scale:
        return None
    return math.log2(first / second)
