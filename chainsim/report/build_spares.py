"""How many spare parts go into the box."""

from __future__ import annotations

import math

SPARE_SHARE = 0.05
"""Spare parts as a share of those fitted (dimensionless); common practice, no source."""

FEWEST_SPARES = 2
"""Fewest spares of a part that is fitted more than once (dimensionless); common practice, no
source."""


def spare_parts(fitted: int, batch: int = 1) -> int:
    """Return how many spares to order.

    Parameters
    ----------
    fitted : int
        Parts in the lift (dimensionless).
    batch : int
        Spares come in multiples of this (dimensionless): links by carrier spacing, so that a
        stretch of chain can be changed as a whole.

    Returns
    -------
    int
        A twentieth, at least two, rounded up to whole batches (dimensionless).
    """
    wanted = max(FEWEST_SPARES, math.ceil(SPARE_SHARE * fitted))
    return batch * math.ceil(wanted / batch)
