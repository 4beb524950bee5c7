"""The energy audit closes whatever happens to the balls; what a ball costs to lift."""

import numpy as np
import pytest

from chainsim.kernels.layout import LEDGER
from tests.validation.rig import G
from tests.validation.small_lift import lifted

HELD = (
    ('model = "rolling"', 'model = "fixed"'),
    ('discharge = { at = ["-40 mm", "140 mm"], mouth = "90 mm", slope = "10 deg" }', ""),
)
LOADED = ('rate = "1.5 /s" }', 'rate = "1.5 /s" }\nstart = "loaded"')
STOP = '[[event]]\nat = "2 s"\nkind = "stop"\n[[event]]\nat = "3 s"\nkind = "start"\n'
KNOCK = (
    '[[event]]\nat = "2 s"\nkind = "knock"\nduration = "20 ms"\n'
    'acceleration = "40 m/s2"\ndirection = "20 deg"\n'
)
CASES = {
    "held balls, loaded and unloaded": (HELD, STOP),
    "rolling balls, all kept": ((), ""),
    "rolling balls, knocked out of their pockets": ((LOADED,), KNOCK),
}


@pytest.mark.parametrize("case", CASES)
def test_audit_closes(claim, case):
    changes, more = CASES[case]
    rec = lifted(200, *changes, more=more)
    fates = {row.fate for row in rec.balls}
    assert ("spilled" in fates) == ("out of" in case)
    left = abs(rec["energy/residual"][-1])
    names = (*LEDGER, "kinetic", "potential", "stored")
    flows = sum(np.abs(np.diff(rec[f"energy/{name}"])).sum() for name in names)
    work = rec["energy/work_drive"][-1]
    assert work > 0.0
    for name in LEDGER:
        if name.startswith("loss_"):
            assert np.diff(rec[f"energy/{name}"]).min() > -1e-9, name
    balance = "balance of energy"
    claim(
        f"energy unaccounted for over the drive's work, {case}",
        balance, 0.0, 100.0 * left / work, 1.0, "%", "stated bound", absolute=True,
    )  # fmt: skip
    claim(
        f"energy unaccounted for over all flows, {case}",
        balance, 0.0, 100.0 * left / flows, 0.1, "%", "stated bound", absolute=True,
    )  # fmt: skip


def test_work_per_ball(claim):
    """Held balls, no friction in joints and bearings: what seven balls take along, and the cost."""
    every = ('feed = { kind = "set down", rate = "1.5 /s" }', 'feed = "every pocket"')
    rec = lifted(200, *HELD, every)
    delivered = [row for row in rec.balls if row.fate == "delivered"]
    given = rec["energy/balls_out"][-1]
    claim(
        "energy that a delivered ball takes along over m g h",
        "lifting power m g h per ball, definition",
        1.0,
        given / (len(delivered) * 0.02 * G * 0.2),
        0.02,
        "",
        "the ball's speed: its pocket already swings round the head when it leaves",
    )
    late = (rec.time > 2.398) & (rec.time < 3.601)
    work = np.diff(rec["energy/work_drive"][late][[0, -1]])[0]
    efficiency = 3 * 0.02 * G * 0.2 / work
    claim(
        "efficiency of a lift without friction in joints and bearings",
        "power balance: below one",
        1.0, efficiency, 0.0, "", "teeth rub, every ball is jerked to speed", sense="at most",
    )  # fmt: skip
    assert efficiency > 0.8
