"""Natural frequencies and resonance windows, against tables of special functions."""

import math

import numpy as np
import pytest

from chainsim import closed_forms as cf
from chainsim.errors import CallError

G = 9.80665


def test_hanging_chain_by_bessel_zeros():
    # Zeros 2.4048, 5.5201, 8.6537 of J0: Abramowitz and Stegun, table 9.5; L = 1 m.
    found = cf.hanging_chain_frequencies(1.0, 5, G)
    expected = [0.599285890, 1.37561118, 2.15652109, 2.93846686, 3.72080556]
    assert found == pytest.approx(expected, rel=1e-8)


@pytest.mark.parametrize(
    ("beads", "zeros"),
    [
        # CRC tables (Beyer), zeros of Laguerre polynomials, six digits.
        (2, [0.585786, 3.41421]),
        (3, [0.415775, 2.29428, 6.28995]),
        (5, [0.26356, 1.4134, 3.59643, 7.08581, 12.6408]),
    ],
)
def test_hanging_beads_by_laguerre_zeros(beads, zeros):
    found = np.array(cf.hanging_beads_frequencies(beads, 0.1, G))
    assert (2 * math.pi * found) ** 2 * 0.1 / G == pytest.approx(zeros, rel=4e-6)  # six digits


def test_two_beads_are_the_double_pendulum():
    # Kibble and Berkshire, Classical Mechanics, eq. 11.21 with equal masses: (2 ∓ √2) g/l.
    found = [2 * math.pi * f for f in cf.hanging_beads_frequencies(2, 1.0, 9.81)]
    assert found == pytest.approx([2.397199398, 5.787351298], rel=1e-9)


@pytest.mark.parametrize(
    ("links", "expected"),
    [
        (5, [1.188393226, 2.456885915]),
        (20, [1.201523263, 2.733489784, 4.165116725]),
        (100, [1.202377201, 2.758984159, 4.320264682]),
    ],
)
def test_links_with_half_their_mass_in_each_pin_converge_to_the_chain(links, expected):
    found = cf.hanging_links_frequencies(links, 1.0 / links, 0.64 / links, 0.0, G)
    scaled = [2 * math.pi * f / math.sqrt(G) for f in found[: len(expected)]]
    assert scaled == pytest.approx(expected, rel=1e-8)


@pytest.mark.parametrize(
    ("ratio", "expected"),
    [
        (0.05, [1.17671105, 2.76011278, 4.47607065]),
        (1.0, [1.05642248, 4.08168676, 7.73750314]),
        (10.0, [1.00793371, 10.2764263, 20.4041314]),
    ],
)
def test_hanging_chain_with_a_mass_at_its_end(ratio, expected):
    found = cf.loaded_hanging_chain_frequencies(1.0, ratio, 3, G)
    assert [2 * math.pi * f / math.sqrt(G) for f in found] == pytest.approx(expected, rel=1e-8)
    beads = cf.hanging_links_frequencies(100, 0.01, 0.0064, 0.64 * ratio, G)[:3]
    assert beads == pytest.approx(found, rel=1e-3)  # a hundred links, second order


def test_taut_strings_with_and_without_beads():
    # 39 beads of 8.128 g at 12.7 mm under 10 N; continuous 3.8906, 7.7812, 11.6718 Hz.
    beads = [
        cf.beaded_string_frequency(39, 0.0127, 10.0, 0.64 * 0.0127, k) for k in (1, 2, 3, 10, 39)
    ]
    assert beads == pytest.approx(
        [3.88959763, 7.77319778, 11.6448122, 37.9136922, 98.9968703], rel=1e-8
    )
    assert cf.string_frequency(0.508, 10.0, 0.64, 1) == pytest.approx(3.89059751, rel=1e-8)
    assert cf.string_frequency(0.508, 10.0, 0.64, 3) == pytest.approx(11.6717925, rel=1e-8)


def test_longitudinal_frequencies():
    assert cf.longitudinal_frequency(1.27, 2e5, 0.64, 1) == pytest.approx(110.042715, rel=1e-8)
    assert cf.longitudinal_frequency(1.27, 2e5, 0.64, 2) == pytest.approx(330.128145, rel=1e-8)
    bound = cf.highest_link_frequency(2e5 / 0.0127, 0.64 * 0.0127)
    assert bound == pytest.approx(14011.0737, rel=1e-8)


@pytest.mark.parametrize(
    ("speed", "frequency"),
    [(0.0, 3.95284708), (0.5, 3.88960152), (1.0, 3.69986486), (3.9, 0.104987618)],
)
def test_moving_strand_loses_frequency_with_its_speed(speed, frequency):
    found = cf.moving_strand_frequency(0.5, 10.0, 0.64, speed, 1)
    assert found == pytest.approx(frequency, rel=1e-8)
    wave = math.sqrt(10.0 / 0.64)
    transit = 0.5 / (wave - speed) + 0.5 / (wave + speed)  # a kink there and back
    assert found == pytest.approx(1.0 / transit, rel=1e-12)


def test_strand_at_its_critical_speed_has_no_frequency():
    with pytest.raises(CallError, match="not slower than its waves"):
        cf.moving_strand_frequency(0.5, 10.0, 0.64, 4.0, 1)


@pytest.mark.parametrize(
    ("degrees", "ratio"), [(5, 1.0004761725), (90, 1.1803405990), (170, 2.4393627197)]
)
def test_pendulum_period(degrees, ratio):
    assert cf.pendulum_period_ratio(math.radians(degrees)) == pytest.approx(ratio, rel=1e-10)


@pytest.mark.parametrize(
    ("ripple", "first", "second"),
    [
        (0.02, (1.989987580, 2.009987424), (0.999916667, 1.000016666)),
        (0.10, (1.949698438, 2.049678773), (0.997916866, 1.000416161)),
        (0.40, (1.795989323, 2.194599747), (0.966765314, 1.006541208)),
    ],
)
def test_parametric_windows(ripple, first, second):
    assert cf.parametric_window(ripple, 1) == pytest.approx(first, abs=2e-9)
    assert cf.parametric_window(ripple, 2) == pytest.approx(second, abs=2e-9)


def test_principal_window_follows_the_published_series():
    # Abramowitz and Stegun 20.2.25: b1 = 1 − q − q²/8 + q³/64 − q⁴/1536 …, a1(q) = b1(−q).
    window = cf.parametric_window(0.2, 1)
    for edge, sign in ((window.low, -1.0), (window.high, 1.0)):
        a = 4.0 / edge**2
        q = sign * 0.1 * a
        series = 1 - q - q**2 / 8 + q**3 / 64 - q**4 / 1536 - 11 * q**5 / 36864
        assert a == pytest.approx(series, abs=3e-8)  # next term of the series, q⁶ / 589824


def test_damping_closes_the_window():
    assert cf.parametric_damping_threshold(0.2) == pytest.approx(0.04997271, rel=1e-3)
    with pytest.raises(CallError, match="between 0 and 1"):
        cf.parametric_window(1.2)


def test_take_up_bounces_on_both_strands():
    # By hand: 50 links of 50 kN/m, twice: 2 kN/m; 0.3 kg + (2·0.05 + 0.2)/3 = 0.4 kg.
    found = cf.take_up_bounce_frequency(0.3, 0.05, 0.2, 50, 5e4)
    assert found == pytest.approx(math.sqrt(2000.0 / 0.4) / (2 * math.pi), rel=1e-12)
