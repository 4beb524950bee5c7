"""Route of the chain: lengths against handbook values, pins in seats, surplus, refusals."""

import math

import numpy as np
import pytest

from chainsim.errors import LayoutError
from chainsim.model.route import Wheel, lay_chain, route
from chainsim.model.tooth import gap, tooth_form

PITCH = 0.010


def radius(teeth: int, pitch: float = PITCH) -> float:
    return pitch / (2.0 * math.sin(math.pi / teeth))


def sprocket(name: str, teeth: int, center, **given) -> Wheel:
    return Wheel(name, center, radius(teeth), teeth, **given)


HEAD = sprocket("head", 8, (0.0, 0.520))
TAIL = sprocket("tail", 8, (0.0, 0.0))
HUNG = sprocket("tail", 8, (0.0, 0.0), movable=(0.0, 1.0))


# Tooth-arc exact lengths of checks A3: sin a = (R2 − R1)/C,
# L = 2 C cos a + N1 (π − 2a)/2π + N2 (π + 2a)/2π, in pitches; the handbook formula
# L = 2 C + (N1 + N2)/2 + (N2 − N1)²/(4 π² C) is as published by ramseychain.com.
@pytest.mark.parametrize(
    ("small", "large", "distance", "exact"),
    [
        (20, 63, 36, 114.8049511),
        (17, 51, 40, 114.7331655),
        (17, 34, 40, 105.6830798),
        (10, 20, 20, 55.12670949),
        (8, 16, 30, 72.05403657),
        (12, 12, 40, 92.0),
    ],
)
@pytest.mark.parametrize("angle", [0.0, 35.0, 90.0, 217.0])
def test_length_agrees_with_handbook_at_any_angle(small, large, distance, exact, angle):
    away = distance * np.array([math.cos(math.radians(angle)), math.sin(math.radians(angle))])
    loop = route(
        [
            Wheel("a", (0.0, 0.0), radius(small, 1.0), small),
            Wheel("b", tuple(away), radius(large, 1.0), large),
        ],
        1.0,
    )
    handbook = (
        2 * distance + (small + large) / 2 + (large - small) ** 2 / (4 * math.pi**2 * distance)
    )
    assert loop.links == pytest.approx(exact, abs=1e-7)
    assert loop.links == pytest.approx(handbook, abs=0.005)


@pytest.mark.parametrize(
    ("small", "large", "links", "exact"),
    [(20, 63, 114, 35.58996020), (17, 51, 116, 40.63920045), (8, 16, 72, 29.97295733)],
)
def test_closing_travel_agrees_with_published_center_distance(small, large, links, exact):
    # checks A3: center distance for a whole number of links, tooth-arc exact.  A loop of rigid
    # links on polygons differs by their phase, 0.03 pitch at most from 6 teeth on.
    laid = lay_chain(
        [
            Wheel("a", (0.0, 0.0), radius(small, 1.0), small),
            Wheel("b", (exact + 0.3, 0.0), radius(large, 1.0), large, movable=(1.0, 0.0)),
        ],
        1.0,
        links,
    )
    assert laid.wheel_center[1, 0] == pytest.approx(exact, abs=0.03)


def test_equal_polygons_close_exactly_on_whole_pitches():
    # checks A4: perimeter of the hull of a polygon and its translate is N p + 2 C at every angle.
    loop = route([HEAD, TAIL], PITCH)
    assert loop.links == pytest.approx(112.0, abs=1e-12)
    for phase in np.linspace(0.0, math.pi / 4, 9):
        turned = sprocket("head", 8, (0.0, 0.520), phase=float(phase))
        laid = lay_chain([turned, HUNG], PITCH, 112)
        assert laid.travel[1] == pytest.approx(0.0, abs=1e-12)
        assert math.remainder(laid.wheel_angle[1] - phase, math.pi / 4) == pytest.approx(
            0, abs=1e-9
        )
        assert laid.wheel_angle[0] == pytest.approx(phase)


