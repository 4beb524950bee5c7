"""Sprocket outlines for a laser or a router, as SVG and DXF in millimeters.

The outline is the one that is simulated, seat arcs, flanks and tips as true lines and arcs, not
offset for the kerf.  A 10 mm square on a layer of its own shows whether a machine has kept the
scale.
"""

from __future__ import annotations

import html
from pathlib import Path

import numpy as np

from chainsim.errors import CallError
from chainsim.model.tooth import ToothForm
from chainsim.report.outline_blank import Blank, blank_of
from chainsim.report.outline_path import Piece, outline_pieces, seat_places
from chainsim.report.style import FAINT, INK, STEEL
from chainsim.scenario import Scenario

CHECK_SQUARE = 0.010
"""Side of the square that shows the scale [m]."""

MARGIN = 0.004
"""Paper round the drawing [m]."""

LINE = 0.1
"""Width of a line in the SVG [mm]: most machines take it as a cut."""


def outline_svg(scenario: Scenario, sprocket: str, kerf: float = 0.0) -> str:
    """Draw a sprocket to be cut, at its true size.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    sprocket : str
        Name of the sprocket.
    kerf : float
        Width of the cut [m], stated beside the drawing.

    Returns
    -------
    str
        An SVG whose unit is the millimeter, one group for each layer: `cut`, `bore`, `pitch`,
        `seats`, `check`, `notes`.

    Raises
    ------
    CallError
        If the sprocket cannot be cut.
    """
    blank = blank_of(scenario, sprocket, kerf)
    reach = 1e3 * (float(np.max(_radii(blank.tooth))) + MARGIN)
    square, text_height = 1e3 * CHECK_SQUARE, 2.2
    width = max(2.0 * reach + square + 6.0, 92.0)
    height = max(2.0 * reach, square + 4.0) + text_height * 1.7 * (len(blank.notes) + 1)
    layers = [
        _group("cut", _path(outline_pieces(blank.tooth)), INK),
        _group("bore", f'<circle r="{500 * blank.bore:.4f}"/>' + _cross(1.0), INK),
        _group("pitch", _polygon(seat_places(blank.tooth)), FAINT, dash="1.2 0.6"),
        _group("seats", _circles(seat_places(blank.tooth), blank.tooth.roller_radius), STEEL),
        _group(
            "check",
            f'<rect x="{reach + 2:.4f}" y="{-reach + 2:.4f}" width="{square:g}" '
            f'height="{square:g}"/>',
            FAINT,
        ),
    ]
    notes = "".join(
        f'<text x="{-reach + 2:.3f}" y="{reach + text_height * 1.7 * (i + 1):.3f}">'
        f"{html.escape(line)}</text>"
        for i, line in enumerate(blank.notes)
    )
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width:.3f}mm" height="{height:.3f}mm" '
        f'viewBox="{-reach:.3f} {-reach:.3f} {width:.3f} {height:.3f}">'
        f"<title>{html.escape(blank.notes[0])}</title>"
        + "".join(layers)
        + f'<g id="notes" font-family="sans-serif" font-size="{text_height}" fill="{INK}">'
        + notes
        + "</g></svg>\n"
    )


def _radii(tooth: ToothForm) -> np.ndarray:
    return np.array([np.linalg.norm(piece.start) for piece in outline_pieces(tooth)])


def _group(name: str, content: str, color: str, dash: str = "") -> str:
    dashed = f' stroke-dasharray="{dash}"' if dash else ""
    return (
        f'<g id="{name}" fill="none" stroke="{color}" stroke-width="{LINE}"{dashed}>{content}</g>'
    )


def _path(pieces: list[Piece]) -> str:
    """Write lines and arcs with y downward, as SVG has it: arcs then turn the other way."""
    first = pieces[0].start
    words = [f"M{1e3 * first[0]:.5f} {-1e3 * first[1]:.5f}"]
    for piece in pieces:
        end = f"{1e3 * piece.end[0]:.5f} {-1e3 * piece.end[1]:.5f}"
        if piece.radius:
            radius = f"{1e3 * piece.radius:.5f}"
            words.append(f"A{radius} {radius} 0 0 {int(piece.sweep < 0.0)} {end}")
        else:
            words.append(f"L{end}")
    return f'<path d="{" ".join(words)}Z"/>'


def _cross(size: float) -> str:
    return f'<path d="M{-size} 0H{size}M0 {-size}V{size}"/>'


def _polygon(points: np.ndarray) -> str:
    places = " ".join(f"{1e3 * x:.5f},{-1e3 * y:.5f}" for x, y in points)
    return f'<polygon points="{places}"/>'


def _circles(points: np.ndarray, radius: float) -> str:
    return "".join(
        f'<circle cx="{1e3 * x:.5f}" cy="{-1e3 * y:.5f}" r="{1e3 * radius:.5f}"/>'
        for x, y in points
    )


def outline_dxf(scenario: Scenario, sprocket: str, path: Path | str, kerf: float = 0.0) -> None:
    """Write a sprocket to be cut as DXF, in millimeters.

    Parameters
    ----------
    scenario : Scenario
        The lift.
    sprocket : str
        Name of the sprocket.
    path : Path or str
        File to write.
    kerf : float
        Width of the cut [m], stated in the notes.

    Raises
    ------
    CallError
        If the sprocket cannot be cut, or the library that writes DXF is not installed.

    Notes
    -----
    Layers `CUT`, `BORE`, `PITCH`, `SEATS`, `CHECK_10_MM`, `NOTES`.  The outline is one closed
    polyline whose arcs are true arcs.
    """
    try:
        import ezdxf
        from ezdxf import units
    except ImportError as error:
        raise CallError('writing DXF needs the "cad" extra: pip install "chainsim[cad]"') from error
    blank = blank_of(scenario, sprocket, kerf)
    document = ezdxf.new("R2010", setup=True)
    document.units = units.MM
    for name, color in _DXF_LAYERS:
        document.layers.add(name, color=color)
    _fill_modelspace(document.modelspace(), blank)
    document.saveas(path)


_DXF_LAYERS = (
    ("CUT", 7),
    ("BORE", 7),
    ("PITCH", 8),
    ("SEATS", 9),
    ("CHECK_10_MM", 8),
    ("NOTES", 8),
)
"""Layer and its index in the standard palette: what is cut in black or white, the rest in grey."""


def _fill_modelspace(space, blank: Blank) -> None:
    """Draw every layer [mm]."""
    tooth = blank.tooth
    corners = [(1e3 * p.start[0], 1e3 * p.start[1], p.bulge) for p in outline_pieces(tooth)]
    space.add_lwpolyline(corners, format="xyb", close=True, dxfattribs={"layer": "CUT"})
    space.add_circle((0.0, 0.0), 500.0 * blank.bore, dxfattribs={"layer": "BORE"})
    pins = 1e3 * seat_places(tooth)
    space.add_lwpolyline([tuple(pin) for pin in pins], close=True, dxfattribs={"layer": "PITCH"})
    for pin in pins:
        space.add_circle(tuple(pin), 1e3 * tooth.roller_radius, dxfattribs={"layer": "SEATS"})
    reach, side = 1e3 * (float(np.max(_radii(tooth))) + MARGIN), 1e3 * CHECK_SQUARE
    square = [(reach, 0.0), (reach + side, 0.0), (reach + side, side), (reach, side)]
    space.add_lwpolyline(square, close=True, dxfattribs={"layer": "CHECK_10_MM"})
    for i, line in enumerate(blank.notes):
        space.add_text(
            line, height=2.0, dxfattribs={"layer": "NOTES", "insert": (-reach, -reach - 3.5 * i)}
        )
