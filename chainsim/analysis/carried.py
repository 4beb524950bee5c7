"""Which balls are carried, and when."""

from __future__ import annotations

from typing import Any

import numpy as np

from chainsim.analysis.survey import survey

SEATED = 3
"""Value of ``balls/state`` of a ball that sits in a pocket [dimensionless]."""


def carried_balls(rec: Any) -> np.ndarray:
    """Which slots hold a ball that sits in a pocket.

    Parameters
    ----------
    rec : Recording or Survey
        The recording.

    Returns
    -------
    ndarray of bool, shape (n_samples, n_slots)
        True where a ball is carried (dimensionless); without ``balls/state``, where its seat
        reserve is known.
    """
    s = survey(rec)
    state = s.channel("balls/state")
    if state is not None:
        return state == SEATED
    reserve = s.channel("balls/seat_reserve")
    return np.isfinite(reserve) if reserve is not None else np.zeros((len(s.time), 0), bool)