def link_lengths(pin: np.ndarray) -> np.ndarray:
    return np.linalg.norm(np.roll(pin, -1, axis=0) - pin, axis=1)


def crossings(pin: np.ndarray) -> int:
    """Count pairs of links that cross."""
    a, b = pin, np.roll(pin, -1, axis=0)

    def side(p, q, x):
        return (q[0] - p[0]) * (x[1] - p[1]) - (q[1] - p[1]) * (x[0] - p[0])

    count = 0
    for i in range(len(pin)):
        for j in range(i + 2, len(pin) - (i == 0)):
            if (
                side(a[i], b[i], a[j]) * side(a[i], b[i], b[j]) < 0.0
                and side(a[j], b[j], a[i]) * side(a[j], b[j], b[i]) < 0.0
            ):
                count += 1
    return count


LAYOUTS = {
    "hung tail": ([HEAD, HUNG], 113),
    "lifted head": ([sprocket("head", 8, (0, 0.52), movable=(0.0, 1.0)), TAIL], 112),
    "unequal": (
        [sprocket("head", 12, (0.0, 0.5)), sprocket("tail", 7, (0, 0), movable=(0, 1))],
        108,
    ),
    "idler outside": (
        [
            sprocket("head", 8, (0.10, 0.50)),
            sprocket("idler", 10, (0.025, 0.25), side=-1),
            sprocket("tail", 6, (0.0, 0.0), movable=(0.0, 1.0)),
        ],
        112,
    ),
    "smooth roller outside": (
        [
            sprocket("head", 8, (0.10, 0.50)),
            Wheel("idler", (0.030, 0.25), 0.010, 0, side=-1),
            sprocket("tail", 8, (0.0, 0.0), movable=(0.3, 0.954)),
        ],
        114,
    ),
    "three inside": (
        [
            sprocket("head", 8, (0.1, 0.5)),
            sprocket("tail", 6, (0.0, 0.0), movable=(0.0, 1.0)),
            sprocket("corner", 8, (0.3, 0.2)),
        ],
        131,
    ),
    "arm": (
        [HEAD, sprocket("tail", 8, (0.0, 0.0), movable=(0.0, 1.0), pivot=(0.08, 0.02))],
        112,
    ),
    "two movable": (
        [sprocket("head", 8, (0, 0.52), movable=(0.0, 1.0)), HUNG],
        114,
    ),
    "one link to spare": ([HEAD, TAIL], 113),
    "half a link to spare": ([HEAD, sprocket("tail", 8, (0.0, 0.0025))], 112),
    "many links to spare": ([HEAD, TAIL], 131),
    "tail first, to spare": ([TAIL, HEAD], 114),
    "level, to spare": ([sprocket("right", 8, (0.4, 0.0)), sprocket("left", 8, (0, 0))], 90),
    "single": ([HEAD], 40),
    "single, eleven teeth": ([sprocket("head", 11, (0.0, 0.0))], 25),
}


@pytest.mark.parametrize(("wheels", "n_links"), LAYOUTS.values(), ids=LAYOUTS.keys())
def test_every_layout_starts_unstrained_and_seated(wheels, n_links):
    laid = lay_chain(wheels, PITCH, n_links)
    assert laid.pin.shape == (n_links, 2)
    assert link_lengths(laid.pin) == pytest.approx(PITCH, rel=1e-9)
    assert crossings(laid.pin) == 0
    for k, wheel in enumerate(wheels):
        on = np.flatnonzero(laid.seat == k)
        offset = laid.pin[on] - laid.wheel_center[k]
        angle = np.arctan2(offset[:, 1], offset[:, 0]) - laid.wheel_angle[k]
        tolerance = 0.16 * PITCH if laid.surplus > 1e-9 else 1e-9
        assert np.hypot(*offset.T) == pytest.approx(wheel.radius, abs=tolerance)
        if wheel.teeth:
            away = wheel.radius * np.array(
                [math.remainder(a, wheel.seat_step(PITCH)) for a in angle]
            )
            assert away == pytest.approx(0.0, abs=tolerance)


