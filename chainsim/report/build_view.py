"""Parts of the build sheet as the page shows them: lists, and tables with columns by part."""

from __future__ import annotations

from typing import Any

from markupsafe import Markup

from chainsim.report.build_line import NO_VALUE, Line, Part

WORDY = 24
"""Letters (dimensionless) above which a value in words asks for a wider column."""


def part_view(part: Part) -> dict[str, Any]:
    """Return a part as the template wants it.

    Parameters
    ----------
    part : Part
        One part of the sheet.

    Returns
    -------
    dict
        Its heading, drawings, tables by column, and list of lines.
    """
    plain = [line for line in part.lines if not line.subject]
    columned = [line for line in part.lines if line.subject]
    return {
        "id": part.id,
        "title": part.title,
        "text": part.text,
        "drawings": [(caption, Markup(svg)) for caption, svg in part.drawings],
        "matrix": matrix(columned),
        "rows": [
            (line.item, line.text, line.band, line.source, line.note, "" if line.unit else "words")
            for line in plain
        ],
        "has_bands": any(line.band for line in plain),
        "is_check": part.id == "checks",
        "is_wordy": any(not line.unit and len(line.text) > WORDY for line in plain),
    }


def matrix(lines: list[Line]) -> dict[str, Any] | None:
    """Return lines with a subject as a table: a row for each item, a column for each subject.

    Parameters
    ----------
    lines : list of Line
        Lines of one part.

    Returns
    -------
    dict or None
        Headings and rows; None without lines.
    """
    if not lines:
        return None
    subjects = list(dict.fromkeys(line.subject for line in lines))
    items = list(dict.fromkeys(line.item for line in lines))
    found = {(line.item, line.subject): line for line in lines}
    rows = []
    for item in items:
        cells = [found.get((item, subject)) for subject in subjects]
        known = [cell for cell in cells if cell is not None]
        if all(cell.text == NO_VALUE for cell in known):
            continue
        sources = "; ".join(dict.fromkeys(cell.source for cell in known))
        rows.append((item, [cell.text if cell else NO_VALUE for cell in cells], sources))
    return {"subjects": subjects, "rows": rows}
