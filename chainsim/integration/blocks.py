"""Turns rows of samples into the blocks of a recording, and the parts into its geometry."""

from __future__ import annotations

import math

import numpy as np

from chainsim.integration.samples import BLOCK_SAMPLES, Block
from chainsim.integration.start import Prepared
from chainsim.kernels.layout import LEDGER
from chainsim.kernels.sample import (
    BALL_COLUMNS,
    KINETIC,
    POTENTIAL,
    STORED,
    WHEEL_COLUMNS,
    Rows,
)
from chainsim.model.packing_balls import chute_line, trough_line
from chainsim.model.tooth import outline

POINTS_PER_TOOTH = 24
"""Points of a tooth's outline in a recording [dimensionless]."""


def new_rows(prepared: Prepared) -> Rows:
    """Return empty rows for one block.

    Parameters
    ----------
    prepared : Prepared
    """
    lift, m = prepared.lift, BLOCK_SAMPLES
    n, n_wheels = lift.n_links, len(lift.wheels)
    slots = prepared.packed.work.seats.pocket.shape[0]
    carriers = max(1, len(lift.carrier_links))
    return Rows(
        time=np.zeros(m),
        pin=np.zeros((m, n, 2), np.float32),
        pin_velocity=np.zeros((m, n, 2), np.float32),
        tension=np.zeros((m, n), np.float32),
        wheel=np.zeros((m, n_wheels, len(WHEEL_COLUMNS))),
        drive=np.zeros((m, 5)),
        strand=np.zeros((m, len(lift.strands), 4)),
        ball=np.zeros((m, slots, len(BALL_COLUMNS))),
        loaded=np.zeros((m, carriers), np.int8),
        energy=np.zeros((m, len(LEDGER) + 3)),
        depth=np.zeros(m),
    )


def block_of(
    prepared: Prepared, rows: Rows, filled: int, energy_at_start: float | None
) -> tuple[Block, float]:
    """Return the filled rows as a block, and the energy that the audit starts from.

    Parameters
    ----------
    prepared : Prepared
    rows : Rows
    filled : int
        Rows in use (dimensionless).
    energy_at_start : float or None
        Energy before the first step [J]; None for the first block.
    """
    wheel = {name: rows.wheel[:filled, :, k].copy() for k, name in enumerate(WHEEL_COLUMNS)}
    channels = {
        "pins/position": rows.pin[:filled].copy(),
        "pins/velocity": rows.pin_velocity[:filled].copy(),
        "links/tension": rows.tension[:filled].copy(),
        "sprockets/angle": wheel["angle"],
        "sprockets/rate": wheel["rate"].astype(np.float32),
        "sprockets/torque": wheel["torque"].astype(np.float32),
        "sprockets/center": rows.wheel[:filled, :, 3:5].copy(),
        "sprockets/force": rows.wheel[:filled, :, 5:7].astype(np.float32),
        "sprockets/skip": wheel["skip"].astype(np.float32),
        "sprockets/ride_height": wheel["ride"].astype(np.float32),
        "sprockets/engaged": wheel["engaged"].astype(np.int16),
        "mounts/angle": wheel["turn"],
        "mounts/travel": wheel["travel"],
        "mounts/weight": wheel["drop"],
        "contacts/penetration": rows.depth[:filled].astype(np.float32),
    }
    for k, name in enumerate(("torque", "rate", "power", "current", "set_speed")):
        channels[f"drive/{name}"] = rows.drive[:filled, k].astype(np.float32)
    for k, name in enumerate(("excursion", "sag", "tension_start", "tension_end")):
        channels[f"strands/{name}"] = rows.strand[:filled, :, k].astype(np.float32)
    if prepared.lift.pocket is not None:
        channels |= _ball_channels(rows, filled)
        channels["carriers/loaded"] = rows.loaded[:filled].copy()
    energies, start = _energy_channels(rows, filled, energy_at_start)
    return Block(rows.time[:filled].copy(), channels | energies), start


