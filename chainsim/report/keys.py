"""Keys and marks around the playback, as inline SVG and lists of buttons."""

from __future__ import annotations

import numpy as np
from markupsafe import Markup, escape

from chainsim.report.moments import Mark
from chainsim.report.style import INK, OUTCOME_COLORS, TENSION_COLORS, TENSION_WIDTHS, tension_text


def tension_key(top: float) -> Markup:
    """Return the key of the tension classes as text with small drawings.

    Parameters
    ----------
    top : float
        Upper end of the highest class [N].
    """
    edges = np.linspace(0.0, top, len(TENSION_COLORS) + 1)
    parts = []
    for k, (color, width) in enumerate(zip(TENSION_COLORS, TENSION_WIDTHS, strict=True)):
        text = tension_text(edges, k)
        parts.append(key_entry(f'stroke="{color}" stroke-width="{1.4 * width:.1f}"', text))
    parts.append(
        key_entry(f'stroke="{INK}" stroke-width="2" stroke-dasharray="4 3"', "the link pushes")
    )
    return Markup("".join(parts))


def key_entry(stroke: str, text: str) -> str:
    """Return one entry of a key: a short line and its text."""
    return (
        '<span><svg viewBox="0 0 34 12" width="34" height="12" aria-hidden="true">'
        f'<line x1="0" x2="34" y1="6" y2="6" {stroke}/></svg> {escape(text)}</span>'
    )


MARK_SHAPES = {
    "event": "M0 -6V6",
    "worst": "M0 -6L5 0L0 6L-5 0Z",
    "loss": "M-5 -5L5 5M5 -5L-5 5",
}

MARK_TEXTS = {
    "event": "event",
    "worst": "worst moment of a finding",
    "loss": "ball lost",
}


def mark_shape(kind: str) -> str:
    """Return the drawing of a mark around the origin."""
    color = OUTCOME_COLORS["fails"] if kind == "loss" else INK
    fill = "none" if kind != "worst" else "#ffffff"
    return (
        f'<path d="{MARK_SHAPES[kind]}" fill="{fill}" stroke="{color}" stroke-width="2" '
        'vector-effect="non-scaling-stroke"/>'
    )


def time_marks(found: list[Mark], start: float, end: float) -> Markup:
    """Return the strip of marks under the time line.

    Parameters
    ----------
    found : list of Mark
        The marks.
    start, end : float
        Ends of the time line [s].
    """
    span = max(end - start, 1e-9)
    order = {"event": 0, "worst": 1, "loss": 2}
    parts = []
    for mark in sorted(found, key=lambda m: order[m.kind]):
        share = 100.0 * min(max((mark.time - start) / span, 0.0), 1.0)
        title = f"{mark.time:.3f} s: {mark.label}"
        parts.append(
            f'<svg x="{share:.3f}%" y="13" overflow="visible"><title>{escape(title)}</title>'
            f"{mark_shape(mark.kind)}</svg>"
        )
    return Markup(f'<svg aria-hidden="true" class="marks">{"".join(parts)}</svg>')


def mark_key() -> Markup:
    """Return the key of the marks."""
    parts = [
        '<span><svg viewBox="-7 -7 14 14" width="14" height="14">'
        f"{mark_shape(kind)}</svg> {text}</span>"
        for kind, text in MARK_TEXTS.items()
    ]
    return Markup("".join(parts))


def jump_lists(found: list[Mark]) -> list[dict]:
    """Return the lists of buttons that jump to marked moments."""
    titles = (
        ("loss", "Balls lost", True),
        ("worst", "Worst moment of each finding", True),
        ("event", "Events", False),
    )
    return [
        {
            "title": title,
            "open": is_open,
            "marks": [
                {"index": k, "text": f"{m.time:.3f} s: {m.label}"}
                for k, m in enumerate(found)
                if m.kind == kind
            ],
        }
        for kind, title, is_open in titles
    ]
