"""What the checks of whole lifts share: small frictionless lifts, cuts through their strands."""

import numpy as np

from chainsim.run import run
from chainsim.scenario import parse_scenario

GRAVITY = 9.80665
#: one link with its share of a carrier on every fourth [kg]
LINK, CARRIER, EVERY, PITCH = 1e-3, 2e-3, 4, 0.01
PER_LENGTH = (LINK + CARRIER / EVERY) / PITCH
BALL = 0.02

TEXT = """
format = 1
title = "{driven} driven, for a check"
[chain]
pitch = "10 mm"
link_mass = "{link_mass} g"
link_stiffness = "{stiffness} kN/m"
link_damping = {damping}
roller_diameter = "5 mm"
allowable_tension = "500 N"
links = {links}
growth = {growth}
joint = {{ friction = {joint}, pin_radius = "1.2 mm" }}
[[sprocket]]
name = "head"
teeth = {teeth}
center = ["0 mm", "{height} mm"]
bearing_friction = {bearing}
{tooth}
mount = {{ {head} }}
[[sprocket]]
name = "tail"
teeth = {teeth}
center = ["0 mm", "0 mm"]
bearing_friction = {bearing}
{tooth}
mount = {{ {tail} }}
[drive]
sprocket = "{driven}"
chain_speed = "{speed} m/s"
ramp = "{ramp} s"
{carriers}
[run]
duration = "{seconds} s"
settle = "0 s"
sample_rate = "{rate} Hz"
"""

#: balls of 20 g that sit on the line of the pins
LOADED = """
[carriers]
every = 4
mass = "2 g"
pocket = { floor = "18 mm", lip = "5 mm", offset = "-8.001 mm" }
[balls]
diameter = "16 mm"
mass = "20 g"
model = "fixed"
feed = "every pocket"
start = "loaded"
"""

USUAL = {
    "driven": "head", "links": 56, "height": 240, "teeth": 8, "speed": 0.05, "ramp": 0.3,
    "seconds": 4.0, "rate": 500, "stiffness": 50, "link_mass": 1.0, "damping": 0.1, "growth": 0.0,
    "joint": 0.0, "bearing": 0.0, "tooth": "tooth = { friction = 0.0 }", "head": 'kind = "fixed"',
    "tail": 'kind = "hung", mass = "0.3 kg", free = "y"', "carriers": LOADED,
}  # fmt: skip


def lift(**changes):
    """Scenario of a small lift with two equal sprockets."""
    return parse_scenario(TEXT.format(**{**USUAL, **changes}))


def hung(mass):
    """Tail hung in the loop, free up and down."""
    return f'kind = "hung", mass = "{mass} kg", free = "y"'


def recorded(**changes):
    """Run a small lift."""
    return run(lift(**changes))


def steady(recording, spacings, speed, spacing=EVERY * PITCH):
    """Samples of the last so many whole carrier spacings."""
    count = round(spacings * spacing / speed / (recording.time[1] - recording.time[0]))
    return slice(-count, None)


def upward_pull(recording, part, height, right):
    """Upward pull of one strand at a height, at every sample [N]; right: the carrying strand."""
    pins = np.asarray(recording["pins/position"][part], float)
    tension = np.asarray(recording["links/tension"][part], float)
    ahead = np.roll(pins, -1, axis=1)
    low, high = np.minimum(pins[..., 1], ahead[..., 1]), np.maximum(pins[..., 1], ahead[..., 1])
    middle = 0.5 * (pins[..., 0] + ahead[..., 0])
    cut = (low <= height) & (high > height) & ((middle > 0) == right)
    rise = np.abs(ahead[..., 1] - pins[..., 1]) / np.hypot(*np.moveaxis(ahead - pins, -1, 0))
    return np.sum(np.where(cut, tension * rise, 0.0), axis=1)


def speed_of_strand(recording, part, low, high):
    """Upward speed of the carrying strand between two heights, mean over its pins [m/s]."""
    pins, speed = recording["pins/position"][part], recording["pins/velocity"][part]
    inside = (pins[..., 0] > 0) & (pins[..., 1] > low) & (pins[..., 1] < high)
    return np.sum(np.where(inside, speed[..., 1], 0.0), axis=1) / np.sum(inside, axis=1)
