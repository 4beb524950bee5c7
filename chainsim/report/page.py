"""The report page: one self-contained HTML file that opens from disk, with no network."""

from __future__ import annotations

import base64
import hashlib
from functools import cache
from importlib.resources import files
from pathlib import Path
from typing import Any

from jinja2 import Environment, PackageLoader
from markupsafe import Markup

from chainsim import __version__
from chainsim.errors import RecordingError
from chainsim.findings import situations, verdict
from chainsim.report.cautions import cautions
from chainsim.report.findings_view import grouped
from chainsim.report.images import page_image
from chainsim.report.keys import jump_lists, mark_key, tension_key, time_marks
from chainsim.report.marks import outcome_bar
from chainsim.report.moments import marks
from chainsim.report.plots import PLOTS, drawn
from chainsim.report.provenance import provenance_rows
from chainsim.report.scene import build_scene
from chainsim.report.sizing import delivered_text, sizing_rows
from chainsim.report.style import OUTCOME_COLORS
from chainsim.report.text import BLIND_SPOTS, DEFERS, findings_of, overall_outcome, readable
from chainsim.report.values import origin_counts, value_blocks

SPEEDS = ((0.02, "1/50"), (0.05, "1/20"), (0.1, "1/10"), (0.2, "1/5"), (0.5, "1/2"), (1, "1"))
FAST_SPEEDS = ((2, "2"), (4, "4"))

PLOT_SECTIONS = (
    ("tensions", "Tensions"),
    ("sag", "Sag, take-up and seating"),
    ("ride", "Ride"),
    ("drive", "Drive"),
    ("resonance", "Resonance"),
)

CONTENTS = (
    ("verdict", "Verdict"),
    ("limits", "What the model cannot see"),
    ("findings", "Findings"),
    ("motion", "Motion"),
    *PLOT_SECTIONS,
    ("sizing", "Sizing sheet"),
    ("scenario", "Scenario"),
    ("provenance", "Provenance"),
    ("cautions", "Cautions"),
)

MOTION_CHANNELS = ("pins/position", "pins/velocity", "links/tension", "sprockets/angle")
"""What a recording must hold to be played."""

LEAST_SAMPLES = 3
"""Fewest samples that can be shown [dimensionless]."""

SCRIPT_FILES = ("printing.js", "player_frames.js", "player_drawing.js", "player_controls.js")


def render_report(rec: Any, path: str | Path) -> Path:
    """Write the report page of a run.

    Parameters
    ----------
    rec : Recording
        The run; findings that it does not hold are judged now.
    path : str or Path
        File to write.

    Returns
    -------
    Path
        The file written.
    """
    path = Path(path)
    path.write_text(report_html(rec), encoding="utf-8")
    return path


def report_html(rec: Any) -> str:
    """Return the report page of a run as text."""
    if len(rec.time) < LEAST_SAMPLES:
        name = rec.path or "recording"
        raise RecordingError(f"{name}: {len(rec.time)} samples are too few to show")
    findings = findings_of(rec)
    has_motion = all(name in rec for name in MOTION_CHANNELS)
    found = marks(rec, findings) if has_motion else []
    scene, frames = build_scene(rec, findings) if has_motion else (None, "")
    reserve = rec.scenario.limits.reserve
    return render_page(
        "report.html.j2",
        script=page_script(),
        title=rec.scenario.title or rec.scenario.stem,
        view=rec.scenario.view,
        created=rec.attrs.get("created", "at an unknown date"),
        span=f"{rec.time[-1] - rec.time[0]:.2f} s simulated, {len(rec.time)} samples.",
        contents=CONTENTS,
        overall=overall_outcome(findings),
        verdict=readable(verdict(findings, situations(rec))),
        complete=rec.complete,
        stop_reason=rec.stop_reason,
        remarks=[str(remark.text) for remark in rec.scenario.remarks],
        blind=BLIND_SPOTS,
        reserve=f"{100 * reserve:.0f} %",
        bars=[(outcome, outcome_bar(outcome)) for outcome in OUTCOME_COLORS],
        groups=grouped(findings, reserve, found),
        frame_rate=round(scene["rate"]) if scene else 0,
        tension_key=tension_key(scene["tension"]["top"]) if scene else "",
        speeds=SPEEDS + FAST_SPEEDS,
        sprockets=[sprocket.name for sprocket in rec.scenario.sprocket],
        length_ms=round(1000 * (rec.time[-1] - rec.time[0])),
        time_marks=time_marks(found, float(rec.time[0]), float(rec.time[-1])),
        mark_key=mark_key(),
        jump_lists=jump_lists(found),
        plot_parts=plot_parts(rec),
        sizing=sizing_rows(rec),
        delivered=delivered_text(rec),
        origin_text=origin_counts(rec.scenario),
        values=value_blocks(rec.scenario),
        scenario_text=rec.scenario_texts.get("text") or rec.scenario.text,
        provenance=provenance_rows(rec),
        cautions=cautions(rec),
        defers=DEFERS,
        scene=scene,
        frames=frames,
    )


def render_page(template: str, script: str = "", **values: Any) -> str:
    """Fill in a page template; style and script are allowed by their hashes, nothing else is.

    Parameters
    ----------
    template : str
        File name of the template.
    script : str
        The page's own script.
    **values : object
        What the template needs.
    """
    style = resource("page.css")
    return (
        environment()
        .get_template(template)
        .render(
            version=__version__,
            style=Markup(style),
            style_hash=csp_hash(style),
            script=Markup(script),
            script_hash=csp_hash(script),
            **values,
        )
    )


@cache
def environment() -> Environment:
    """Return the template environment, with escaping switched on."""
    return Environment(
        loader=PackageLoader("chainsim.report"),
        autoescape=True,
        trim_blocks=True,
        lstrip_blocks=True,
    )


@cache
def resource(name: str) -> str:
    """Return the text of a file beside the templates."""
    return (files("chainsim.report") / "templates" / name).read_text(encoding="utf-8")


@cache
def page_script() -> str:
    """Return the script of the page: its files in one function scope."""
    body = "\n".join(resource(name) for name in SCRIPT_FILES)
    return f'"use strict";\n(function () {{\n{body}\n}})();'


def csp_hash(text: str) -> str:
    """Return the source expression that allows exactly this inline text."""
    digest = hashlib.sha256(text.encode("utf-8")).digest()
    return f"sha256-{base64.b64encode(digest).decode('ascii')}"


def plot_parts(rec: Any) -> list[dict]:
    """Return the plots of the page, section by section."""
    images: dict[str, list[dict]] = {section: [] for section, _ in PLOT_SECTIONS}
    for plot in PLOTS:
        figure = drawn(plot, rec)
        if figure is not None:
            images[plot.section].append(page_image(figure, plot.title, plot.text))
    return [{"id": i, "title": title, "plots": images[i]} for i, title in PLOT_SECTIONS]
