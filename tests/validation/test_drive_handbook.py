"""Worm gears, shafts and balls as printed in handbooks."""

import math

import pytest

from chainsim import closed_forms as cf

INCH, LBF, PSI, RPM = 0.0254, 4.4482216152605, 6894.757293168, 2.0 * math.pi / 60.0
SHIGLEY = "Shigley's Mechanical Engineering Design, 9th ed., example 7-5"


@pytest.mark.parametrize(("lead", "percent"), [(2.5, 45.7), (10.0, 76.6), (30.0, 89.1)])
def test_worm_efficiency(claim, lead, percent):
    claim(
        f"worm efficiency, lead angle {lead:g}°, friction 0.05",
        "Shigley, table 13-6 (from memory)",
        percent,
        100.0 * cf.worm_efficiency(math.radians(lead), 0.05, math.radians(14.5)),
        0.051,
        "%",
        "printed with one decimal",
        absolute=True,
    )


@pytest.fixture
def handbook_shaft():
    """Influence numbers, weights and gravity of the handbook's shaft, in SI."""
    second = math.pi * INCH**4 / 64.0
    places, weights = (7 * INCH, 20 * INCH), (35 * LBF, 55 * LBF)
    influence = [
        [cf.beam_influence(31 * INCH, a, b, 30e6 * PSI, second) for b in places] for a in places
    ]
    return influence, weights, 386.1 * INCH


def test_rayleigh_speed(claim, handbook_shaft):
    influence, weights, gravity = handbook_shaft
    sags = [sum(w * d for w, d in zip(weights, row, strict=True)) for row in influence]
    claim(
        "critical speed of a shaft with two weights, Rayleigh",
        SHIGLEY,
        124.8,
        cf.rayleigh_speed(weights, sags, gravity),
        1e-3,
        "rad/s",
        "printed with four digits",
    )


def test_dunkerley_speed(claim, handbook_shaft):
    influence, weights, gravity = handbook_shaft
    alone = [math.sqrt(gravity / (weights[i] * influence[i][i])) for i in range(2)]
    claim(
        "critical speed of a shaft with two weights, Dunkerley",
        SHIGLEY,
        120.3,
        cf.dunkerley_speed(alone),
        1e-3,
        "rad/s",
        "printed with four digits",
        cause="the book rounds the single speeds to 231.4 and 140.9 rad/s and truncates 120.36",
    )


def test_bare_shaft(claim):
    density = 0.282 * LBF / (386.1 * INCH * INCH**3)
    claim(
        "critical speed of the bare shaft, 1 inch over 31 inch",
        SHIGLEY,
        520.4,
        cf.whirl_speed(INCH, 31 * INCH, 30e6 * PSI, density),
        1e-3,
        "rad/s",
        "printed with four digits",
    )


def test_support_distance(claim):
    density = 0.304 * LBF / (386.1 * INCH * INCH**3)
    claim(
        "distance of shaft supports, 1 inch bronze at 2000 rev/min, no margin",
        "engineersedge.com, boat shaft bearing spacing: 3 ft 5 in",
        41.0,
        cf.support_distance(INCH, 16e6 * PSI, density, 2000 * RPM, margin=1.0) / INCH,
        0.5,
        "in",
        "printed in whole inches",
        absolute=True,
    )


def test_bouncing_ball(claim):
    claim(
        "second bounce of a ball from 2 m, restitution 0.5",
        "clubztutoring, bouncing-ball example",
        0.125,
        cf.bounce_height(2.0, 0.5, 2),
        1e-12,
        "m",
        "both are exact",
    )


def test_rolling_ball(claim):
    found = cf.rolling(math.radians(25.0), 0.5, 0.01, 9.80665)
    claim(
        "acceleration of a rolling ball over g sin θ",
        "miniphysics.com, UY1 rolling motion: 5/7",
        5.0 / 7.0,
        found.acceleration / (9.80665 * math.sin(math.radians(25.0))),
        1e-12,
        "",
        "both are exact",
    )
