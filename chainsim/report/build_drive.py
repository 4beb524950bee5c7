"""The drive on the build sheet: what the motor has to give, and its margins."""

from __future__ import annotations

from collections.abc import Iterator

from chainsim import closed_forms as cf
from chainsim.analysis.advice import STALL_RESERVE
from chainsim.analysis.drive import droop, duty
from chainsim.analysis.sized import sprocket_torque, starting_pull
from chainsim.report.build_case import Case, steady_mean
from chainsim.report.build_line import (
    CLOSED,
    CLOSED_ONLY,
    PRACTICE,
    SIMULATED,
    STATED,
    Line,
    Part,
    known,
    ran_or_reckoned,
)
from chainsim.scenario.schema_drive import Motor

RAMPS = {
    "smooth": "speed follows half a cosine: the controller must give it, a bare switch does not",
    "linear": "speed grows evenly: the controller must give it, a bare switch does not",
}
"""What a shape of ramp asks of the controller."""

REACTIONS = {
    "frame": "the frame, by a torque arm",
    "mount": "the hung unit, by its weight off the axle",
}
"""What a reaction is in a workshop's words."""

SPEED_SHARE = 0.05
"""Band of the motor's speed to accept (dimensionless); our choice."""

CONTINUOUS_SHARE = 0.8
"""Share of its continuous rating that a motor runs at (dimensionless); common practice, no
source."""


def drive_part(case: Case) -> Part:
    """Write the duty of the motor with its margins.

    Parameters
    ----------
    case : Case
        The lift.
    """
    motor = case.scenario.drive.motor
    text = (
        "What was calculated with is a set speed, not a motor: order one that gives at least this."
        if motor is None
        else "Torques and speeds at the driven sprocket, unless the line says motor."
    )
    lines = list(_load_lines(case))
    lines += _motor_lines(case) if motor is not None else _order_lines(case)
    lines.append(_pull_line(case))
    return Part("drive", "Motor duty", text, tuple(lines))


def running_torque(case: Case) -> tuple[float | None, float | None]:
    """Return the mean torque on the driven sprocket in steady running.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    simulated, closed : float or None
        What the run gave and what the closed form says [N m].
    """
    load = case.simulated(duty)
    closed = sprocket_torque(case.sized) if case.sized else None
    return (abs(load.mean_torque) if load else None), closed


def driven_rate(case: Case) -> float | None:
    """Return the mean speed of the driven sprocket in steady running [rad/s], None without a run.

    Parameters
    ----------
    case : Case
        The lift.
    """
    return case.simulated(lambda s: abs(steady_mean(s, "sprockets/rate", case.driven)))


def wanted_torques(case: Case) -> tuple[float, float] | None:
    """Return what a gearmotor must give where the scenario has none.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    lasting, stall : float
        Least continuous and least stall torque at the sprocket [N m]; None where neither a run nor
        a closed form tells.
    """
    load, (mean, closed) = case.simulated(duty), running_torque(case)
    running = mean if known(mean) else closed
    heating = load.rms_torque if load is not None and known(load.rms_torque) else running
    if running is None or heating is None:
        return None
    peak = load.peak_torque / CONTINUOUS_SHARE if load is not None else 0.0
    return heating / CONTINUOUS_SHARE, max(STALL_RESERVE * running, peak)


def _load_lines(case: Case) -> Iterator[Line]:
    load, (mean, closed) = case.simulated(duty), running_torque(case)
    radius = case.lift.wheels[case.driven].radius
    drive = case.scenario.drive
    yield Line("driven sprocket", case.lift.wheels[case.driven].name)
    if drive.kind == "speed":
        yield Line("starts and stops on a ramp of", drive.ramp, "s", note=RAMPS[drive.ramp_shape])
    yield Line("what takes its torque", REACTIONS[drive.reaction])
    line = Line("speed of the driven sprocket", None, "rad s-1", note="mean over a turn")
    yield ran_or_reckoned(line, driven_rate(case), case.rate)
    yield ran_or_reckoned(Line("mean torque on it, running", None, "N m"), mean, closed)
    yield ran_or_reckoned(Line("r.m.s. torque, running", None, "N m"), load and load.rms_torque)
    start = (starting_pull(case.sized) * radius + (closed or 0.0)) if case.sized else None
    line = Line("peak torque", None, "N m", note="whole run, starts and stops included")
    yield ran_or_reckoned(line, load and load.peak_torque, start)
    power = closed * case.rate if closed is not None else None
    line = Line("mechanical power, running", None, "W")
    yield ran_or_reckoned(line, load and load.mean_power, power)


