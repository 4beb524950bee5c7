"""Drawings of a lift: to scale, complete, mirrored on demand, and narrow enough for a terminal."""

import re
import xml.etree.ElementTree as ET

import numpy as np
import pytest

from chainsim.model.lift import build_lift
from chainsim.report.layout import layout_sketch, layout_svg
from chainsim.report.layout_marks import round_length
from chainsim.report.layout_notes import mount_text
from chainsim.report.layout_parts import ball_places, shapes_of
from chainsim.report.layout_sheet import scale_text
from chainsim.scenario import parse_scenario

SVG = "{http://www.w3.org/2000/svg}"
LIFT = """
format = 1
title = "Made up <for> a test"
[chain]
kind = "moulded_sturdy"
[[sprocket]]
name = "head"
teeth = 8
center = ["0 mm", "520 mm"]
[[sprocket]]
name = "tail"
teeth = 8
center = ["0 mm", "0 mm"]
mount = { kind = "hung", mass = "0.30 kg" }
[drive]
sprocket = "tail"
chain_speed = "0.12 m/s"
[carriers]
every = 4
[balls]
diameter = "16 mm"
"""
LEANING = (
    LIFT.replace('["0 mm", "520 mm"]', '["-200 mm", "480 mm"]').replace(
        '[[sprocket]]\nname = "tail"',
        '[[sprocket]]\nname = "idler"\nroller_radius = "12 mm"\n'
        'center = ["-126.4 mm", "229 mm"]\n[[sprocket]]\nname = "tail"',
    )
    + '[[guide]]\nname = "rail"\nfrom = ["-30 mm", "100 mm"]\nto = ["-150 mm", "388 mm"]\n'
    '[[wall]]\nname = "back"\npoints = [["60 mm", "0 mm"], ["60 mm", "400 mm"]]\n'
)
ALONE = (
    LIFT[: LIFT.index('[[sprocket]]\nname = "tail"')].replace(
        'kind = "moulded_sturdy"', 'kind = "moulded_sturdy"\nlinks = 60'
    )
    + '[drive]\nsprocket = "head"\nchain_speed = "0.12 m/s"\n'
)


def lift(text: str = LIFT):
    return build_lift(parse_scenario(text))


def drawing(text: str = LIFT) -> ET.Element:
    return ET.fromstring(layout_svg(lift(text)))


def points_of(element: ET.Element) -> np.ndarray:
    return np.array([pair.split(",") for pair in element.get("points").split()], dtype=float)


def parts(root: ET.Element, kind: str) -> list[ET.Element]:
    return [element for element in root.iter() if element.get("class") == kind]


def texts(root: ET.Element) -> list[str]:
    return [element.text for element in root.iter(f"{SVG}text")]


SHORT = LIFT.replace("520 mm", "120 mm")


@pytest.mark.parametrize(("text", "scale"), [(LIFT, 1 / 5), (LEANING, 1 / 5), (SHORT, 1)])
def test_svg_is_to_the_scale_that_it_states(text, scale):
    root, model = drawing(text), lift(text)
    chain = points_of(parts(root, "chain")[0])
    drawn = np.linalg.norm(np.roll(chain, -1, axis=0) - chain, axis=1)
    links = np.linalg.norm(np.roll(model.laid.pin, -1, axis=0) - model.laid.pin, axis=1)
    assert drawn == pytest.approx(1e3 * scale * links, abs=2e-3)  # three decimals are written
    assert any(f"scale {scale_text(scale)}," in words for words in texts(root))
    box = [float(word) for word in root.get("viewBox").split()]
    assert (root.get("width"), root.get("height")) == (f"{box[2]:.2f}mm", f"{box[3]:.2f}mm")


def test_everything_lies_on_the_paper():
    for text in (LIFT, LEANING, ALONE):
        root = drawing(text)
        width, height = (float(root.get(key)[:-2]) for key in ("width", "height"))
        for element in root.iter():
            if element.get("points"):
                points = points_of(element)
                assert points.min() >= 0.0
                assert (points <= [width, height]).all()
        for element in root.iter(f"{SVG}text"):
            if element.get("y") and element.get("x"):
                assert 0.0 < float(element.get("y")) < height
                assert 0.0 < float(element.get("x")) < width


def test_svg_measures_the_axles():
    measures = {e.text for e in parts(drawing(LEANING), "measure")}
    model = lift(LEANING)
    rise = np.ptp(model.laid.wheel_center[:, 1])
    across = np.ptp(model.laid.wheel_center[:, 0])
    assert {f"{1e3 * rise:.1f}", f"{1e3 * across:.1f}", "73.6"} <= measures


def test_svg_says_what_every_part_is():
    words = " | ".join(texts(drawing()))
    for wanted in (
        "Made up <for> a test",
        "head",
        "tail, driven",
        "8 teeth, pitch circle 26.13 mm",
        "wrap 180°; at 0.0, 520.0 mm",
        "hangs in the loop, 300 g",
        "520.0 mm, 52.0 links",
        "112 links of 10.00 mm",
    ):
        assert wanted in words


