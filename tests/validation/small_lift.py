"""A lift of 200 mm, our own invention: small, so that whole runs of it take a second or two."""

from chainsim.run import run
from chainsim.scenario import parse_scenario

LIFT = """\
format = 1
title = "Small lift, our own invention"
[chain]
kind = "moulded_sturdy"
pitch = "10 mm"
link_mass = "1 g"
link_stiffness = "50 kN/m"
link_damping = 0.1
joint = { moment = "0 N m", friction = 0 }
links = LINKS
[[sprocket]]
name = "head"
teeth = 8
center = ["0 mm", "HEIGHT mm"]
bearing_friction = 0
bearing_drag = "0 N m"
[[sprocket]]
name = "tail"
teeth = 8
center = ["0 mm", "0 mm"]
bearing_friction = 0
bearing_drag = "0 N m"
mount = { kind = "hung", mass = "0.5 kg", free = "y", damping = "5 N s/m" }
[drive]
sprocket = "head"
kind = "speed"
chain_speed = "0.1 m/s"
ramp = "0.3 s"
[carriers]
every = 4
mass = "2 g"
pocket = { floor = "18 mm", lip = "5 mm", tilt = "5 deg", offset = "4 mm" }
[balls]
diameter = "16 mm"
mass = "20 g"
model = "rolling"
feed = { kind = "set down", rate = "1.5 /s" }
discharge = { at = ["-40 mm", "140 mm"], mouth = "90 mm", slope = "10 deg" }
[run]
duration = "4 s"
settle = "1 s"
seed = 1
"""


def lift_text(height=200, *changes):
    """Text of the small lift, `height` millimeters tall, with pieces of it exchanged."""
    text = LIFT.replace("HEIGHT", str(height)).replace("LINKS", str(8 + height // 5))
    for old, new in changes:
        assert text.count(old) == 1, (old, text.count(old))
        text = text.replace(old, new)
    return text


def lifted(height=200, *changes, more="", step_scale=1.0):
    """Run the small lift; returns the recording."""
    return run(parse_scenario(lift_text(height, *changes) + more), step_scale=step_scale)