def _order_lines(case: Case) -> Iterator[Line]:
    """What to order where the scenario has no motor."""
    torques = wanted_torques(case)
    if torques is None:
        return
    source = SIMULATED if case.run is not None else CLOSED_ONLY
    yield Line(
        "gearmotor: continuous torque of at least",
        torques[0],
        "N m",
        source,
        f"running at most at {100 * CONTINUOUS_SHARE:.0f} % of its rating; {PRACTICE}",
    )
    yield Line(
        "gearmotor: stall torque of at least",
        torques[1],
        "N m",
        source,
        f"{STALL_RESERVE:g} times the running torque, and above the peak; {PRACTICE}",
    )
    rate = case.rate
    yield Line(
        "gearmotor: speed under that load",
        rate,
        "rad s-1",
        STATED,
        "not its speed without load; set it by the supply or a controller",
        (1.0 - SPEED_SHARE) * rate,
        (1.0 + SPEED_SHARE) * rate,
    )


def _pull_line(case: Case) -> Line:
    """Torque at which a stalled drive reaches the strength of the links."""
    radius = case.lift.wheels[case.driven].radius
    most = case.sized.running.most if case.sized else 0.0
    spare = (case.scenario.chain.allowable_tension - most) * radius
    motor = case.scenario.drive.motor
    stall = case.scenario.drive.max_torque
    if motor is not None:
        stall = motor.stall_torque * motor.gear_ratio * motor.gear_efficiency
    note = (
        "above it a jam loads links beyond what they are allowed: a clutch or the supply limits it"
    )
    if stall is not None:
        word = "does not reach it" if stall <= spare else "EXCEEDS it"
        note = f"this drive stalls at {1e3 * stall:.0f} mN m and {word}; {note}"
    return Line("torque limit of the drive, at most", spare, "N m", CLOSED, note, None, spare)


def _motor_lines(case: Case) -> Iterator[Line]:
    motor, (mean, closed) = case.scenario.drive.motor, running_torque(case)
    torque = mean if known(mean) else closed
    if motor is None or torque is None:
        return
    source = SIMULATED if known(mean) else CLOSED_ONLY
    load = torque / (motor.gear_ratio * motor.gear_efficiency)
    yield Line("motor: supply", motor.supply, "V")
    yield Line("motor: gear ratio", motor.gear_ratio, "1")
    yield Line("motor: speed without load", motor.no_load_speed, "rad s-1")
    yield Line("motor: torque, running", load, "N m", source, "through gear ratio and efficiency")
    if motor.continuous_torque is not None:
        share = load / motor.continuous_torque
        yield Line("motor: share of its continuous torque", share, "share", source, "", None, 1.0)
    share = load / motor.stall_torque
    yield Line(
        "motor: share of its stall torque", share, "share", source, "", None, 1 / STALL_RESERVE
    )
    speed = cf.motor_speed(load, motor.no_load_speed, motor.stall_torque)
    ran = driven_rate(case)
    line = Line("motor: speed, running", None, "rad s-1")
    yield ran_or_reckoned(line, ran and ran * motor.gear_ratio, speed)
    slow = case.simulated(droop)
    line = Line("motor: loss of speed under load", None, "share")
    yield ran_or_reckoned(line, slow and slow.share, 1.0 - speed / motor.no_load_speed)
    yield from _heat_lines(case, motor, load, speed)


def reckoned_current(case: Case, torque: float | None) -> float | None:
    """Return the current of the motor at a torque on the sprocket, by its straight line.

    Parameters
    ----------
    case : Case
        The lift.
    torque : float or None
        At the driven sprocket [N m].

    Returns
    -------
    float or None
        Current [A]; None without a motor or a torque.
    """
    motor = case.scenario.drive.motor
    if motor is None or torque is None:
        return None
    load = torque / (motor.gear_ratio * motor.gear_efficiency)
    return cf.motor_current(load, motor.stall_torque, motor.no_load_current, motor.stall_current)


def _heat_lines(case: Case, motor: Motor, load: float, speed: float) -> Iterator[Line]:
    """Current, and the power that stays in the motor as heat."""
    closed = cf.motor_current(load, motor.stall_torque, motor.no_load_current, motor.stall_current)
    ran = case.simulated(lambda s: steady_mean(s, "drive/current"))
    yield ran_or_reckoned(Line("motor: current, running", None, "A"), ran, closed)
    yield Line("motor: current when stalled", motor.stall_current, "A", STATED, "fuse below it")
    has_run = known(ran)
    heat = motor.supply * (ran if has_run else closed) - load * speed
    yield Line(
        "motor: heat",
        heat,
        "W",
        SIMULATED if has_run else CLOSED_ONLY,
        "supply power less shaft power at the full supply voltage",
    )