def test_svg_draws_every_kind_of_part():
    root = drawing(LEANING)
    count = {kind: len(parts(root, kind)) for kind in ("wheel", "roller", "guide", "wall", "bore")}
    assert count == {"wheel": 2, "roller": 1, "guide": 1, "wall": 1, "bore": 3}
    assert len(parts(root, "carrier")) == len(parts(root, "stem")) == 28
    assert len(parts(root, "ball")) == len(ball_places(lift(LEANING)))


def test_wheels_are_drawn_with_pins_in_their_seats():
    model = lift()
    wheels = [shape.points for shape in shapes_of(model) if shape.kind == "wheel"]
    for k, points in enumerate(wheels):
        seated = model.laid.pin[model.laid.seat == k]
        gaps = np.linalg.norm(points[:, None] - seated[None], axis=2).min(axis=0)
        # The roller touches the bottom of its seat, which is a corner of the drawn outline.
        assert gaps == pytest.approx(0.5 * model.scenario.chain.roller_diameter, rel=1e-6)


def test_balls_stand_in_rising_pockets_outside_the_loop():
    places = np.array(ball_places(lift()))
    assert len(places) in (13, 14)
    assert (places[:, 0] > 0.0131).all()
    assert np.diff(np.sort(places[:, 1]))[1:-1] == pytest.approx(0.040, rel=1e-6)


def test_seen_from_the_back_left_and_right_change_places():
    front, back = drawing(LEANING), drawing("view = 'back'\n" + LEANING)
    a = points_of(parts(front, "chain")[0])
    b = points_of(parts(back, "chain")[0])
    assert a[:, 1] == pytest.approx(b[:, 1])
    assert np.ptp(a[:, 0] + b[:, 0]) < 2e-3
    assert any("seen from the back" in words for words in texts(back))
    turned = [e.get("transform") for e in parts(back, "measure")]
    assert all("180" not in turn for turn in turned)


@pytest.mark.parametrize("text", [LIFT, LEANING, ALONE], ids=["plain", "leaning", "alone"])
def test_sketch_fits_a_terminal(text):
    rows = layout_sketch(lift(text)).splitlines()
    assert max(map(len, rows)) <= 80
    assert len(rows) <= 60


def test_sketch_is_to_scale():
    model = lift()
    rows = layout_sketch(model).splitlines()
    picture = [row[:39] for row in rows if re.search("[\u2801-\u28ff]", row)]
    bar = next(row for row in rows if row.startswith("├"))
    length = float(re.search(r"┤ ([\d.]+) mm", bar)[1])
    column = length / (bar.index("┤") + 1)
    # A character is two dots wide and four tall: a row is twice a column.
    tall = len(picture) * 2.0 * column
    assert tall == pytest.approx(1e3 * np.ptp(model.laid.pin[:, 1]), rel=0.15)


def test_sketch_names_parts_and_states_its_view():
    text = layout_sketch(lift())
    for wanted in ("tail, driven", "hangs in the loop, 300 g", "seen from the front", "o a ball"):
        assert wanted in text
    assert "seen from the back" in layout_sketch(lift("view = 'back'\n" + LIFT))


def test_sketch_shows_as_many_balls_as_there_are_places():
    model = lift()
    rows = layout_sketch(model).splitlines()
    picture = "".join(row[:12] for row in rows if re.search("[\u2801-\u28ff]", row))
    assert picture.count("o") == len(ball_places(model))


@pytest.mark.parametrize(
    ("mount", "words"),
    [
        ("{ kind = 'fixed' }", "fixed axle"),
        ("{ kind = 'screwed', shift = '1.5 mm' }", "screwed, shifted +1.50 mm"),
        ("{ kind = 'arm', mass = '400 g', pivot = ['90 mm', '0 mm'] }", "on an arm, 400 g"),
        (
            "{ kind = 'spring', mass = '50 g', rate = '200 N/m', set_force = '4 N' }",
            "sprung, 4 N at 200 N/m",
        ),
        (
            "{ kind = 'counterweight', mass = '50 g', weight = '0.8 kg' }",
            "drawn by a counterweight, 800 g",
        ),
        ("{ kind = 'sliding', mass = '150 g' }", "slides, 150 g"),
    ],
)
def test_mounts_are_told_in_a_few_words(mount, words):
    scenario = parse_scenario(LIFT.replace('{ kind = "hung", mass = "0.30 kg" }', mount))
    assert mount_text(scenario.sprocket[1].mount) == words


@pytest.mark.parametrize(
    ("scale", "text"), [(2, "2:1"), (1, "1:1"), (0.4, "1:2.5"), (0.05, "1:20")]
)
def test_scales_are_written_as_drawings_do(scale, text):
    assert scale_text(scale) == text


@pytest.mark.parametrize(("longest", "length"), [(0.03, 0.02), (0.2, 0.2), (0.099, 0.05), (1.3, 1)])
def test_bar_has_a_round_length(longest, length):
    assert round_length(longest) == pytest.approx(length)
