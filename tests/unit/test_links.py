"""Link counts: what each means, and which one is taken."""

import math

import pytest

from chainsim.errors import LayoutError
from chainsim.model.links import describe_links, fitting_links, link_choices
from chainsim.model.tangents import Wheel, route

PITCH = 0.010


def wheel(name: str, teeth: int, height: float, **given) -> Wheel:
    return Wheel(name, (0.0, height), PITCH / (2 * math.sin(math.pi / teeth)), teeth, **given)


def lift(height: float = 0.520, teeth=(8, 8), **tail):
    return route([wheel("head", teeth[0], height), wheel("tail", teeth[1], 0.0, **tail)], PITCH)


def test_three_nearest_counts_in_order():
    assert [choice.links for choice in link_choices(lift(), 4)] == [111, 112, 113]


def test_hung_axle_travels_half_a_pitch_for_every_link():
    short, exact, long = link_choices(lift(movable=(0.0, 1.0)), 4)
    assert dict(short.travel)["tail"] == pytest.approx(0.5 * PITCH, rel=1e-3)
    assert dict(exact.travel)["tail"] == pytest.approx(0.0, abs=1e-9)
    assert dict(long.travel)["tail"] == pytest.approx(-0.5 * PITCH, rel=1e-3)
    assert "closes taut with the axles as drawn" in exact.text
    assert "tail moves 5.00 mm down" in long.text
    assert "tail moves 5.00 mm up" in short.text


def test_sideways_travel_is_told_as_such():
    path = route(
        [
            wheel("right", 8, 0.0),
            Wheel("left", (-0.4, 0.0), 0.013065629648763765, 8, movable=(1, 0)),
        ],
        PITCH,
    )
    assert "left moves 5.00 mm to the left" in describe_links(path, 89, None).text


# checks A3: center distance for a whole number of links, tooth-arc exact, in pitches.
@pytest.mark.parametrize(
    ("teeth", "links", "distance"),
    [
        ((20, 63), 114, 35.58996020),
        ((17, 51), 116, 40.63920045),
        ((8, 16), 72, 29.97295733),
        ((10, 20), 56, 20.43800439),
    ],
)
def test_taut_distance_agrees_with_published_values(teeth, links, distance):
    path = lift(height=(distance + 0.4) * PITCH, teeth=teeth)
    assert describe_links(path, links, None).distance == pytest.approx(distance * PITCH, rel=1e-9)


def test_fixed_axles_say_what_is_spare_and_where_it_would_be_taut():
    choice = describe_links(lift(0.523), 113, 4)
    assert choice.surplus == pytest.approx(0.4)
    assert choice.distance == pytest.approx(0.525)
    assert "0.40 links too many for the axles as drawn (taut at 525.00 mm" in choice.text


@pytest.mark.parametrize(
    ("links", "carriers", "left_over", "words"),
    [
        (112, 28, 0, "28 carriers evenly spaced"),
        (113, 28, 1, "28 carriers and 1 link left over"),
        (111, 27, 3, "27 carriers and 3 links left over"),
    ],
)
def test_carriers_and_what_is_left_over(links, carriers, left_over, words):
    choice = describe_links(lift(), links, 4)
    assert (choice.carriers, choice.left_over) == (carriers, left_over)
    assert words in choice.text


def test_without_carriers_none_are_mentioned():
    choice = describe_links(lift(), 112, None)
    assert choice.carriers == 0
    assert "carrier" not in choice.text


def test_teeth_and_links_meet_by_their_common_divisor():
    # Each tooth steps z links at a time: it meets n / gcd(n, z) of n links.
    met = {
        links: dict(describe_links(lift(), links, None).partners)["head"]
        for links in (112, 113, 114)
    }
    assert met == {112: 14, 113: 113, 114: 57}
    assert "every tooth meets every link" in describe_links(lift(), 113, None).text
    assert "a tooth of head meets only one link in 8" in describe_links(lift(), 112, None).text


def test_walking_the_chain_round_shows_the_same_partners():
    links, teeth = 114, 8
    met = {(tooth + turn * teeth) % links for turn in range(links) for tooth in (3,)}
    assert len(met) == dict(describe_links(lift(), links, None).partners)["tail"]


def test_odd_counts_are_called_odd():
    assert describe_links(lift(), 113, None).is_odd
    assert "needs an offset link" in describe_links(lift(), 113, None).text
    assert "odd" not in describe_links(lift(), 112, None).text


def test_a_count_that_cannot_close_says_why():
    choice = describe_links(lift(), 107, None)
    assert "too short by 5 links" in choice.fault
    assert choice.fault in choice.text


@pytest.mark.parametrize(
    ("path", "every", "links"),
    [
        (lift(0.520), None, 112),
        (lift(0.5201), None, 112),  # short by 0.02 links: joined by hand
        (lift(0.523), None, 113),
        (lift(0.523), 4, 113),
        (lift(0.523, movable=(0.0, 1.0)), None, 113),
        (lift(0.523, movable=(0.0, 1.0)), 4, 112),
    ],
)
def test_fitting_count(path, every, links):
    assert fitting_links(path, every) == links


def test_a_single_wheel_takes_any_count():
    path = route([wheel("head", 8, 0.5)], PITCH)
    with pytest.raises(LayoutError, match=r"state chain\.links"):
        link_choices(path, 4)
    choice = describe_links(path, 40, 4)
    assert choice.fault == ""
    assert "hangs free below its sprocket" in choice.text
