"""Plots: every axis has its unit, looks read without color, files are the same twice."""

from __future__ import annotations

import re
from itertools import pairwise

import matplotlib.colors
import numpy as np
import pytest

from chainsim.errors import CallError
from chainsim.report import animate, write_plots
from chainsim.report.figures import work_rows
from chainsim.report.plots import PLOTS
from chainsim.report.style import (
    LINE_CYCLE,
    OUTCOME_COLORS,
    TENSION_COLORS,
    TENSION_WIDTHS,
    plot_style,
    round_up,
    tension_class,
    tension_edges,
)
from chainsim.report.timeplots import MAX_COLUMNS, thinned
from tests.synthetic import synthetic_recording


@pytest.fixture(scope="module")
def recording():
    return synthetic_recording(duration=6.0, spilled_ball=2)


def lightness(color: str) -> float:
    """Relative luminance (W3C, Web Content Accessibility Guidelines 2.1, definition)."""
    rgb = np.array(matplotlib.colors.to_rgb(color))
    linear = np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4)
    return float(linear @ [0.2126, 0.7152, 0.0722])


def contrast(color: str) -> float:
    """Contrast against white (the same guideline, formula of the contrast ratio)."""
    return 1.05 / (lightness(color) + 0.05)


def test_tension_darkens_and_widens_class_by_class():
    light = [lightness(color) for color in TENSION_COLORS]
    assert all(a > 1.3 * b for a, b in pairwise(light))
    assert list(TENSION_WIDTHS) == sorted(set(TENSION_WIDTHS))


def test_tension_is_one_hue():
    hues = [matplotlib.colors.rgb_to_hsv(matplotlib.colors.to_rgb(c))[0] for c in TENSION_COLORS]
    assert max(hues) - min(hues) < 0.06  # of the color circle


def test_lines_differ_in_dash_so_that_grey_is_enough():
    assert len({str(look["linestyle"]) for look in LINE_CYCLE}) == len(LINE_CYCLE)


@pytest.mark.parametrize("outcome", OUTCOME_COLORS)
def test_outcomes_are_readable_on_white(outcome):
    assert contrast(OUTCOME_COLORS[outcome]) >= 4.5  # guideline 1.4.3, normal text


def test_tension_classes():
    edges = tension_edges(13.9)
    assert edges[0] == 0.0
    assert edges[-1] >= 13.9
    assert tension_class(np.array([-0.1, 0.0, 13.9]), edges).tolist() == [-1, 0, 6]


@pytest.mark.parametrize(
    ("value", "step"), [(1.0, 1.0), (1.01, 1.2), (0.0231, 0.025), (81.0, 100.0)]
)
def test_round_steps(value, step):
    assert round_up(value) == pytest.approx(step)


def labels_of(figure) -> list[str]:
    """Labels of all axes, the horizontal one only where it is not shared with the axes below."""
    last = figure.axes[-1]
    found = []
    for axes in figure.axes:
        found.append(axes.get_ylabel())
        if axes is last or not axes.get_shared_x_axes().joined(axes, last):
            found.append(axes.get_xlabel())
    return found


@pytest.mark.parametrize("plot", [p for p in PLOTS if p.name != "sag"], ids=lambda plot: plot.name)
def test_every_axis_has_a_label_with_its_unit(plot, recording):
    with plot_style():
        figure = plot.draw(recording)
    assert figure is not None, "the recording holds everything, so everything is drawn"
    counted = ("number of the ball", "harmonic of the tooth rate")
    labels = labels_of(figure)
    if plot.name in ("work", "resonance"):  # rows by name
        labels.remove("")
    for label in labels:
        assert re.search(r"\[[^\]]+\]", label) or label.startswith(counted), label


def test_writes_svg_and_png_the_same_twice(recording, tmp_path, monkeypatch):
    chosen = tuple(plot for plot in PLOTS if plot.name in ("lift", "resonance"))
    monkeypatch.setattr("chainsim.report.plots.PLOTS", chosen)
    first = write_plots(recording, tmp_path / "a")
    assert sorted(p.name for p in first) == [
        "lift.png",
        "lift.svg",
        "resonance.png",
        "resonance.svg",
    ]
    second = write_plots(recording, tmp_path / "b")
    assert all(a.read_bytes() == b.read_bytes() for a, b in zip(first, second, strict=True))


def test_thinning_keeps_extremes_and_gaps():
    rng = np.random.default_rng(3)
    time = np.arange(5000) / 500.0
    values = rng.standard_normal(5000)
    values[1000:2000] = np.nan
    middle, mean, low, high = thinned(time, values)
    assert len(middle) <= MAX_COLUMNS
    assert np.nanmin(low) == np.nanmin(values)
    assert np.nanmax(high) == np.nanmax(values)
    assert np.isnan(mean[(middle > 2.1) & (middle < 3.9)]).all()


def test_work_rows_balance(recording):
    rows = work_rows(recording)
    came = sum(value for _, value, is_input in rows if is_input)
    went = sum(value for _, value, is_input in rows if not is_input)
    # The residual is one of the rows, so both sides agree to rounding.
    assert went == pytest.approx(came, rel=1e-6)


def test_gif_moves(tmp_path):
    from PIL import Image

    short = synthetic_recording(duration=1.0, links=40)
    path = animate(short, tmp_path / "lift.gif", rate=5.0)
    with Image.open(path) as image:
        assert image.n_frames == 5
        first = np.asarray(image.convert("L"), dtype=int)
        image.seek(4)
        assert np.abs(np.asarray(image.convert("L"), dtype=int) - first).max() > 50


def test_animation_refuses_another_ending(tmp_path, recording):
    with pytest.raises(CallError, match=r"\.gif or \.mp4"):
        animate(recording, tmp_path / "lift.avi")


def test_mp4_says_what_it_needs(tmp_path, recording, monkeypatch):
    monkeypatch.setattr("shutil.which", lambda name: None)
    with pytest.raises(CallError, match="ffmpeg"):
        animate(recording, tmp_path / "lift.mp4")


def test_an_upright_strand_has_no_sag_to_draw(recording):
    sag = next(plot for plot in PLOTS if plot.name == "sag")
    assert sag.draw(recording) is None
