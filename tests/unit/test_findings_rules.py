"""How an outcome follows from measures; the order of the findings; situations and verdict."""

import math
from types import SimpleNamespace

import numpy as np
import pytest

from chainsim.analysis import run_summary
from chainsim.findings import GROUPS, Finding, Measure, judge, situations, verdict
from chainsim.findings.finding import judged, unjudged
from tests.synthetic import synthetic_recording
from tests.unit.overlay import Overlay, event

# Names in the order and the groups of the job: balls, chain, space, drive.
NAMES = {
    "balls": ["balls_stay_seated", "rate_met", "ride_smooth"],
    "chain": ["no_tooth_skipped", "chain_stays_on", "carrying_strand_taut", "links_hold"],
    "space": ["strand_in_clearance", "parts_keep_clear", "takeup_in_travel"],
    "drive": ["drive_copes", "off_resonance", "shaft_below_whirl"],
}
OUTCOMES = {"holds", "close", "fails", "not judged"}
WHYS = {"does not apply", "not enough data", "outside validated range"}


@pytest.fixture(scope="module")
def rec():
    return synthetic_recording()


def measure(value, limit, **more):
    return Measure(what="thing", value=value, unit="N", limit=limit, **more)


@pytest.mark.parametrize(
    ("value", "limit", "is_floor", "outcome", "margin"),
    [
        (7.9, 10.0, False, "holds", 2.1),
        (8.1, 10.0, False, "close", 1.9),
        (10.0, 10.0, False, "close", 0.0),
        (10.1, 10.0, False, "fails", -0.1),
        (12.1, 10.0, True, "holds", 2.1),
        (9.9, 10.0, True, "fails", -0.1),
        (-8.1, -10.0, True, "close", 1.9),
    ],
)
def test_close_is_inside_the_reserve_of_the_limit(value, limit, is_floor, outcome, margin):
    found = judged([measure(value, limit, is_floor=is_floor)], 0.2)
    assert (found.outcome, found.scale) == (outcome, 10.0)
    assert found.margin == pytest.approx(margin)


def test_a_scale_of_its_own_replaces_the_limit():
    assert judged([measure(1.0, 0.0, is_floor=True, scale=9.8)], 0.2).outcome == "close"
    assert judged([measure(2.0, 0.0, is_floor=True, scale=9.8)], 0.2).outcome == "holds"


def test_the_least_margin_by_its_scale_is_shown():
    wide, narrow = measure(80.0, 100.0), measure(0.9, 1.0)
    found = judged([wide, narrow], 0.05)
    assert (found.value, found.outcome) == (0.9, "holds")
    assert "80" in found.note


def test_a_failed_measure_goes_before_a_smaller_margin():
    found = judged([measure(0.99, 1.0), measure(0.1, 1.0, has_failed=True)], 0.2)
    assert (found.value, found.outcome) == (0.1, "fails")


def test_without_a_limit_it_is_measured_and_not_judged():
    found = judged([measure(3.0, None)], 0.2)
    assert (found.outcome, found.why, found.value) == ("not judged", "does not apply", 3.0)
    assert found.margin is None and found.limit is None


def test_a_value_that_is_not_known_is_not_judged():
    found = judged([measure(math.nan, 1.0)], 0.2)
    assert found.outcome == "not judged" and found.value is None


def test_unjudged_tells_all_it_measured():
    found = unjudged("not enough data", "too short", [measure(3.0, None), measure(4.0, None)])
    assert "4 N" in found.note and found.note.endswith("too short")


def test_thirteen_findings_in_their_order_and_groups(rec):
    findings = judge(rec)
    assert [finding.name for finding in findings] == [n for names in NAMES.values() for n in names]
    assert tuple(NAMES) == GROUPS
    for finding in findings:
        assert finding.name in NAMES[finding.group]
        assert finding.title and finding.outcome in OUTCOMES
        assert (finding.why in WHYS) == (finding.outcome == "not judged")
        for number in (finding.value, finding.limit, finding.margin, finding.time):
            assert number is None or math.isfinite(number)


def test_findings_can_be_kept_by_a_recorder(rec):
    from dataclasses import asdict

    from chainsim.recording.rows import FindingRow

    assert next(FindingRow(**asdict(finding)).name for finding in judge(rec)) == "balls_stay_seated"


