"""A small lift of our own invention, and stand-ins for its simulation by its free body."""

from __future__ import annotations

from chainsim.scenario import parse_scenario
from chainsim.study.jobs import Job
from chainsim.study.simulate import scenario_of
from tests.unit.study_tasks import finding

LIFT = """\
format = 1
title = "A lift for tests, drive unit hung from the chain"

[chain]
kind = "moulded_sturdy"
pitch = "10 mm"
links = 112
joint = { friction = 0.0 }

[[sprocket]]
name = "head"
teeth = 8
bearing_friction = 0.0
center = ["0 mm", "520 mm"]

[[sprocket]]
name = "tail"
teeth = 8
bearing_friction = 0.0
center = ["0 mm", "0 mm"]
mount = { kind = "hung", mass = "0.30 kg" }

[drive]
sprocket = "tail"
kind = "speed"
chain_speed = "0.04 m/s"

[carriers]
every = 4
mass = "2 g"

[balls]
diameter = "16 mm"
mass = "20 g"
model = "fixed"
feed = "every pocket"

[run]
duration = "2 s"
"""


def lift():
    """The lift as a scenario."""
    return parse_scenario(LIFT, "lift.toml")


def free_body(job: Job) -> dict:
    """Foot tension of the carrying strand by the free body, judged as a run judges it."""
    scenario = scenario_of(job)
    sprocket = {s.name: s for s in scenario.sprocket}
    height = sprocket["head"].center[1] - sprocket["tail"].center[1]
    spacing = scenario.carriers.every * scenario.chain.pitch
    link = scenario.chain.link_mass + scenario.carriers.mass / scenario.carriers.every
    hung = sprocket["tail"].mount.mass + 0.5 * sprocket["tail"].teeth * link
    carried = height / spacing * scenario.balls.mass
    share = 1.0 if scenario.drive.sprocket == "tail" else 0.0
    foot = 0.5 * (hung - share * carried) * scenario.frame.gravity
    rest = 0.5 * hung * scenario.frame.gravity
    outcome = "fails" if foot < 0 else "close" if foot < 0.2 * rest else "holds"
    taut = finding("carrying_strand_taut", foot, outcome) | {"scale": rest}
    speed = scenario.drive.chain_speed
    seat = finding("balls_stay_seated", 0.6 - speed, "fails" if speed > 0.6 else "holds")
    return {
        "findings": [seat, taut],
        "summary": {"foot": foot, "balls_ended": 50, "balls_lost": 0},
        "stop_reason": "reached end",
    }


def with_island(job: Job) -> dict:
    """The same lift, failing besides in a narrow range of speeds, as at a resonance."""
    result = free_body(job)
    speed = scenario_of(job).drive.chain_speed
    if 0.07 < speed < 0.11:
        result["findings"].append(finding("off_resonance", -0.1, "fails"))
    return result


def link_mass_decides(job: Job) -> dict:
    """A lift whose strand is taut only while its links are heavy enough."""
    mass = scenario_of(job).chain.link_mass
    origin = lift().origin("chain.link_mass")
    least = 0.5 * (origin.low + origin.typical)
    outcome = "holds" if mass > least else "fails"
    return {
        "findings": [finding("carrying_strand_taut", mass - least, outcome)],
        "summary": {},
        "stop_reason": "reached end",
    }


def frail_when_knocked(job: Job) -> dict:
    """The free body, losing its balls at any knock."""
    result = free_body(job)
    if any(event.kind == "knock" for event in scenario_of(job).event):
        result["findings"][0] = finding("balls_stay_seated", -1.0, "fails")
    return result
