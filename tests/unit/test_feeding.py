"""What becomes of balls: every feed, every fate, on whole runs of a small lift."""

import numpy as np
import pytest

from tests.validation.small_lift import lifted

FEED = 'feed = { kind = "set down", rate = "1.5 /s" }'
DISCHARGE = 'discharge = { at = ["-40 mm", "140 mm"], mouth = "90 mm", slope = "10 deg" }'


def fates(rec):
    """Fates of the balls that are no longer aboard."""
    return [row.fate for row in rec.balls if row.fate != "aboard"]


@pytest.fixture(scope="module")
def calm():
    """The small lift as it is."""
    return lifted()


def test_calm_lift_delivers(calm):
    assert len(fates(calm)) >= 2
    assert set(fates(calm)) == {"delivered"}


def test_rows_tell_a_ball_s_life(calm):
    for row in calm.balls:
        if row.fate == "delivered":
            assert row.fed_time <= row.seated_time < row.end_time
            assert row.pocket >= 0
            assert row.end_x == pytest.approx(-0.04, abs=5e-3)
        else:
            assert np.isnan(row.end_time)
    assert [row.number for row in calm.balls] == list(range(len(calm.balls)))


def test_mouth_in_the_wrong_place():
    low = DISCHARGE.replace("140 mm", "60 mm").replace("90 mm", "20 mm")
    rec = lifted(200, (DISCHARGE, low))
    assert "delivered" not in fates(rec)
    assert "outside the mouth" in fates(rec)


def test_chute_that_throws_past_the_pockets():
    chute = (
        'feed = { kind = "chute", rate = "2 /s", at = ["120 mm", "60 mm"], '
        'velocity = ["500 mm/s", "0 mm/s"] }'
    )
    rec = lifted(200, (FEED, chute))
    assert fates(rec)
    assert set(fates(rec)) == {"missed the pocket"}


def test_missing_and_double_ball():
    more = '[[event]]\nat = "0.5 s"\nkind = "missing_ball"\n'
    rec = lifted(200, more=more)
    assert [event.kind for event in rec.events].count("missing_ball") >= 1
    fed = [event for event in rec.events if event.kind == "fed"]
    assert len(fed) == len(rec.balls)


def test_every_pocket_is_filled():
    rec = lifted(200, (FEED, 'feed = "every pocket"\nstart = "loaded"'))
    seated = (rec["balls/state"][-1] == 3).sum()
    assert seated >= 5
