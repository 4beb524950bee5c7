"""Tension on wraps and in hanging chains, and the free body of the loop."""

import math

import numpy as np
import pytest
from scipy.integrate import quad

from chainsim import closed_forms as cf
from chainsim.errors import CallError

WEIGHT = 0.64 * 9.80665  # weight per length of an 08A chain, 0.64 kg/m [N/m]
PITCH = 0.0127


# Naji and Marshek 1983 (law); columns: teeth, pressure angle [deg], ratio, ratio^(N/2), P1/T0.
@pytest.mark.parametrize(
    ("teeth", "degrees", "ratio", "half_wrap", "tooth"),
    [
        (8, 20.0, 0.37737747, 0.02028168, 0.78020601),
        (12, 25.0, 0.51592163, 0.01885830, 0.61038729),
        (16, 27.5, 0.60277001, 0.01742662, 0.49955774),
        (20, 29.0, 0.66289351, 0.01638467, 0.42252742),
        (24, 30.0, 1 / math.sqrt(2), 1 / 64, 0.36602540),
    ],
)
def test_tension_falls_from_tooth_to_tooth(teeth, degrees, ratio, half_wrap, tooth):
    angle = math.radians(degrees)
    assert cf.tooth_tension_ratio(teeth, angle) == pytest.approx(ratio, rel=1e-7)
    assert cf.tooth_force_ratio(teeth, angle) == pytest.approx(tooth, rel=1e-7)
    assert cf.back_tension(1.0, teeth / 2, teeth, angle) == pytest.approx(half_wrap, rel=1e-6)


@pytest.mark.parametrize(
    ("teeth", "degrees", "friction", "helping", "climbing"),
    [(8, 20.0, 0.1, 0.28708066, 0.45962826), (16, 27.5, 0.15, 0.49086630, 0.68965338)],
)
def test_friction_shifts_the_pressure_angle(teeth, degrees, friction, helping, climbing):
    angle = math.radians(degrees)
    assert cf.tooth_tension_ratio(teeth, angle, friction) == pytest.approx(helping, rel=1e-7)
    assert cf.tooth_tension_ratio(teeth, angle, -friction) == pytest.approx(climbing, rel=1e-7)


def test_friction_that_holds_a_pin_alone_is_named():
    with pytest.raises(CallError, match="by itself"):
        cf.tooth_tension_ratio(8, math.radians(5.0), 0.2)


def test_wrap_without_flanks_keeps_its_tension():
    # Force along the bisector: pressure angle 90° − π/z, ratio 1, pin force 2 T sin(π/z).
    for teeth in (8, 12):
        angle = math.pi / 2 - math.pi / teeth
        assert cf.tooth_tension_ratio(teeth, angle) == pytest.approx(1.0, rel=1e-12)
        assert cf.bisector_pin_force(1.0, teeth) == pytest.approx(
            cf.tooth_force_ratio(teeth, angle), rel=1e-12
        )


def test_capstan_matches_printed_numbers():
    # "Capstan equation": 153 552 935 for ten turns at 0.3; a chain maker's guide: half a turn at
    # 0.3 makes 256.6 N of 100 N.
    assert cf.capstan_ratio(0.3, 20 * math.pi) == pytest.approx(153552935.4, rel=1e-9)
    assert round(100 * cf.capstan_ratio(0.3, math.pi), 1) == 256.6


@pytest.mark.parametrize(
    ("friction", "teeth", "ratio"),
    [(0.1, 6, 1.41452790), (0.1, 48, 1.36972930), (0.15, 8, 1.64492924), (0.3, 12, 2.62926116)],
)
def test_polygon_drags_more_than_a_drum(friction, teeth, ratio):
    assert cf.polygon_capstan_ratio(friction, teeth, teeth / 2) == pytest.approx(ratio, rel=1e-8)
    assert ratio > cf.capstan_ratio(friction, math.pi)


def test_centrifugal_tension_of_a_spinning_polygon():
    # Ring of 12 point masses m p at ω = 100 rad/s: link tension m p ω² R / (2 sin β).
    radius = cf.pitch_radius(PITCH, 12)
    beads = 0.64 * PITCH * 100.0**2 * radius / (2.0 * math.sin(math.pi / 12))
    assert cf.centrifugal_tension(0.64, 100.0 * radius) == pytest.approx(beads, rel=1e-12)
    assert beads == pytest.approx(3.85243184, rel=1e-8)


