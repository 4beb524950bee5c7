"""Tension on wraps and hanging strands as printed in guides and courses."""

import math

from chainsim import closed_forms as cf


def test_capstan(claim):
    claim(
        "tension behind half a turn at friction 0.3, from 100 N",
        "back-tension chapter of a chain maker's guide",
        256.6,
        100.0 * cf.capstan_ratio(0.3, math.pi),
        0.05,
        "N",
        "printed with one decimal",
        absolute=True,
    )
    claim(
        "capstan ratio of ten turns at friction 0.3",
        "encyclopedia article on the capstan equation",
        153552935.0,
        cf.capstan_ratio(0.3, 20.0 * math.pi),
        4e-9,
        "",
        "printed as a whole number",
    )


def test_polygon_tends_to_the_capstan_equation(claim):
    claim(
        "drag of half a wrap on 480 corners, friction 0.3",
        "Euler–Eytelwein equation",
        math.exp(0.3 * math.pi),
        cf.polygon_capstan_ratio(0.3, 480, 240),
        1e-4,
        "",
        "excess of a polygon, π (μ + μ³) β² / 3, is 1.4e-5 here",
    )


def test_catenary(claim):
    strand = cf.catenary(120.0, 140.0, 3.0 * 9.81)
    source = "statics course, Cables: Catenaries, example 1"
    claim(
        "sag of 140 m of cable over 120 m",
        source,
        31.70,
        strand.sag,
        0.005,
        "m",
        "printed with two decimals",
        absolute=True,
    )
    claim(
        "largest tension of 140 m of cable over 120 m",
        source,
        2740.0,
        strand.end_tension,
        6e-4,
        "N",
        "the source rounds its parameter, then to three digits",
        cause="the source carries 61.45 m for the parameter 61.4457 m, then prints 2741 as 2740 N",
    )
