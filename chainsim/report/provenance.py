"""How a recording was made: versions, hashes, steps and how well its books balance."""

from __future__ import annotations

from typing import Any

import numpy as np

from chainsim.report.text import percent, quantity, significant, texts

SHOWN_ELSEWHERE = ("situations_run", "situations_not_run", "Conventions", "title")


def provenance_rows(rec: Any) -> list[tuple[str, str]]:
    """Return what is known of how a recording was made, as rows of what and value.

    Parameters
    ----------
    rec : Recording
        The run.
    """
    rows = [("file", rec.path.name if rec.path else "not written to a file")]
    rows.append(("stop reason", rec.stop_reason))
    rows += [
        (name.replace("_", " "), attribute_text(value))
        for name, value in rec.attrs.items()
        if name not in SHOWN_ELSEWHERE and name != "stop_reason"
    ]
    return rows + audit_rows(rec)


def attribute_text(value: Any) -> str:
    """Return a root attribute as text."""
    if isinstance(value, bool | np.bool_):
        return "yes" if value else "no"
    if isinstance(value, float | np.floating):
        return significant(float(value), 6)
    if isinstance(value, np.ndarray | list | tuple):
        return ", ".join(texts(list(value)))
    return value.decode() if isinstance(value, bytes) else str(value)


def audit_rows(rec: Any) -> list[tuple[str, str]]:
    """Return the residual of the energy audit, and the deepest contact against the pitch."""
    rows = []
    if "energy/residual" in rec and "energy/work_drive" in rec:
        residual = float(np.nanmax(np.abs(rec["energy/residual"])))
        work = float(np.nanmax(np.abs(rec["energy/work_drive"])))
        share = f", {percent(residual / work)} of the work put in" if work else ""
        rows.append(("largest residual of the energy audit", f"{quantity(residual, 'J')}{share}"))
    if "contacts/penetration" in rec:
        depth = float(np.nanmax(rec["contacts/penetration"]))
        share = percent(depth / rec.scenario.chain.pitch)
        rows.append(("deepest contact", f"{quantity(depth, 'm')}, {share} of the pitch"))
    return rows
