"""How much a tail-driven lift must hang from its chain: slack comes at the weight of the balls."""

import numpy as np
import pytest

from tests.validation.rig import G
from tests.validation.small_lift import lifted

BALL = 0.02
WRAP = 4 * 1e-3 + 2e-3
"""Chain and carriers on the tail's wrap: four links and one carrier [kg]."""
ON_PIN_LINE = (
    'pocket = { floor = "18 mm", lip = "5 mm", tilt = "5 deg", offset = "4 mm" }',
    'pocket = { floor = "16 mm", lip = "5 mm", tilt = "0 deg", offset = "-8 mm" }',
)
CUT = 15e-3
"""Height of the cut above the axle [m]."""
FREE_BODY = "free body of the tail, common practice (job of the take-up), no source"


def slow_run(height, drive, hung):
    """A slow run with held balls on the pin line, started loaded."""
    return lifted(
        height,
        ('sprocket = "head"\nkind', f'sprocket = "{drive}"\nkind'),
        ('chain_speed = "0.1 m/s"', 'chain_speed = "0.04 m/s"'),
        ("0.5 kg", f"{hung:.6f} kg"),
        ON_PIN_LINE,
        ('model = "rolling"', 'model = "fixed"'),
        (
            'feed = { kind = "set down", rate = "1.5 /s" }',
            'feed = "every pocket"\nstart = "loaded"',
        ),
        ('discharge = { at = ["-40 mm", "140 mm"], mouth = "90 mm", slope = "10 deg" }', ""),
    )


def foot_pull(rec):
    """Vertical pull at the foot of the rising strand, and the weight of the balls on it [N].

    Means over two whole carrier spacings, of the link that crosses a plane one and a half pitches
    above the tail's axle, clear of its teeth; what hangs between plane and axle is taken off.
    """
    late = rec.time > rec.time[-1] - 2.0
    pins = rec["pins/position"][late].astype(float)
    tension = rec["links/tension"][late].astype(float)
    plane = rec["sprockets/center"][late][:, 1, 1] + CUT
    ahead = np.roll(pins, -1, axis=1)
    crosses = (pins[..., 1] < plane[:, None]) & (ahead[..., 1] >= plane[:, None])
    length = np.hypot(*np.moveaxis(ahead - pins, 2, 0))
    upright = (ahead[..., 1] - pins[..., 1]) / length
    pull = (tension * upright * crosses).sum(axis=1).mean()
    between = CUT / 0.04 * (4e-3 + 2e-3 + BALL) * G
    return pull - between, rec["carriers/loaded"][late].sum(axis=1).mean() * BALL * G


@pytest.mark.parametrize("height", [200, 400])
def test_slack_threshold(claim, height):
    balls = height // 40 * BALL
    shares = (1.2, 1.8, 2.4, 3.0)
    pulls, weights = [], []
    for share in shares:
        pull, carried = foot_pull(slow_run(height, "tail", share * balls - WRAP))
        pulls.append(pull)
        weights.append(carried)
    slope, start = np.polyfit([share * balls * G for share in shares], pulls, 1)
    claim(
        f"hung weight at which the foot of a tail-driven lift of {height} mm goes slack",
        FREE_BODY,
        np.mean(weights),
        -start / slope,
        0.03,
        "N",
        "balls come and go by whole ones; teeth rub",
    )
    claim(
        f"share of the hung weight that this foot carries, per newton more ({height} mm)",
        FREE_BODY, 0.5, slope, 0.03, "", "fitted over four weights",
    )  # fmt: skip


@pytest.mark.parametrize("height", [200, 400])
def test_head_driven_foot(claim, height):
    balls = height // 40 * BALL
    pull, _ = foot_pull(slow_run(height, "head", 1.5 * balls - WRAP))
    claim(
        f"pull at the foot of a head-driven lift of {height} mm: half of what hangs",
        FREE_BODY, 0.5 * 1.5 * balls * G, pull, 0.03, "N", "teeth rub; two carrier spacings",
    )  # fmt: skip
