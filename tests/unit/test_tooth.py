"""Tooth form: published numbers, one smooth distance, and the arc of the arriving pin."""

import math
from dataclasses import replace

import numpy as np
import pytest

from chainsim.errors import LayoutError
from chainsim.model.tooth import (
    ToothForm,
    arriving_clearance,
    gap,
    outline,
    seat_clearances,
    tooth_form,
)

PITCH = 0.010
ROLLER = 0.005


def form(teeth: int = 8, **given) -> ToothForm:
    return tooth_form(teeth, PITCH, ROLLER, **given)


FORMS = {
    "6 teeth": form(6),
    "8 teeth": form(8),
    "8 teeth, no clearance": form(8, seat_clearance=0.0),
    "16 teeth, round tips": tooth_form(16, PITCH, 0.0062),
    "25 teeth": form(25),
}


@pytest.fixture(params=FORMS.values(), ids=FORMS.keys())
def tooth(request) -> ToothForm:
    return request.param


def test_outside_diameter_agrees_with_published_value():
    # 25 teeth, unit pitch: pitch diameter 7.9789, outside diameter 8.516 (ASME B29.1 rule
    # p (0.6 + cot(180°/z)), printed by wheelsprocket.xyz, article 299; the first is printed two
    # units in the last digit too high, 1/sin(7.2°) = 7.97873).
    wheel = tooth_form(25, 1.0, 0.5)
    assert 2.0 * wheel.pitch_radius == pytest.approx(7.9789, abs=2e-4)
    assert 2.0 * wheel.outer_radius == pytest.approx(8.516, abs=5e-4)


def test_default_pressure_angle_is_mean_of_published_range():
    # ASME B29.1 appendix (from memory): 35° − 120°/z and 17° − 64°/z; 8 teeth: 20° and 9°.
    assert math.degrees(form(8).pressure_angle) == pytest.approx(14.5)


def test_seat_clearance_range_is_that_of_the_published_form():
    # ISO 606 (from memory): r_i from 0.505 d1 to 0.505 d1 + 0.069 d1^(1/3); d1 = 8 mm.
    least, most = seat_clearances(0.008)
    assert least == pytest.approx(0.04e-3)
    assert most == pytest.approx(0.178e-3)
    assert tooth_form(12, 0.0127, 0.008).seat_clearance == pytest.approx(0.109e-3)


def test_pin_on_the_pitch_polygon_touches_the_bottom_of_its_seat(tooth):
    for k in range(tooth.teeth):
        angle = 2.0 * math.pi * k / tooth.teeth
        out = np.array([math.cos(angle), math.sin(angle)])
        touch = gap(tooth, tooth.pitch_radius * out)
        assert touch.distance == pytest.approx(0.0, abs=1e-15)
        if tooth.seat_clearance > 0.0:
            assert touch.normal == pytest.approx(out, abs=1e-12)


def shell(tooth: ToothForm, offset: float, count: int = 20_001) -> np.ndarray:
    """Walk a pin across one seat and both its teeth at a radius over the pitch circle."""
    angle = np.linspace(-2.0, 2.0, count) * tooth.half_angle
    radius = tooth.pitch_radius + offset
    return radius * np.column_stack([np.cos(angle), np.sin(angle)])


@pytest.mark.parametrize("share", [0.1, 0.25, 0.4])
def test_distance_is_continuous_and_normal_turns_no_faster_than_the_tip(tooth, share):
    points = shell(tooth, share * PITCH)
    touches = [gap(tooth, point) for point in points]
    distance = np.array([touch.distance for touch in touches])
    normal = np.array([touch.normal for touch in touches])
    step = np.linalg.norm(points[1] - points[0])
    # Deeper than the roller's radius, the pin center would pass the tip's center of curvature.
    reachable = (distance[1:] > -tooth.roller_radius) & (distance[:-1] > -tooth.roller_radius)
    assert np.abs(np.diff(distance))[reachable].max() <= step * (1.0 + 1e-9)
    # Where the roller is within a tenth of its radius of touching, the normal may turn by the step
    # over the smallest distance from a center of curvature; on the tooth's middle line, far from
    # either flank, it may jump.
    near = np.abs(distance) < 0.1 * tooth.roller_radius
    both = near[1:] & near[:-1]
    curvature = 1.0 / (tooth.corner_radius + 0.9 * tooth.roller_radius)
    turn = np.linalg.norm(np.diff(normal, axis=0), axis=1)
    off_middle = np.abs(np.abs(np.arctan2(points[1:, 1], points[1:, 0])) - tooth.half_angle) > 1e-3
    assert (turn[both & off_middle] <= 1.01 * curvature * step).all()


def test_normal_is_the_gradient_of_the_distance(tooth):
    rng = np.random.default_rng(7)
    count = 0
    small = 1e-9
    for _ in range(400):
        angle = rng.uniform(-math.pi, math.pi)
        radius = tooth.pitch_radius + rng.uniform(-0.02, 0.45) * PITCH
        pin = radius * np.array([math.cos(angle), math.sin(angle)])
        slope = np.array(
            [
                (gap(tooth, pin + move).distance - gap(tooth, pin - move).distance) / (2.0 * small)
                for move in small * np.eye(2)
            ]
        )
        touch = gap(tooth, pin)
        if touch.distance > 0.2 * tooth.roller_radius:
            continue  # midway between two flanks or teeth the nearest one changes
        if np.linalg.norm(pin) < tooth.pitch_radius and abs(touch.distance) < 1e-6:
            continue
        count += 1
        assert slope == pytest.approx(touch.normal, abs=3e-6)
    assert count > 100


