"""The scene that the page plays: parts of the lift, chosen moments, marks on the time line."""

from __future__ import annotations

from typing import Any

import numpy as np

from chainsim.report.moments import is_lost, loss_time, marks
from chainsim.report.parts import (
    carrier_parts,
    held_seat,
    n_slots,
    sampled,
    scalar,
    sprocket_parts,
    standing_parts,
    usual_tension,
    view_box,
)
from chainsim.report.playback import (
    MAX_BASE64,
    MAX_RATE,
    Channel,
    chosen_samples,
    packed_angle,
    packed_counts,
    packed_range,
    squeezed,
)
from chainsim.report.style import TENSION_COLORS, TENSION_WIDTHS, tension_edges


def _readouts(rec: Any, samples: np.ndarray) -> tuple[list[dict], np.ndarray]:
    """Return what stands beside the motion: captions, and values of shape (frames, k)."""
    speed = np.linalg.norm(sampled(rec, "pins/velocity", samples), axis=-1).mean(axis=-1)
    columns = [speed, np.nanmax(sampled(rec, "links/tension", samples), axis=-1)]
    captions = [
        {"label": "Mean chain speed", "unit": "m/s", "factor": 1.0, "digits": 3},
        {"label": "Highest link tension", "unit": "N", "factor": 1.0, "digits": 2},
    ]
    for index, sprocket in enumerate(rec.scenario.sprocket):
        if sprocket.mount.kind in ("fixed", "screwed") or "mounts/travel" not in rec:
            continue
        columns.append(sampled(rec, "mounts/travel", samples)[:, index])
        label = f"Take-up travel, {sprocket.name}"
        captions.append({"label": label, "unit": "mm", "factor": 1e3, "digits": 2})
    return captions, np.nan_to_num(np.stack(columns, axis=1).astype(float))


def _motion_channels(rec: Any, samples: np.ndarray, box: tuple[float, ...]) -> list[Channel]:
    """Pack everything that moves at the chosen samples."""
    margin = 0.5 * max(box[2] - box[0], box[3] - box[1])
    low = np.array([box[0] - margin, box[1] - margin])
    high = np.array([box[2] + margin, box[3] + margin])
    tension = sampled(rec, "links/tension", samples)
    ends = np.array([[min(float(np.nanmin(tension)), -1e-3)], [float(np.nanmax(tension)) + 1e-3]])
    channels = [
        packed_range("pins", flat(rec, "pins/position", samples), low, high),
        packed_range("tension", tension, *ends),
        packed_range("centers", flat(rec, "sprockets/center", samples), low, high),
        packed_angle("angles", sampled(rec, "sprockets/angle", samples)),
    ]
    _, values = _readouts(rec, samples)
    channels.append(packed_range("readouts", values, values.min(axis=0), values.max(axis=0)))
    if "mounts/weight" in rec:
        drop = np.nan_to_num(sampled(rec, "mounts/weight", samples))
        channels.append(packed_range("weights", drop, drop.min(axis=0), drop.max(axis=0)))
    if held_seat(rec):
        loaded = sampled(rec, "carriers/loaded", samples).astype(int)
        channels.append(packed_counts("loaded", loaded))
    if n_slots(rec):
        position = flat(rec, "balls/position", samples)
        channels += [
            packed_range("balls", position, low, high),
            packed_angle("ball_angle", sampled(rec, "balls/angle", samples)),
            packed_counts("ball_number", sampled(rec, "balls/number", samples)),
            packed_counts("ball_state", sampled(rec, "balls/state", samples)),
        ]
    return channels


def flat(rec: Any, name: str, samples: np.ndarray) -> np.ndarray:
    """Return a channel at some samples, a row each.

    Parameters
    ----------
    rec : Recording
        The run.
    name : str
        Path of the channel.
    samples : ndarray of int, shape (frames,)
        Sample numbers [dimensionless].

    Returns
    -------
    ndarray, shape (frames, series)
        In the unit of the channel.
    """
    return sampled(rec, name, samples).reshape(len(samples), -1)


def build_scene(rec: Any, findings: list) -> tuple[dict, str]:
    """Return the description of the scene and the packed motion.

    Parameters
    ----------
    rec : Recording
        The run.
    findings : list of Finding
        Its findings, for the marks.

    Returns
    -------
    scene : dict
        Of plain values, for JSON.
    frames : str
        The packed motion in base64.
    """
    found = marks(rec, findings)
    parts = sprocket_parts(rec)
    standing = standing_parts(rec)
    box = view_box(rec, parts, standing)
    rate = MAX_RATE
    while True:
        keep = [mark.time for mark in found]
        samples = chosen_samples(rec.time, keep, rate)
        channels = _motion_channels(rec, samples, box)
        frames = squeezed(channels)
        if len(frames) <= MAX_BASE64 or rate < 1.0:
            break
        rate *= min(0.8, 0.95 * MAX_BASE64 / len(frames))
    carriers, pockets = carrier_parts(rec)
    scene = {
        "time": np.round(rec.time[samples].astype(float), 6).tolist(),
        "rate": rate,
        "channels": [channel.described() for channel in channels],
        "pins": int(rec.read("pins/position", slice(0, 1)).shape[1]),
        "slots": n_slots(rec),
        "pitch": float(rec.scenario.chain.pitch),
        "roller": scalar(rec, "geometry/roller_radius"),
        "ball": 0.5 * rec.scenario.balls.diameter if rec.scenario.balls else 0.0,
        "sprockets": parts,
        "carriers": carriers,
        "held": held_seat(rec),
        "pockets": pockets,
        "standing": standing,
        "lost": {str(b.number): loss_time(rec, b) for b in rec.balls if is_lost(b.fate)},
        "tension": {
            "top": float(tension_edges(usual_tension(rec))[-1]),
            "colors": TENSION_COLORS,
            "widths": TENSION_WIDTHS,
        },
        "readouts": _readouts(rec, samples)[0],
        "marks": [{"time": m.time, "label": m.label, "target": m.target} for m in found],
        "view": [round(float(x), 6) for x in box],
        "mirror": getattr(rec.scenario, "view", "front") == "back",
    }
    return scene, frames
