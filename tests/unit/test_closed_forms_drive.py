"""Motors, worms, shafts, stick-slip and statistics, against handbook examples."""

import math

import pytest
from scipy.integrate import solve_ivp
from scipy.stats import binom, binomtest

from chainsim import closed_forms as cf
from chainsim.errors import CallError

RPM = 2 * math.pi / 60
INCH, LBF, PSI = 0.0254, 4.4482216152605, 6894.757293168


def test_motor_line():
    no_load = 5000 * RPM
    assert cf.motor_speed(0.1, no_load, 0.5) / RPM == pytest.approx(4000.0)
    assert cf.motor_peak_power(no_load, 0.5) == pytest.approx(65.4498469, rel=1e-8)
    best = cf.motor_best_point(0.15, 4.0)
    assert best == pytest.approx((0.650201665, 0.774596669), rel=1e-8)
    assert cf.motor_current(0.25, 0.5, 0.15, 4.0) == pytest.approx(2.075)


@pytest.mark.parametrize(
    ("lead", "percent"),
    # Shigley, table 13-6, friction 0.05, pressure angle 14.5° (from memory).
    [(1, 25.2), (2.5, 45.7), (5, 62.6), (7.5, 71.3), (10, 76.6), (20, 85.9), (30, 89.1)],
)
def test_worm_efficiency_matches_a_handbook_table(lead, percent):
    found = cf.worm_efficiency(math.radians(lead), 0.05, math.radians(14.5))
    assert 100 * found == pytest.approx(percent, abs=0.051)  # one decimal is printed


def test_worm_locks_below_its_lock_angle():
    pressure = math.radians(20.0)
    assert math.degrees(cf.worm_lock_angle(0.05, pressure)) == pytest.approx(3.04577253, rel=1e-8)
    back = [cf.worm_back_efficiency(math.radians(lead), 0.05, pressure) for lead in (5, 2.5)]
    assert back == pytest.approx([0.390004083, -0.218177052], rel=1e-8)
    limit = cf.worm_lock_angle(0.1, pressure)
    assert cf.worm_efficiency(limit, 0.1, pressure) == pytest.approx(0.494337628, rel=1e-8)
    assert cf.worm_back_efficiency(limit, 0.1, pressure) == pytest.approx(0.0, abs=1e-12)


def test_run_up_of_a_geared_motor():
    load = 2e-4 + 1.2 * 0.03**2
    found = cf.run_up(4e-6, load, 30.0, 0.7, 0.10, 6000 * RPM, 0.03)
    assert found == pytest.approx(
        (6.03174603e-6, 4.76190476e-3, 0.126328593, 528.585431, 0.378446645), rel=1e-8
    )


def test_lifting_power():
    assert cf.lifting_power(1.5, 0.045, 1.2, 9.80665) == pytest.approx(0.794338650, rel=1e-8)


def test_shaft_twist_and_torsional_frequencies():
    stiffness = cf.torsional_stiffness(0.006, 0.4, 79.3e9)
    assert stiffness == pytest.approx(25.2242401, rel=1e-8)
    assert cf.torsional_stress(0.5, 0.006) == pytest.approx(11.7892550e6, rel=1e-8)
    one = cf.torsional_frequency(stiffness, 1.2e-4)
    two = cf.torsional_frequency(stiffness, 1.2e-4, 3e-5)
    own = 7850 * math.pi * 0.006**4 / 32 * 0.4
    heavy = cf.torsional_frequency(stiffness, 1.2e-4, shaft_inertia=own)
    assert [one, two, heavy] == pytest.approx([72.9690269, 163.163704, 72.9285712], rel=1e-8)


def test_whirl_of_the_handbook_shaft():
    # Shigley, 9th edition, example 7-5: 1 inch, 31 inch span, 35 and 55 lbf at 7 and 20 inch,
    # 30 Mpsi, 386.1 in/s2, 0.282 lbf/in3. Printed values in the assertions.
    gravity = 386.1 * INCH
    second = math.pi * INCH**4 / 64
    places, weights = (7 * INCH, 20 * INCH), (35 * LBF, 55 * LBF)

    def influence(at, load_at):
        return cf.beam_influence(31 * INCH, at, load_at, 30e6 * PSI, second)

    d11, d12, d22 = (influence(places[i], places[j]) for i, j in ((0, 0), (0, 1), (1, 1)))
    per_pound = LBF / INCH
    assert d11 * per_pound == pytest.approx(2.061e-4, rel=5e-4)
    assert d12 * per_pound == pytest.approx(2.224e-4, rel=5e-4)
    assert d22 * per_pound == pytest.approx(3.534e-4, rel=5e-4)
    assert influence(places[1], places[0]) == d12
    sags = (weights[0] * d11 + weights[1] * d12, weights[0] * d12 + weights[1] * d22)
    rayleigh = cf.rayleigh_speed(weights, sags, gravity)
    alone = [math.sqrt(gravity / (w * d)) for w, d in zip(weights, (d11, d22), strict=True)]
    assert rayleigh == pytest.approx(124.8, abs=0.05)
    assert alone == pytest.approx([231.4, 140.9], abs=0.05)
    # The book rounds the single speeds first: printed 120.3, 120.36 unrounded.
    dunkerley = cf.dunkerley_speed(alone)
    assert dunkerley == pytest.approx(120.3, abs=0.1)
    density = 0.282 * LBF / (gravity * INCH**3)
    bare = cf.whirl_speed(INCH, 31 * INCH, 30e6 * PSI, density)
    assert bare == pytest.approx(520.4, abs=0.05)
    assert cf.dunkerley_speed([*alone, bare]) == pytest.approx(117.3, abs=0.05)
    assert dunkerley < 124.679241 < rayleigh  # exact two-mass value between both


