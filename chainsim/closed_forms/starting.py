"""Motor and load on their way to speed: run-up, and stick-slip."""

from __future__ import annotations

import math
from typing import NamedTuple

from chainsim.closed_forms.drive import motor_speed


class RunUp(NamedTuple):
    """Start of a geared motor against a constant load.

    Attributes
    ----------
    inertia : float
        All inertia, seen at the motor [kg m2].
    load_torque : float
        Torque of the load, seen at the motor [N m].
    time_constant : float
        Time to 63 % of the final speed [s].
    final_speed : float
        Speed of the motor in the end [rad/s].
    time_to_95 : float
        Time to 95 % of it [s].
    """

    inertia: float
    load_torque: float
    time_constant: float
    final_speed: float
    time_to_95: float


class StickSlip(NamedTuple):
    """One cycle of a load that is dragged through a spring and sticks.

    Attributes
    ----------
    period : float
        Time of a cycle [s].
    slip_time, stick_time : float
        Its two parts [s].
    least_torque, largest_torque : float
        Range of the spring torque [N m].
    largest_speed : float
        Largest speed of the load [rad/s].
    """

    period: float
    slip_time: float
    stick_time: float
    least_torque: float
    largest_torque: float
    largest_speed: float


def run_up(
    motor_inertia: float,
    load_inertia: float,
    ratio: float,
    efficiency: float,
    load_torque: float,
    no_load_speed: float,
    stall_torque: float,
) -> RunUp:
    """Start of a geared motor against a constant load, the motor driving.

    Parameters
    ----------
    motor_inertia : float
        Inertia of the motor [kg m2].
    load_inertia : float
        Inertia at the output, chain and balls as `m R²` [kg m2].
    ratio : float
        Turns of the motor for one of the output (dimensionless).
    efficiency : float
        Efficiency of the gear (dimensionless).
    load_torque : float
        Torque at the output [N m].
    no_load_speed : float
        Speed of the motor without load [rad/s].
    stall_torque : float
        Torque of the motor standing still [N m].

    Returns
    -------
    RunUp
        The speed follows `ω (1 − exp(−t/τ))`.

    References
    ----------
    Reflected inertia: R. L. Norton, *Machine Design*, and handbooks of motor makers (from
    memory).
    """
    inertia = motor_inertia + load_inertia / (ratio**2 * efficiency)
    torque = load_torque / (ratio * efficiency)
    constant = inertia * no_load_speed / stall_torque
    final = motor_speed(torque, no_load_speed, stall_torque)
    return RunUp(inertia, torque, constant, final, constant * math.log(20.0))


def stick_slip(
    inertia: float, stiffness: float, static_torque: float, sliding_torque: float, rate: float
) -> StickSlip:
    """Load dragged at a steady rate through a torsional spring against dry friction.

    Parameters
    ----------
    inertia : float
        Inertia of the load [kg m2].
    stiffness : float
        Stiffness of the spring [N m/rad].
    static_torque, sliding_torque : float
        Friction torque at rest and in motion [N m].
    rate : float
        Rate at which the spring's far end is turned [rad/s].

    Returns
    -------
    StickSlip
        The repeated cycle, without other damping.

    Notes
    -----
    While it slips the load swings about the moving end: with `X = (Ts − Tk)/k` the swing
    starts at phase `atan2(Ω/ω, X)` and lasts `(π + 2 ψ)/ω`; then it sticks for `2 X/Ω`.
    """
    speed = math.sqrt(stiffness / inertia)
    start = (static_torque - sliding_torque) / stiffness
    phase = math.atan2(rate / speed, start)
    swing = math.hypot(start, rate / speed)
    slip, stick = (math.pi + 2.0 * phase) / speed, 2.0 * start / rate
    return StickSlip(
        slip + stick, slip, stick,
        sliding_torque - stiffness * swing, sliding_torque + stiffness * swing,
        rate + swing * speed,
    )  # fmt: skip
