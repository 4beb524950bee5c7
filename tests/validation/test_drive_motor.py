"""Motor, gear, shaft and one-way elements on a bare wheel, against closed forms."""

import math

import numpy as np
import pytest

from chainsim.integration.loading import pin_velocities, times_masses
from chainsim.integration.timeline import Action
from chainsim.kernels.sample import WHEEL_COLUMNS
from tests.validation.rig import SPIN, Rig, residual, rig_text

MOTOR = """kind = "motor"
chain_speed = "0.1 m/s"
[drive.motor]
supply = "12 V"
no_load_speed = "{no_load} rev/min"
stall_torque = "{stall} mN m"
no_load_current = "0.15 A"
stall_current = "4 A"
gear_ratio = {ratio}
gear_efficiency = "{efficiency} %"
back_drivable = {back}
inertia = "{inertia} g cm2"
"""
STIFF = 'stiffness = "500 N m/rad"\ndamping = "0.05 N m s/rad"\n'
HANDBOOK = "Norton; motor makers' formula handbooks (from memory)"


def motor(no_load=6000, stall=30, ratio=30, efficiency=70, back="true", inertia=40):
    """A motor as TOML."""
    return MOTOR.format(
        no_load=no_load, stall=stall, ratio=ratio, efficiency=efficiency, back=back, inertia=inertia
    )


def bare(drive, wheel_inertia, drag="0 N m", shaft=STIFF, step_scale=1.0):
    """A wheel alone with its drive: the chain is laid aside."""
    text = rig_text(drive=f"{drive}[drive.shaft]\n{shaft}")
    text = text.replace('inertia = "50 g cm2"', f'inertia = "{wheel_inertia} g cm2"')
    text = text.replace('bearing_drag = "0 N m"', f'bearing_drag = "{drag}"')
    rig = Rig(text, step_scale).afloat()
    # friction of the textbook has no spring before it slips
    rig.mount("tail")["bearing_stiffness"] = 1e3
    rig.drive["gear_stiffness"] = 1e3
    return rig


def rates(rig, samples):
    """Rate of the driven wheel [rad/s]."""
    return samples.wheel[:, rig.wheel("tail")[0], WHEEL_COLUMNS.index("rate")]


def angles(rig, samples):
    """Angle of the driven wheel since the rig was built [rad]."""
    return samples.wheel[:, rig.wheel("tail")[0], WHEEL_COLUMNS.index("angle")]


def profile(rig, rate):
    """Let the speed drive turn at a rate from now on [rad/s]."""
    rig.drive["rate_from"] = rig.drive["rate_to"] = rate
    rig.drive["ramp_start"], rig.drive["ramp_time"] = rig.time, 0.0


@pytest.mark.parametrize(("torque", "speed"), [(0.1, 4000.0), (0.2, 3000.0)])
def test_torque_speed_line(claim, torque, speed):
    rig = bare(motor(5000, 500, 1, 100, inertia=50), 50, f"{torque} N m")
    samples = rig.march(0.3)
    claim(
        f"speed of a motor of 5000 rev/min and 0.5 N m under {torque:g} N m",
        "torque-speed line of a DC motor, any text (from memory)",
        speed,
        rates(rig, samples)[-1] * 60.0 / (2.0 * math.pi),
        0.001,
        "rev/min",
        "settled to e^-30 of its start",
    )


def test_run_up(claim):
    rig = bare(motor(), 12800, "0.1 N m")
    start = float(rig.state.q[rig.wheel("tail")[1] + SPIN])
    tau = 0.126328593
    samples = rig.march(1.2)
    rate, angle = rates(rig, samples), angles(rig, samples) - start
    at = 2.0 * tau
    claim(
        "speed of a geared motor after two time constants of its run-up",
        HANDBOOK,
        457.049172,
        30.0 * np.interp(at, samples.time, rate),
        0.005,
        "rad/s",
        "shaft of 500 N m/rad instead of a rigid one",
    )
    claim(
        "turn of its output by then",
        HANDBOOK,
        2.52708430,
        np.interp(at, samples.time, angle),
        0.005,
        "rad",
        "shaft of 500 N m/rad instead of a rigid one",
    )
    claim(
        "time to 95 % of its final speed",
        HANDBOOK,
        0.378446645,
        np.interp(0.95 * 528.585431 / 30.0, rate, samples.time),
        0.005,
        "s",
        "shaft of 500 N m/rad instead of a rigid one",
    )


