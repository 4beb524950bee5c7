"""Each file of measurements as a bench: what it can tell, and what the model says it should read.

A bench that another kind of measurement needs is one more class with the same members, and a row
in `BENCHES`.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any, NamedTuple, Protocol

import numpy as np

from chainsim.errors import Problem, ScenarioError
from chainsim.kernels.drive import motor_torque
from chainsim.model.lift import build_lift
from chainsim.model.packing_wheels import pack_drive
from chainsim.study.fit_reading import Measurement
from chainsim.study.fit_strand import Trace, bounce, growth, piece_of, pluck, tilts

FEWEST_LINKS = 3
"""Fewest links of a piece of chain on the bench [dimensionless]."""

LATEST_RELEASE = 1.0
"""How far the clock may be off at the letting go, in steps of the log [dimensionless]."""

EARLY = 0.3
"""Share of a decay that is followed first [dimensionless]: from too far away a fit of all of it
catches on a wrong number of swings."""

STIFFNESS, DAMPING = "chain.link_stiffness", "chain.link_damping"
MOMENT, FRICTION, AIR = "chain.joint.moment", "chain.joint.friction", "chain.air_damping"
MOTOR = "drive.motor"


class Own(NamedTuple):
    """A number that belongs to one file alone, such as how far a strand was pulled.

    Attributes
    ----------
    name : str
        What it is.
    start, low, high : float
        First guess and bounds [SI].
    """

    name: str
    start: float
    low: float
    high: float


class Bench(Protocol):
    """What the fit asks of a bench.

    Attributes
    ----------
    measurement : Measurement
    keys : tuple of str
        Scenario keys that its readings depend on and can tell.
    own : tuple of Own
        Numbers of its own to be found beside them.
    observed : ndarray, shape (n_readings,)
        Readings [SI].
    groups : ndarray of int, shape (n_readings,)
        Readings with the same number have the same scatter (dimensionless).
    early : ndarray of bool, shape (n_readings,)
        Readings to follow first; the rest is added once they are followed.
    """

    measurement: Measurement
    keys: tuple[str, ...]
    own: tuple[Own, ...]
    observed: np.ndarray
    groups: np.ndarray
    early: np.ndarray

    def guess(self) -> dict[str, float]:
        """Rough values by closed forms, to start from [SI]."""
        ...

    def predicted(self, values: Mapping[str, float], own: np.ndarray) -> np.ndarray:
        """What the model reads [SI]."""
        ...


class StretchBench:
    """Growth of a hung length under loads."""

    keys = (STIFFNESS,)
    own: tuple[Own, ...] = ()

    def __init__(self, scenario: Any, measurement: Measurement) -> None:
        self.measurement = measurement
        self._piece = _piece(scenario, measurement)
        self._loads = measurement.force("load", scenario.frame.gravity)
        self.observed = measurement.columns["growth"]
        self.groups = np.zeros(len(self.observed), int)
        self.early = np.ones(len(self.observed), bool)

    def guess(self) -> dict[str, float]:
        """Stiffness of a link: links times load over growth, the middle of all rows [N/m]."""
        ratio = np.median(self.observed[self._loads > 0.0] / self._loads[self._loads > 0.0])
        return {STIFFNESS: self._piece.n_links / ratio} if ratio > 0.0 else {}

    def predicted(self, values: Mapping[str, float], own: np.ndarray) -> np.ndarray:
        """Growth under each load [m].

        Parameters
        ----------
        values : mapping of str to float
            What is fitted [SI].
        own : ndarray, shape (0,)
            Nothing (dimensionless).
        """
        return growth(self._piece, values, self._loads)


class DecayBench:
    """Motion of a strand that was let go; its start, its zero and its clock are found beside."""

    def __init__(self, scenario: Any, measurement: Measurement) -> None:
        self.measurement = measurement
        self._piece = _piece(scenario, measurement)
        self._load = float(measurement.force("load", scenario.frame.gravity))
        self._along = measurement.stated["motion"] == "along"
        self._at = float(measurement.stated.get("at", 0.5 * float(measurement.stated["length"])))
        # a strand that is plucked far enough to rub in its joints is also drawn tighter by it
        self.keys = (STIFFNESS, DAMPING) if self._along else (STIFFNESS, MOMENT, FRICTION, AIR)
        self._time = measurement.columns["time"]
        self.observed = measurement.columns["displacement"]
        self.groups = np.zeros(len(self.observed), int)
        self.early = np.arange(len(self.observed)) < EARLY * len(self.observed)
        self._interval = float(np.median(np.diff(self._time)))
        zero = float(np.median(self.observed[len(self.observed) // 2 :]))
        size = float(np.abs(self.observed - zero).max())
        late = LATEST_RELEASE * self._interval
        self.own = (
            Own("how far it was pulled", float(self.observed[0]) - zero, -3.0 * size, 3.0 * size),
            Own("zero of the scale", zero, zero - size, zero + size),
            Own("moment of letting go", 0.0, -late, late),
        )
        self._kept: dict[tuple[float, ...], Trace] = {}

    def guess(self) -> dict[str, float]:
        """Stiffness from the frequency and damping from the decay, where it moves along [SI]."""
        if not self._along:
            return {}
        moved = self.observed - np.median(self.observed[len(self.observed) // 2 :])
        rate = _rate(moved, self._interval)
        piece = self._piece
        mass = self._load / piece.gravity + piece.n_links * piece.link_mass / 3.0
        stiffness = rate**2 * piece.n_links * mass
        half = len(moved) // 2
        first, second = np.std(moved[:half]), np.std(moved[half:])
        fall = max(math.log(first / second) / (half * self._interval), 1e-3 * rate)
        damping = 2.0 * fall * math.sqrt(stiffness / piece.link_mass) / rate**2
        return {STIFFNESS: stiffness, DAMPING: damping}

    def predicted(self, values: Mapping[str, float], own: np.ndarray) -> np.ndarray:
        """Displacement at each time stamp [m].

        Parameters
        ----------
        values : mapping of str to float
            What is fitted [SI].
        own : ndarray, shape (3,)
            Pull [m], zero [m], moment of letting go [s].
        """
        return own[1] + self._trace(values, float(own[0])).at(self._time - own[2])

    def _trace(self, values: Mapping[str, float], pulled: float) -> Trace:
        """Simulate, or take what was simulated with these values."""
        known = (*values.values(), pulled)
        if known not in self._kept:
            late = LATEST_RELEASE * self._interval
            n_samples = math.ceil((self._time[-1] + late) / self._interval) + 2
            self._kept = dict(list(self._kept.items())[-20:])
            if self._along:
                made = bounce(self._piece, values, self._load, pulled, self._interval, n_samples)
            else:
                made = pluck(
                    self._piece, values, self._load, self._at, pulled, self._interval, n_samples
                )
            self._kept[known] = made
        return self._kept[known]


class TiltBench:
    """Tilt of a link under a weight on an arm, against the tension of the strand."""

    keys = (MOMENT, FRICTION)
    own: tuple[Own, ...] = ()

    def __init__(self, scenario: Any, measurement: Measurement) -> None:
        gravity = scenario.frame.gravity
        self.measurement = measurement
        self._piece = _piece(scenario, measurement)
        self._loads = measurement.force("load", gravity)
        self._weight = float(measurement.force("weight", gravity))
        self._arm = float(measurement.stated["arm"])
        self.observed = measurement.columns["tilt"]
        self.groups = np.zeros(len(self.observed), int)
        self.early = np.ones(len(self.observed), bool)

    def guess(self) -> dict[str, float]:
        """Nothing: the fit starts from the scenario."""
        return {}

    def predicted(self, values: Mapping[str, float], own: np.ndarray) -> np.ndarray:
        """Tilt under each load [rad].

        Parameters
        ----------
        values : mapping of str to float
            What is fitted [SI].
        own : ndarray, shape (0,)
            Nothing (dimensionless).
        """
        return tilts(self._piece, values, self._loads, self._weight, self._arm)


class MotorBench:
    """Speed and current of a motor at its rated supply against a torque that brakes it."""

    own: tuple[Own, ...] = ()

    def __init__(self, scenario: Any, measurement: Measurement) -> None:
        motor = scenario.drive.motor
        if motor is None or motor.table is not None:
            rule = (
                "the scenario has no drive.motor to be fitted"
                if motor is None
                else "the scenario states drive.motor.table: a straight line is fitted, remove it"
            )
            raise ScenarioError([Problem(measurement.file, None, "kind", "motor", rule)])
        self.measurement = measurement
        self._drive = pack_drive(build_lift(scenario))
        self._at_motor = measurement.stated["shaft"] == "motor"
        self._ratio = motor.gear_ratio
        columns = measurement.columns
        self._torque = columns["torque"]
        self._has_speed, self._has_current = "speed" in columns, "current" in columns
        names = [name for name in ("speed", "current") if name in columns]
        self.observed = np.concatenate([columns[name] for name in names])
        self.groups = np.repeat(np.arange(len(names)), len(self._torque))
        self.early = np.ones(len(self.observed), bool)
        self.keys = tuple(f"{MOTOR}.{name}" for name in self._names())

    def _names(self) -> tuple[str, ...]:
        names: tuple[str, ...] = ("stall_torque",)
        if self._has_speed:
            names = ("no_load_speed", *names)
        if self._has_current:
            names = (*names, "no_load_current", "stall_current")
        return names if self._at_motor else (*names, "gear_efficiency")

    def guess(self) -> dict[str, float]:
        """Straight lines through the readings [SI]."""
        columns = self.measurement.columns
        scale = 1.0 if self._at_motor else self._ratio
        found: dict[str, float] = {}
        if self._has_speed:
            slope, start = np.polyfit(self._torque, columns["speed"], 1)
            if slope < 0.0 < start:
                found["no_load_speed"], found["stall_torque"] = start * scale, -start / slope
        if self._has_current:
            slope, start = np.polyfit(self._torque, columns["current"], 1)
            stall = found.get("stall_torque", float(self._torque.max()))
            found["stall_current"] = start + slope * stall
            found["no_load_current"] = max(start, 1e-3 * found["stall_current"])
        if "stall_torque" in found:
            found["stall_torque"] /= scale
        return {f"{MOTOR}.{name}": value for name, value in found.items() if value > 0.0}

    def predicted(self, values: Mapping[str, float], own: np.ndarray) -> np.ndarray:
        """Speed [rad/s], then current [A], at each torque.

        Parameters
        ----------
        values : mapping of str to float
            What is fitted [SI].
        own : ndarray, shape (0,)
            Nothing (dimensionless).
        """
        value = {key.removeprefix(f"{MOTOR}."): number for key, number in values.items()}
        record = self._drive[0]
        record["stall_torque"] = value["stall_torque"] * self._ratio
        record["free_rate"] = value["no_load_speed"] / self._ratio
        record["supply"], record["level"] = 0, 1.0
        loss = 0.0 if self._at_motor else 1.0 / value["gear_efficiency"] - 1.0
        load = self._torque * (self._ratio if self._at_motor else 1.0) * (1.0 + loss)
        found = []
        if self._has_speed:
            # the law is a straight line: two of its points say where it meets the load
            held = motor_torque(record, 0.0)
            slope = motor_torque(record, 1.0) - held
            rate = (load - held) / slope
            found.append(rate * (self._ratio if self._at_motor else 1.0))
        if self._has_current:
            idle, stall = value["no_load_current"], value["stall_current"]
            found.append(idle + (stall - idle) * load / float(record["stall_torque"]))
        return np.concatenate(found)


def _piece(scenario: Any, measurement: Measurement):
    """Cut the piece of chain that a file speaks of."""
    length = float(measurement.stated["length"])
    piece = piece_of(scenario, length)
    if piece.n_links < FEWEST_LINKS:
        rule = f"at least {FEWEST_LINKS} links of {scenario.chain.pitch * 1e3:g} mm are due"
        found = f"{length * 1e3:g} mm"
        raise ScenarioError([Problem(measurement.file, None, "length", found, rule)])
    return piece


def _rate(moved: np.ndarray, interval: float) -> float:
    """Angular frequency of the strongest oscillation [rad/s], from a padded spectrum."""
    size = 8 * len(moved)
    spectrum = np.abs(np.fft.rfft((moved - moved.mean()) * np.hanning(len(moved)), size))
    peak = max(1, int(np.argmax(spectrum)))
    return 2.0 * math.pi * peak / (size * interval)


BENCHES: Mapping[str, Callable[..., Any]] = {
    "stretch": StretchBench,
    "decay": DecayBench,
    "tilt": TiltBench,
    "motor": MotorBench,
}
"""Kind of measurement -> its bench."""
