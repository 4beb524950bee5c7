"""Sizing rows of forces: tensions, torque and power, and the frequencies that follow from them."""

from __future__ import annotations

import numpy as np

from chainsim.analysis.survey import Survey
from chainsim.analysis.tensions import strand_ends
from chainsim.closed_forms.loop import Driven, LoopTensions, hung_loop, lifting_torque
from chainsim.closed_forms.resonance import take_up_bounce_frequency
from chainsim.closed_forms.vibration import string_frequency
from chainsim.report.sizing_basis import (
    SizingRow,
    carrying_length,
    mass_per_length,
    payload,
    steady_mean,
)
from chainsim.report.text import quantity


def hung_tensions(s: Survey) -> LoopTensions | None:
    """Return the closed form of the tensions, None where the layout is another."""
    scenario = s.scenario
    if len(s.strands) != 2 or s.scenario.frame.tilt or len(s.carrying) != 1:
        return None
    heights = s.center[0, :, 1]
    low, high = int(np.argmin(heights)), int(np.argmax(heights))
    mount = scenario.sprocket[low].mount
    if mount.kind != "hung" or abs(s.center[0, low, 0] - s.center[0, high, 0]) > 0.1 * s.pitch:
        return None
    gravity, per_length = scenario.frame.gravity, mass_per_length(s)
    wrap = 0.5 * max(s.teeth[low], 1) * s.pitch
    hung = gravity * (mount.mass + per_length * wrap)
    strand = gravity * per_length * carrying_length(s)
    driven: Driven = "tail" if scenario.drive.sprocket == scenario.sprocket[low].name else "head"
    return hung_loop(hung, strand, payload(s), driven)


def tension_rows(s: Survey) -> list[SizingRow]:
    """Tensions at both ends of both strands."""
    loop = hung_tensions(s)
    if loop is None:
        return []
    carrying = s.carrying[0]
    returning = 1 - carrying
    up, down = strand_ends(s, carrying), strand_ends(s, returning)
    pairs = (
        ("carrying strand, foot", loop.carrying_foot, up.start),
        ("carrying strand, head", loop.carrying_head, up.end),
        ("return strand, head", loop.return_head, down.start),
        ("return strand, foot", loop.return_foot, down.end),
    )
    return [
        SizingRow(
            f"mean tension, {name}",
            quantity(form, "N"),
            quantity(steady_mean(s, values), "N"),
            "no friction" if k == 0 else "",
        )
        for k, (name, form, values) in enumerate(pairs)
    ]


def torque_rows(s: Survey) -> list[SizingRow]:
    """Torque and power of the drive."""
    driven = s.sprocket_names.index(s.scenario.drive.sprocket)
    teeth = s.teeth[driven]
    torque, power = s.channel("drive/torque"), s.channel("drive/power")
    rows = []
    if teeth and payload(s) and torque is not None:
        form = lifting_torque(payload(s), s.pitch, teeth)
        rows.append(
            SizingRow(
                "mean torque of the drive",
                quantity(form.mean, "N m"),
                quantity(abs(steady_mean(s, torque)), "N m"),
                "lifting the balls only; friction comes on top",
            )
        )
    if payload(s) and power is not None:
        rows.append(
            SizingRow(
                "mean power at the driven sprocket",
                quantity(payload(s) * (s.scenario.drive.chain_speed or 0.0), "W"),
                quantity(steady_mean(s, power), "W"),
                "lifting the balls only",
            )
        )
    return rows


def frequency_rows(s: Survey) -> list[SizingRow]:
    """First frequencies of the strands and of a hung take-up."""
    modes = {mode.kind: float(mode.frequency) for mode in reversed(s.rec.modes)}
    loop = hung_tensions(s)
    if loop is None:
        return []
    length, per_length = carrying_length(s), mass_per_length(s)
    still = (loop.return_foot + loop.return_head) / 2.0
    rows = []
    for strand in s.strands:
        kind = f"strand {strand.name} 1"
        if kind in modes and still > 0.0:
            rows.append(
                SizingRow(
                    f"first frequency of strand {strand.name}",
                    quantity(string_frequency(length, still, per_length, 1), "Hz"),
                    quantity(modes[kind], "Hz"),
                    "empty, at its mean tension; the eigenvalue is that of the whole lift at rest",
                )
            )
    low = int(np.argmin(s.center[0, :, 1]))
    kind = f"take-up {s.sprocket_names[low]}"
    if kind in modes:
        form = take_up_bounce_frequency(
            s.scenario.sprocket[low].mount.mass,
            per_length * length,
            0.0,
            length / s.pitch,
            s.scenario.chain.link_stiffness,
        )
        rows.append(
            SizingRow(
                f"bounce of the take-up {s.sprocket_names[low]}",
                quantity(form, "Hz"),
                quantity(modes[kind], "Hz"),
                "rigid seats, empty; the eigenvalue is that of the whole lift at rest",
            )
        )
    return rows
