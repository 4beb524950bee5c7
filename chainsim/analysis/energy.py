"""What the energy audit of a run says."""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np

from chainsim.analysis.survey import survey

LOSS = "energy/loss_"


class Audit(NamedTuple):
    """Energy balance of a whole run.

    Attributes
    ----------
    work_in : float
        Work of the drive and of knocks, and energy that balls brought [J].
    lifted : float
        Energy of the balls that left [J].
    losses : dict of str to float
        Dissipation by cause [J].
    residual : float
        Largest magnitude of the residual [J].
    residual_of_flows, residual_of_work : float
        The residual as a share of the sum of all absolute flows, and of the work put in
        [dimensionless].
    """

    work_in: float
    lifted: float
    losses: dict[str, float]
    residual: float
    residual_of_flows: float
    residual_of_work: float


def energy_audit(rec: Any) -> Audit | None:
    """Sum up the energy audit.

    Flows are the absolute changes from sample to sample of work, balls, and each loss.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    Audit or None
        None where no audit was recorded.
    """
    s = survey(rec)
    residual = s.channel("energy/residual")
    if residual is None or len(residual) < 2:
        return None
    losses = {name.removeprefix(LOSS): s[name] for name in s.rec.names() if name.startswith(LOSS)}
    names = ("work_drive", "work_knock", "balls_in", "balls_out")
    flows = {name: s.channel(f"energy/{name}") for name in names}
    known = {name: values for name, values in flows.items() if values is not None}
    total = sum(float(np.abs(np.diff(x)).sum()) for x in [*known.values(), *losses.values()])
    work = sum(
        float(np.abs(np.diff(known[name])).sum())
        for name in ("work_drive", "work_knock")
        if name in known
    )
    gained = sum(float(known[name][-1]) for name in names[:3] if name in known)
    worst = float(np.max(np.abs(residual)))
    return Audit(
        gained,
        float(known["balls_out"][-1]) if "balls_out" in known else 0.0,
        {name: float(values[-1]) for name, values in losses.items()},
        worst,
        worst / total if total > 0.0 else float("nan"),
        worst / work if work > 0.0 else float("nan"),
    )