def test_a_recording_of_nothing_is_not_judged(rec):
    nothing = Overlay(rec, {"drive/set_speed": None}, time=np.zeros(1))
    assert {finding.why for finding in judge(nothing)} == {"not enough data"}


def test_situations_of_a_plain_run(rec):
    found = situations(rec)
    assert found.run == ["start empty", "steady"]
    assert "stop" in found.not_run and len(found.run) + len(found.not_run) == 12


def test_situations_from_events(rec):
    kinds = ["stop", "supply cut", "jam", "knock", "double ball", "take-up blocked"]
    events = [event(5.0 + k, kind) for k, kind in enumerate(kinds)] + [event(11.5, "start")]
    found = situations(Overlay(rec, events=events))
    assert set(kinds) | {"restart loaded"} <= set(found.run)
    late = situations(Overlay(rec, events=[event(99.0, "jam")]))
    assert "jam" in late.not_run


def test_a_lift_without_balls_lists_no_situation_of_balls(rec):
    scenario = SimpleNamespace(
        **{name: getattr(rec.scenario, name) for name in ("sprocket", "chain", "drive", "run")},
        balls=None,
        event=(),
    )
    found = situations(Overlay(rec, scenario=scenario))
    assert "double ball" not in found.run + found.not_run
    assert "start empty" in found.run


def finding(outcome, title="links hold", note=""):
    return Finding(name="links_hold", title=title, outcome=outcome, note=note)


RAN = (["start empty", "steady"], ["stop", "jam"])


def test_verdict_names_what_fails():
    text = verdict([finding("fails", note="peak tension; x"), finding("close", "rate is met")], RAN)
    assert "1 of 2 judged findings fails (links hold: peak tension)" in text
    assert text.endswith("shown for start empty, steady only, not run: stop, jam.")


def test_verdict_of_a_run_that_holds_is_not_a_licence():
    text = verdict([finding("holds"), finding("not judged")], RAN)
    assert "All 1 judged findings hold" in text and "not run: stop, jam" in text


def test_verdict_of_close_findings_and_of_none():
    assert "1 of 2 is close" in verdict([finding("close"), finding("holds")], RAN)
    assert verdict([finding("not judged")], ([], ["stop"])).startswith("Nothing could be judged")


def broken(rec, how):
    """Recording of a run that went badly wrong half way."""
    random, half = np.random.default_rng(5), len(rec.time) // 2
    position, tension = rec["pins/position"].copy(), rec["links/tension"].copy()
    angle = rec["sprockets/angle"].copy()
    if how == "off its sprockets":
        position[half:] += random.normal(scale=0.2, size=position[half:].shape)
    elif how == "in one point":
        position[half:] = 0.0
    elif how == "not a number":
        position[half:], tension[half:], angle[half:] = np.nan, np.nan, np.nan
    return Overlay(
        rec,
        {"pins/position": position, "links/tension": tension, "sprockets/angle": angle},
        events=[event(6.0, "supply_cut"), event(7.0, "jam")],
    )


@pytest.mark.filterwarnings("error")
@pytest.mark.parametrize("how", ["off its sprockets", "in one point", "not a number"])
def test_whatever_was_recorded_is_judged_or_says_why(rec, how):
    wreck = broken(rec, how)
    for found in judge(wreck):
        assert (found.outcome == "not judged") == bool(found.why)
    assert run_summary(wreck, [])["n_links"] == 60


@pytest.mark.filterwarnings("error")
@pytest.mark.parametrize("n", [0, 1, 2, 3, 20])
def test_short_recordings_are_judged_as_far_as_they_go(n):
    rec = synthetic_recording(duration=3.0)
    cut = {name: rec[name][:n] for name in rec.names() if not name.startswith("geometry/")}
    short = Overlay(rec, cut, time=rec.time[:n], balls=[], extremes={})
    assert len(judge(short)) == 13
    assert verdict(judge(short), situations(short))
    assert "duration" in run_summary(short, [])


def test_a_recording_that_keeps_little_says_what_it_lacks(rec):
    bulk = ("pins/position", "pins/velocity", "links/tension", "balls/acceleration")
    small = Overlay(rec, dict.fromkeys(bulk))
    by_name = {finding.name: finding for finding in judge(small)}
    assert by_name["links_hold"].why == "not enough data"
    assert "pins/position" in by_name["strand_in_clearance"].note
    assert by_name["no_tooth_skipped"].outcome == "holds"
    assert "torque_peak" in run_summary(small, []) and "ripple" not in run_summary(small, [])