def test_vertical_chain_of_a_hundred_links():
    tension = [cf.vertical_chain_tension(below, PITCH, 0.64, 0.0, 9.80665) for below in (99, 49)]
    assert tension == pytest.approx([7.93099089, 3.94556833], rel=1e-8)
    own = cf.vertical_chain_stretch(1.27, 2e5, WEIGHT * 1.27, 0.0)
    assert own == pytest.approx(2.53074333e-5, rel=1e-8)
    assert cf.vertical_chain_stretch(1.27, 2e5, WEIGHT * 1.27, 10.0) == pytest.approx(
        8.88074333e-5, rel=1e-8
    )


def test_catenary_of_the_worked_example():
    # Statics course, "Cables: Catenaries", example 1: 140 m over 120 m, 3 kg/m, g = 9.81:
    # sag 31.70 m, largest tension 2740 N (rounded there).
    strand = cf.catenary(120.0, 140.0, 3 * 9.81)
    assert strand.sag == pytest.approx(31.70, abs=0.005)
    assert strand.end_tension == pytest.approx(2740.0, rel=5e-4)
    assert strand.horizontal_tension == pytest.approx(1808.34785, rel=1e-8)


@pytest.mark.parametrize(
    ("sag", "horizontal", "length", "end"),
    [
        (0.010, 19.6237515, 0.5005329357, 19.6865141),
        (0.050, 3.97388793, 0.5130934341, 4.28770073),
        (0.125, 1.68567713, 0.575395557, 2.47020913),
    ],
)
def test_catenary_of_a_given_sag(sag, horizontal, length, end):
    strand = cf.catenary_of_sag(0.5, sag, WEIGHT)
    assert strand.horizontal_tension == pytest.approx(horizontal, rel=1e-8)
    assert strand.length == pytest.approx(length, rel=1e-8)
    assert strand.end_tension == pytest.approx(end, rel=1e-8)
    assert cf.catenary(0.5, strand.length, WEIGHT).sag == pytest.approx(sag, rel=1e-7)


@pytest.mark.parametrize(
    ("links", "span", "horizontal", "sag", "end"),
    [
        (8, 0.08, 0.2039603197, 0.02798567404, 0.345585615),
        (20, 0.20, 0.5116238095, 0.06946312030, 0.913869044),
        (21, 0.20, 0.4641258449, 0.07834010556, 0.922364635),
        (40, 0.40, 1.023742696, 0.1387854109, 1.86116727),
    ],
)
def test_chain_of_rigid_links_between_two_hooks(links, span, horizontal, sag, end):
    strand = cf.link_catenary(links, PITCH, span, WEIGHT)
    assert strand.horizontal_tension == pytest.approx(horizontal, rel=1e-9)
    assert strand.sag == pytest.approx(sag, rel=1e-9)
    assert strand.end_tension == pytest.approx(end, rel=1e-8)


@pytest.mark.parametrize(
    ("stiffness", "horizontal", "sag"),
    [(2e5, 2.055213312, 0.1001570821), (500.0, 1.999700509, 0.1027406285),
     (50.0, 1.671248377, 0.1212585046)],
)  # fmt: skip
def test_elastic_catenary(stiffness, horizontal, sag):
    strand = cf.elastic_catenary(0.5, 0.55, WEIGHT, stiffness)
    assert strand.horizontal_tension == pytest.approx(horizontal, rel=1e-8)
    assert strand.sag == pytest.approx(sag, rel=1e-8)


def test_strands_that_do_not_reach_are_refused():
    with pytest.raises(CallError, match="cannot hang across"):
        cf.catenary(1.0, 1.0, WEIGHT)
    with pytest.raises(CallError, match="cannot hang across"):
        cf.link_catenary(10, 0.1, 1.0, WEIGHT)


# Loop of checks D5: H = 1 m, W = 20 N, P = 6 N, w H = 6.276256 N, eight teeth of 12.7 mm.
def test_loop_driven_at_the_head_keeps_half_the_hung_weight_at_both_feet():
    loop = cf.hung_loop(20.0, WEIGHT, 6.0, "head")
    assert loop.carrying_foot == loop.return_foot == 10.0
    assert loop.carrying_head == pytest.approx(22.276256, rel=1e-9)
    assert loop.return_head == pytest.approx(16.276256, rel=1e-9)
    assert loop.head_hub == pytest.approx(38.552512, rel=1e-9)


