"""What the report page says, in which order, and how safely: without a browser."""

from __future__ import annotations

import math
import re
import subprocess
import sys
from html.parser import HTMLParser

import pytest

from chainsim.errors import CallError, RecordingError
from chainsim.findings import judge
from chainsim.report import compare, comparison_table, render_report
from chainsim.report.cautions import cautions
from chainsim.report.comparison import input_differences
from chainsim.report.page import CONTENTS, report_html
from chainsim.report.plots import PLOTS
from chainsim.report.sizing import sizing_rows
from chainsim.report.values import value_blocks
from chainsim.scenario import parse_scenario
from tests.synthetic import BALL_MASS, GRAVITY, PITCH, SEAT_RADIUS, synthetic_recording


@pytest.fixture(scope="module")
def recording():
    return synthetic_recording(duration=6.0, spilled_ball=2)


@pytest.fixture(scope="module")
def page(recording):
    return report_html(recording)


class Outline(HTMLParser):
    """Collects ids of sections and everything that could fetch something."""

    def __init__(self):
        super().__init__()
        self.sections: list[str] = []
        self.fetches: list[str] = []

    def handle_starttag(self, tag, attrs):
        names = dict(attrs)
        if tag == "section":
            self.sections.append(names["id"])
        self.fetches += [v for k, v in attrs if k in ("src", "href", "action", "data", "poster")]


def test_parts_stand_in_the_stated_order(page):
    outline = Outline()
    outline.feed(page)
    assert outline.sections == [i for i, _ in CONTENTS]
    assert outline.sections[:4] == ["verdict", "limits", "findings", "motion"]
    assert outline.sections[-4:] == ["sizing", "scenario", "provenance", "cautions"]


def test_nothing_is_fetched(page):
    outline = Outline()
    outline.feed(page)
    assert all(f.startswith(("#", "data:")) for f in outline.fetches)
    assert "http://" not in re.sub(r"http://www\.w3\.org/\S+", "", page)
    assert " style=" not in page  # the policy allows no style attribute


def test_twenty_seconds_stay_below_three_megabytes(tmp_path):
    long = synthetic_recording(duration=20.0, links=120, rate=100.0)
    path = render_report(long, tmp_path / "report.html")
    assert path.stat().st_size < 3_000_000


def test_every_finding_is_shown_with_its_outcome(page, recording):
    for finding in judge(recording):
        assert f'aria-label="{finding.title}: {finding.outcome}"' in page


def test_a_title_is_never_markup(recording, monkeypatch):
    monkeypatch.setattr("chainsim.report.page.plot_parts", lambda rec: [])

    class Renamed:
        """The same recording under a hostile title."""

        def __getattr__(self, name):
            return getattr(recording, name)

        def __getitem__(self, name):
            return recording[name]

        def __contains__(self, name):
            return name in recording

        scenario = recording.scenario.with_values({"title": "</title><script>alert(1)</script>"})

    html = report_html(Renamed())
    assert "<script>alert" not in html
    assert "&lt;script&gt;alert(1)" in html


def test_every_value_is_told_with_its_origin(recording):
    rows = {row[0]: row[1:] for block in value_blocks(recording.scenario) for row in block["rows"]}
    assert rows["chain.pitch"] == ("10 mm", "given", "")
    assert rows["chain.link_damping"][1] == "from the kind of chain: moulded_sturdy"
    assert " to " in rows["chain.link_damping"][2]
    assert rows["frame.gravity"][1].startswith("assumed")
    assert set(rows) <= set(recording.scenario.origins())


def test_falling_ball_caution_has_the_energy_of_its_height(recording):
    text = next(c.text for c in cautions(recording) if c.title == "A ball that falls")
    # From the lowest to the highest pin: 26 links between the axles, a seat radius at each end.
    energy = BALL_MASS * GRAVITY * (26 * PITCH + 2 * SEAT_RADIUS)
    found = float(re.search(r"([\d.]+) mJ", text)[1])
    assert found == pytest.approx(1e3 * energy, rel=0.01)


def test_hung_mass_caution_names_mass_and_drop(recording):
    text = next(c.text for c in cautions(recording) if c.title == "Hung masses")
    assert "0.3 kg at sprocket tail" in text
    assert "20 mm between its stops" in text
    assert f"{1e3 * 0.3 * GRAVITY * 0.02:.1f} mJ" in text


