"""The lift as an object: a scenario worked out to parts, places, strands, carriers and pockets."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np

from chainsim.closed_forms import pitch_radius
from chainsim.errors import LayoutError
from chainsim.model.pockets import PocketForm, pocket_form
from chainsim.model.route import Laid, Route, Wheel, lay_chain, route
from chainsim.model.tooth import ToothForm, tooth_form


@dataclass(frozen=True)
class Strand:
    """One long run of the chain between two wheels.

    Parameters
    ----------
    name : str
        ``"tail-head"``: from, to, in the order of travel.
    start, end : int
        Wheels that it joins (dimensionless).
    carrying : bool
        Whether it rises.
    """

    name: str
    start: int
    end: int
    carrying: bool


@dataclass(frozen=True)
class Lift:
    """Everything about a lift that does not change while it runs.

    Parameters
    ----------
    scenario : Scenario
        What it was built from.
    n_links : int
        Links of the loop (dimensionless).
    pitch : ndarray, shape (n_links,)
        Unstretched length of each link, growth and scatter included [m].
    wheels : tuple of Wheel
        As the route sees them.
    teeth : tuple of ToothForm or None
        Outline of each wheel; None for a smooth roller.
    route : Route
    laid : Laid
        Where every pin lies before the first step.
    strands : tuple of Strand
    carrier_links : ndarray of int, shape (n_carriers,)
        The link that each carrier sits on.
    pocket : PocketForm or None
        The pocket that all carriers have; None without balls or carriers.
    up : tuple of float, shape (2,)
        Upward unit vector in the frame (dimensionless).
    load_height, unload_height : float
        Along `up`, where pockets are filled and emptied [m].
    """

    scenario: Any
    n_links: int
    pitch: np.ndarray
    wheels: tuple[Wheel, ...]
    teeth: tuple[ToothForm | None, ...]
    route: Route
    laid: Laid
    strands: tuple[Strand, ...]
    carrier_links: np.ndarray
    pocket: PocketForm | None
    up: tuple[float, float]
    load_height: float
    unload_height: float

    @property
    def wheel_names(self) -> tuple[str, ...]:
        """Names of the wheels in the order of travel."""
        return tuple(wheel.name for wheel in self.wheels)

    @property
    def driven(self) -> int:
        """Index of the driven wheel (dimensionless)."""
        return self.wheel_names.index(self.scenario.drive.sprocket)

    @property
    def ball_radius(self) -> float:
        """Radius of the balls [m]; 0 without balls."""
        balls = self.scenario.balls
        return 0.5 * balls.diameter if balls is not None else 0.0


def build_lift(scenario) -> Lift:
    """Work a scenario out to a lift.

    Parameters
    ----------
    scenario : Scenario

    Returns
    -------
    Lift

    Raises
    ------
    LayoutError
        If the layout is impossible: clockwise, crossing, a chain too short, teeth that cut.
    """
    tilt = scenario.frame.tilt
    up = (math.sin(tilt), math.cos(tilt))
    down = (-up[0], -up[1])
    nominal = scenario.chain.pitch
    pitch = nominal * (1.0 + scenario.chain.growth)
    teeth = tuple(_tooth(sprocket, scenario.chain) for sprocket in scenario.sprocket)
    wheels = tuple(_wheel(sprocket, scenario.chain) for sprocket in scenario.sprocket)
    path = route(wheels, nominal, down)
    n_links = scenario.chain.links or _best_count(path, scenario)
    laid = lay_chain(wheels, pitch, n_links, down)
    rng = np.random.default_rng([scenario.run.seed, 1])
    scatter = rng.standard_normal(n_links) * scenario.chain.scatter
    carrier_links = _carrier_links(scenario, n_links)
    balls = scenario.balls
    pocket = None
    if balls is not None and scenario.carriers is not None:
        pocket = pocket_form(scenario.carriers.pocket, 0.5 * balls.diameter, nominal)
    load, unload = _heights(scenario, wheels, up)
    return Lift(
        scenario=scenario,
        n_links=n_links,
        pitch=pitch * (1.0 + scatter),
        wheels=wheels,
        teeth=teeth,
        route=path,
        laid=laid,
        strands=_strands(path, up),
        carrier_links=carrier_links,
        pocket=pocket,
        up=up,
        load_height=load,
        unload_height=unload,
    )


def _tooth(sprocket, chain) -> ToothForm | None:
    """Return the outline of a sprocket, None for a smooth roller."""
    if not sprocket.teeth:
        return None
    tooth = sprocket.tooth
    return tooth_form(
        sprocket.teeth,
        sprocket.pitch or chain.pitch,
        chain.roller_diameter,
        chain_pitch=chain.pitch,
        height=tooth.height,
        pressure_angle=tooth.pressure_angle,
        seat_clearance=tooth.seat_clearance,
        tip_radius=tooth.tip_radius,
        name=sprocket.name,
    )


def _wheel(sprocket, chain) -> Wheel:
    """Return a sprocket as the route of the chain sees it."""
    mount = sprocket.mount
    center = sprocket.center
    movable = pivot = None
    if mount.kind == "screwed":
        center = (
            center[0] + mount.shift * mount.axis[0],
            center[1] + mount.shift * mount.axis[1],
        )
    elif mount.kind in ("sliding", "spring", "counterweight"):
        movable = tuple(mount.axis)
    elif mount.kind == "hung":
        movable = (0.0, -1.0)
    elif mount.kind == "arm":
        pivot = tuple(mount.pivot)
        arm = (center[0] - pivot[0], center[1] - pivot[1])
        length = math.hypot(*arm)
        movable = (-arm[1] / length, arm[0] / length)
    if sprocket.teeth:
        radius = pitch_radius(sprocket.pitch or chain.pitch, sprocket.teeth)
    else:
        radius = sprocket.roller_radius + 0.5 * chain.roller_diameter
    return Wheel(
        name=sprocket.name,
        center=tuple(center),
        radius=radius,
        teeth=sprocket.teeth or 0,
        side=1 if sprocket.side == "inside" else -1,
        phase=sprocket.phase,
        movable=movable,
        pivot=pivot,
    )


def _best_count(path: Route, scenario) -> int:
    """Return the link count nearest to the drawing that the carriers divide, where they can."""
    every = scenario.carriers.every if scenario.carriers is not None else 1
    movable = any(wheel.movable is not None for wheel in path.wheels)
    if not movable:
        return math.ceil(path.links - 1e-6)
    whole = max(1, round(path.links / every)) * every
    return whole


def _carrier_links(scenario, n_links: int) -> np.ndarray:
    """Return the links that carry carriers."""
    carriers = scenario.carriers
    if carriers is None:
        return np.zeros(0, dtype=np.int64)
    if carriers.at is not None:
        links = np.array(sorted(carriers.at), dtype=np.int64)
        if links[-1] >= n_links:
            raise LayoutError(f"carriers.at: link {links[-1]} of a chain of {n_links} links")
        return links
    return (
        np.arange(carriers.first, n_links - carriers.every + 1 + carriers.first, carriers.every)
        % n_links
    )


def _heights(scenario, wheels, up) -> tuple[float, float]:
    """Return where pockets are filled and emptied, along up [m]: default the axles' heights."""
    heights = [wheel.center[0] * up[0] + wheel.center[1] * up[1] for wheel in wheels]
    load, unload = min(heights), max(heights)
    balls = scenario.balls
    if balls is not None:
        load = balls.load_at if balls.load_at is not None else load
        unload = balls.unload_at if balls.unload_at is not None else unload
    return load, unload


def _strands(path: Route, up) -> tuple[Strand, ...]:
    """Name the strands and mark those that rise; a single hanging loop carries nothing."""
    count = len(path.wheels)
    if count < 2:
        return ()
    rise = path.direction @ np.asarray(up)
    return tuple(
        Strand(path.names[k], k, (k + 1) % count, bool(rise[k] > 0.3)) for k in range(count)
    )
