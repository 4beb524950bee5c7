"""Chain speed over a polygon: slow, stiff, damped lifts with their sprockets in phase."""

from functools import cache

import numpy as np
import pytest

from tests.validation.lifts import PITCH, recorded, speed_of_strand

SPEED = 0.02


@cache
def speed_over_teeth(teeth):
    """Speed of the middle of the carrying strand over eight teeth, and its times."""
    recording = recorded(
        teeth=teeth, links=48 + teeth, speed=SPEED, seconds=5.0, ramp=0.4, stiffness=500,
        damping=0.5, carriers="", tail='kind = "screwed", shift = "-0.1 mm"',
        tooth='tooth = { seat_clearance = "0 mm", friction = 0.0 }',
    )  # fmt: skip
    count = round(8 * PITCH / SPEED / (recording.time[1] - recording.time[0]))
    part = slice(-count, None)
    return speed_of_strand(recording, part, 0.08, 0.16), recording.time[part]


@pytest.mark.parametrize("teeth", [6, 8, 10, 16])
def test_speed_ripple(claim, teeth):
    speed, t = speed_over_teeth(teeth)
    wave = 2 * np.mean(speed * np.exp(-2j * np.pi * t * SPEED / PITCH))
    claim(
        f"first harmonic of the chain speed over its mean, {teeth} teeth",
        "Fourier series of the polygon's speed: 2/(z^2 - 1), checks B2", 2 / (teeth**2 - 1),
        abs(wave) / speed.mean(), 0.02, "", "stretch of the strands, ringing after engagement",
    )  # fmt: skip
    claim(
        f"mean chain speed, {teeth} teeth", "z p n, exact for a polygon", SPEED, speed.mean(), 1e-3,
        "m/s", "mean over the pins at whole samples",
    )  # fmt: skip


@pytest.mark.parametrize("teeth", [6, 8, 10])
def test_peak_to_peak_of_the_speed(claim, teeth):
    speed, _ = speed_over_teeth(teeth)
    # mean over the tooth passages, which leaves out the ringing that is not in step
    passage = speed.reshape(8, -1).mean(axis=0)
    smooth = np.convolve(np.tile(passage, 3), np.ones(9) / 9, "same")[
        len(passage) : 2 * len(passage)
    ]
    handbook = np.pi / teeth * (1 / np.sin(np.pi / teeth) - 1 / np.tan(np.pi / teeth))
    claim(
        f"chain speed, peak to peak over mean, {teeth} teeth",
        "handbook formula, Shigley, from memory",
        handbook, np.ptp(smooth) / speed.mean(), 0.15, "",
        "a pin that strikes its seat makes the links ring at the cusp of the curve",
        cause="the mean over nine samples that takes the ringing out also rounds the cusp off",
    )  # fmt: skip


def test_ten_teeth_come_closer_to_steady_than_six():
    """Common practice, no source."""
    assert np.std(speed_over_teeth(10)[0]) < 0.5 * np.std(speed_over_teeth(6)[0])
