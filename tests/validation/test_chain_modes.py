"""Small oscillations of chains: hanging, weighed down, taut; windows of parametric resonance."""

import numpy as np
import pytest
from scipy.special import jn_zeros, mathieu_a, mathieu_b, roots_laguerre

from chainsim.model.strand import bench_strand, rest_strand, strand_step
from tests.validation.bench import (
    AXIAL,
    GRAVITY,
    LINK_MASS,
    MASS_PER_LENGTH,
    PITCH,
    fitted_rate,
    follow,
    frequencies,
    line,
)

LAGUERRE = "zeros of Laguerre polynomials, table 25.9 of Abramowitz & Stegun; law from memory"
#: zeros of L_8, ten digits: keisoku.magicgifted.com, same set as A&S table 25.9
ZEROS_8 = [0.1702796323, 0.9037017768, 2.2510866299, 4.2667001703]


def hung(n, *, length=1.0, half_tip=False, end_mass=0.0, axial=AXIAL):
    """Chain of n beads hung by its first, massless pin, at rest."""
    pitch = length / n
    mass = np.full(n + 1, MASS_PER_LENGTH * pitch)
    mass[-1] = mass[-1] * (0.5 if half_tip else 1.0) + end_mass
    packed = bench_strand(
        line(n, pitch), pitch=pitch, link_mass=mass[0], link_stiffness=axial / pitch,
        link_damping=0.1, fixed=(0,), pin_mass=mass,
    )  # fmt: skip
    rest_strand(packed, strand_step(packed), 1e-7)
    return packed


def test_beads_on_a_hanging_string(claim):
    n = 8
    packed = hung(n)
    scale = np.sqrt(GRAVITY / (1.0 / n))
    found = (frequencies(packed, list(range(1, n + 1))) / scale) ** 2
    for k in range(4):
        claim(
            f"square of mode {k + 1} of 8 hanging beads, in g/a", LAGUERRE, ZEROS_8[k], found[k],
            1e-4, "", "links stretch by 3e-5 at the top",
        )  # fmt: skip
    assert found == pytest.approx(roots_laguerre(n)[0], rel=1e-4)


@pytest.mark.parametrize("mode", [1, 2, 3])
def test_pluck_of_a_hanging_chain(claim, mode):
    n = 8
    packed = hung(n)
    packed = packed._replace(
        parts=packed.parts._replace(chain=packed.parts.chain._replace(damping=0.0))
    )
    zero = roots_laguerre(n)[0][mode - 1]
    rate = np.sqrt(zero * GRAVITY * n)
    # mode shape by the three-term recursion of the tension, from the tip up
    matrix = np.diag(2.0 * np.arange(n) + 1.0) - np.diag(np.arange(1, n), 1)
    matrix -= np.diag(np.arange(1, n), -1)
    shape = np.linalg.eigh(matrix)[1][:, mode - 1]
    packed.state.x[1 : n + 1] = 2e-4 * shape[::-1] / np.abs(shape).max()
    t, x = follow(packed, 8 * 2 * np.pi / rate, 400, lambda p: p.state.x[1 : n + 1] @ shape[::-1])
    claim(
        f"mode {mode} of 8 hanging beads, from a pluck, sqrt(g/a)", LAGUERRE, np.sqrt(zero),
        fitted_rate(t, x, rate) / np.sqrt(GRAVITY * n), 1e-4, "", "links stretch by 3e-5",
    )  # fmt: skip


def test_hanging_chain(claim):
    found = frequencies(hung(40, half_tip=True), list(range(1, 41)))
    expected = 0.5 * jn_zeros(0, 2) * np.sqrt(GRAVITY)
    for mode in (1, 2):
        claim(
            f"mode {mode} of 1 m of hanging chain", "zeros of J0, from memory: 2.4048, 5.5201",
            expected[mode - 1] / 2 / np.pi, found[mode - 1] / 2 / np.pi, 3e-3, "Hz",
            "40 links for a continuum: 0.24 % in the second mode",
        )  # fmt: skip


#: end mass over chain mass, then the first three frequencies in sqrt(g/L)
END_MASS = [
    (1.0, (1.05642248, 4.08168676, 7.73750314)),
    (5.0, (1.01515276, 7.49898627, 14.7905620)),
]