def test_cautions_admit_what_was_not_simulated(recording):
    texts = {c.title: c.text for c in cautions(recording)}
    assert "No stop was simulated" in texts["Overrun"]
    assert "not known from this run" in texts["Run-back"]
    assert "meets sprocket head" in texts["Nip places"]


def test_sizing_rows_stand_beside_simulated_values(recording):
    rows = {row.name: row for row in sizing_rows(recording)}
    rate = rows["tooth rate"]
    assert rate.closed_form == "15 Hz"  # 0.15 m/s over 10 mm
    assert float(rate.simulated.split()[0]) == pytest.approx(15.0, rel=0.01)
    foot = rows["tension of tail-head leaving tail"]
    closed, simulated = (float(text.split()[0]) for text in (foot.closed_form, foot.simulated))
    assert simulated == pytest.approx(closed, rel=0.05)


def test_comparison_names_what_differs_and_the_change_of_margin(recording):
    other = synthetic_recording(duration=6.0, chain_speed=0.2)
    comparison = compare([recording, other])
    assert comparison.names == ("synthetic (1)", "synthetic (2)")
    assert [d.key for d in comparison.inputs] == ["drive.chain_speed"]
    assert comparison.inputs[0].values == ("150 mm/s", "200 mm/s")
    links = next(row for row in comparison.findings if row.name == "links_hold")
    assert links.changes[0] == pytest.approx(links.margins[1] - links.margins[0])
    seated = next(row for row in comparison.findings if row.name == "balls_stay_seated")
    assert seated.outcomes == ("fails", "holds")
    assert seated.margins[0] is None
    assert seated.changes == (None,)


def test_comparison_of_scenarios_read_back_from_their_recordings(recording):
    stored = parse_scenario(recording.scenario.resolved_toml(), file="stored.toml")
    changed = stored.with_values({"chain.play": "0.05 mm"})
    assert [d.key for d in input_differences([stored, changed])] == ["chain.play"]


def test_comparison_on_the_terminal_needs_no_color(recording):
    from rich.console import Console

    console = Console(width=100, record=True, file=open("/dev/null", "w"))  # noqa: SIM115
    console.print(comparison_table(compare([recording, recording])))
    text = console.export_text()
    assert "same in every value" in text
    assert "balls stay seated" in text
    assert "fails" in text


def test_comparison_of_one_is_refused(recording):
    with pytest.raises(CallError, match="two or more"):
        compare([recording])


def test_the_package_imports_no_plotting_by_itself():
    program = "import sys, chainsim.report; sys.exit('matplotlib' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", program], check=False).returncode == 0


def test_scene_is_valid_json_without_nan(page):
    import json

    text = re.search(r'<script type="application/json" id="scene">(.*?)</script>', page, re.S)[1]
    scene = json.loads(text, parse_constant=lambda name: pytest.fail(f"{name} is no JSON"))
    assert all(math.isfinite(t) for t in scene["time"])


class Partly:
    """A recording of which some channels were not kept, with the findings of the whole."""

    def __init__(self, whole, hidden):
        self._whole, self._hidden = whole, hidden
        self.findings = judge(whole)

    def __getattr__(self, name):
        return getattr(self._whole, name)

    def __contains__(self, name):
        return not name.startswith(self._hidden) and name in self._whole

    def __getitem__(self, name):
        return self.read(name)

    def read(self, name, window=slice(None)):
        if name not in self:
            raise RecordingError(f"holds no '{name}'")
        return self._whole.read(name, window)

    def names(self):
        return [name for name in self._whole.names() if name in self]


@pytest.mark.parametrize(
    "hidden", [("pins/", "links/", "balls/"), ("drive/", "mounts/", "strands/", "energy/")]
)
def test_a_recording_that_holds_less_gets_a_page_all_the_same(recording, hidden, monkeypatch):
    few = [p for p in PLOTS if p.name in ("lift", "strand-tension", "drive", "takeup-travel")]
    monkeypatch.setattr("chainsim.report.page.PLOTS", few)
    html = report_html(Partly(recording, hidden))
    assert ('id="player"' in html) == (hidden[0] != "pins/")
    assert "Cautions" in html


def test_too_few_samples_are_refused_by_name():
    with pytest.raises(RecordingError, match="2 samples"):
        report_html(synthetic_recording(duration=0.004))