@pytest.mark.parametrize(("wheels", "n_links"), LAYOUTS.values(), ids=LAYOUTS.keys())
def test_no_tooth_stands_in_a_pin(wheels, n_links):
    laid = lay_chain(wheels, PITCH, n_links)
    for k, wheel in enumerate(wheels):
        if wheel.teeth:
            deepest = deepest_contact(wheel, laid.pin - laid.wheel_center[k], laid.wheel_angle[k])
            assert deepest > -0.03e-3


@pytest.mark.parametrize("teeth", [6, 7, 8, 13])
@pytest.mark.parametrize("surplus", np.linspace(0.0, 3.0, 13))
def test_slack_between_fixed_axles_leaves_pins_free_of_teeth_and_unstrained(teeth, surplus):
    wheels = [HEAD, sprocket("tail", teeth, (0.0, 0.5 * surplus * PITCH))]
    n_links = math.ceil(route([HEAD, sprocket("tail", teeth, (0.0, 0.0))], PITCH).links)
    laid = lay_chain(wheels, PITCH, n_links)
    deepest = deepest_contact(wheels[1], laid.pin - laid.wheel_center[1], laid.wheel_angle[1])
    assert deepest > -0.05 * PITCH  # one spare link shares many teeth: they push it out softly
    assert link_lengths(laid.pin) == pytest.approx(PITCH, rel=1e-9)
    assert crossings(laid.pin) == 0


def deepest_contact(wheel: Wheel, offset: np.ndarray, angle: float) -> float:
    """Return the least gap of a 5 mm roller on a wheel at an angle [m]."""
    tooth = tooth_form(wheel.teeth, PITCH, 0.005)
    cos, sin = math.cos(angle), math.sin(angle)
    in_wheel = offset @ np.array([[cos, -sin], [sin, cos]])
    near = in_wheel[np.hypot(*in_wheel.T) < tooth.outer_radius + 0.003]
    return min(gap(tooth, pin).distance for pin in near)


@pytest.mark.parametrize(("wheels", "n_links"), LAYOUTS.values(), ids=LAYOUTS.keys())
def test_pins_run_counterclockwise_from_the_exit_of_the_first_wheel(wheels, n_links):
    laid = lay_chain(wheels, PITCH, n_links)
    after = np.roll(laid.pin, -1, axis=0)
    area = 0.5 * np.sum(laid.pin[:, 0] * after[:, 1] - laid.pin[:, 1] * after[:, 0])
    assert area > 0.0
    moved = [w.moved(d) for w, d in zip(wheels, laid.travel, strict=True)]
    exit_point = route(moved, PITCH).start[0]
    assert np.linalg.norm(laid.pin[0] - exit_point) <= 0.75 * PITCH


def test_strands_are_straight_and_evenly_spaced():
    laid = lay_chain([HEAD, HUNG], PITCH, 113)
    strand = laid.pin[: int(np.argmax(laid.seat == 1)) + 1]
    assert np.diff(strand, axis=0) == pytest.approx(
        np.tile(np.diff(strand, axis=0)[0], (len(strand) - 1, 1)), abs=1e-12
    )


def test_surplus_hangs_below_the_lowest_wheel_and_strands_stay_in_place():
    taut = lay_chain([HEAD, TAIL], PITCH, 112)
    slack = lay_chain([HEAD, TAIL], PITCH, 118)
    assert slack.surplus == pytest.approx(6.0)
    assert slack.pin[:, 1].min() < taut.pin[:, 1].min() - 2.5 * PITCH
    upper = slack.pin[slack.pin[:, 1] > 0.0]
    assert np.abs(upper[:, 0]).max() <= radius(8) + 1e-9


def test_surplus_sags_outward_from_the_lower_of_two_level_strands():
    wheels, n_links = LAYOUTS["level, to spare"]
    pin = lay_chain(wheels, PITCH, n_links).pin
    assert pin[:, 1].max() == pytest.approx(radius(8))
    assert pin[:, 1].min() < -4.0 * PITCH