@pytest.mark.parametrize("teeth", [6, 7, 8, 10, 16])
@pytest.mark.parametrize("tip_radius", [0.5e-3, 1.0e-3])
def test_clearance_agrees_with_a_walk_along_the_arc(teeth, tip_radius):
    tooth = form(teeth, tip_radius=tip_radius)
    step = 2.0 * tooth.half_angle
    neighbor = tooth.pitch_radius * np.array([math.cos(step), math.sin(step)])
    seated = np.array([tooth.pitch_radius, 0.0]) - neighbor
    swing = np.linspace(0.25, 1.0, 4001) * step
    walk = [
        neighbor
        + [
            math.cos(turn) * seated[0] - math.sin(turn) * seated[1],
            math.sin(turn) * seated[0] + math.cos(turn) * seated[1],
        ]
        for turn in swing
    ]
    touches = [gap(tooth, pin).distance for pin in walk]
    assert min(touches) >= 0.0
    # At the end of the swing the pin may still be over the flank, which is then nearer.
    beyond = [
        distance
        for pin, distance in zip(walk, touches, strict=True)
        if tooth.cos_lean * (pin[0] - tooth.seat_radius) + tooth.sin_lean * pin[1] > tooth.flank_end
    ]
    if beyond:
        assert arriving_clearance(tooth, PITCH) == pytest.approx(
            min(beyond), abs=1e-7
        )  # step of the walk


@pytest.mark.parametrize("teeth", range(6, 26))
def test_worked_out_forms_clear_the_arriving_pin(teeth):
    tooth = form(teeth)
    assert arriving_clearance(tooth, PITCH) >= 0.01 * PITCH * (1.0 - 1e-9)
    assert tooth.corner_radius >= 0.05 * PITCH
    assert tooth.height > 0.1 * PITCH


@pytest.mark.parametrize("teeth", [6, 7, 8])
def test_least_published_pressure_angle_collides_with_few_teeth(teeth):
    lean = math.radians(17.0 - 64.0 / teeth)
    height = PITCH * (0.3 + 0.5 / math.tan(math.pi / teeth)) - form(teeth).pitch_radius
    with pytest.raises(LayoutError, match=r"cuts the arc of the arriving pin by 0\.\d+ mm"):
        form(
            teeth,
            pressure_angle=lean,
            height=height,
            seat_clearance=0.0,
            tip_radius=0.05 * PITCH,
        )


def test_lower_teeth_clear_where_the_standard_ones_are_cut():
    tooth = form(6, seat_clearance=0.0, tip_radius=0.05 * PITCH)
    standard = PITCH * (0.3 + 0.5 / math.tan(math.pi / 6)) - tooth.pitch_radius
    assert tooth.height < standard
    assert arriving_clearance(tooth, PITCH) == pytest.approx(0.01 * PITCH, rel=1e-6)


def test_outline_lies_on_the_zero_of_the_distance(tooth):
    seat_arc = tooth.roller_radius + tooth.seat_clearance
    point_probe = replace(
        tooth,
        roller_radius=0.0,
        seat_clearance=seat_arc,
        pitch_radius=tooth.seat_radius - seat_arc,
    )
    for point in outline(tooth, arc_points=9):
        assert gap(point_probe, point).distance == pytest.approx(0.0, abs=1e-15)


def test_outline_is_closed_counterclockwise_and_of_the_stated_size(tooth):
    points = outline(tooth)
    radius = np.linalg.norm(points, axis=1)
    area = 0.5 * np.sum(
        points[:, 0] * np.roll(points[:, 1], -1) - points[:, 1] * np.roll(points[:, 0], -1)
    )
    assert area > 0.0
    assert radius.min() == pytest.approx(tooth.pitch_radius - tooth.roller_radius, rel=1e-12)
    middle = tooth.outer_radius
    assert radius.max() >= middle * (1.0 - 1e-12)
    assert points[0] == pytest.approx([radius.min(), 0.0], abs=1e-15)


@pytest.mark.parametrize(
    ("given", "message"),
    [
        ({"pressure_angle": -0.04}, "pressure angle is -2.3°"),
        ({"tip_radius": 0.3e-3}, "tip radius is 0.30 mm, need at least 0.50 mm"),
        ({"height": 9e-3}, "has room for a tip radius of 0.00 mm, need at least 0.50 mm"),
        ({"height": 0.1e-3, "tip_radius": 3e-3}, "has room for a tip radius of 2.71 mm"),
        ({"height": 0.1e-3, "tip_radius": 2.7e-3}, "has no flank left"),
    ],
)
def test_impossible_forms_are_refused_with_the_reason(given, message):
    with pytest.raises(LayoutError, match=message):
        form(8, name="head", **given)


def test_rollers_that_leave_no_tooth_are_refused():
    with pytest.raises(LayoutError, match="leave no tooth"):
        tooth_form(8, PITCH, 0.0105)
