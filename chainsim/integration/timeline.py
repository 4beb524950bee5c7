"""Dated events of a run: what happens when, and what each does to the arrays."""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np

from chainsim.integration.feeding import Feeder
from chainsim.integration.samples import Event
from chainsim.integration.start import Prepared
from chainsim.kernels.drive import SUPPLY_ON, SUPPLY_OPEN, SUPPLY_SHORTED, demanded_rate
from chainsim.kernels.layout import PER_WHEEL
from chainsim.model.lift import Lift

JAM_STIFFNESS_SHARE = 1.0
"""Stiffness of a jam over that of a link, where none is given [dimensionless]."""

KNOCK_TIME = 0.02
"""Length of a knock where none is given [s]."""

PAUSE = 1.0
"""Rest between the stop and the restart of the usual run [s]."""

TURNS = 3
"""Full turns of the chain in the usual run [dimensionless]."""


class Action(NamedTuple):
    """Something that happens at a moment.

    Attributes
    ----------
    time : float
        [s].
    kind : str
        As in a scenario's events, and ``"unblock"``.
    event : Event table of the scenario or None
        Its parameters; None for the usual start and stop.
    """

    time: float
    kind: str
    event: object


def timeline(lift: Lift) -> tuple[float, list[Action]]:
    """Return the duration of a run [s] and its actions in order of time.

    Where the scenario gives no duration: the strand is filled, the chain makes three full turns,
    the lift stops and restarts loaded.

    Parameters
    ----------
    lift : Lift
    """
    scenario = lift.scenario
    actions = [Action(0.0, "start", None)]
    actions += [Action(event.at, event.kind, event) for event in scenario.event]
    actions += [
        Action(event.at + (event.duration or KNOCK_TIME), "unblock", event)
        for event in scenario.event
        if event.kind == "takeup_blocked" and event.duration is not None
    ]
    duration = scenario.run.duration
    if duration is None:
        speed = scenario.drive.chain_speed
        length = float(np.sum(lift.pitch))
        ramp = scenario.drive.ramp
        fill = max((lift.route.length[k] for k in range(len(lift.strands))), default=length) / speed
        stop = scenario.run.settle + ramp + fill + TURNS * length / speed
        last = max((action.time for action in actions), default=0.0)
        if last <= 0.0:
            actions.append(Action(stop, "stop", None))
            actions.append(Action(stop + ramp + PAUSE, "start", None))
            duration = stop + ramp + PAUSE + ramp + max(scenario.run.settle, 0.5 * length / speed)
        else:
            duration = max(stop, last + scenario.run.settle + ramp + 0.5 * length / speed)
    return float(duration), sorted(actions, key=lambda action: action.time)


