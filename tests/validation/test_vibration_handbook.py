"""Natural frequencies as printed in tables of special functions and in textbooks."""

import math

import mpmath
import pytest

from chainsim import closed_forms as cf

G = 9.80665
TABLE = "Abramowitz and Stegun, Handbook of Mathematical Functions, table 9.5"


@pytest.mark.parametrize(("mode", "zero"), [(1, 2.4048), (2, 5.5201), (3, 8.6537)])
def test_hanging_chain(claim, mode, zero):
    found = cf.hanging_chain_frequencies(1.0, mode, G)[-1]
    claim(
        f"hanging chain, mode {mode}, as a zero of J0",
        TABLE,
        zero,
        4.0 * math.pi * found / math.sqrt(G),
        6e-5,
        "",
        "four decimals are compared",
        absolute=True,
    )


@pytest.mark.parametrize(("mode", "zero"), [(1, 0.26356), (3, 3.59643), (5, 12.6408)])
def test_hanging_beads(claim, mode, zero):
    found = cf.hanging_beads_frequencies(5, 0.1, G)[mode - 1]
    claim(
        f"five hanging beads, mode {mode}, as a Laguerre zero",
        "CRC Standard Mathematical Tables (Beyer), Laguerre zeros",
        zero,
        (2.0 * math.pi * found) ** 2 * 0.1 / G,
        1e-5,
        "",
        "printed with five or six digits",
    )


def test_double_pendulum(claim):
    slow, fast = cf.hanging_beads_frequencies(2, 1.0, 9.81)
    source = "Kibble and Berkshire, Classical Mechanics, eq. 11.21, equal masses"
    for name, sign, found in (("slow", -1, slow), ("fast", 1, fast)):
        claim(
            f"double pendulum of 1 m, {name} mode",
            source,
            math.sqrt((2.0 + sign * math.sqrt(2.0)) * 9.81),
            2.0 * math.pi * found,
            1e-12,
            "rad/s",
            "both are exact",
        )


def test_pendulum_period(claim):
    claim(
        "pendulum period at 150°, over the small swing",
        "mpmath, complete elliptic integral of the first kind",
        float(2 / mpmath.pi * mpmath.ellipk(mpmath.sin(mpmath.radians(75)) ** 2)),
        cf.pendulum_period_ratio(math.radians(150.0)),
        1e-12,
        "",
        "both are exact",
    )


@pytest.mark.parametrize("edge", ["low", "high"])
def test_parametric_window(claim, edge):
    # b1(q) = 1 − q − q²/8 + q³/64 − q⁴/1536 − 11 q⁵/36864 − …, a1(q) = b1(−q).
    found = getattr(cf.parametric_window(0.2), edge)
    a = 4.0 / found**2
    q = 0.1 * a * (-1.0 if edge == "low" else 1.0)
    claim(
        f"principal parametric window, ripple 0.2, {edge} border as a characteristic value",
        "Abramowitz and Stegun, Handbook of Mathematical Functions, eq. 20.2.25",
        1 - q - q**2 / 8 + q**3 / 64 - q**4 / 1536 - 11 * q**5 / 36864,
        a,
        3e-8,
        "",
        "first term left out of the series",
        absolute=True,
    )


def test_moving_strand(claim):
    # A kink that runs there and back: L/(c − v) + L/(c + v), with no theory of vibration.
    wave = math.sqrt(10.0 / 0.64)
    claim(
        "moving strand at 1 m/s, from the transit of a kink",
        "Archibald and Emslie, J. Appl. Mech. 25, 1958 (from memory)",
        1.0 / (0.5 / (wave - 1.0) + 0.5 / (wave + 1.0)),
        cf.moving_strand_frequency(0.5, 10.0, 0.64, 1.0, 1),
        1e-12,
        "Hz",
        "both are exact",
    )