@pytest.mark.parametrize(("ratio", "expected"), END_MASS)
def test_hanging_chain_with_an_end_mass(claim, ratio, expected):
    packed = hung(100, half_tip=True, end_mass=ratio * MASS_PER_LENGTH)
    found = frequencies(packed, list(range(1, 101))) / np.sqrt(GRAVITY)
    for mode in range(3):
        claim(
            f"mode {mode + 1} of a chain with {ratio:g} times its mass at the end, sqrt(g/L)",
            "J0(s1) Y2(s0) - J2(s0) Y0(s1) = 0, derived from Bessel's equation",
            expected[mode], found[mode], 1e-3, "", "100 links for a continuum",
        )  # fmt: skip


def taut(n_beads, tension, axial, **more):
    """Beads on a taut string between two held pins, along x, without gravity."""
    stiffness = axial / PITCH
    return bench_strand(
        line(n_beads + 1, PITCH, (1.0, 0.0)), pitch=PITCH - tension / stiffness,
        link_mass=LINK_MASS, link_stiffness=stiffness, fixed=(0, n_beads + 1), gravity=(0.0, 0.0),
        **more,
    )  # fmt: skip


def beaded(mode, tension=10.0, n=39):
    """Angular frequency of a beaded string [rad/s]."""
    return 2 * np.sqrt(tension / LINK_MASS / PITCH) * np.sin(mode * np.pi / 2 / (n + 1))


STRING = "Lagrange's beaded string, from memory"


def test_beaded_string(claim):
    n = 39
    packed = taut(n, 10.0, 2e4)
    total = n + 2
    found = frequencies(packed, [total + i for i in range(1, n + 1)]) / 2 / np.pi
    for mode, expected in ((1, 3.88959763), (2, 7.77319778), (10, 37.9136922), (39, 98.9968703)):
        claim(f"mode {mode} of 39 beads at 10 N", STRING, expected, found[mode - 1], 1e-5, "Hz",
              "finite differences")  # fmt: skip


def test_pluck_of_a_beaded_string(claim):
    n = 39
    packed = taut(n, 10.0, 2e4)
    at = np.arange(n + 2)
    peak = 10  # plucked at a quarter
    packed.state.y[: n + 2] = 1e-5 * np.minimum(at / peak, (n + 1 - at) / (n + 1 - peak))
    shapes = np.array([np.sin(k * np.pi * at / (n + 1)) for k in (1, 2, 3)])
    t, x = follow(packed, 2.0, 800, lambda p: shapes @ p.state.y[: n + 2])
    for mode in (1, 2, 3):
        claim(
            f"mode {mode} of 39 beads at 10 N, from a pluck", STRING, beaded(mode) / 2 / np.pi,
            fitted_rate(t, x[:, mode - 1], beaded(mode), 0.02) / 2 / np.pi, 2e-5, "Hz",
            "the pluck raises the tension by 6e-6 of itself",
        )  # fmt: skip


def test_axial_modes(claim):
    n = 100
    packed = bench_strand(
        line(n), pitch=PITCH, link_mass=LINK_MASS, link_stiffness=AXIAL / PITCH, fixed=(0,),
        gravity=(0.0, 0.0),
    )  # fmt: skip
    found = frequencies(packed, [n + 1 + i for i in range(1, n + 1)]) / 2 / np.pi
    claim("first axial mode of 1.27 m hung chain, EA 200 kN", "quarter wave in a bar, from memory",
          110.042715, found[0], 1e-4, "Hz", "100 links for a bar")  # fmt: skip
    claim("highest axial mode of a chain of links", "sqrt(k/m)/pi, Lagrange, from memory",
          14011.0737, found[-1], 2e-4, "Hz", "the end of the strand, 1e-4")  # fmt: skip