def test_stall(claim):
    rig = bare(motor(), 12800, "5 N m")
    # the supply comes up slowly: after a jerk the gear's friction would hold the shaft overwound
    for k in range(200):
        rig.drive["level"] = rig.drive["forward"] * (k + 1) / 200
        rig.march(5e-3)
    samples = rig.march(0.5)
    late = samples.time > 1.2
    assert abs(rates(rig, samples)[late]).max() < 1e-3
    claim(
        "torque of a stalled geared motor at its sprocket",
        "stall torque × ratio × efficiency, definition",
        0.63,
        samples.drive[late, 0].mean(),
        0.01,
        "N m",
        "the gear's friction lets it creep up to the end",
    )
    claim(
        "current of a stalled motor",
        "motor's data sheet",
        4.0,
        samples.drive[late, 3].mean(),
        0.01,
        "A",
        "at rest",
    )


def test_gear_loses_by_direction(claim):
    """A heavy wheel drives an unfed motor: the gear's loss lies on the other side."""
    rig = bare(motor(), 12800)
    rig.drive["supply"] = 1
    base = rig.wheel("tail")[1]
    rig.state.w[base + SPIN] = rig.state.w[5 * len(rig.lift.wheels)] = 15.0
    samples = rig.march(0.5)
    late = (samples.time > 0.1) & (samples.time < 0.4)
    slope = np.polyfit(samples.time[late], rates(rig, samples)[late], 1)[0]
    drag = 0.9 * 0.15 / 4.0
    claim(
        "slowing of a wheel that drives its unfed motor back through a gear of 70 %",
        "free body: drag / (J_motor N² + η J_wheel) (derived here)",
        -drag / (3.6e-3 + 0.7 * 1.28e-3),
        slope,
        0.01,
        "rad/s²",
        "shaft of 500 N m/rad instead of a rigid one",
    )


def test_wind_up_and_torsional_frequency(claim):
    """A handbook shaft: 6 mm of steel, 0.4 m long."""
    shaft = 'length = "400 mm"\ndiameter = "6 mm"\nmaterial = "steel"\n'
    handbook = "J. P. Den Hartog, Mechanical Vibrations (from memory); G = 79.3 GPa"
    rig = bare('kind = "speed"\nchain_speed = "0.1 m/s"\n', 1200, shaft=shaft)
    stiffness = float(rig.drive["stiffness"])
    claim("stiffness of that shaft", handbook, 25.2242401, stiffness, 0.01, "N m/rad", "G of steel")
    rig.drive["damping"] = 0.0
    rig.state.w[rig.wheel("tail")[1] + SPIN] = 1.0
    samples = rig.march(0.5)
    got = frequency(samples.time, rates(rig, samples))
    expected = 72.9690269 * math.sqrt(stiffness / 25.2242401)
    claim(
        "torsional frequency of a disk on it",
        handbook,
        expected,
        got,
        0.005,
        "Hz",
        "samples of 1 ms",
    )
    rig = bare(motor(6000, 30, 1, 100, inertia=300), 1200, shaft=shaft)
    rig.drive["supply"], rig.drive["damping"], rig.drive["drag_torque"] = 1, 0.0, 0.0
    rig.state.w[rig.wheel("tail")[1] + SPIN] = 1.0
    rig.state.w[5 * len(rig.lift.wheels)] = -4.0
    samples = rig.march(0.5)
    claim(
        "torsional frequency of two disks on it",
        handbook,
        163.163704 * math.sqrt(stiffness / 25.2242401),
        frequency(samples.time, rates(rig, samples)),
        0.005,
        "Hz",
        "samples of 1 ms",
    )


