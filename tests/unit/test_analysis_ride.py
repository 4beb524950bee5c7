"""Ride and tilt of carried balls, losses, gaps between parts."""

import numpy as np
import pytest

from chainsim.analysis import (
    ball_acceleration,
    carrier_tilts,
    losses,
    ride,
    ride_spectrum,
    smallest_gaps,
    survey,
)
from tests.synthetic import PITCH, SEAT_RADIUS, TEETH, synthetic_recording
from tests.unit.overlay import Overlay, bare_strand, event


@pytest.fixture(scope="module")
def rec():
    return synthetic_recording(noise=0.0)


def test_ride_is_the_peak_and_rms_of_what_carried_balls_feel(rec):
    lateral, longitudinal = ride(rec)
    s = survey(rec)
    felt = rec["balls/acceleration"][s.is_steady][rec["balls/state"][s.is_steady] == 3]
    assert lateral.peak == pytest.approx(np.abs(felt[:, 0]).max())
    assert longitudinal.rms == pytest.approx(np.sqrt(np.mean(felt[:, 1] ** 2)), rel=1e-5)
    sample = int(np.argmin(np.abs(s.time - lateral.time)))
    assert lateral.ball in rec["balls/number"][sample]


def test_no_ride_without_a_carried_ball(rec):
    empty = np.zeros_like(rec["balls/state"])
    assert ride(Overlay(rec, {"balls/state": empty})) is None


def test_acceleration_turns_with_the_link_into_the_strand(rec):
    """A link that leans by 0.1 rad shows an acceleration along the strand partly across itself."""
    lean, s = 0.1, survey(rec)
    sample, slot = np.argwhere((rec["balls/state"] == 3) & s.is_steady[:, None])[200]
    position, acceleration = rec["pins/position"].copy(), rec["balls/acceleration"].copy()
    link = rec["geometry/carrier_link"][rec["balls/pocket"][sample, slot]]
    center = 0.5 * (position[sample, link] + position[sample, link + 1])
    half = 0.5 * PITCH * np.array([-np.sin(lean), np.cos(lean)])
    position[sample, link], position[sample, link + 1] = center - half, center + half
    acceleration[sample, slot] = 2 * np.sin(lean), 2 * np.cos(lean)  # 2 m/s² along the strand
    changed = {"pins/position": position, "balls/acceleration": acceleration}
    found = ball_acceleration(Overlay(rec, changed), "strand")[sample, slot]
    chord = position[sample, s.strand_pins[1].last[sample]]
    chord = chord - position[sample, s.strand_pins[1].first[sample]]
    lean_of_chord = np.arctan2(-chord[0], chord[1])
    assert found == pytest.approx(
        [-2 * np.sin(-lean_of_chord), 2 * np.cos(lean_of_chord)], abs=1e-3
    )


def test_spectrum_of_a_ride_reaches_half_of_the_sample_rate(rec):
    found = ride_spectrum(rec)
    assert found.frequency[-1] == pytest.approx(125.0, rel=0.02)
    assert np.isfinite(found.amplitude).all()


def test_tilt_of_a_leaning_carrier():
    """Two pins of one link set askew: its lean is read against the chord of the strand."""
    place = np.stack([np.zeros(21), 0.01 * np.arange(21)], axis=1)
    place[10, 0], place[11, 0] = 0.0005, -0.0005
    rec = bare_strand(place, 0.01, tension=3.0)
    pocket, state = np.zeros((2, 1), int), np.full((2, 1), 3)
    rec._channels |= {
        "balls/pocket": pocket,
        "balls/state": state,
        "geometry/carrier_link": np.array([10]),
    }
    (tilt,) = carrier_tilts(rec)
    assert tilt.tilt == pytest.approx(np.arctan(0.1), rel=1e-4)
    assert tilt.tension == pytest.approx(3.0)


def test_loss_tells_the_half_second_before():
    rec = synthetic_recording(spilled_ball=3, noise=0.0)
    (loss,) = losses(rec)
    assert (loss.ball, loss.fate) == (3, "spilled")
    assert loss.speed_least < 0.15 < loss.speed_most
    assert loss.reserve_least == pytest.approx(-1.0)
    assert loss.cause == "left over the lip"  # what the run itself said


@pytest.mark.parametrize(
    ("change", "says"),
    [
        ("knock", "knock"),
        ("slack", "went slack"),
        ("nothing", "too rough"),
    ],
)
def test_most_likely_cause(change, says):
    rec = synthetic_recording(spilled_ball=3, noise=0.0)
    balls = [ball._replace(cause="") for ball in rec.balls]
    when = next(ball.end_time for ball in balls if ball.fate == "spilled")
    tension = rec["links/tension"].copy()
    if change == "slack":
        tension[np.abs(rec.time - when) < 0.2] = -0.1
    events = [event(when - 0.1, "knock")] if change == "knock" else []
    changed = Overlay(rec, {"links/tension": tension}, balls=balls, events=events)
    assert says in losses(changed)[0].cause


def test_gap_between_two_straight_strands_is_their_distance_less_a_roller(rec):
    by_parts = {gap.parts: gap for gap in smallest_gaps(rec)}
    gap = by_parts["strand head-tail and strand tail-head"]
    nearest = 2 * SEAT_RADIUS * np.cos(np.pi / TEETH) - 0.005
    assert nearest - 1e-6 <= gap.size < nearest + 2e-4


def test_gap_to_a_wall_counts_chain_and_carriers(rec):
    text = rec.scenario.text + (
        '[[wall]]\nname = "guard"\npoints = [["60 mm", "0 mm"], ["60 mm", "300 mm"]]\n'
    )
    from chainsim.scenario import parse_scenario

    walled = Overlay(rec, scenario=parse_scenario(text))
    by_parts = {gap.parts: gap for gap in smallest_gaps(walled)}
    chain = by_parts["chain and wall guard"]
    assert chain.size == pytest.approx(0.060 - SEAT_RADIUS - 0.0025, abs=1e-5)
    # The lip stands 22 mm out of the line of the pins, on the wrap a little farther.
    carriers = by_parts["carriers and wall guard"]
    assert 0.060 - 0.040 < carriers.size < 0.060 - SEAT_RADIUS * np.cos(np.pi / TEETH) - 0.0215


def test_gap_to_a_chute_is_that_of_its_lip_too(rec):
    """A chute that points at the strand: its lip comes nearer a pocket's side than any corner."""
    chute = np.array([[0.20, 0.103], [0.0372, 0.103]])
    by_parts = {g.parts: g for g in smallest_gaps(Overlay(rec, {"geometry/chute": chute}))}
    # On the straight strand the lip of a pocket stands 22 mm out of the pins, which swing inward.
    nearest = 0.0372 - SEAT_RADIUS - 0.022 - 0.00075
    assert nearest - 1e-5 <= by_parts["carriers and chute"].size < nearest + 0.0011
