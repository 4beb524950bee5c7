"""Sprockets, chain length and speed variation as printed in handbooks and tables."""

import pytest

from chainsim import closed_forms as cf

# Pitch diameters for 1 inch pitch [mm]: "Pitch diameter of roller chain wheels", tandwiel.info,
# two decimals.
PRINTED_DIAMETERS = {
    8: 66.37, 9: 74.26, 10: 82.20, 11: 90.16, 12: 98.14, 13: 106.14, 15: 122.17, 16: 130.20,
    17: 138.23, 18: 146.27, 19: 154.32, 20: 162.37, 21: 170.42, 24: 194.60, 25: 202.66,
    30: 243.00, 37: 299.51, 63: 509.57, 100: 808.64, 152: 1229.02,
}  # fmt: skip


@pytest.mark.parametrize("teeth", [8, 12, 20, 152])
def test_pitch_diameter(claim, teeth):
    claim(
        f"pitch diameter, {teeth} teeth of 25.4 mm",
        "table on tandwiel.info; law of ISO 606:2015, annex A",
        PRINTED_DIAMETERS[teeth],
        2e3 * cf.pitch_radius(0.0254, teeth),
        0.0051,
        "mm",
        "table has two decimals",
        absolute=True,
    )


def test_every_pitch_diameter_of_the_table(claim):
    gaps = [abs(2e3 * cf.pitch_radius(0.0254, z) - d) for z, d in PRINTED_DIAMETERS.items()]
    claim(
        "largest gap to 20 printed pitch diameters",
        "table on tandwiel.info; law of ISO 606:2015, annex A",
        0.0,
        max(gaps),
        0.0051,
        "mm",
        "table has two decimals",
        absolute=True,
    )


def test_outside_diameter(claim):
    claim(
        "outside diameter over pitch, 25 teeth",
        "wheelsprocket.xyz, article 299; rule of ASME B29.1-2011",
        8.516,
        2.0 * cf.standard_tip_radius(1.0, 25),
        0.0006,
        "",
        "printed with three decimals",
        absolute=True,
    )


def test_chain_length_and_center_distance(claim):
    source = "worked example with 20 and 63 teeth, C inferred as 36 pitches"
    claim(
        "links of a chain over 20 and 63 teeth",
        source,
        114.8,
        cf.chain_length(20, 63, 36.0, 1.0),
        0.05,
        "",
        "printed with one decimal; pitch-circle arcs would give 114.86",
        absolute=True,
    )
    claim(
        "center distance for 114 links, in pitches",
        source,
        35.6,
        cf.center_distance(20, 63, 114, 1.0),
        0.05,
        "",
        "printed with one decimal",
        absolute=True,
    )


@pytest.mark.parametrize(
    ("teeth", "printed", "tolerance"),
    [(16, 2.0, 0.5), (20, 1.2, 0.05)],
)
def test_speed_variation(claim, teeth, printed, tolerance):
    claim(
        f"speed variation, {teeth} teeth",
        "bs-wiki.de, polygon effect",
        printed,
        100.0 * cf.speed_variation(teeth),
        tolerance,
        "%",
        "half of the last printed digit",
        absolute=True,
        cause="the page rounds 1.93 % up to 2 %" if teeth == 16 else "",
    )


def test_speed_variation_of_six_teeth(claim):
    claim(
        "speed variation, six teeth",
        "common practice, no source",
        15.0,
        100.0 * cf.speed_variation(6),
        1.0,
        "%",
        "a saying: about 15 %",
        absolute=True,
        cause="the saying rounds 14.0 % of the mean speed, or 15.5 % of the least, to about 15 %",
    )