def test_single_wheel_hangs_a_narrow_loop():
    pin = lay_chain([HEAD], PITCH, 40).pin
    assert np.abs(pin[:, 0]).max() == pytest.approx(radius(8), abs=0.2 * PITCH)
    assert pin[:, 1].min() < 0.520 - 16 * PITCH


def test_phase_follows_the_turned_frame():
    # A lift turned as a whole is laid as the turned picture of itself, gravity with it.
    turn = math.radians(30.0)
    spin = np.array([[math.cos(turn), math.sin(turn)], [-math.sin(turn), math.cos(turn)]])
    plain = lay_chain([HEAD, TAIL], PITCH, 116)
    wheels = [sprocket(w.name, 8, tuple(np.array(w.center) @ spin)) for w in (HEAD, TAIL)]
    down = tuple(np.array([0.0, -1.0]) @ spin)
    assert lay_chain(wheels, PITCH, 116, down).pin == pytest.approx(plain.pin @ spin, abs=1e-9)


def test_short_loop_is_stretched_alike_and_stays_seated():
    laid = lay_chain([HEAD, TAIL], PITCH, 111)
    length = link_lengths(laid.pin)
    assert laid.surplus == pytest.approx(-1.0)
    assert length.sum() == pytest.approx(112 * PITCH, rel=1e-5)  # ripple of the polygons
    on_strand = (laid.seat < 0) | (np.roll(laid.seat, -1) < 0)
    assert np.ptp(length[on_strand]) < 1e-12


@pytest.mark.parametrize(
    ("wheels", "n_links", "message"),
    [
        ([HEAD, TAIL], 107, "too short by 5 links: 107 links, the taut loop .* needs 112.00"),
        ([HEAD], 6, "too short"),
        ([HEAD, sprocket("tail", 8, (0.02, 0.52))], 40, "overlap: axles 20.00 mm apart"),
        ([], 10, "at least one sprocket"),
        ([sprocket("head", 8, (0, 0), side=-1)], 40, "alone in the loop it must be inside"),
        ([HEAD, sprocket("tail", 8, (0, 0), side=-1)], 112, "does not reach sprocket"),
        (
            [HEAD, sprocket("corner", 8, (0.3, 0.2)), TAIL],
            150,
            "listed clockwise; .*: head, tail, corner",
        ),
        (
            [HEAD, TAIL, sprocket("idler", 8, (0.2, 0.25), side=-1)],
            112,
            "does not reach sprocket 'idler' with side = 'outside'",
        ),
        (
            [HEAD, TAIL, sprocket("corner", 8, (0.3, 0.2)), sprocket("post", 8, (-0.013, 0.3))],
            150,
            "does not reach|runs through",
        ),
        (
            [HEAD, sprocket("tail", 8, (0.0, 0.0), movable=(1.0, 0.0))],
            112,
            "do not change the length of the loop",
        ),
        ([HEAD, HUNG], 6, "6 links do not close this loop"),
    ],
)
def test_impossible_layouts_are_refused_with_the_reason(wheels, n_links, message):
    with pytest.raises(LayoutError, match=message):
        lay_chain(wheels, PITCH, n_links)


def test_travel_is_a_length_whatever_the_length_of_the_way():
    moved = sprocket("tail", 8, (0.0, 0.0), movable=(30.0, -40.0)).moved(0.005)
    assert moved.center == pytest.approx((0.003, -0.004))


def test_swung_axle_keeps_its_distance_from_the_pivot_and_starts_along_its_way():
    arm = sprocket("tail", 8, (0.0, 0.0), movable=(0.0, 1.0), pivot=(0.08, 0.0))
    for travel in (-0.01, 0.002, 0.02):
        center = arm.moved(travel).center
        assert math.dist(center, (0.08, 0.0)) == pytest.approx(0.08)
        assert center[1] == pytest.approx(0.08 * math.sin(travel / 0.08))
