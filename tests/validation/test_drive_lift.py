"""Drives on a whole lift: what runs back, what turns, what a jam stores."""

import math

import numpy as np

from tests.validation.rig import G
from tests.validation.small_lift import lifted

HELD = (
    ('model = "rolling"', 'model = "fixed"'),
    ('discharge = { at = ["-40 mm", "140 mm"], mouth = "90 mm", slope = "10 deg" }', ""),
)
LOADED = (
    'feed = { kind = "set down", rate = "1.5 /s" }',
    'feed = "every pocket"\nstart = "loaded"',
)
MOTOR = """kind = "motor"
chain_speed = "0.1 m/s"
[drive.motor]
supply = "12 V"
no_load_speed = "4500 rev/min"
stall_torque = "20 mN m"
no_load_current = "0.002 A"
stall_current = "1.2 A"
gear_ratio = 60
gear_efficiency = "70 %"
back_drivable = BACK
inertia = "1 g cm2"
"""
CUT = '[[event]]\nat = "1.5 s"\nkind = "supply_cut"\nterminals = "open"\n'


def motor(back):
    """Exchange the speed drive for a motor."""
    old = 'kind = "speed"\nchain_speed = "0.1 m/s"\nramp = "0.3 s"\n'
    return old, MOTOR.replace("BACK", back)


def test_load_runs_back(claim):
    """A gear that can be driven back lets it run: acceleration of the free body."""
    rec = lifted(200, *HELD, LOADED, motor("true"), more=CUT)
    rate = rec["sprockets/rate"][:, 0].astype(float)
    assert rate.min() < -5.0
    late = (rec.time > 1.5) & (rate < -2.0) & (rate > -7.0) & (rec.time < 2.3)
    slope = np.polyfit(rec.time[late], rate[late], 1)[0]
    loads = rec["carriers/loaded"][late].sum(axis=1).mean()
    mean_radius = 8 * 0.01 / (2.0 * math.pi)
    torque = loads * 0.02 * G * mean_radius
    moving = (48 * 1e-3 + 12 * 2e-3 + loads * 0.02) * mean_radius**2
    drag = 0.02 * 60 * 0.002 / 1.2
    expected = -(0.7 * torque - drag) / (1e-7 * 3600 + 0.7 * moving)
    claim(
        "run-back of a loaded lift through a gear of 70 %, its motor unfed",
        "free body: (η T - drag)/(J_motor N² + η J_lift) (derived here)",
        expected, slope, 0.08, "rad/s²", "teeth take about 5 % of the load's torque",
    )  # fmt: skip


def test_hung_unit_turns_until_its_weight_balances_the_torque(claim):
    """The drive unit hangs in the loop and carries its motor: how far it leans, free body."""
    rec = lifted(
        200,
        *HELD,
        LOADED,
        ('sprocket = "head"\nkind', 'sprocket = "tail"\nreaction = "mount"\nkind'),
        (
            'mount = { kind = "hung", mass = "0.5 kg", free = "y", damping = "5 N s/m" }',
            'mount = { kind = "hung", mass = "0.5 kg", free = "y", damping = "5 N s/m", '
            'center_of_mass = ["0 mm", "-40 mm"], inertia = "10 kg cm2" }',
        ),
    )
    late = rec.time > rec.time[-1] - 2.4
    lean = rec["mounts/angle"][late, 1].mean()
    torque = rec["drive/torque"][late].mean()
    assert abs(torque) > 5e-3
    claim(
        "moment of the weight of a hung drive unit over its drive's torque",
        "free body of the unit: m g r sin φ = T",
        1.0,
        abs(0.5 * G * 0.04 * np.sin(rec["mounts/angle"][late, 1]).mean() / torque),
        0.03,
        "",
        "means over six carrier spacings; the unit sways",
    )
    assert lean * torque < 0.0


def test_jam_stores_and_lets_go(claim):
    """A caught pocket winds the lift up until the jam gives; what it had stored is booked."""
    jam = (
        '[[event]]\nat = "1.5 s"\nkind = "jam"\nheight = "100 mm"\n'
        'stiffness = "2 kN/m"\nrelease_force = "8 N"\n'
    )
    rec = lifted(200, *HELD, more=jam)
    kinds = [event.kind for event in rec.events]
    assert "jam_let_go" in kinds
    claim(
        "energy that a jam of 2 kN/m had stored when it let go at 8 N",
        "F²/2k",
        8.0**2 / (2.0 * 2000.0) * 1e3,
        rec["energy/loss_jam"][-1] * 1e3,
        0.01,
        "mJ",
        "it lets go at the first step beyond its force",
    )
