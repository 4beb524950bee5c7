"""A recording with some of its values exchanged, for tests of what reads recordings."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np

from chainsim.findings import judge

TABLES = ("events", "balls", "extremes", "modes", "findings", "strands", "scenario")
TRAITS = ("time", "stop_reason", "complete")


class Overlay:
    """A recording under which another one shows where nothing is exchanged.

    Parameters
    ----------
    base : Recording
        The recording below; it is not changed.
    channels : dict of str to ndarray or None
        Channels that differ, each in its own unit; None takes one away.
    **tables
        Tables and traits that differ.
    """

    def __init__(self, base, channels=None, **tables):
        self._base, self._channels = base, channels or {}
        for name in (*TABLES, *TRAITS):
            setattr(self, name, tables[name] if name in tables else getattr(base, name))

    def __contains__(self, name):
        if name in self._channels:
            return self._channels[name] is not None
        return name in self._base

    def __getitem__(self, name):
        return self._channels[name] if name in self._channels else self._base[name]

    def names(self):
        """Paths of all channels."""
        return [name for name in {*self._base.names(), *self._channels} if name in self]


class Bare:
    """A recording of nothing but what a test puts into it."""

    def __init__(self, scenario, strands, channels, time):
        self.scenario, self.strands, self.time = scenario, strands, np.asarray(time, dtype=float)
        self._channels = channels
        self.events, self.balls, self.modes, self.findings, self.extremes = [], [], [], [], {}
        self.stop_reason, self.complete = "reached the end", True

    def __contains__(self, name):
        return name in self._channels

    def __getitem__(self, name):
        return self._channels[name]

    def names(self):
        """Paths of all channels."""
        return list(self._channels)


def bare_strand(place, pitch, tension=1.0, n_samples=2, speed=0.0, interval=0.01):
    """Recording of one strand that hangs from pin to pin between two points.

    The chain is closed by three pins more: two at the ends, one far away.

    Parameters
    ----------
    place : ndarray, shape (n, 2)
        Its pins from start to end [m].
    pitch : float
        Pitch [m].
    tension : float or ndarray
        Tension of every link [N].
    n_samples : int
        Samples, all alike [dimensionless].
    speed : float
        Chain speed [m/s].
    interval : float
        Time between samples [s].

    Returns
    -------
    Bare
        With sprockets ``a`` and ``b`` of one hundredth of a pitch, ten teeth each, driven at a.
    """
    n = len(place)
    pins = np.concatenate([place, place[-1:], [[9.0, 9.0]], place[:1]])
    sprocket = SimpleNamespace(teeth=10, side="inside", mount=SimpleNamespace(kind="fixed"))
    scenario = SimpleNamespace(
        sprocket=tuple(SimpleNamespace(name=name, **vars(sprocket)) for name in "ab"),
        chain=SimpleNamespace(pitch=pitch, growth=0.0, link_mass=1e-3),
        drive=SimpleNamespace(sprocket="a", kind="speed", chain_speed=speed),
        run=SimpleNamespace(settle=0.0),
        limits=SimpleNamespace(slack_tension=0.0, slack_time=0.05),
        carriers=None,
        balls=None,
        event=(),
    )
    rate = np.full((n_samples, 2), speed * 2 * np.pi / (10 * pitch))
    channels = {
        "pins/position": np.repeat(pins[None], n_samples, axis=0),
        "pins/velocity": np.zeros((n_samples, n + 3, 2)),
        "links/tension": np.broadcast_to(tension, (n_samples, n + 3)),
        "sprockets/center": np.repeat(place[None, [0, -1]], n_samples, axis=0),
        "sprockets/rate": rate,
        "geometry/seat_radius": np.full(2, 0.01 * pitch),
        "geometry/pitch": np.full(n + 3, pitch),
    }
    strands = (
        SimpleNamespace(name="a-b", start="a", end="b", carrying=True),
        SimpleNamespace(name="b-a", start="b", end="a", carrying=False),
    )
    return Bare(scenario, strands, channels, interval * np.arange(n_samples))


def found(rec, name):
    """Finding of this name."""
    return next(finding for finding in judge(rec) if finding.name == name)


def changed(rec, **values):
    """Recording of a scenario with other values; two underscores stand for a dot in a key."""
    keys = {key.replace("__", "."): value for key, value in values.items()}
    return Overlay(rec, scenario=rec.scenario.with_values(keys))


def extreme(value, time=3.0, place="somewhere"):
    """Worst value over every inner step."""
    return SimpleNamespace(value=value, unit="", time=time, place=place)


def event(time, kind):
    """Something that happened."""
    return SimpleNamespace(time=time, kind=kind, subject="", value=np.nan, unit="", text="")
