"""The lift drawn in a terminal, to scale, with dots of Braille characters and notes beside it."""

from __future__ import annotations

import itertools
import math

import numpy as np

from chainsim.model.lift import Lift
from chainsim.report.layout_marks import round_length
from chainsim.report.layout_notes import Note, strand_notes, wheel_notes
from chainsim.report.layout_parts import ball_places, shapes_of, spots_of

WIDTH = 80
"""Greatest width of the sketch [columns] (dimensionless)."""

TALLEST = 44
"""Greatest height of the picture [rows] (dimensionless): a screen and a little more."""

PICTURE = 36
"""Greatest width of the picture [columns] (dimensionless); notes take the rest."""

DOT_BITS = ((0x01, 0x08), (0x02, 0x10), (0x04, 0x20), (0x40, 0x80))
"""Bit of each dot of a Braille character, by row and column (Unicode block U+2800)."""

BALL_MARK = "o"


class _Canvas:
    """Dots on a grid of characters of two by four dots each; dots are square in most fonts."""

    def __init__(self, low: np.ndarray, high: np.ndarray, mirrored: bool) -> None:
        """Fit the box from `low` to `high` [m], shape (2,) each, into the picture."""
        span = np.maximum(high - low, 1e-9)
        self.scale = max(span[0] / (2 * PICTURE - 1), span[1] / (4 * TALLEST - 1))
        self.low, self.high, self.mirrored = low, high, mirrored
        self.columns = math.floor(span[0] / self.scale) // 2 + 1
        self.rows = math.floor(span[1] / self.scale) // 4 + 1
        self.bits = np.zeros((self.rows, self.columns), dtype=int)
        self.marks: dict[tuple[int, int], str] = {}

    def dot(self, point: np.ndarray) -> tuple[int, int, int, int]:
        """Return row, column and the dot within them of a place [m] (dimensionless)."""
        across = self.high[0] - point[0] if self.mirrored else point[0] - self.low[0]
        x = min(max(round(across / self.scale), 0), 2 * self.columns - 1)
        y = min(max(round((self.high[1] - point[1]) / self.scale), 0), 4 * self.rows - 1)
        return y // 4, x // 2, y % 4, x % 2

    def line(self, points: np.ndarray, closed: bool) -> None:
        """Set the dots along a polyline [m]."""
        if closed:
            points = np.vstack([points, points[:1]])
        for start, end in itertools.pairwise(points):
            count = 1 + math.ceil(float(np.linalg.norm(end - start)) / self.scale)
            for share in np.linspace(0.0, 1.0, count + 1):
                row, column, v, h = self.dot(start + share * (end - start))
                self.bits[row, column] |= DOT_BITS[v][h]

    def mark(self, point: np.ndarray, text: str) -> None:
        """Put a letter where a small thing stands [m]."""
        row, column, _, _ = self.dot(point)
        self.marks[row, column] = text

    def text(self) -> list[str]:
        """Return the rows of the picture."""
        return [
            "".join(
                self.marks.get((r, c)) or (chr(0x2800 + bits) if bits else " ")
                for c, bits in enumerate(row)
            )
            for r, row in enumerate(self.bits)
        ]


def layout_sketch(lift: Lift) -> str:
    """Draw a lift for a terminal.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.

    Returns
    -------
    str
        At most 80 columns wide: the picture on the left, notes on the right, the scale below.
    """
    mirrored = lift.scenario.view == "back"
    low, high = extent(lift)
    canvas = _Canvas(low, high, mirrored)
    for shape in shapes_of(lift):
        if shape.kind not in ("carrier", "stem") or canvas.scale < 0.3 * lift.ball_radius:
            canvas.line(shape.points, shape.closed)
    for spot in spots_of(lift):
        if spot.kind == "roller":
            canvas.line(_circle(spot.center, spot.radius), closed=True)
    for place in ball_places(lift):
        canvas.mark(place, BALL_MARK)
    beside = _notes_by_row(canvas, wheel_notes(lift) + strand_notes(lift))
    rows = canvas.text()
    room = WIDTH - canvas.columns - 3
    drawn = [
        f"{row}   {beside.get(r, '')[:room]}".rstrip()
        for r, row in enumerate(
            rows + [" " * canvas.columns] * max(0, _last(beside) + 1 - len(rows))
        )
    ]
    return "\n".join([*drawn, "", *_foot(lift, canvas)]) + "\n"


def extent(lift: Lift) -> tuple[np.ndarray, np.ndarray]:
    """Return the corners of the box that holds everything drawn.

    Parameters
    ----------
    lift : Lift
        The lift, its chain laid.

    Returns
    -------
    low, high : ndarray, shape (2,)
        Lower left and upper right corner [m].
    """
    points = [shape.points for shape in shapes_of(lift)]
    points += [_circle(spot.center, spot.radius) for spot in spots_of(lift)]
    every = np.vstack(points)
    return every.min(axis=0), every.max(axis=0)


def _circle(center: np.ndarray, radius: float) -> np.ndarray:
    angle = np.linspace(0.0, 2.0 * math.pi, 33)[:-1]
    return center + radius * np.column_stack([np.cos(angle), np.sin(angle)])


def _notes_by_row(canvas: _Canvas, notes: list[Note]) -> dict[int, str]:
    """Give each line of each note a row near its part, none twice, from the top down."""
    taken: dict[int, str] = {}
    following = 0
    for note in sorted(notes, key=lambda n: -n.place[1]):
        lines = [note.title, *(f"  {line}" for line in note.lines)]
        first = max(following, canvas.dot(note.place)[0] - len(lines) // 2)
        for i, line in enumerate(lines):
            taken[first + i] = line
        following = first + len(lines)
    return taken


def _last(rows: dict[int, str]) -> int:
    return max(rows, default=0)


def _foot(lift: Lift, canvas: _Canvas) -> list[str]:
    """Draw a bar of a round length, and say what the picture shows."""
    column = 2.0 * canvas.scale
    length = round_length(12.0 * column)
    bar = "├" + "─" * max(0, round(length / column) - 2) + "┤"
    side = "the back" if canvas.mirrored else "the front"
    balls = f", {BALL_MARK} a ball" if ball_places(lift) else ""
    return [
        f"{bar} {1e3 * length:g} mm, seen from {side}{balls}",
        f"{lift.n_links} links of {1e3 * lift.route.pitch:.2f} mm; "
        f"{1e3 * (canvas.high[0] - canvas.low[0]):.0f} mm wide, "
        f"{1e3 * (canvas.high[1] - canvas.low[1]):.0f} mm tall in all",
    ]
