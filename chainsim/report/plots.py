"""Every plot of a run: one table of name, title and drawing, for the page and for files."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any, NamedTuple

from matplotlib.figure import Figure

from chainsim.errors import RecordingError
from chainsim.report import series
from chainsim.report.drawing import lift_figure
from chainsim.report.figures import (
    balls_figure,
    harmonics_figure,
    height_figure,
    resonance_figure,
    work_figure,
)
from chainsim.report.images import PNG_DOTS, clean_metadata
from chainsim.report.style import plot_style
from chainsim.report.timeplots import panels_figure


class Plot(NamedTuple):
    """One plot.

    Attributes
    ----------
    name : str
        Stem of its file.
    section : str
        Part of the page that it stands in.
    title : str
        Heading.
    text : str
        What a reader should look for.
    draw : callable
        Takes a recording; returns a figure, or None where the run has nothing to show.
    """

    name: str
    section: str
    title: str
    text: str
    draw: Callable[[Any], Figure | None]


def over_time(panels: Callable[[Any], list[series.Panel]]) -> Callable[[Any], Figure | None]:
    """Return a drawing function for panels over time."""

    def draw(rec: Any) -> Figure | None:
        found = panels(rec)
        return panels_figure(rec, found) if found else None

    return draw


PLOTS: tuple[Plot, ...] = (
    Plot(
        "lift",
        "tensions",
        "The lift at its highest tension",
        "Darker and wider links pull harder; a dashed link pushes.",
        lift_figure,
    ),
    Plot(
        "strand-tension",
        "tensions",
        "Tension at the ends of each strand",
        "Where the carrying strand comes near the slack line, its carriers can tip.",
        over_time(series.tension_panels),
    ),
    Plot(
        "tension-along",
        "tensions",
        "Tension along the carrying strand",
        "A strand slackens first where this band comes nearest to the slack line.",
        height_figure,
    ),
    Plot(
        "axle-load",
        "tensions",
        "Axle loads",
        "What the axles, their bearings and the frame have to carry.",
        over_time(series.axle_panels),
    ),
    Plot(
        "excursion",
        "sag",
        "Sideways excursion of the strands",
        "How far each strand leaves the straight line between its sprockets.",
        over_time(series.excursion_panels),
    ),
    Plot(
        "sag",
        "sag",
        "Sag of leaning strands",
        "How far a strand that leans hangs below the straight line between its ends.",
        over_time(series.sag_panels),
    ),
    Plot(
        "takeup-travel",
        "sag",
        "Take-up travel",
        "Movement of each take-up along its axis, from its place on the drawing.",
        over_time(series.takeup_panels),
    ),
    Plot(
        "seating",
        "sag",
        "Seating on the sprockets",
        "Pins that ride up lose their tooth first; a whole seat of difference is a skip.",
        over_time(series.seating_panels),
    ),
    Plot(
        "seat-reserve",
        "ride",
        "Seat reserve",
        "How much more sideways acceleration the worst seat would still have held.",
        over_time(series.seat_panels),
    ),
    Plot(
        "ride",
        "ride",
        "Speed and accelerations",
        "Few teeth shake the chain at the tooth rate; the balls feel it.",
        over_time(series.ride_panels),
    ),
    Plot(
        "harmonics",
        "ride",
        "Ripple of the chain speed by harmonic",
        "What the polygon of the driven sprocket explains, and what comes on top.",
        harmonics_figure,
    ),
    Plot(
        "balls",
        "ride",
        "What became of each ball",
        "From feed to the end of its ride; losses are crossed and named.",
        balls_figure,
    ),
    Plot(
        "drive",
        "drive",
        "The drive",
        "Torque on the driven sprocket and power there; current where a motor is described.",
        over_time(series.drive_panels),
    ),
    Plot(
        "work",
        "drive",
        "Where the work went",
        "The energy audit of the run; the residual is what the simulation cannot account for.",
        work_figure,
    ),
    Plot(
        "resonance",
        "resonance",
        "Natural frequencies and the tooth rate",
        "A frequency inside a shaded band is fed by every passing tooth. "
        "Diamonds are the take-up bouncing on the chain, which matters most; a strand also minds "
        "half the tooth rate.",
        resonance_figure,
    ),
)


def drawn(plot: Plot, rec: Any) -> Figure | None:
    """Return a plot of a run, None where the run did not record what it shows."""
    try:
        with plot_style():
            return plot.draw(rec)
    except RecordingError:
        return None


def write_plots(rec: Any, directory: str | Path) -> list[Path]:
    """Write every plot of a run as SVG and PNG.

    Parameters
    ----------
    rec : Recording
        The run.
    directory : str or Path
        Where to; made if missing.

    Returns
    -------
    list of Path
        The files written.
    """
    directory = Path(directory)
    directory.mkdir(parents=True, exist_ok=True)
    written = []
    for plot in PLOTS:
        figure = drawn(plot, rec)
        if figure is None:
            continue
        with plot_style():
            for suffix in ("svg", "png"):
                path = directory / f"{plot.name}.{suffix}"
                figure.savefig(path, dpi=PNG_DOTS, metadata=clean_metadata(suffix))
                written.append(path)
    return written