@pytest.mark.parametrize(
    ("ends", "speed"),
    [
        ("pinned", 398.538151),
        ("free end", 141.977953),
        ("clamped and pinned", 622.592654),
        ("clamped", 903.441256),
    ],
)
def test_whirl_of_each_kind_of_ends(ends, speed):
    assert cf.whirl_speed(0.008, 0.5, 200e9, 7850, ends) == pytest.approx(speed, rel=1e-8)
    number = cf.MODE_NUMBERS[ends]
    equation = {
        "pinned": math.sin(number),
        "free end": math.cos(number) + 1 / math.cosh(number),
        "clamped and pinned": math.tan(number) - math.tanh(number),
        "clamped": math.cos(number) - 1 / math.cosh(number),
    }[ends]
    assert equation == pytest.approx(0.0, abs=2e-8)  # the table has nine digits


def test_support_distance_matches_a_boat_builders_rule():
    # engineersedge, eq. 2: L[ft] = sqrt(3.21 D/n) (E/w)^(1/4); 1 inch bronze at 2000 rev/min:
    # printed 3 ft 5 in. It is the pinned critical speed without margin.
    density = 0.304 * LBF / (386.1 * INCH * INCH**3)
    found = cf.support_distance(INCH, 16e6 * PSI, density, 2000 * RPM, margin=1.0)
    assert found / 0.3048 == pytest.approx(3 + 5 / 12, abs=0.5 / 12)
    twice = cf.support_distance(0.006, 200e9, 7850, 1500 * RPM)
    assert twice == pytest.approx(0.487708866, rel=1e-8)


def test_stick_slip_cycle():
    found = cf.stick_slip(1.2e-4, 2.0, 0.05, 0.03, 0.5)
    assert found == pytest.approx(
        (0.0700590799, 0.0300590799, 0.04, 0.00855238941, 0.0514476106, 1.88443731), rel=1e-8
    )

    def slip(_, state):
        wind, speed = state
        return [0.5 - speed, (2.0 * wind - 0.03) / 1.2e-4]

    def stopped(time, state):
        return state[1] if time > 1e-3 else 1.0

    stopped.terminal, stopped.direction = True, -1
    out = solve_ivp(slip, (0, 1), [0.025, 0.0], events=stopped, rtol=1e-10, atol=1e-12)
    assert out.t[-1] == pytest.approx(found.slip_time, rel=1e-7)
    assert 2.0 * out.y[0, -1] == pytest.approx(2 * 0.03 - 0.05, rel=1e-7)


def test_pocket_rate():
    assert cf.pocket_rate(0.09, 0.12) == pytest.approx(0.75)
    assert 60 * cf.pocket_rate(12 * 0.0127 * 20 / 60, 6 * 0.0127) == pytest.approx(40.0)


@pytest.mark.parametrize(
    ("trials", "bound"),
    [(30, 0.0950338529), (100, 0.0295130496), (1500, 0.00199516186)],
)
def test_rule_of_three(trials, bound):
    # Jovanovic and Levy 1997: 3/n; exact form 1 − 0.05^(1/n), always below it.
    assert cf.failure_bound(trials) == pytest.approx(bound, rel=1e-8)
    assert cf.failure_bound(trials) < 3.0 / trials


@pytest.mark.parametrize(("rate", "trials"), [(1e-2, 299), (1e-3, 2995), (1e-4, 29956)])
def test_trials_needed_without_a_failure(rate, trials):
    assert cf.trials_without_failure(rate) == trials
    assert cf.failure_bound(trials) <= rate < cf.failure_bound(trials - 1)


@pytest.mark.parametrize(
    ("count", "trials", "confidence", "low", "high"),
    # codingace.net, Clopper-Pearson page, four decimals.
    [(3, 20, 0.95, 0.0321, 0.3789), (12, 30, 0.90, 0.2495, 0.5661),
     (42, 100, 0.95, 0.3220, 0.5229), (85, 120, 0.99, 0.5904, 0.8092)],
)  # fmt: skip
def test_exact_interval_of_a_share(count, trials, confidence, low, high):
    found = cf.share_interval(count, trials, confidence)
    assert found == pytest.approx((low, high), abs=5.1e-5)
    other = binomtest(count, trials).proportion_ci(confidence, "exact")
    assert found == pytest.approx((other.low, other.high), rel=1e-8)


def test_exact_interval_covers_at_its_ends():
    assert cf.share_interval(0, 20) == pytest.approx((0.0, 0.168433471), rel=1e-8)
    assert cf.share_interval(20, 20).high == 1.0
    covered = sum(
        binom.pmf(count, 100, 0.05)
        for count in range(101)
        if cf.share_interval(count, 100).low <= 0.05 <= cf.share_interval(count, 100).high
    )
    assert covered == pytest.approx(0.982607061, rel=1e-8)
    with pytest.raises(CallError, match="21 of 20"):
        cf.share_interval(21, 20)


@pytest.mark.parametrize(
    ("width", "tolerance", "count"),
    [(1.0, 1e-3, 10), (2.0, 1e-3, 11), (10.0, 1e-6, 24), (0.5, 0.01, 6), (0.1, 1.0, 0)],
)
def test_bisections_needed(width, tolerance, count):
    assert cf.halvings(width, tolerance) == count
