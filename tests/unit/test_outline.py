"""Sprocket outlines: the very form that is simulated, at the right size, in both formats."""

import math
import re
import xml.etree.ElementTree as ET
from dataclasses import replace

import numpy as np
import pytest

from chainsim.errors import CallError
from chainsim.model.tooth import gap, outline, tooth_form
from chainsim.report.outline import outline_dxf, outline_svg
from chainsim.report.outline_path import outline_pieces, seat_places
from chainsim.scenario import parse_scenario

LIFT = """
format = 1
title = "made up for a test"
[chain]
kind = "moulded_sturdy"
[[sprocket]]
name = "head"
teeth = 12
center = ["0 mm", "520 mm"]
axle_diameter = "4 mm"
[[sprocket]]
name = "tail"
teeth = 7
center = ["0 mm", "0 mm"]
mount = { kind = "hung", mass = "0.30 kg" }
[[sprocket]]
name = "roller"
roller_radius = "8 mm"
center = ["60 mm", "260 mm"]
[drive]
sprocket = "head"
chain_speed = "0.12 m/s"
"""
SVG = "{http://www.w3.org/2000/svg}"


@pytest.fixture(scope="module")
def scenario():
    return parse_scenario(LIFT)


FORMS = {
    "land": tooth_form(8, 0.010, 0.005),
    "full round": tooth_form(16, 0.010, 0.0062),
}


@pytest.mark.parametrize("tooth", FORMS.values(), ids=FORMS.keys())
def test_lines_and_arcs_lie_on_the_simulated_surface(tooth):
    seat_arc = tooth.roller_radius + tooth.seat_clearance
    point_probe = replace(
        tooth,
        roller_radius=0.0,
        seat_clearance=seat_arc,
        pitch_radius=tooth.seat_radius - seat_arc,
    )
    for piece in outline_pieces(tooth):
        for share in np.linspace(0.0, 1.0, 7):
            assert gap(point_probe, along(piece, share)).distance == pytest.approx(0.0, abs=1e-14)


def along(piece, share: float) -> np.ndarray:
    """Return a point of a piece at a share of its way."""
    chord = piece.end - piece.start
    if not piece.radius:
        return piece.start + share * chord
    half = 0.5 * piece.sweep
    left = np.array([-chord[1], chord[0]])
    center = piece.start + 0.5 * chord + 0.5 * left / math.tan(half)
    turn = share * piece.sweep
    arm = piece.start - center
    return center + [
        math.cos(turn) * arm[0] - math.sin(turn) * arm[1],
        math.sin(turn) * arm[0] + math.cos(turn) * arm[1],
    ]


@pytest.mark.parametrize("tooth", FORMS.values(), ids=FORMS.keys())
def test_pieces_close_and_arcs_fit_their_ends(tooth):
    pieces = outline_pieces(tooth)
    for piece, following in zip(pieces, pieces[1:] + pieces[:1], strict=True):
        assert piece.end == pytest.approx(following.start, abs=1e-15)
        if piece.radius:
            chord = np.linalg.norm(piece.end - piece.start)
            assert chord == pytest.approx(2 * piece.radius * math.sin(abs(piece.sweep) / 2))
    # A smooth outline turns by one full turn in all: arcs only, no corner between pieces.
    assert sum(piece.sweep for piece in pieces) == pytest.approx(2 * math.pi)


@pytest.mark.parametrize("tooth", FORMS.values(), ids=FORMS.keys())
def test_area_agrees_with_the_recorded_outline(tooth):
    def area(points):
        after = np.roll(points, -1, axis=0)
        return 0.5 * np.sum(points[:, 0] * after[:, 1] - points[:, 1] * after[:, 0])

    fine = np.array(
        [along(piece, s) for piece in outline_pieces(tooth) for s in np.linspace(0, 1, 40)[:-1]]
    )
    assert area(outline(tooth, arc_points=40)) == pytest.approx(area(fine), rel=1e-4)


def test_pins_stand_one_pitch_apart():
    places = seat_places(FORMS["land"])
    assert np.linalg.norm(places - np.roll(places, 1, axis=0), axis=1) == pytest.approx(0.010)


