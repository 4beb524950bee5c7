"""The situations of the proving run: scenario values that put a lift into each of them."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from chainsim.errors import CallError
from chainsim.study.scenario_numbers import takeup_sprocket

# The conditions of the proving run are ours: common practice, no source.
_AFTER = 3.0  # time that a situation is followed after what happens in it [s]


_STANDSTILL = 2.0  # between a stop and the restart [s]


_STOP_RAMP = 0.5  # time a stop takes [s]


_KNOCK = ("5 m/s2", "30 ms", "0 deg")  # a visitor against the frame: peak, length, direction


_BLOCKED = 2.0  # time for which the take-up is blocked [s]


_JAM_SHARE = 0.5  # of the allowable link tension, at which the jam lets go


_BALLS_SEEN = 8  # delivered in steady running, so that the rate can be judged


@dataclass(frozen=True)
class Timing:
    """Times that suit a lift.

    Attributes
    ----------
    ready : float
        When it runs steadily after its start [s].
    rise : float
        Time of a ball from the lowest to the highest axle [s].
    turn : float
        Time of one turn of the chain [s].
    pocket : float
        Time from one pocket to the next [s].
    """

    ready: float
    rise: float
    turn: float
    pocket: float


def timing(scenario: Any) -> Timing:
    """Times that suit a lift, from its size and its speed.

    Parameters
    ----------
    scenario : Scenario
        The lift.

    Returns
    -------
    Timing
        Its times.
    """
    drive = scenario.drive
    heights = [sprocket.center[1] for sprocket in scenario.sprocket]
    height = max(heights) - min(heights)
    teeth = sum(sprocket.teeth for sprocket in scenario.sprocket) / len(scenario.sprocket)
    pitch = scenario.chain.pitch
    speed = drive.chain_speed or _motor_speed(scenario)
    every = scenario.carriers.every if scenario.carriers is not None else 1
    return Timing(
        ready=drive.ramp + scenario.run.settle,
        rise=height / speed,
        turn=(2.0 * height + teeth * pitch) / speed,
        pocket=every * pitch / speed,
    )


def _motor_speed(scenario: Any) -> float:
    """Chain speed at the no-load speed of the motor [m/s]."""
    motor = scenario.drive.motor
    driven = next(s for s in scenario.sprocket if s.name == scenario.drive.sprocket)
    turns = motor.no_load_speed / motor.gear_ratio / (2.0 * math.pi)
    return turns * driven.teeth * scenario.chain.pitch


def situation_values(scenario: Any, name: str, times: Timing) -> dict[str, Any] | str:
    """Scenario values that put a lift into a situation.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    name : str
        The situation.
    times : Timing
        Times that suit the lift.

    Returns
    -------
    dict of str to object, or str
        Values by dotted key, as in a file; or the reason why it does not apply.
    """
    if scenario.balls is None and ("loaded" in name or "ball" in name):
        return "the lift carries no balls"
    made = _SITUATIONS[name](scenario, times)
    if isinstance(made, str):
        return made
    events, duration, start = made
    values: dict[str, Any] = {"event": events, "run.duration": f"{duration:.6g} s"}
    if scenario.balls is not None:
        values["balls.start"] = start
    return values


_Made = tuple[list[dict[str, Any]], float, str] | str


def _start_empty(scenario: Any, times: Timing) -> _Made:
    return [], times.ready + times.rise + _BALLS_SEEN * times.pocket, "empty"


def _start_loaded(scenario: Any, times: Timing) -> _Made:
    return [], times.ready + _AFTER, "loaded"


def _steady(scenario: Any, times: Timing) -> _Made:
    return [], times.ready + times.turn + _BALLS_SEEN * times.pocket, "loaded"


def _stop(scenario: Any, times: Timing) -> _Made:
    return [_event("stop", times.ready, ramp=_s(_STOP_RAMP))], times.ready + _AFTER, "loaded"


def _restart(scenario: Any, times: Timing) -> _Made:
    again = times.ready + _STOP_RAMP + _STANDSTILL
    events = [
        _event("stop", times.ready, ramp=_s(_STOP_RAMP)),
        _event("start", again, ramp=_s(scenario.drive.ramp)),
    ]
    return events, again + scenario.drive.ramp + _AFTER, "loaded"


def _cut(scenario: Any, times: Timing) -> _Made:
    return [_event("supply_cut", times.ready)], times.ready + _AFTER, "loaded"


def _reversed(scenario: Any, times: Timing) -> _Made:
    return [_event("supply_reversed", times.ready)], times.ready + times.turn / 2, "loaded"


def _jam(scenario: Any, times: Timing) -> _Made:
    heights = [sprocket.center[1] for sprocket in scenario.sprocket]
    event = _event(
        "jam",
        times.ready,
        height=f"{0.5e3 * (max(heights) + min(heights)):.6g} mm",
        release_force=f"{_JAM_SHARE * scenario.chain.allowable_tension:.6g} N",
    )
    return [event], times.ready + times.pocket + _AFTER, "loaded"


def _missing(scenario: Any, times: Timing) -> _Made:
    return [_event("missing_ball", times.ready)], times.ready + times.rise + _AFTER, "loaded"


def _double(scenario: Any, times: Timing) -> _Made:
    return [_event("double_ball", times.ready)], times.ready + times.rise + _AFTER, "loaded"


def _knock(scenario: Any, times: Timing) -> _Made:
    peak, length, direction = _KNOCK
    event = _event("knock", times.ready, acceleration=peak, duration=length, direction=direction)
    return [event], times.ready + _AFTER, "loaded"


def _blocked(scenario: Any, times: Timing) -> _Made:
    try:
        sprocket = takeup_sprocket(scenario)
    except CallError:
        return "no axle of the lift can move"
    event = _event("takeup_blocked", times.ready, sprocket=sprocket.name, duration=_s(_BLOCKED))
    return [event], times.ready + _BLOCKED + _AFTER, "loaded"


def _event(kind: str, at: float, **keys: Any) -> dict[str, Any]:
    return {"kind": kind, "at": _s(at), **keys}


def _s(time: float) -> str:
    return f"{time:.6g} s"


_SITUATIONS: dict[str, Callable[[Any, Timing], _Made]] = {
    "start empty": _start_empty,
    "start loaded": _start_loaded,
    "steady": _steady,
    "stop": _stop,
    "restart loaded": _restart,
    "supply cut": _cut,
    "supply reversed": _reversed,
    "jam": _jam,
    "missing ball": _missing,
    "double ball": _double,
    "knock": _knock,
    "take-up blocked": _blocked,
}
