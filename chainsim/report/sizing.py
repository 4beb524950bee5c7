"""The sizing sheet of a lift beside what its run gave: closed forms left, simulation right.

The closed forms come from `chainsim.closed_forms`, which name their sources; nothing is simulated
there. Tension rows are given where the layout is the one that their free body is drawn for: a
vertical loop over two sprockets whose lower one hangs in it.
"""

from __future__ import annotations

import math
from typing import Any

from chainsim.analysis.chain_motion import ripple
from chainsim.analysis.ride import carried_balls
from chainsim.analysis.survey import Survey, survey
from chainsim.closed_forms.chordal import speed_variation, tooth_rate
from chainsim.closed_forms.sprockets import pitch_radius
from chainsim.report.sizing_basis import SizingRow, balls_on_strand
from chainsim.report.sizing_loads import frequency_rows, tension_rows, torque_rows
from chainsim.report.text import percent, quantity, significant


def sizing_rows(rec: Any) -> list[SizingRow]:
    """Return the sizing sheet of a recorded lift.

    Parameters
    ----------
    rec : Recording
        The run.
    """
    s = survey(rec)
    return [
        *sprocket_rows(s),
        *speed_rows(s),
        *ball_rows(s),
        *tension_rows(s),
        *torque_rows(s),
        *frequency_rows(s),
    ]


def sprocket_rows(s: Survey) -> list[SizingRow]:
    """Seat radii, and the number of links."""
    rows = [SizingRow("links in the loop", "–", str(s.n_pins), "")]
    for k, name in enumerate(s.sprocket_names):
        if s.teeth[k]:
            rows.append(
                SizingRow(
                    f"radius through the seated pins, {name}",
                    quantity(pitch_radius(s.scenario.chain.pitch, s.teeth[k]), "m", 4),
                    quantity(float(s.seat_radius[k]), "m", 4),
                    f"{s.teeth[k]} teeth",
                )
            )
    return rows


def speed_rows(s: Survey) -> list[SizingRow]:
    """Chain speed, tooth rate and ripple."""
    wanted = s.scenario.drive.chain_speed
    teeth = s.teeth[s.sprocket_names.index(s.scenario.drive.sprocket)]
    found = ripple(s)
    rows = [
        SizingRow(
            "chain speed, mean over a tooth",
            quantity(wanted, "m s-1"),
            quantity(s.steady_speed, "m s-1"),
            "demanded, and held in steady running",
        )
    ]
    if wanted:
        rate = tooth_rate(wanted, s.scenario.chain.pitch)
        rows.append(SizingRow("tooth rate", quantity(rate, "Hz"), quantity(s.tooth_rate, "Hz"), ""))
    if teeth:
        rows.append(
            SizingRow(
                "chain speed ripple, peak to peak over mean",
                percent(speed_variation(teeth)),
                percent(found.peak_to_peak) if found else "–",
                "polygon of the driven sprocket alone; the other sprockets and the chain's "
                "own swing come on top",
            )
        )
    return rows


def ball_rows(s: Survey) -> list[SizingRow]:
    """Rates of pockets and balls, and balls aboard."""
    scenario = s.scenario
    if scenario.balls is None or scenario.carriers is None or not scenario.drive.chain_speed:
        return []
    pockets = scenario.drive.chain_speed / (s.pitch * scenario.carriers.every)
    delivered = next((f.value for f in s.rec.findings if f.name == "rate_met"), None)
    carried = carried_balls(s).sum(axis=1)
    aboard = float(carried[s.is_steady].mean()) if s.steady and carried.size else float("nan")
    demand = scenario.balls.feed.rate
    feed = f"; the feed brings {quantity(demand, 's-1')}" if demand else ""
    return [
        SizingRow(
            "rate of pockets, balls delivered",
            quantity(pockets, "s-1"),
            quantity(delivered, "s-1"),
            f"every pocket filled{feed}",
        ),
        SizingRow(
            "balls on the carrying strand",
            significant(balls_on_strand(s)),
            significant(aboard) if math.isfinite(aboard) else "–",
            "between the axles; mean in steady running",
        ),
    ]
