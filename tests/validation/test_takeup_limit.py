"""Where a hung take-up lets the carrying strand go slack, simulated, against its free body.

Free body of a vertical loop whose lower sprocket hangs in it (statics, derived in
`chainsim.closed_forms.loop`): driven at the tail the foot of the carrying strand goes slack
where all that hangs weighs as much as the balls on that strand; driven at the head it never
does; a taller lift needs more only as far as it carries more balls.
"""

from __future__ import annotations

import pytest

from chainsim.run import run
from chainsim.scenario import parse_scenario
from chainsim.study.heights import raised
from chainsim.study.limit_estimates import estimate

LIFT = """\
format = 1

[chain]
kind = "moulded_sturdy"
pitch = "10 mm"
links = 112
joint = { friction = 0.0 }

[[sprocket]]
name = "head"
teeth = 8
center = ["0 mm", "520 mm"]
bearing_friction = 0.0

[[sprocket]]
name = "tail"
teeth = 8
center = ["0 mm", "0 mm"]
bearing_friction = 0.0
mount = { kind = "hung", mass = "0.30 kg", damping = "10 N s/m" }

[drive]
sprocket = "tail"
chain_speed = "0.04 m/s"

[carriers]
every = 4
mass = "2 g"
pocket = { offset = "0 mm" }

[balls]
diameter = "16 mm"
mass = "20 g"
model = "fixed"
feed = "every pocket"
start = "loaded"

[run]
duration = "6 s"
settle = "2 s"
"""
TALLER = 0.32  # a whole number of carrier spacings in each strand [m]


def failing(scenario, mass):
    """Which findings of the chain fail at a hung mass [kg]."""
    recording = run(scenario.with_values({"sprocket.tail.mount.mass": mass}), keep="summary")
    return {f.name for f in recording.findings if f.outcome == "fails" and f.group == "chain"}


def test_the_strand_goes_slack_within_3_percent_of_the_closed_form():
    scenario = parse_scenario(LIFT)
    threshold = estimate(scenario, "takeup").value
    assert "carrying_strand_taut" in failing(scenario, 0.97 * threshold)
    assert "carrying_strand_taut" not in failing(scenario, 1.03 * threshold)


@pytest.mark.parametrize(
    ("changes", "grows"),
    [
        ({"drive.sprocket": "head"}, False),
        ({"carriers.at": [0, 4, 8, 12, 16, 20]}, False),
        ({}, True),
    ],
    ids=["driven at the head", "at the tail, six balls", "at the tail, balls at a fixed spacing"],
)
def test_a_taller_lift_needs_more_only_as_far_as_it_carries_more(changes, grows):
    scenario = parse_scenario(LIFT).with_values(changes)
    taller = scenario.with_values(raised(scenario, TALLER, 112))
    enough = 1.15 * estimate(parse_scenario(LIFT), "takeup").value
    assert not failing(scenario, enough)
    assert bool(failing(taller, enough)) == grows
