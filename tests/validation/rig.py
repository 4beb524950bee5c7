"""A test rig around the simulator's own arrays: the parts under test, and nothing else near them.

A tiny lift is packed as every lift is; the tests then lay its chain aside as a ring that touches
nothing, or put balls on walls, and march with the same compiled loop that a run uses.
"""

import math
from types import SimpleNamespace

import numpy as np

from chainsim.integration.blocks import new_rows
from chainsim.integration.start import prepare
from chainsim.integration.timeline import Conductor
from chainsim.kernels.balls import FREE
from chainsim.kernels.layout import LEDGER, PER_WHEEL, SPIN
from chainsim.kernels.motion import close_loop
from chainsim.kernels.sample import BALL_COLUMNS, KINETIC, POTENTIAL, STORED, march_samples
from chainsim.model.lift import build_lift
from chainsim.scenario import parse_scenario

G = 9.80665

PARTS = """\
format = 1
title = "Test rig, our own invention"
[chain]
kind = "moulded_sturdy"
pitch = "10 mm"
link_mass = "1 g"
link_stiffness = "50 kN/m"
link_damping = 0.1
joint = { moment = "0 N m", friction = 0 }
[[sprocket]]
name = "head"
teeth = 8
center = ["0 mm", "100 mm"]
[[sprocket]]
name = "tail"
teeth = 8
center = ["0 mm", "0 mm"]
inertia = "50 g cm2"
bearing_friction = 0
bearing_drag = "0 N m"
mount = { kind = "MOUNT" }
[drive]
sprocket = "tail"
DRIVE
[carriers]
every = 4
mass = "2 g"
pocket = { floor = "22 mm", lip = "5 mm", tilt = "5 deg", offset = "4 mm" }
[balls]
diameter = "20 mm"
mass = "30 g"
model = "rolling"
friction = 0.3
restitution = 0.5
restitution_speed = "0.3 m/s"
feed = { kind = "trough", rate = "1 /s", at = ["5 m", "5 m"], slope = "5 deg", queue = 24 }
discharge = { at = ["-5 m", "-5 m"], mouth = "40 mm" }
[run]
seed = 1
sample_rate = "1 kHz"
"""
SPEED_DRIVE = 'kind = "speed"\nchain_speed = "0.1 m/s"'


def rig_text(mount='kind = "fixed"', drive=SPEED_DRIVE, more=""):
    """Scenario text of the rig."""
    text = PARTS.replace('kind = "MOUNT"', mount).replace("DRIVE", drive)
    return text + more


class Rig:
    """The arrays of a lift, and the compiled loop that marches them."""

    def __init__(self, text, step_scale=1.0):
        self.lift = build_lift(parse_scenario(text))
        self.prepared = prepare(self.lift, step_scale)
        self.packed = self.prepared.packed
        self.parts, self.state = self.packed.parts, self.packed.state
        self.world = self.parts.world[0]
        self.drive = self.parts.drive[0]
        self.n = self.lift.n_links
        self.time = 0.0
        self.interval = self.prepared.dt * self.prepared.steps
        self._balls = 0
        self._rows = new_rows(self.prepared)

    def afloat(self, x=-2.0, y=0.0):
        """Lay the chain aside: a ring at rest, unstretched, that touches nothing; no gravity."""
        pitch = float(np.mean(self.lift.pitch))
        radius = pitch / (2.0 * math.sin(math.pi / self.n))
        angle = 2.0 * math.pi * np.arange(self.n) / self.n
        self.state.x[: self.n] = x + radius * np.cos(angle)
        self.state.y[: self.n] = y + radius * np.sin(angle)
        self.state.vx[: self.n] = self.state.vy[: self.n] = 0.0
        close_loop(self.state, self.n)
        self.gravity(0.0, 0.0)
        self.packed.work.search_in[0] = 0
        return self

    def gravity(self, gx, gy):
        """Set gravity in the frame [m/s2]."""
        self.world["gx"], self.world["gy"] = gx, gy
        self.parts = self.parts._replace(chain=self.parts.chain._replace(gx=gx, gy=gy))

    def wheel(self, name):
        """Index of a wheel, and where its coordinates start."""
        s = self.lift.wheel_names.index(name)
        return s, PER_WHEEL * s

    def mount(self, name):
        """Record of a wheel's mount."""
        return self.parts.mounts[self.wheel(name)[0]]

    def ball(self, x, y, vx=0.0, vy=0.0, spin=0.0):
        """Put a free ball somewhere."""
        slot, self._balls = self._balls, self._balls + 1
        state, touches = self.state, self.packed.work.touches
        state.bx[slot], state.by[slot], state.bvx[slot], state.bvy[slot] = x, y, vx, vy
        state.bw[slot] = spin
        touches.state[slot] = FREE
        touches.used[0] = max(touches.used[0], slot + 1)
        self.packed.work.search_in[0] = 0
        watch = self.prepared.watch
        watch.last_x[slot], watch.last_y[slot] = x, y
        return slot

    def conductor(self):
        """Who carries dated events out."""
        return Conductor(self.prepared, SimpleNamespace(skip_next=0, double_next=0))

    def march(self, seconds):
        """March and return the samples' columns, time first."""
        kept = []
        left = round(seconds / self.interval)
        while left > 0:
            rows, p = self._rows, self.prepared
            taken = march_samples(
                self.time, p.dt, p.steps, min(left, 256), 0, self.parts, self.state,
                self.packed.rate, self.packed.work, p.memory, rows, p.watch,
            )  # fmt: skip
            kept.append([getattr(rows, name)[:taken].copy() for name in rows._fields])
            left -= taken
            self.time += taken * self.interval
        joined = [np.concatenate(parts) for parts in zip(*kept, strict=True)]
        return SimpleNamespace(**dict(zip(self._rows._fields, joined, strict=True)))

    def masses(self, loaded=None):
        """Mass matrix of the pins."""
        from chainsim.model.packing_carriers import pack_carriers

        loaded = np.zeros(len(self.lift.carrier_links), bool) if loaded is None else loaded
        return pack_carriers(self.lift, loaded)


def column(samples, name):
    """Column of every ball: (sample, slot)."""
    return samples.ball[:, :, BALL_COLUMNS.index(name)]


def residual(samples, first=None):
    """Energy that is unaccounted for at every sample, and the sum of all absolute flows [J]."""
    energy = samples.energy
    there = energy[:, KINETIC] + energy[:, POTENTIAL] + energy[:, STORED]
    came, gone = energy[:, :3].sum(axis=1), energy[:, 3 : len(LEDGER)].sum(axis=1)
    start = there[0] + gone[0] - came[0] if first is None else first
    flows = np.abs(np.diff(energy[:, : len(LEDGER)], axis=0)).sum()
    return came - gone - (there - start), flows


__all__ = ["PER_WHEEL", "SPEED_DRIVE", "SPIN", "G", "Rig", "column", "residual", "rig_text"]
