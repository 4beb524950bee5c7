"""The lift drawn to scale with its measures: an SVG whose unit is the millimeter of the paper."""

from __future__ import annotations

import html

import numpy as np

from chainsim.model.lift import Lift
from chainsim.report.layout_marks import arrow, dashed, measure, round_length
from chainsim.report.layout_notes import Note, strand_notes, wheel_notes
from chainsim.report.layout_parts import route_at_rest, shapes_of, spots_of
from chainsim.report.layout_sheet import (
    BELOW,
    BORDER,
    LINE,
    MEASURES,
    MOST_MEASURES,
    TEXT,
    Sheet,
    fitting_scale,
    scale_text,
)
from chainsim.report.sketch import extent, layout_sketch
from chainsim.report.style import FAINT, GRID, INK, PAPER, STEEL, TENSION_COLORS

__all__ = ["layout_sketch", "layout_svg"]

STYLES = {
    "wall": f'stroke="{STEEL}" stroke-width="0.7"',
    "guide": f'stroke="{STEEL}" stroke-width="0.9" stroke-linecap="round"',
    "chute": f'stroke="{STEEL}" stroke-width="0.7"',
    "arm": f'stroke="{FAINT}" stroke-width="0.5" stroke-dasharray="3 1 0.6 1"',
    "wheel": f'stroke="{INK}" stroke-width="0.25" fill="{GRID}"',
    "chain": f'stroke="{TENSION_COLORS[4]}" stroke-width="0.6" stroke-linejoin="round"',
    "carrier": f'stroke="{INK}" stroke-width="0.25" stroke-linejoin="round"',
    "stem": f'stroke="{INK}" stroke-width="0.25"',
    "ball": f'stroke="{INK}" stroke-width="0.2" fill="#f4ead6"',
    "bore": f'stroke="{INK}" stroke-width="0.2" fill="{PAPER}"',
    "roller": f'stroke="{INK}" stroke-width="0.25" fill="{GRID}"',
}
"""Look of each kind of shape."""


def layout_svg(lift: Lift) -> str:
    """Draw a lift to scale.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.

    Returns
    -------
    str
        An SVG in millimeters: the lift as its chain is laid out, measures on the left, notes on the
        right, scale and view below.
    """
    low, high = extent(lift)
    notes = wheel_notes(lift) + strand_notes(lift)
    noted = sum((1.5 + len(note.lines)) * LINE for note in notes)
    sheet = Sheet(fitting_scale(high - low), low, high, lift.scenario.view == "back", noted)
    width, height = sheet.size
    content = [
        _shapes(lift, sheet),
        _axles(lift, sheet),
        _travel_arrows(lift, sheet),
        _heights(lift, sheet),
        _widths(lift, sheet),
        _notes(notes, sheet),
        _title_and_foot(lift, sheet),
    ]
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width:.2f}mm" height="{height:.2f}mm" '
        f'viewBox="0 0 {width:.2f} {height:.2f}" font-family="Liberation Sans, sans-serif" '
        f'font-size="{TEXT}" fill="{INK}">'
        f"<title>{html.escape(lift.scenario.title)}</title>"
        f'<rect width="100%" height="100%" fill="{PAPER}"/>' + "".join(content) + "</svg>\n"
    )


def _shapes(lift: Lift, sheet: Sheet) -> str:
    """Draw walls, wheels, chain, carriers and balls, each kind in its group."""
    words = []
    for shape in shapes_of(lift):
        points = " ".join(f"{x:.3f},{y:.3f}" for x, y in sheet.place(shape.points))
        tag = "polygon" if shape.closed else "polyline"
        fill = "" if "fill=" in STYLES[shape.kind] else ' fill="none"'
        words.append(f'<{tag} class="{shape.kind}" points="{points}" {STYLES[shape.kind]}{fill}/>')
    for spot in spots_of(lift):
        x, y = sheet.place(spot.center)
        radius = 1e3 * sheet.scale * spot.radius
        words.append(
            f'<circle class="{spot.kind}" cx="{x:.3f}" cy="{y:.3f}" r="{radius:.3f}" '
            f"{STYLES[spot.kind]}/>"
        )
    return "".join(words)


def _axles(lift: Lift, sheet: Sheet) -> str:
    """Draw center marks, and what weighs on movable axles as a plumb arrow."""
    words = []
    down = np.array([-1.0 if sheet.mirrored else 1.0, -1.0]) * (-np.array(lift.up))
    for k, sprocket in enumerate(lift.scenario.sprocket):
        x, y = sheet.place(lift.laid.wheel_center[k])
        words.append(
            f'<path d="M{x - 2:.2f} {y:.2f}h4M{x:.2f} {y - 2:.2f}v4" stroke="{INK}" '
            f'stroke-width="0.15" fill="none"/>'
        )
        if sprocket.mount.kind == "hung":
            reach = 1e3 * sheet.scale * lift.wheels[k].radius + 10.0
            tip = np.array([x, y]) + reach * down
            words.append(arrow(np.array([x, y]), tip, INK, 0.35))
    return "".join(words)


