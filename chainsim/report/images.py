"""Figures as they stand on a page or in a file, the same bytes for the same run."""

from __future__ import annotations

import base64
import io
import re

from matplotlib.figure import Figure

from chainsim.report.style import plot_style

PNG_DOTS = 160
"""Resolution of the PNG files [dots per inch]."""

HEAVY_SVG = 150_000
"""Above this many characters a plot stands on the page as PNG [dimensionless]."""

COORDINATES = re.compile(r'<path d="[^"]*"')
"""Paths of curves and axes; outlines of letters carry an id first and keep all their digits."""

LONG_NUMBER = re.compile(r"-?\d+\.\d{2,}")


def clean_metadata(suffix: str) -> dict:
    """Return metadata without a date, so that the same run gives the same file."""
    return {"Date": None, "Creator": "chainsim"} if suffix == "svg" else {"Software": "chainsim"}


def page_image(figure: Figure, title: str, text: str) -> dict:
    """Return a figure as the page shows it.

    Parameters
    ----------
    figure : Figure
        The figure.
    title, text : str
        Heading, and what a reader should look for.

    Returns
    -------
    dict
        With ``title``, ``text``, ``alt``, ``uri``, ``width`` and ``height`` [CSS px].
    """
    width, height = figure.get_size_inches() * 96.0
    return {
        "title": title,
        "text": text,
        "alt": f"{title}. {text}",
        "uri": data_uri(figure),
        "width": round(width),
        "height": round(height),
    }


def data_uri(figure: Figure) -> str:
    """Return a figure as a data URI: SVG, or PNG where that would be heavy."""
    with plot_style():
        buffer = io.StringIO()
        figure.savefig(buffer, format="svg", metadata=clean_metadata("svg"))
        content, kind = slimmer(buffer.getvalue()).encode("utf-8"), "svg+xml"
        if len(content) > HEAVY_SVG:
            png = io.BytesIO()
            figure.savefig(png, format="png", dpi=PNG_DOTS, metadata=clean_metadata("png"))
            content, kind = png.getvalue(), "png"
    return f"data:image/{kind};base64,{base64.b64encode(content).decode('ascii')}"


def slimmer(svg: str) -> str:
    """Return SVG text whose path coordinates [pt] have one decimal."""

    def shorter(path: re.Match) -> str:
        return LONG_NUMBER.sub(lambda number: f"{float(number[0]):.1f}", path[0])

    return COORDINATES.sub(shorter, svg)
