"""Findings about the drive itself: it copes, and its shaft does not whirl."""

from __future__ import annotations

import math
from typing import Any

import numpy as np

from chainsim.analysis.drive import STALL_TIME as LONGEST_STAND
from chainsim.analysis.drive import Duty, droop, duty, stall
from chainsim.analysis.materials import SHAFT_MATERIALS
from chainsim.analysis.stops import overrun, run_back
from chainsim.analysis.survey import Survey
from chainsim.analysis.work import efficiency
from chainsim.closed_forms import whirl_speed
from chainsim.findings.finding import (
    DOES_NOT_APPLY,
    Finding,
    Measure,
    add_note,
    judged,
    unjudged,
)
from chainsim.findings.places import on_sprocket
from chainsim.findings.wording import amount

RUN_BACK_PITCHES = 1.0
"""Run-back that counts as none [pitches]: backlash and the give of chain and shaft."""


def drive_copes(s: Survey) -> Finding:
    """Whether the drive keeps its speed and stays inside its rating.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        The least of: time at a stand under power, run-back after a stop, cut or reversal,
        droop, peak torque, and root mean square torque of steady running against the
        continuous rating. Torques are told at the driven sprocket. A set speed without a
        largest torque copes with everything: it is measured, and judged only on run-back.
    """
    load = duty(s)
    measures = [*_torques(s, load), *_standing(s), *_drooping(s), *_running_back(s)]
    return add_note(judged(measures, s.scenario.limits.reserve), _duty_note(s, load))


def _standing(s: Survey) -> list[Measure]:
    """Time that the drive stood under power; a set speed without a largest torque cannot."""
    if s.scenario.drive.kind == "speed" and s.scenario.drive.max_torque is None:
        return []
    start, duration = stall(s)
    return [
        Measure(
            what="longest stand under power",
            value=duration,
            unit="s",
            limit=LONGEST_STAND,
            time=start,
            place=on_sprocket(s.scenario.drive.sprocket),
            has_failed=duration > LONGEST_STAND or "stall" in s.rec.stop_reason,
        )
    ]


def _torques(s: Survey, load: Duty) -> list[Measure]:
    """Peak torque and heating torque against what the drive can give."""
    place = on_sprocket(s.scenario.drive.sprocket)
    most, lasting = _ratings(s)
    peak = Measure(
        what="peak torque", value=load.peak_torque, unit="N m", limit=most, time=load.peak_time,
        place=place,
    )  # fmt: skip
    heating = Measure(
        what="r.m.s. torque in steady running", value=load.rms_torque, unit="N m", limit=lasting,
        place=place,
    )  # fmt: skip
    return [peak, heating] if math.isfinite(load.rms_torque) else [peak]


def _ratings(s: Survey) -> tuple[float | None, float | None]:
    """Largest and continuous torque at the driven sprocket [N m]; None where not stated."""
    drive = s.scenario.drive
    if drive.kind == "speed" or drive.motor is None:
        return drive.max_torque, None
    motor = drive.motor
    gain = motor.gear_ratio * motor.gear_efficiency
    most = motor.pull_out_torque if motor.stepper and motor.pull_out_torque else motor.stall_torque
    lasting = motor.continuous_torque
    return most * gain, None if lasting is None else lasting * gain


def _drooping(s: Survey) -> list[Measure]:
    """Loss of speed under load."""
    lost = droop(s)
    if lost is None:
        return []
    return [
        Measure(
            what="speed droop",
            value=lost.share,
            unit="1",
            limit=s.scenario.limits.droop,
            time=lost.time,
            place=on_sprocket(s.scenario.drive.sprocket),
        )
    ]


def _running_back(s: Survey) -> list[Measure]:
    """Run-back, where there was anything to run back after."""
    if overrun(s) is None and not run_back(s).cause:
        return []
    back = run_back(s)
    cause = f" after {back.cause.replace('_', ' ')}" if back.cause else ""
    return [
        Measure(
            what=f"run-back{cause}",
            value=back.distance,
            unit="m",
            limit=RUN_BACK_PITCHES * s.pitch,
            time=back.time,
            place=on_sprocket(s.scenario.drive.sprocket),
        )
    ]


def _duty_note(s: Survey, load: Duty) -> str:
    """Power and current of steady running, overrun after a stop."""
    notes = []
    if math.isfinite(load.mean_power):
        notes.append(f"mean power {amount(load.mean_power, 'W')}")
    current = s.channel("drive/current")
    if current is not None and np.isfinite(current).any():
        notes.append(f"peak current {float(np.nanmax(np.abs(current))):.3g} A")
    work = efficiency(s)
    if work is not None:
        spent, lifted = amount(work.work_per_ball, "J"), amount(work.lift_work_per_ball, "J")
        notes.append(f"{spent} a ball for {lifted} of lifting, efficiency {work.efficiency:.0%}")
    ran_on = overrun(s)
    if ran_on is not None:
        after = ran_on.cause.replace("_", " ")
        notes.append(f"ran on {1e3 * ran_on.distance:.0f} mm after {after}")
    return "; ".join(notes)


def shaft_below_whirl(s: Survey) -> Finding:
    """Whether the drive shaft runs well below its first critical speed.

    Parameters
    ----------
    s : Survey
        The recording.

    Returns
    -------
    Finding
        Value: fastest running speed of the shaft [rad s-1]; limit: the first critical speed of
        its longest span, less the guard band. A closed form; nothing of it is simulated.
    """
    shaft: Any = s.scenario.drive.shaft
    if shaft is None or shaft.length is None or shaft.diameter is None:
        return unjudged(DOES_NOT_APPLY, "no shaft with length and diameter is stated")
    material = SHAFT_MATERIALS[shaft.material or "steel"]
    span = shaft.length / (shaft.supports - 1)
    critical = whirl_speed(shaft.diameter, span, material.modulus, material.density)
    driven = s.sprocket_names.index(s.scenario.drive.sprocket)
    rate = np.abs(s["sprockets/rate"][:, driven])
    at = int(np.argmax(rate))
    measure = Measure(
        what="shaft speed",
        value=float(rate[at]),
        unit="rad s-1",
        limit=critical * (1.0 - s.scenario.limits.guard_band),
        time=float(s.time[at]),
        place=f"span of {span:.2f} m between {shaft.supports} supports",
    )
    note = (
        f"closed form for a straight, balanced {shaft.material or 'steel'} shaft on pinned "
        f"supports, not simulated; first critical speed {60 * critical / (2 * math.pi):.0f} rev/min"
    )
    return judged([measure], s.scenario.limits.reserve, note)