def _travel_arrows(lift: Lift, sheet: Sheet) -> str:
    """Draw the direction of travel beside every strand."""
    words, path = [], route_at_rest(lift)
    for strand in lift.strands:
        k = strand.start
        direction = path.direction[k]
        side = np.array([-direction[1], direction[0]])
        middle = path.start[k] + 0.35 * path.length[k] * direction
        offset = 2.2e-3 / sheet.scale
        half = min(5e-3 / sheet.scale, 0.3 * float(path.length[k]))
        tail, tip = (middle + offset * side + s * half * direction for s in (-1.0, 1.0))
        words.append(arrow(sheet.place(tail), sheet.place(tip), TENSION_COLORS[4], 0.3))
    return "".join(words)


def _heights(lift: Lift, sheet: Sheet) -> str:
    """Measure the axles upward from the lowest one, on the left."""
    centers = lift.laid.wheel_center
    foot = float(centers[:, 1].min())
    levels = _levels(centers[:, 1])
    right, words = BORDER + MEASURES + float(sheet.picture[0]), []
    base = sheet.place(np.array([0.0, foot]))[1]
    for i, level in enumerate(levels):
        x = BORDER + MEASURES - 6.0 - 6.0 * i
        top = sheet.place(np.array([0.0, foot + level]))[1]
        words.append(measure(np.array([x, base]), np.array([x, top]), f"{1e3 * level:.1f}"))
        words.append(dashed((x - 2.0, top), (right, top)))
    if levels:
        words.append(dashed((BORDER + 2.0, base), (right, base)))
    return "".join(words)


def _widths(lift: Lift, sheet: Sheet) -> str:
    """Measure the axles across from the one on the left, below."""
    centers = lift.laid.wheel_center
    levels = _levels(centers[:, 0])
    low = BORDER + 2.0 * LINE + float(sheet.picture[1])
    start = float(centers[:, 0].max() if sheet.mirrored else centers[:, 0].min())
    left, words = sheet.place(np.array([start, 0.0]))[0], []
    for i, level in enumerate(levels):
        x, y = left + 1e3 * sheet.scale * level, low + 5.0 + 5.0 * i
        words.append(measure(np.array([left, y]), np.array([x, y]), f"{1e3 * level:.1f}"))
        words.append(dashed((x, low - 2.0), (x, y + 1.0)))
    if levels:
        words.append(dashed((left, low - 2.0), (left, low + 6.0 + 5.0 * (len(levels) - 1))))
    return "".join(words)


def _levels(places: np.ndarray) -> list[float]:
    """Return up to three distances of axles from the first one along an axis [m]."""
    away = sorted({round(float(place - places.min()), 5) for place in places} - {0.0})
    return away[:MOST_MEASURES]


def _notes(notes: list[Note], sheet: Sheet) -> str:
    """Write the notes on the right, each as near to its part as the others let it."""
    x = BORDER + MEASURES + float(sheet.picture[0]) + 10.0
    top, words = BORDER + 2.0 * LINE, []
    for note in sorted(notes, key=lambda n: -n.place[1]):
        at = sheet.place(note.place)
        tall = (1 + len(note.lines)) * LINE
        last = BORDER + 2.0 * LINE + max(float(sheet.picture[1]) + BELOW, sheet.noted) - tall
        top = max(top, min(float(at[1]) - 0.5 * tall, last))
        words.append(
            f'<path d="M{x - 1:.2f} {top + 0.4 * LINE:.2f}L{at[0]:.2f} {at[1]:.2f}" '
            f'stroke="{FAINT}" stroke-width="0.12"/>'
        )
        for i, line in enumerate((note.title, *note.lines)):
            weight = ' font-weight="bold"' if i == 0 else ""
            words.append(
                f'<text x="{x:.2f}" y="{top + (i + 0.65) * LINE:.2f}"{weight}>'
                f"{html.escape(line)}</text>"
            )
        top += tall + 0.5 * LINE
    return "".join(words)


def _title_and_foot(lift: Lift, sheet: Sheet) -> str:
    """Write title, scale, view and size, and draw a bar of a round length."""
    _, height = sheet.size
    y = height - BORDER
    length = round_length(30e-3 / sheet.scale)
    bar = 1e3 * length * sheet.scale
    span = 1e3 * (sheet.high - sheet.low)
    view = "the back" if sheet.mirrored else "the front"
    text = (
        f"scale {scale_text(sheet.scale)}, seen from {view}, as laid out; measures in mm; "
        f"{lift.n_links} links of {1e3 * lift.route.pitch:.2f} mm; "
        f"{span[0]:.0f} wide, {span[1]:.0f} tall in all"
    )
    return (
        f'<text x="{BORDER}" y="{BORDER + 0.6 * LINE:.2f}" font-size="{1.4 * TEXT}" '
        f'font-weight="bold">{html.escape(lift.scenario.title)}</text>'
        f'<path d="M{BORDER} {y - LINE:.2f}v-1.2h{bar:.2f}v1.2" stroke="{INK}" '
        f'stroke-width="0.25" fill="none"/>'
        f'<text x="{BORDER + bar + 2:.2f}" y="{y - LINE:.2f}">{1e3 * length:g} mm</text>'
        f'<text x="{BORDER}" y="{y:.2f}">{html.escape(text)}</text>'
    )