class Conductor:
    """Carries actions out on the arrays.

    Parameters
    ----------
    prepared : Prepared
    feeder : Feeder
    """

    def __init__(self, prepared: Prepared, feeder: Feeder) -> None:
        self.prepared = prepared
        self.feeder = feeder
        self.events: list[Event] = []
        self.reversed = 1.0
        drive = prepared.lift.scenario.drive
        if drive.supply_sign == "reversed" and drive.polarity == "as wired":
            self.reversed = -1.0

    def carry_out(self, action: Action, t: float) -> None:
        """Do what an action says, and log it.

        Parameters
        ----------
        action : Action
        t : float
            Time [s].
        """
        done = getattr(self, "_" + action.kind)(action.event, t)
        subject, value, unit, text = done
        self.events.append(Event(t, action.kind, subject, value, unit, text))

    def _start(self, event, t: float):
        """Start, or start again."""
        lift, drive = self.prepared.lift, self._drive
        ramp = event.ramp if event is not None else lift.scenario.drive.ramp
        drive["supply"] = SUPPLY_ON
        if drive["motor"]:
            drive["level"] = self.reversed * drive["forward"]
        else:
            target = lift.scenario.drive.chain_speed / drive["speed_per_rate"]
            self._ramp(t, self.reversed * drive["forward"] * target, ramp)
        return "drive", lift.scenario.drive.chain_speed, "m s-1", "the drive starts"

    def _stop(self, event, t: float):
        """Stop: ramp down and hold, or short the motor."""
        drive = self._drive
        ramp = event.ramp if event is not None else self.prepared.lift.scenario.drive.ramp
        if drive["motor"]:
            drive["supply"] = SUPPLY_SHORTED
        else:
            self._ramp(t, 0.0, ramp)
        return "drive", ramp, "s", "the drive stops"

    def _supply_cut(self, event, t: float):
        """Cut the supply: a motor coasts or brakes, a speed drive lets go."""
        drive = self._drive
        shorted = event.terminals == "shorted"
        drive["supply"] = SUPPLY_SHORTED if shorted else SUPPLY_OPEN
        if not drive["motor"]:
            drive["low"] = drive["high"] = 0.0
            drive["rate_from"] = drive["rate_to"] = 0.0
        how = "terminals shorted" if shorted else "terminals open"
        return "drive", math.nan, "", f"the supply is cut, {how}"

    def _supply_reversed(self, event, t: float):
        """Reverse the supply; a rectified drive goes on turning the right way."""
        drive = self._drive
        if self.prepared.lift.scenario.drive.polarity == "rectified":
            return "drive", math.nan, "", "the supply is reversed; the drive is rectified"
        self.reversed = -self.reversed
        if drive["motor"]:
            drive["level"] = -drive["level"]
        else:
            now = float(demanded_rate(drive, t))
            self._ramp(
                t, -now if now else -drive["rate_to"], self.prepared.lift.scenario.drive.ramp
            )
        return "drive", math.nan, "", "the supply is reversed"

    def _jam(self, event, t: float):
        """Catch the pocket nearest to a height on the frame by a stiff spring."""
        lift, packed = self.prepared.lift, self.prepared.packed
        world, state = packed.parts.world[0], packed.state
        pitch = lift.scenario.chain.pitch
        height = (
            event.height
            if event.height is not None
            else 0.5 * (lift.load_height + lift.unload_height)
        )
        link = self._link_at(height)
        out = 0.0
        if lift.scenario.carriers is not None:
            pocket = lift.scenario.carriers.pocket
            out = pocket.offset + (pocket.floor or 0.0)
        c = complex(0.5 * pitch, -out) / pitch
        zi = complex(state.x[link], state.y[link])
        zj = complex(state.x[link + 1], state.y[link + 1])
        place = (1.0 - c) * zi + c * zj
        stiffness = event.stiffness or JAM_STIFFNESS_SHARE * lift.scenario.chain.link_stiffness
        world["jam_link"], world["jam_re"], world["jam_im"] = link, c.real, c.imag
        world["jam_x"], world["jam_y"] = place.real, place.imag
        world["jam_stiffness"] = stiffness
        world["jam_release"] = event.release_force if event.release_force else 1.0e9
        world["jam_on"] = 1
        return f"link {link}", height, "m", f"link {link} is caught on the frame"

    def _link_at(self, height: float) -> int:
        """Return the carrier link, or link, on the rise that is nearest to a height [m]."""
        lift, state = self.prepared.lift, self.prepared.packed.state
        up = lift.up
        links = lift.carrier_links if len(lift.carrier_links) else np.arange(lift.n_links)
        best, found = math.inf, int(links[0])
        for link in links:
            i = int(link)
            rise = (state.x[i + 1] - state.x[i]) * up[0] + (state.y[i + 1] - state.y[i]) * up[1]
            here = state.x[i] * up[0] + state.y[i] * up[1]
            if rise > 0.0 and abs(here - height) < best:
                best, found = abs(here - height), i
        return found

    def _knock(self, event, t: float):
        """Knock the frame: a half-sine pulse of acceleration."""
        world = self.prepared.packed.parts.world[0]
        world["knock_x"] = event.acceleration * math.cos(event.direction)
        world["knock_y"] = event.acceleration * math.sin(event.direction)
        world["knock_start"], world["knock_time"] = t, event.duration or KNOCK_TIME
        return "frame", event.acceleration, "m s-2", "the frame is knocked"

    def _missing_ball(self, event, t: float):
        """Let the next ball not come."""
        self.feeder.skip_next += 1
        return "feed", math.nan, "", "the next ball will not come"

    def _double_ball(self, event, t: float):
        """Let the next ball come with a second one on top."""
        self.feeder.double_next += 1
        return "feed", math.nan, "", "the next ball will come double"

    def _takeup_blocked(self, event, t: float):
        """Jam the take-up where it stands."""
        lift = self.prepared.lift
        names = [
            sprocket.name
            for sprocket in lift.scenario.sprocket
            if sprocket.mount.kind not in ("fixed", "screwed")
        ]
        name = event.sprocket or (names[0] if names else lift.wheel_names[0])
        s = lift.wheel_names.index(name)
        mount, q = self.prepared.packed.parts.mounts[s], self.prepared.packed.state.q
        base = PER_WHEEL * s
        arm = math.hypot(mount["arm_x"], mount["arm_y"]) if mount["arm"] else 1.0
        mount["block_at"] = q[base + 2] if mount["arm"] else q[base]
        mount["block_stiffness"] = 0.5 * lift.scenario.chain.link_stiffness * arm**2
        mount["blocked"] = 1
        return name, float(mount["block_at"]), "m", f"the take-up of {name} is blocked"

    def _unblock(self, event, t: float):
        """Free a blocked take-up."""
        for mount in self.prepared.packed.parts.mounts:
            mount["blocked"] = 0
        return "take-up", math.nan, "", "the take-up is free again"

    @property
    def _drive(self):
        """The record of the drive."""
        return self.prepared.packed.parts.drive[0]

    def _ramp(self, t: float, target: float, ramp: float) -> None:
        """Let the demanded speed go to a target [rad/s] from where it is."""
        drive = self._drive
        drive["rate_from"] = demanded_rate(drive, t)
        drive["rate_to"] = target
        drive["ramp_start"], drive["ramp_time"] = t, ramp
