"""Words and numbers of reports, and the small drawings beside them."""

from __future__ import annotations

import re

import pytest

from chainsim.report.marks import GAUGE_WIDTH, margin_gauge, outcome_bar
from chainsim.report.text import (
    SHARE,
    overall_outcome,
    percent,
    quantity,
    readable,
    signed,
    significant,
    unit_of,
)


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (0.00312, "m", "3.12 mm"),
        (-0.0004, "m", "−0.4 mm"),
        (2.413, "m s-2", "2.41 m/s²"),
        (1.0, "s-1", "1 per s"),
        (0.0116, "N m", "11.6 mN m"),
        (0.0168, "kg", "16.8 g"),
        (0.5, "kg", "0.5 kg"),
        (0.213, SHARE, "21.3 %"),
        (3.0, "1", "3"),
        (0.0, "N", "0 N"),
        (float("nan"), "N", "–"),
        (None, "N", "–"),
        (3.14159265 / 2, "rad", "90 °"),
        (1234567.0, "N", "1.23e+06 N"),
    ],
)
def test_quantities(value, unit, text):
    assert quantity(value, unit) == text


def test_significant_digits_without_padding():
    assert significant(40.0) == "40"
    assert significant(0.0999) == "0.0999"
    assert significant(1.5e-9) == "1.50e−09"


def test_margins_carry_their_sign():
    assert signed(0.002, "m") == "+2 mm"
    assert signed(-0.002, "m") == "−2 mm"
    assert signed(None, "m") == "–"


def test_percent_says_small_where_it_would_round_away():
    assert percent(0.0781) == "7.81 %"
    assert percent(3e-8) == "less than 0.001 %"
    assert percent(0.0) == "0 %"


def test_written_quantities_are_put_in_readers_units():
    text = "gap 0.00312 m at 5 m/s; peak 11.8 m s-2; torque 2e-05 N m; link 3; strand a-1 31 Hz"
    expected = "gap 3.12 mm at 5 m/s; peak 11.8 m/s²; torque 0.02 mN m; link 3; strand a-1 31 Hz"
    assert readable(text) == expected


def test_dimensionless_findings_say_what_they_count():
    assert unit_of("no_tooth_skipped", "1") == "seats"
    assert unit_of("ride_smooth", "1") == SHARE
    assert unit_of("ride_smooth", "m s-2") == "m s-2"


class Outcome:
    def __init__(self, outcome):
        self.outcome = outcome


@pytest.mark.parametrize(
    ("outcomes", "worst"),
    [
        (["holds", "close", "fails"], "fails"),
        (["holds", "close", "not judged"], "close"),
        (["not judged", "holds"], "holds"),
        (["not judged"], "not-judged"),
    ],
)
def test_worst_outcome(outcomes, worst):
    assert overall_outcome([Outcome(o) for o in outcomes]) == worst


def test_outcome_bars_differ_in_shape():
    shapes = {
        re.sub(r'(fill|stroke)="#[^"]+"', "", outcome_bar(outcome))
        for outcome in ("holds", "close", "fails", "not judged")
    }
    assert len(shapes) == 4


def marker_x(gauge: str) -> float:
    return float(re.findall(r"L(-?[\d.]+) 1[13]", gauge)[0])


def limit_x(gauge: str) -> float:
    return float(re.search(r'<line x1="([\d.]+)"[^>]*stroke-width="2.5"', gauge)[1])


def test_the_gauge_puts_failing_left_of_the_limit_and_holding_right():
    fails, holds = margin_gauge(-0.2, 1.0, 0.2), margin_gauge(0.6, 1.0, 0.2)
    assert marker_x(fails) < limit_x(fails) == limit_x(holds) < marker_x(holds)
    # margin of one scale: a step of width/1.75, since the gauge runs from −0.5 to 1.25.
    whole = marker_x(margin_gauge(1.0, 1.0, 0.2)) - marker_x(margin_gauge(0.0, 1.0, 0.2))
    assert whole == pytest.approx(GAUGE_WIDTH / 1.75, abs=0.1)


def test_a_margin_beyond_the_gauge_points_outward_at_its_end():
    assert marker_x(margin_gauge(9.0, 1.0, 0.2)) == pytest.approx(GAUGE_WIDTH)
    assert marker_x(margin_gauge(-9.0, 1.0, 0.2)) == pytest.approx(0.0)


@pytest.mark.parametrize("margin", [None, float("nan")])
def test_no_margin_is_said(margin):
    assert "no margin" in margin_gauge(margin, 1.0, 0.2)


@pytest.mark.parametrize("scale", [None, 0.0])
def test_a_margin_without_a_scale_has_no_gauge(scale):
    assert margin_gauge(1.0, scale, 0.2) == ""