def frequency(time, signal):
    """Frequency of a steady swing about its mean [Hz], from its upward crossings."""
    swing = signal - signal.mean()
    up = np.flatnonzero((swing[:-1] < 0.0) & (swing[1:] >= 0.0))
    cross = time[up] - swing[up] * np.diff(time)[up] / (swing[up + 1] - swing[up])
    return (len(cross) - 1) / (cross[-1] - cross[0])


def test_backlash(claim):
    """On reversal the wheel stands still while play and wind-up are taken back."""
    shaft = 'stiffness = "5 N m/rad"\ndamping = "0.01 N m s/rad"\nbacklash = "1 deg"\n'
    rig = bare('kind = "speed"\nchain_speed = "0.1 m/s"\n', 500, "20 mN m", shaft)
    profile(rig, 0.5)
    rig.march(0.5)
    profile(rig, -0.5)
    samples = rig.march(0.4)
    rate = rates(rig, samples)
    moving = np.flatnonzero(rate < -0.1)
    claim(
        "turn lost on reversal: play of 1° and the wind-up of 20 mN m",
        "backlash + 2 T/k (derived here)",
        math.radians(1.0) + 2.0 * 0.02 / 5.0,
        0.5 * samples.time[moving[0]] - 0.5 * (rig.time - 0.4),
        0.06,
        "rad",
        "the wheel must first gather speed; samples of 1 ms are 2 % of the time",
    )


def test_dragged_load_does_not_stick(claim):
    """Friction alike at rest and in motion: the load starts late, and never sticks again.

    The handbook's stick-slip needs a static friction above the sliding one; with both alike its
    formulas give a stick time of zero and a load that swings between standing and twice the speed.
    """
    shaft = 'stiffness = "2 N m/rad"\ndamping = "0 N m s/rad"\n'
    rig = bare('kind = "speed"\nchain_speed = "0.1 m/s"\n', 1200, "30 mN m", shaft)
    rig.drive["damping"] = 0.0
    profile(rig, 0.5)
    samples = rig.march(0.6)
    rate = rates(rig, samples)
    source = "torsional stick-slip with equal friction (derived here; novasolver stick-slip page)"
    first = samples.time[np.flatnonzero(rate > 0.01)[0]]
    claim(
        "time until a load of 30 mN m friction starts, dragged at 0.5 rad/s by 2 N m/rad",
        source, 0.03, first, 2.5e-3, "s", "rises with the square of time; samples of 1 ms",
        absolute=True,
    )  # fmt: skip
    claim("its largest speed", source, 1.0, rate.max(), 0.02, "rad/s", "first-order step")
    late = samples.time > 0.05
    claim(
        "its frequency", source, 129.099445 / (2.0 * math.pi),
        frequency(samples.time[late], rate[late]), 0.01, "Hz", "first-order step",
    )  # fmt: skip
    assert rate.min() > -0.02


def test_overrunning_clutch(claim):
    """A wheel that runs ahead of its drive is let go, and taken again when it has slowed."""
    drive = 'kind = "speed"\nchain_speed = "0.1 m/s"\noverrunning = true\n'
    rig = bare(drive, 1200, "2 mN m")
    profile(rig, 1.0)
    rig.state.w[rig.wheel("tail")[1] + SPIN] = 5.0
    samples = rig.march(0.4)
    rate = rates(rig, samples)
    free = samples.time < 0.2
    claim(
        "slowing of a wheel that overruns its clutch, by 2 mN m of bearing drag",
        "free body: T/J (derived here)",
        -2e-3 / 1.2e-4,
        np.polyfit(samples.time[free], rate[free], 1)[0],
        0.005,
        "rad/s²",
        "first-order step",
    )
    assert abs(samples.drive[free, 0]).max() < 1e-9
    assert rate[-1] == pytest.approx(1.0, abs=0.05)


