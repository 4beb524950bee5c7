"""Dated events: in order of time, and what the usual run consists of."""

import pytest

from chainsim.integration.timeline import timeline
from chainsim.model.lift import build_lift
from chainsim.scenario import parse_scenario
from tests.validation.small_lift import lift_text

BLOCK = (
    '[[event]]\nat = "2 s"\nkind = "takeup_blocked"\nsprocket = "tail"\nduration = "0.5 s"\n'
    '[[event]]\nat = "1 s"\nkind = "stop"\n'
)


def test_events_stand_in_order_of_time():
    duration, actions = timeline(build_lift(parse_scenario(lift_text(200) + BLOCK)))
    assert duration == 4.0
    assert [(action.time, action.kind) for action in actions] == [
        (0.0, "start"),
        (1.0, "stop"),
        (2.0, "takeup_blocked"),
        (2.5, "unblock"),
    ]


def test_usual_run_stops_and_restarts_after_three_turns():
    text = lift_text(200, ('duration = "4 s"\n', ""))
    duration, actions = timeline(build_lift(parse_scenario(text)))
    assert [action.kind for action in actions] == ["start", "stop", "start"]
    turns = 3.0 * 48 * 0.01 / 0.1
    assert actions[1].time > turns
    assert actions[2].time == pytest.approx(actions[1].time + 0.3 + 1.0)
    assert duration > actions[2].time
