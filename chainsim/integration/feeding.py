"""Feeds the lift with balls and keeps the book on each of them."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from chainsim.integration.loading import change_load
from chainsim.integration.room import has_room
from chainsim.integration.samples import BallRow, Event
from chainsim.integration.start import Prepared, place_ball
from chainsim.kernels.balls import EMPTY, FREE, SEATED
from chainsim.kernels.layout import BALLS_IN, BALLS_OUT, TOUCHES
from chainsim.kernels.watch import (
    CAME_TO_REST,
    DELIVERED,
    LEFT_BOX,
    OUTSIDE_MOUTH,
    ROSE,
    SAT_DOWN,
)
from chainsim.model.packing_balls import rolls, trough_line

NEVER = float("inf")

SECOND_RISE = 0.6
"""How far up, over how far out, a second ball lies on one that sits [dimensionless]."""


@dataclass
class Ball:
    """What is known of one ball.

    Attributes
    ----------
    number : int
        Counted from 0 (dimensionless).
    fed_time, seated_time, left_time : float
        When it was fed, first sat down, last rose from a pocket [s]; NaN: never.
    pocket : int
        Carrier that held it last (dimensionless); -1: none.
    """

    number: int
    fed_time: float
    seated_time: float = float("nan")
    left_time: float = float("nan")
    pocket: int = -1


@dataclass
class Feeder:
    """Decides when balls come, and writes down what becomes of them.

    Parameters
    ----------
    prepared : Prepared
        Its state is written to when a ball comes or goes.
    """

    prepared: Prepared
    events: list[Event] = field(default_factory=list)
    rows: list[BallRow] = field(default_factory=list)
    aboard: dict[int, Ball] = field(default_factory=dict)
    waiting: int = 0
    waits: list[float] = field(default_factory=list)
    skip_next: int = 0
    double_next: int = 0
    next_due: float = NEVER
    count: int = 0
    _waiting_since: list[float] = field(default_factory=list)

    def __post_init__(self) -> None:
        lift = self.prepared.lift
        balls = lift.scenario.balls
        self._rng = np.random.default_rng([lift.scenario.run.seed, 3])
        self._rolling = rolls(lift)
        self._order = 0
        if balls is None:
            return
        self._kind = balls.feed.kind
        if self._kind in ("set down", "chute"):
            self._schedule()
        if self._kind == "every pocket":
            self.waiting = 1
        touches = self.prepared.packed.work.touches
        for slot in range(int(touches.used[0])):
            if touches.state[slot] >= FREE:
                self._register(slot, 0.0, seated=True)
        if self._kind == "trough":
            self._fill_trough(0.0)
        self._tell_kernel()

    # ---- arriving ---------------------------------------------------------------------------

    def _schedule(self) -> None:
        """Set the time of the next ball: its turn, shifted by the jitter."""
        feed = self.prepared.lift.scenario.balls.feed
        jitter = self._rng.uniform(-feed.jitter, feed.jitter) if feed.jitter else 0.0
        self.next_due = max(0.0, self._order / feed.rate + jitter)
        self._order += 1

    def arrive(self, t: float) -> None:
        """Let the ball that is due come.

        Parameters
        ----------
        t : float
            Time [s].
        """
        self._schedule()
        if self.skip_next > 0:
            self.skip_next -= 1
            self.events.append(Event(t, "missing_ball", "feed", np.nan, "", "a ball did not come"))
            return
        if self._kind == "chute":
            self._release(t)
            return
        self.waiting += 1
        self._waiting_since.append(t)
        self._tell_kernel()

    def _release(self, t: float) -> None:
        """Release a ball from the end of the feeding chute."""
        lift = self.prepared.lift
        feed = lift.scenario.balls.feed
        slot = self._free_slot()
        state, touches = self.prepared.packed.state, self.prepared.packed.work.touches
        state.bx[slot], state.by[slot] = feed.at
        state.bvx[slot], state.bvy[slot] = feed.velocity
        state.bw[slot] = state.spin[slot] = 0.0
        self._put(slot, t)
        touches.state[slot] = FREE

    def _fill_trough(self, t: float) -> None:
        """Lay balls on the trough, the first at its lower end, until the queue is full."""
        lift = self.prepared.lift
        feed = lift.scenario.balls.feed
        line = trough_line(lift)
        if line is None:
            return
        low, high = sorted(line, key=lambda point: point[1])
        along = (high - low) / np.hypot(*(high - low))
        across = np.array([-along[1], along[0]]) * (1.0 if along[0] > 0 else -1.0)
        radius = lift.ball_radius
        state, touches = self.prepared.packed.state, self.prepared.packed.work.touches
        lying = self._on_trough()
        far = max((float((p - low) @ along) for p in lying), default=-radius)
        while len(lying) < feed.queue:
            far = max(far + 2.02 * radius, radius)
            if far > np.hypot(*(high - low)):
                return
            slot = self._free_slot()
            place = low + far * along + radius * across
            state.bx[slot], state.by[slot] = place
            state.bvx[slot] = state.bvy[slot] = state.bw[slot] = state.spin[slot] = 0.0
            self._put(slot, t)
            touches.state[slot] = FREE
            lying.append(place)

    def _on_trough(self) -> list[np.ndarray]:
        """Return where balls lie that have not been picked up."""
        state = self.prepared.packed.state
        return [
            np.array([state.bx[slot], state.by[slot]])
            for slot, ball in self.aboard.items()
            if np.isnan(ball.seated_time)
        ]

    def set_down(self, t: float, carrier: int) -> None:
        """Set the waiting ball down in a pocket that passes; it waits on where no room is.

        Parameters
        ----------
        t : float
            Time [s].
        carrier : int
            (dimensionless)
        """
        if self._rolling and not has_room(self.prepared, carrier, self.aboard):
            return
        if self._kind == "set down":
            self.waiting -= 1
            self.waits.append(t - self._waiting_since.pop(0))
        packed = self.prepared.packed
        if not self._rolling:
            self._load_held(t, carrier)
        else:
            slot = self._free_slot()
            place_ball(packed, slot, carrier)
            self._put(slot, t)
            packed.work.touches.state[slot] = SEATED
            packed.work.seats.judged[slot] = 1
            self.aboard[slot].seated_time = t
            self.aboard[slot].pocket = carrier
            if self.double_next > 0:
                self.double_next -= 1
                self._set_second(t, slot)
        self._tell_kernel()

    def _set_second(self, t: float, first: int) -> None:
        """Let a second ball lean on one that sits, from outside and above, where there is room."""
        state = self.prepared.packed.state
        slot = self._free_slot()
        i = int(self.prepared.packed.parts.pockets["link"][self.aboard[first].pocket])
        out = np.array([state.y[i + 1] - state.y[i], state.x[i] - state.x[i + 1]])
        lean = out / np.hypot(*out) + SECOND_RISE * np.asarray(self.prepared.lift.up)
        step = 2.0 * self.prepared.lift.ball_radius * lean / np.hypot(*lean)
        state.bx[slot] = state.bx[first] + step[0]
        state.by[slot] = state.by[first] + step[1]
        state.bvx[slot], state.bvy[slot] = state.bvx[first], state.bvy[first]
        state.bw[slot] = state.spin[slot] = 0.0
        self._put(slot, t)
        self.prepared.packed.work.touches.state[slot] = FREE
        self.prepared.packed.work.seats.pocket[slot] = -1
        self.events.append(Event(t, "double_ball", "feed", np.nan, "", "two balls came together"))

    def _load_held(self, t: float, carrier: int) -> None:
        """Let a carrier take a ball that was at rest: momentum is shared, energy is lost."""
        change_load(self.prepared, carrier, 1)
        self._register(carrier, t, seated=True)
        self.events.append(Event(t, "fed", f"ball {self.count - 1}", carrier, "1", "ball set down"))

    # ---- leaving ----------------------------------------------------------------------------

    def unload_held(self, t: float, carrier: int) -> None:
        """Take a held ball off where it is delivered.

        Parameters
        ----------
        t : float
            Time [s].
        carrier : int
            (dimensionless)
        """
        x, y = change_load(self.prepared, carrier, 0)
        ball = self.aboard.pop(carrier)
        self._close(ball, t, x, y, "delivered", "")

    def look(self, t: float) -> None:
        """Act on what the kernels saw happen to the balls.

        Parameters
        ----------
        t : float
            Time [s].
        """
        watch = self.prepared.watch
        for slot in np.flatnonzero(watch.happened):
            ball = self.aboard.get(int(slot))
            code = watch.happened[slot]
            watch.happened[slot] = 0
            if ball is None:
                continue
            if code == SAT_DOWN:
                ball.pocket = int(self.prepared.packed.work.seats.pocket[slot])
                if np.isnan(ball.seated_time):
                    ball.seated_time = t
                    text = f"ball {ball.number} sat down in pocket {ball.pocket}"
                    self.events.append(Event(t, "seated", f"ball {ball.number}", np.nan, "", text))
            elif code == ROSE:
                ball.left_time = t
            elif code in (DELIVERED, OUTSIDE_MOUTH, LEFT_BOX, CAME_TO_REST):
                self._leave(t, int(slot), ball, code)
        if self.prepared.lift.scenario.balls.feed.kind == "trough":
            self._fill_trough(t)

    def _leave(self, t: float, slot: int, ball: Ball, code: int) -> None:
        """Settle a ball's fate and free its slot."""
        if code == CAME_TO_REST and np.isnan(ball.seated_time) and self._kind == "trough":
            return
        fate = self._fate(slot, ball, code)
        state = self.prepared.packed.state
        self._close(ball, t, float(state.bx[slot]), float(state.by[slot]), fate, "")
        self._free(slot)

    def _fate(self, slot: int, ball: Ball, code: int) -> str:
        """Name what became of a ball that left."""
        if code == DELIVERED:
            return "delivered"
        if code == OUTSIDE_MOUTH:
            return "outside the mouth"
        if np.isnan(ball.seated_time):
            return "missed the pocket"
        lift = self.prepared.lift
        seats = self.prepared.packed.work.seats
        if seats.pocket[slot] >= 0 and self.prepared.watch.cross_y[slot] == 0.0:
            head = max(
                range(len(lift.wheels)), key=lambda s: np.dot(lift.wheels[s].center, lift.up)
            )
            x = float(self.prepared.packed.state.bx[slot])
            if x < lift.wheels[head].center[0]:
                return "carried over"
        return "spilled"

    def _close(self, ball: Ball, t: float, x: float, y: float, fate: str, cause: str) -> None:
        """Write the row of a ball that is done with."""
        self.rows.append(
            BallRow(ball.number, ball.fed_time, ball.seated_time, t, x, y, ball.pocket, fate, cause)
        )
        self.events.append(
            Event(t, fate, f"ball {ball.number}", np.nan, "", f"ball {ball.number}: {fate}")
        )

    def finish(self) -> list[BallRow]:
        """Return the rows of all balls, those still aboard included, by number."""
        state = self.prepared.packed.state
        for slot, ball in sorted(self.aboard.items()):
            x, y = (state.bx[slot], state.by[slot]) if self._rolling else (np.nan, np.nan)
            self.rows.append(
                BallRow(
                    ball.number,
                    ball.fed_time,
                    ball.seated_time,
                    np.nan,
                    float(x),
                    float(y),
                    ball.pocket,
                    "aboard",
                    "",
                )
            )
        self.aboard.clear()
        return sorted(self.rows)

    # ---- slots ------------------------------------------------------------------------------

    def _free_slot(self) -> int:
        """Return the lowest free slot; the oldest lost ball gives way where none is free."""
        touches = self.prepared.packed.work.touches
        free = np.flatnonzero(touches.state == EMPTY)
        if len(free):
            return int(free[0])
        slot = min(self.aboard, key=lambda s: self.aboard[s].fed_time)
        ball = self.aboard[slot]
        self._leave(ball.fed_time, slot, ball, LEFT_BOX)
        return slot

    def _put(self, slot: int, t: float) -> None:
        """Enter a ball that has just come, and book its energy."""
        packed = self.prepared.packed
        touches, seats = packed.work.touches, packed.work.seats
        touches.used[0] = max(touches.used[0], slot + 1)
        touches.what[slot, :] = -1
        packed.state.grip[slot * TOUCHES : (slot + 1) * TOUCHES] = 0.0
        seats.age[slot] = seats.judged[slot] = 0
        if touches.state[slot] == EMPTY and seats.pocket[slot] < 0:
            seats.pocket[slot] = -1
        packed.work.search_in[0] = 0
        watch = self.prepared.watch
        watch.last_x[slot], watch.last_y[slot] = packed.state.bx[slot], packed.state.by[slot]
        watch.still[slot] = 0
        watch.cross_y[slot] = 0.0
        self._register(slot, t, seated=False)
        packed.state.ledger[BALLS_IN] += self._energy(slot)
        self.events.append(
            Event(t, "fed", f"ball {self.count - 1}", np.nan, "", f"ball {self.count - 1} came")
        )

    def _register(self, slot: int, t: float, seated: bool) -> None:
        """Give a ball its number."""
        ball = Ball(self.count, t)
        if seated:
            ball.seated_time = t
            ball.pocket = int(self.prepared.packed.work.seats.pocket[slot])
        self.aboard[slot] = ball
        self.prepared.memory.number[slot] = self.count
        state = self.prepared.packed.state
        self.prepared.memory.ball_vx[slot] = state.bvx[slot]
        self.prepared.memory.ball_vy[slot] = state.bvy[slot]
        self.count += 1

    def _free(self, slot: int) -> None:
        """Empty a slot, and book the energy that leaves."""
        packed = self.prepared.packed
        packed.state.ledger[BALLS_OUT] += self._energy(slot)
        packed.work.touches.state[slot] = EMPTY
        packed.work.seats.pocket[slot] = -1
        for array in (packed.state.bvx, packed.state.bvy, packed.state.bw):
            array[slot] = 0.0
        packed.rate.bvx[slot] = packed.rate.bvy[slot] = packed.rate.bw[slot] = 0.0
        self.prepared.memory.number[slot] = -1
        self.aboard.pop(slot, None)
        packed.work.search_in[0] = 0

    def _energy(self, slot: int) -> float:
        """Return kinetic and potential energy of a ball [J]."""
        packed = self.prepared.packed
        state, law = packed.state, packed.parts.law
        world = packed.parts.world[0]
        speed2 = state.bvx[slot] ** 2 + state.bvy[slot] ** 2
        height = world["gx"] * state.bx[slot] + world["gy"] * state.by[slot]
        spin = 0.5 * law.inertia * state.bw[slot] ** 2
        return float(0.5 * law.mass * speed2 + spin - law.mass * height)

    def _tell_kernel(self) -> None:
        """Say to the kernels whether a ball waits."""
        waits = self.waiting > 0 and self._kind in ("set down", "every pocket")
        self.prepared.watch.feeding["waiting"] = int(waits)