def test_backstop():
    """Nothing turns a wheel back that a backstop holds; forward it is free."""
    drive = 'kind = "speed"\nchain_speed = "0.1 m/s"\nbackstop = true\n'
    rig = bare(drive, 1200)
    rig.drive["low"] = rig.drive["high"] = 0.0
    base = rig.wheel("tail")[1]
    start = float(rig.state.q[base + SPIN])
    rig.state.w[base + SPIN] = -1.0
    samples = rig.march(0.1)
    most = math.sqrt(1.2e-4 / float(rig.drive["backstop_stiffness"]))
    assert -1.1 * most < (angles(rig, samples) - start).min() < 0.0
    assert rates(rig, samples)[-1] > -1e-9
    rig.state.w[base + SPIN] = 2.0
    samples = rig.march(0.1)
    np.testing.assert_allclose(rates(rig, samples), 2.0, rtol=1e-9)


@pytest.mark.parametrize(("polarity", "turns"), [("as wired", -1.0), ("rectified", 1.0)])
def test_polarity(polarity, turns):
    """A reversed supply turns a plain drive back; a rectified one goes on the right way."""
    drive = motor().replace("[drive.motor]", f'polarity = "{polarity}"\n[drive.motor]')
    rig = bare(drive, 1200)
    rig.march(0.5)
    rig.conductor().carry_out(Action(rig.time, "supply_reversed", None), rig.time)
    samples = rig.march(1.5)
    forward = float(rig.drive["forward"])
    assert rates(rig, samples)[-1] * forward * turns == pytest.approx(628.3 / 30.0, rel=0.01)


def test_supply_cut_open_and_shorted(claim):
    """With open terminals drag alone slows the rotor; shorted it brakes by its own line."""
    drag = 0.9 * 0.15 / 4.0
    found = []
    for supply in (1, 2):
        rig = bare(motor(efficiency=100), 12800)
        rig.march(1.5)
        rig.drive["supply"] = supply
        began = rig.time
        samples = rig.march(0.1)
        found.append((samples.time - began, rates(rig, samples)))
    inertia = 3.6e-3 + 1.28e-3
    free = 628.318531 / 30.0
    time, rate = found[0]
    late = time > 0.01
    claim(
        "slowing after a supply cut, terminals open",
        "free body: drag / J (derived here)",
        -drag / inertia,
        np.polyfit(time[late], rate[late], 1)[0],
        0.01,
        "rad/s²",
        "shaft of 500 N m/rad instead of a rigid one",
    )
    tau = inertia * free / 0.9
    time, rate = found[1]
    asymptote = drag * free / 0.9
    expected = (rate[0] + asymptote) * math.exp(-(time[-1] - time[0]) / tau) - asymptote
    claim(
        "speed 0.1 s after a supply cut, terminals shorted",
        "torque-speed line at zero voltage (derived here)",
        expected,
        rate[-1],
        0.01,
        "rad/s",
        "shaft of 500 N m/rad instead of a rigid one",
    )


def test_knock_momentum(claim):
    """A knock of the frame moves what floats in it by the pulse's integral; its work is booked."""

    rig = Rig(rig_text()).afloat()
    masses = rig.masses()
    total = times_masses(masses, np.ones(rig.n, complex)).sum().real
    rig.world["knock_x"], rig.world["knock_y"] = 30.0, -40.0
    rig.world["knock_start"], rig.world["knock_time"] = 0.01, 0.02
    samples = rig.march(0.05)
    momentum = times_masses(masses, pin_velocities(rig.state, rig.n)).sum()
    gained = 2.0 * 0.02 / math.pi
    claim(
        "momentum that a half-sine knock of 50 m/s² and 20 ms leaves in a floating chain",
        "integral of the pulse: 2 A T m/π",
        50.0 * gained * total,
        abs(momentum),
        1e-4,
        "N s",
        "the pulse is summed in steps of 67 µs",
    )
    assert momentum.real < 0.0 < momentum.imag
    left, flows = residual(samples, 0.0)
    assert flows > 1e-3
    assert abs(left[-1]) < 1e-2 * samples.energy[-1, 1]