def _ball_channels(rows: Rows, filled: int) -> dict[str, np.ndarray]:
    """Return the channels of the balls."""
    ball = rows.ball[:filled]
    return {
        "balls/position": ball[:, :, 0:2].astype(np.float32),
        "balls/velocity": ball[:, :, 2:4].astype(np.float32),
        "balls/acceleration": ball[:, :, 4:6].astype(np.float32),
        "balls/angle": ball[:, :, 6].copy(),
        "balls/seat_reserve": ball[:, :, 7].astype(np.float32),
        "balls/raw_peak": ball[:, :, 8].astype(np.float32),
        "balls/number": ball[:, :, 9].astype(np.int32),
        "balls/pocket": ball[:, :, 10].astype(np.int32),
        "balls/state": ball[:, :, 11].astype(np.int8),
    }


def _energy_channels(
    rows: Rows, filled: int, start: float | None
) -> tuple[dict[str, np.ndarray], float]:
    """Return the audit; its residual is what came in less what is there, went out or was lost."""
    energy = rows.energy[:filled]
    channels = {f"energy/{name}": energy[:, k].copy() for k, name in enumerate(LEDGER)}
    channels["energy/kinetic"] = energy[:, KINETIC].copy()
    channels["energy/potential"] = energy[:, POTENTIAL].copy()
    channels["energy/stored"] = energy[:, STORED].copy()
    there = energy[:, KINETIC] + energy[:, POTENTIAL] + energy[:, STORED]
    came = energy[:, 0] + energy[:, 1] + energy[:, 2]
    gone = energy[:, 3] + energy[:, 4 : len(LEDGER)].sum(axis=1)
    if start is None:
        start = float(there[0] + gone[0] - came[0]) if filled else 0.0
    channels["energy/residual"] = came - gone - (there - start)
    return channels, start


def geometry_of(prepared: Prepared) -> dict[str, np.ndarray]:
    """Return outlines and sizes of the parts, by dataset path [m].

    Parameters
    ----------
    prepared : Prepared
    """
    lift = prepared.lift
    scenario = lift.scenario
    geometry: dict[str, np.ndarray] = {
        "geometry/tooth_outline": _tooth_outlines(lift),
        "geometry/seat_radius": np.array([wheel.radius for wheel in lift.wheels]),
        "geometry/teeth": np.array([wheel.teeth for wheel in lift.wheels], np.int32),
        "geometry/carrier_link": lift.carrier_links.astype(np.int32),
        "geometry/roller_radius": np.array(0.5 * scenario.chain.roller_diameter),
        "geometry/pitch": lift.pitch,
    }
    if lift.pocket is not None:
        shape = lift.pocket.outline
        geometry["geometry/pocket_outline"] = np.repeat(
            shape[None], len(lift.carrier_links), axis=0
        )
        geometry["geometry/ball_radius"] = np.array(lift.ball_radius)
        chute, trough = chute_line(lift), trough_line(lift)
        if chute is not None:
            geometry["geometry/chute"] = chute
        if trough is not None:
            geometry["geometry/trough"] = trough
    for wall in scenario.wall:
        geometry[f"geometry/walls/{wall.name}"] = np.asarray(wall.points, float)
    for guide in scenario.guide:
        geometry[f"geometry/guides/{guide.name}"] = _guide_line(guide)
    if not len(lift.carrier_links):
        geometry.pop("geometry/carrier_link")
    return geometry


def _tooth_outlines(lift) -> np.ndarray:
    """Return the outlines of all wheels in their own frames, padded with NaN [m]."""
    shapes = []
    for wheel, form in zip(lift.wheels, lift.teeth, strict=True):
        if form is None:
            angles = np.linspace(0.0, 2.0 * math.pi, 97)
            radius = wheel.radius - 0.5 * lift.scenario.chain.roller_diameter
            shapes.append(radius * np.column_stack([np.cos(angles), np.sin(angles)]))
        else:
            shapes.append(outline(form, POINTS_PER_TOOTH))
    longest = max(len(shape) for shape in shapes)
    padded = np.full((len(shapes), longest, 2), np.nan)
    for k, shape in enumerate(shapes):
        padded[k, : len(shape)] = shape
    return padded


def _guide_line(guide) -> np.ndarray:
    """Return a guide as a polyline [m]."""
    if guide.kind == "straight":
        return np.array([guide.start, guide.end], float)
    angles = np.linspace(guide.angles[0], guide.angles[1], 33)
    arc = np.column_stack([np.cos(angles), np.sin(angles)])
    return np.asarray(guide.center, float) + guide.radius * arc