def test_loop_driven_at_the_tail_takes_the_balls_out_of_the_carrying_foot():
    loop = cf.hung_loop(20.0, WEIGHT, 6.0, "tail")
    assert (loop.carrying_foot, loop.return_foot) == (7.0, 13.0)
    assert loop.carrying_head == pytest.approx(19.276256, rel=1e-9)
    assert loop.return_head == pytest.approx(19.276256, rel=1e-9)
    assert loop.head_hub == pytest.approx(38.552512, rel=1e-9)
    assert loop.tail_hub == 20.0


def test_slack_thresholds():
    assert cf.least_hung_weight(6.0, "tail") == 6.0
    assert cf.least_hung_weight(6.0, "head") == 0.0
    assert cf.hung_loop(6.0, WEIGHT, 6.0, "tail").carrying_foot == 0.0
    assert cf.least_lifting_force(0.0, WEIGHT, 0.0, "head") == pytest.approx(12.552512, rel=1e-9)
    needed = cf.least_lifting_force(3.0, WEIGHT, 6.0, "tail")
    loop = cf.lifted_loop(needed, 3.0, WEIGHT, 6.0, "tail")
    assert loop.carrying_foot == pytest.approx(0.0, abs=1e-12)
    assert loop.return_foot == pytest.approx(6.0)


def test_torque_lifts_the_balls_by_one_tooth_count_of_pitches_a_turn():
    torque = cf.lifting_torque(6.0, PITCH, 8)
    assert torque.peak == pytest.approx(0.0995600979, rel=1e-8)
    assert torque.mean == pytest.approx(0.0970208533, rel=1e-8)


@pytest.mark.parametrize(("tension", "degrees"), [(2.0, 6.4), (0.5, 21.5)])
def test_tilt_of_a_link_under_an_off_axis_ball(tension, degrees):
    # 20 g, 12 mm off the pin line, 10 mm link: 6.4° at 2 N and 21.5° at 0.5 N (derived).
    tilt = cf.loaded_link_tilt(tension, 0.02 * 9.80665, 0.012, 0.0, 0.01)
    assert math.degrees(tilt) == pytest.approx(degrees, abs=0.05)


def test_tension_that_cannot_right_a_link_is_named():
    with pytest.raises(CallError, match="cannot right a link"):
        cf.loaded_link_tilt(0.0, 0.2, 0.0, 0.02, 0.01)


@pytest.mark.parametrize("driven", ["head", "tail"])
def test_hung_tail_swings_as_far_as_its_moments_say(driven):
    # The slopes of both strands, integrated, must meet the moment balance about the head axle:
    # balls at R + e and the displaced weights on one side, the torques on the other.
    length, payload, offset, hung = 1.0, 6.0, 0.012, 20.0
    loop = cf.hung_loop(hung, WEIGHT * length, payload, driven)
    swing = cf.tail_out_of_plumb(loop, length, WEIGHT * length, payload, offset)

    def compliance(foot, weight, below):
        return quad(lambda z: 1.0 / (foot + weight * z / length), 0.0, below)[0]

    carrying = WEIGHT * length + payload
    a_carrying = compliance(loop.carrying_foot, carrying, length)
    a_return = compliance(loop.return_foot, WEIGHT * length, length)
    assert swing == pytest.approx(
        payload * offset / length * a_carrying * a_return / (a_carrying + a_return), rel=1e-9
    )
    heights = np.linspace(0.0, length, 2001)
    rising = [
        swing * (1 - compliance(loop.carrying_foot, carrying, z) / a_carrying) for z in heights
    ]
    falling = [swing * (1 - compliance(loop.return_foot, WEIGHT, z) / a_return) for z in heights]
    moment = hung * swing
    moment += np.trapezoid(rising, heights) * carrying / length
    moment += np.trapezoid(falling, heights) * WEIGHT
    assert moment == pytest.approx(payload * offset, rel=1e-4)  # trapezoidal rule, 2001 points


def test_hung_tail_of_a_heavy_take_up_swings_by_the_short_estimate():
    # x = P e / (W + w H + P/2) holds where the tension hardly varies along the strands.
    loop = cf.hung_loop(2000.0, WEIGHT, 6.0, "head")
    swing = cf.tail_out_of_plumb(loop, 1.0, WEIGHT, 6.0, 0.012)
    assert swing == pytest.approx(6.0 * 0.012 / (2000.0 + WEIGHT + 3.0), rel=1e-4)
    with pytest.raises(CallError, match="slack strand"):
        cf.tail_out_of_plumb(cf.hung_loop(6.0, WEIGHT, 6.0, "tail"), 1.0, WEIGHT, 6.0, 0.012)
