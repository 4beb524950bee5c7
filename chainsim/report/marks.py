"""Small drawings in the text: the bar of an outcome and the gauge of a margin, as inline SVG.

Shapes carry the meaning: a full bar holds, a notched one is close, a broken one fails, an empty
dotted one was not judged. They are hidden from screen readers, since the words stand beside them.
"""

from __future__ import annotations

from markupsafe import Markup

from chainsim.report.style import FAINT, INK, OUTCOME_COLORS

BAR_PATHS = {
    "holds": "M0 1H44V13H0Z",
    "close": "M0 1H17L22 9L27 1H44V13H0Z",
    "fails": "M0 1H20L16 5L21 9L17 13H0Z M27 1H44V13H24L28 9L23 5Z",
}

GAUGE_WIDTH = 190.0
GAUGE_LOW, GAUGE_HIGH = -0.5, 1.25
"""Ends of a margin gauge, as shares of the scale of the finding [dimensionless]."""


def outcome_bar(outcome: str) -> Markup:
    """Return the bar of an outcome as SVG."""
    color = OUTCOME_COLORS[outcome]
    if outcome in BAR_PATHS:
        shape = f'<path d="{BAR_PATHS[outcome]}" fill="{color}"/>'
    else:
        shape = (
            '<rect x="0.75" y="1.75" width="42.5" height="10.5" fill="none" '
            f'stroke="{color}" stroke-width="1.5" stroke-dasharray="2 2.4"/>'
        )
    return Markup(
        '<svg class="bar" viewBox="0 0 44 14" width="44" height="14" aria-hidden="true">'
        f"{shape}</svg>"
    )


def _gauge_place(share: float) -> float:
    """Return where a share of the scale lies along a gauge [px]."""
    clipped = min(max(share, GAUGE_LOW), GAUGE_HIGH)
    return GAUGE_WIDTH * (clipped - GAUGE_LOW) / (GAUGE_HIGH - GAUGE_LOW)


def margin_gauge(margin: float | None, scale: float | None, reserve: float) -> Markup:
    """Return a margin drawn against its scale as SVG.

    Left of the thick line the finding fails; the hatched piece right of it is the reserve, inside
    which it is close. The marker points outward where the margin lies beyond the gauge.

    Parameters
    ----------
    margin : float or None
        Margin [unit of the finding]; None where there is none.
    scale : float or None
        Scale of the margin [same unit].
    reserve : float
        Share of the scale below which an outcome is close [dimensionless].
    """
    if margin is None or margin != margin:
        return Markup('<span class="none">no margin</span>')
    if not scale:
        return Markup("")
    share = margin / scale
    width = round(GAUGE_WIDTH + 12.0)
    zero, edge, at = _gauge_place(0.0), _gauge_place(reserve), _gauge_place(share)
    ticks = "".join(
        f'<line x1="{x:.1f}" x2="{x:.1f}" y1="16" y2="19" stroke="{FAINT}"/>'
        for x in map(_gauge_place, (-0.5, 0.5, 1.0))
    )
    hatch = "".join(
        f'<line x1="{x:.1f}" y1="16" x2="{min(x + 4.0, edge):.1f}" y2="10" stroke="{FAINT}"/>'
        for x in _steps(zero, edge - 1.0, 4.0)
    )
    if share > GAUGE_HIGH:
        marker = f"M{at - 9:.1f} 5L{at:.1f} 11L{at - 9:.1f} 17Z"
    elif share < GAUGE_LOW:
        marker = f"M{at + 9:.1f} 5L{at:.1f} 11L{at + 9:.1f} 17Z"
    else:
        marker = f"M{at - 5:.1f} 2H{at + 5:.1f}L{at:.1f} 13Z"
    return Markup(
        f'<svg class="gauge" viewBox="-6 0 {width} 20" width="{width}" '
        'height="20" aria-hidden="true">'
        f'<line x1="0" x2="{GAUGE_WIDTH:.0f}" y1="16" y2="16" stroke="{FAINT}"/>{ticks}{hatch}'
        f'<line x1="{zero:.1f}" x2="{zero:.1f}" y1="3" y2="20" stroke="{INK}" stroke-width="2.5"/>'
        f'<path d="{marker}" fill="{INK}"/></svg>'
    )


def _steps(start: float, stop: float, step: float) -> list[float]:
    found = []
    while start < stop:
        found.append(start)
        start += step
    return found
