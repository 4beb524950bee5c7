"""A recording of format 1, written on the first day, stays readable in every later version.

The file holds a few channels of a tenth of a second of what `tests/synthetic.py` makes.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np

from chainsim.recording import open_recording

FILE = Path(__file__).parents[1] / "data" / "format-1.lift.h5"


def test_format_1_can_be_read():
    rec = open_recording(FILE)
    assert rec.complete
    assert rec.attrs["format_version"] == 1
    assert rec.sprockets == ("head", "tail")
    assert [strand.carrying for strand in rec.strands] == [False, True]
    np.testing.assert_array_equal(rec.time, np.arange(26) / 250)
    assert rec["links/tension"].shape == (26, 60)
    # Half the hung weight and the wrap's at the foot: (0.3 + 4 * 0.0015) kg * 9.80665 m/s^2 / 2.
    np.testing.assert_allclose(rec["links/tension"].min(), 1.500, atol=1e-3)  # written digits
    assert rec.events[0].text == "drive starts, ramp of 0.5 s"
    assert rec.extremes["link_tension"].unit == "N"
    assert rec.modes[0].kind == "take-up tail"
    assert rec.scenario_texts["text"].startswith("format = 1\n")