def test_svg_is_in_millimeters_and_to_scale(scenario):
    root = ET.fromstring(outline_svg(scenario, "head", kerf=0.2e-3))
    box = [float(word) for word in root.get("viewBox").split()]
    assert root.get("width") == f"{box[2]:.3f}mm"
    assert root.get("height") == f"{box[3]:.3f}mm"
    layers = {group.get("id"): group for group in root.iter(f"{SVG}g")}
    assert list(layers) == ["cut", "bore", "pitch", "seats", "check", "notes"]
    square = layers["check"].find(f"{SVG}rect")
    assert (square.get("width"), square.get("height")) == ("10", "10")
    assert float(layers["bore"].find(f"{SVG}circle").get("r")) == pytest.approx(2.0)
    corners = layers["pitch"].find(f"{SVG}polygon").get("points").split()
    x, y = np.array([corner.split(",") for corner in corners], dtype=float).T
    # 12 teeth, pitch 10 mm: pitch diameter 38.637033 mm (p / sin 15°, checks A1).
    assert np.hypot(x, y) == pytest.approx(38.637033 / 2, abs=1e-5)


def test_svg_path_holds_every_corner_and_arc(scenario):
    root = ET.fromstring(outline_svg(scenario, "tail"))
    path = next(group for group in root.iter(f"{SVG}g") if group.get("id") == "cut")
    words = path.find(f"{SVG}path").get("d")
    tooth = tooth_form(7, 0.010, 0.005)
    pieces = outline_pieces(tooth)
    assert words.count("A") == sum(1 for piece in pieces if piece.radius)
    ends = re.findall(r"(?:L|A[\d.]+ [\d.]+ 0 0 [01] )(-?[\d.]+) (-?[\d.]+)", words)
    found = np.array(ends, dtype=float) * [1.0, -1.0]
    assert found == pytest.approx(np.array([1e3 * piece.end for piece in pieces]), abs=1e-5)


def test_notes_state_sizes_and_kerf(scenario):
    text = outline_svg(scenario, "head", kerf=0.2e-3)
    assert "12 teeth, pitch 10.000 mm, rollers 5.00 mm" in text
    assert "pitch circle 38.637 mm" in text
    assert "kerf 0.20 mm is not allowed for" in text
    assert "0.100 mm outside the outline and inside the bore" in text
    assert "kerf is not allowed for" in outline_svg(scenario, "head")


def test_dxf_passes_the_audit_and_has_the_right_size(scenario, tmp_path):
    ezdxf = pytest.importorskip("ezdxf")
    from ezdxf import bbox

    file = tmp_path / "head.dxf"
    outline_dxf(scenario, "head", file)
    document = ezdxf.readfile(file)
    assert not document.audit().has_errors
    assert document.header["$INSUNITS"] == 4  # millimeters
    space = document.modelspace()
    cut = [item for item in space if item.dxf.layer == "CUT"]
    assert len(cut) == 1 and cut[0].closed
    tooth = tooth_form(12, 0.010, 0.005)
    box = bbox.extents(cut, fast=False)
    assert box.size.x == pytest.approx(2e3 * extent(tooth), abs=0.01)
    check = bbox.extents(item for item in space if item.dxf.layer == "CHECK_10_MM")
    assert (check.size.x, check.size.y) == pytest.approx((10.0, 10.0))
    bore = next(item for item in space if item.dxf.layer == "BORE")
    assert bore.dxf.radius == pytest.approx(2.0)


def extent(tooth) -> float:
    """Return the largest reach of the outline along x [m]."""
    return max(
        along(piece, share)[0] for piece in outline_pieces(tooth) for share in np.linspace(0, 1, 41)
    )


def test_dxf_polyline_is_the_simulated_outline(scenario, tmp_path):
    ezdxf = pytest.importorskip("ezdxf")
    file = tmp_path / "tail.dxf"
    outline_dxf(scenario, "tail", file)
    space = ezdxf.readfile(file).modelspace()
    corners = next(item for item in space if item.dxf.layer == "CUT").get_points("xyb")
    pieces = outline_pieces(tooth_form(7, 0.010, 0.005))
    expected = [(1e3 * p.start[0], 1e3 * p.start[1], p.bulge) for p in pieces]
    assert np.array(corners) == pytest.approx(np.array(expected), abs=1e-9)


@pytest.mark.parametrize(
    ("name", "message"),
    [
        ("nose", "no sprocket is called 'nose'; there are head, tail, roller"),
        ("roller", "is a smooth roller"),
    ],
)
def test_what_cannot_be_cut_is_refused(scenario, name, message):
    with pytest.raises(CallError, match=message):
        outline_svg(scenario, name)


def test_bore_without_a_rim_is_refused(scenario):
    wide = scenario.with_values({"sprocket.tail.axle_diameter": "20 mm"})
    with pytest.raises(CallError, match="a bore of 20 mm leaves nothing inside"):
        outline_svg(wide, "tail")


def test_missing_library_says_how_to_install_it(scenario, tmp_path, monkeypatch):
    monkeypatch.setitem(__import__("sys").modules, "ezdxf", None)
    with pytest.raises(CallError, match="pip install"):
        outline_dxf(scenario, "head", tmp_path / "head.dxf")