def test_damping_is_a_share_of_critical_in_the_highest_axial_mode(claim):
    zeta = 0.05
    n = 20
    angle = 2 * np.pi * np.arange(n) / n
    radius = PITCH / 2 / np.sin(np.pi / n)
    ring = radius * np.column_stack([np.cos(angle), np.sin(angle)])
    packed = bench_strand(
        ring, pitch=PITCH, link_mass=LINK_MASS, link_stiffness=AXIAL / PITCH, link_damping=zeta,
        closed=True, gravity=(0.0, 0.0),
    )  # fmt: skip
    along = np.column_stack([-np.sin(angle), np.cos(angle)]) * (-1.0) ** np.arange(n)[:, None]
    packed.state.x[:n] += 1e-9 * along[:, 0]
    packed.state.y[:n] += 1e-9 * along[:, 1]
    packed.state.x[n], packed.state.y[n] = packed.state.x[0], packed.state.y[0]
    rate = 2 * np.sqrt(AXIAL / PITCH / LINK_MASS) * np.cos(np.pi / n)
    period = 2 * np.pi / (rate * np.sqrt(1 - zeta**2))

    def size(p):
        move = np.column_stack([p.state.x[:n], p.state.y[:n]]) - ring
        return np.sum(move * along)

    t, x = follow(packed, 6 * period, 300, size, dt=period / 1000)
    falls = np.log(np.abs(x))
    tops = [int(np.argmax(np.where(np.abs(t - k * period) < 0.1 * period, np.abs(x), 0)))
            for k in (1, 5)]  # fmt: skip
    decrement = (falls[tops[0]] - falls[tops[1]]) / 4
    expected = 2 * np.pi * zeta * np.cos(np.pi / n)
    claim(
        "logarithmic decrement of the highest axial mode, zeta 0.05",
        "c = zeta sqrt(k m), w = 2 sqrt(k/m): damping ratio zeta, from memory",
        expected, decrement, 0.01, "", "inner step of a thousandth of the period",
    )  # fmt: skip


def growth(ratio, swing, periods=24):
    """Growth of a taut strand whose pull swings by `swing` at `ratio` of its first mode.

    The far pin is moved along the strand, slowly against axial waves. Returns the exponent of the
    first mode over its frequency, and the largest amplitude over that at the start.
    """
    n, tension, axial = 39, 10.0, 2e4
    packed = taut(n, tension, axial)
    rate = beaded(1)
    push = ratio * rate
    at = np.arange(n + 2)
    shape = np.sin(np.pi * at / (n + 1))
    packed.state.y[: n + 2] = 1e-7 * shape
    length = (n + 1) * PITCH
    travel = swing * tension * length / axial
    end = n + 1
    pieces = 40
    interval = 2 * np.pi / push / pieces
    # start in step with the swing, so that its first move is no jump
    packed.state.x[: n + 2] += travel * at / end

    def move(p, t):
        to = (n + 1) * PITCH + travel * np.cos(push * (t + interval))
        p.state.vx[end] = (to - p.state.x[end]) / interval

    count = round(periods * 2 * np.pi / rate / interval)
    t, x = follow(
        packed, count * interval, count,
        lambda p: (p.state.y[: n + 2] @ shape, p.state.vy[: n + 2] @ shape / rate), act=move,
    )  # fmt: skip
    size = np.hypot(x[:, 0], x[:, 1]) / (1e-7 * shape @ shape)
    half = len(t) // 2
    exponent = np.polyfit(t[half:], np.log(size[half:]), 1)[0]
    return exponent / rate, size.max()


def test_growth_at_twice_the_natural_frequency(claim):
    exponent, _ = growth(2.0, 0.2)
    claim(
        "growth rate of a strand whose pull swings by 20 % at twice its frequency",
        "Mathieu's equation, Floquet exponent, from memory", 0.049941570, exponent, 0.03, "",
        "one mode of 39 beads; the pin is moved in 40 straight pieces a period",
    )  # fmt: skip


@pytest.mark.parametrize("edge", ["low", "high"])
def test_window_of_parametric_resonance(claim, edge):
    swing = 0.2
    low, high = 1.898848110, 2.098687561
    expected, sense = (low, 1.0) if edge == "low" else (high, -1.0)
    # the edges are the characteristic values of Mathieu's equation
    q = 2 * swing / expected**2
    value = mathieu_b(1, q) if edge == "high" else mathieu_a(1, q)
    assert value == pytest.approx(4 / expected**2, rel=1e-6)
    _, inside = growth(expected * (1 + 0.01 * sense), swing)
    _, outside = growth(expected * (1 - 0.01 * sense), swing)
    claim(
        f"growth 1 % inside the {edge} edge of the window of parametric resonance, 20 % swing",
        "characteristic values of Mathieu's equation, A&S 20.2.25", 12.0, inside, 0.0, "",
        "in 24 periods; outside it beats", sense="at least",
    )  # fmt: skip
    claim(
        f"growth 1 % outside the {edge} edge of the window of parametric resonance, 20 % swing",
        "characteristic values of Mathieu's equation, A&S 20.2.25", 6.0, outside, 0.0, "",
        "in 24 periods; inside it grows without end", sense="at most",
    )  # fmt: skip
