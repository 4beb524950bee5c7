"""`chainsim run` and what follows from its recording: judged, recorded, reported, interrupted."""

import json
import os
import resource
import signal
import subprocess
import sys
import time
from pathlib import Path

import h5py
import pytest
from click.testing import CliRunner

from chainsim.cli.main import commands
from chainsim.cli.progress import RunProgress
from chainsim.findings.table import ROWS
from chainsim.recording import open_recording
from chainsim.scenario import read_scenario

SCENARIOS = Path(__file__).parents[1] / "scenarios"
LIFT = Path(__file__).parent / "data" / "foyer.toml"
SHORT = ("--set", "run.duration=3 s", "--set", "run.settle=1 s")
ENDLESS = ("--set", "run.duration=20000 s", "--set", "run.sample_rate=50 Hz")


def chainsim(*arguments):
    return CliRunner().invoke(commands, [str(argument) for argument in arguments])


@pytest.fixture(scope="module")
def short(tmp_path_factory):
    """A short run of a lift: folder, and what the command printed as JSON."""
    folder = tmp_path_factory.mktemp("short")
    done = chainsim("run", LIFT, *SHORT, "--out", folder, "--json")
    assert done.exit_code in (0, 1), done.output
    return folder, done


def test_one_object_holds_everything(short):
    folder, done = short
    data = json.loads(done.stdout)
    assert data["recording"] == str(folder / "foyer.lift.h5")
    assert data["report"] == str(folder / "foyer.html")
    assert data["complete"] is True
    assert set(data["situations"]) == {"run", "not_run"}
    assert [f["name"] for f in data["findings"]] == [row.judge.__name__ for row in ROWS]
    for finding in data["findings"]:
        assert finding["outcome"] in ("holds", "close", "fails", "not judged")
        assert ("why" in finding) == (finding["outcome"] == "not judged")
        assert {"value", "unit", "limit", "margin", "time", "place", "note"} <= set(finding)


def test_status_follows_from_the_findings(short):
    _, done = short
    outcomes = {finding["outcome"] for finding in json.loads(done.stdout)["findings"]}
    assert done.exit_code == ("fails" in outcomes)


def test_recording_and_page_are_there(short):
    folder, _ = short
    with h5py.File(folder / "foyer.lift.h5") as file:
        assert file.attrs["complete"]
        assert file["pins/position"].attrs["units"] == "m"
        text = file["scenario/text"][()].decode()
    assert "# changed: run.duration=3 s" in text
    assert "<title>" in (folder / "foyer.html").read_text(encoding="utf-8")
    assert not list(folder.glob("*.partial"))


def test_progress_is_plain_where_there_is_no_terminal(short):
    _, done = short
    assert "simulated s per s" in done.stderr
    assert "\x1b" not in done.output
    assert "\r" not in done.output


def test_from_python_the_same_findings(short):
    import chainsim as cs

    _, done = short
    changes = SHORT[1::2]
    rec = cs.run(cs.read_scenario(LIFT, changes))
    told = {f["name"]: (f["outcome"], f["value"]) for f in json.loads(done.stdout)["findings"]}
    assert {f.name: (f.outcome, f.value) for f in rec.findings} == told


def test_names_that_are_taken_are_kept(short, tmp_path):
    for name in ("foyer", "foyer-2"):
        done = chainsim("run", LIFT, *SHORT, "--out", tmp_path, "--json", "--no-report")
        data = json.loads(done.stdout)
        assert data["recording"] == str(tmp_path / f"{name}.lift.h5")
        assert data["report"] is None
    before = (tmp_path / "foyer.lift.h5").stat().st_ino
    done = chainsim("run", LIFT, *SHORT, "--out", tmp_path, "--force", "--quiet", "--no-report")
    assert (tmp_path / "foyer.lift.h5").stat().st_ino != before
    assert len(list(tmp_path.iterdir())) == 2
    assert done.stderr == ""


def test_a_stranger_reads_verdict_findings_and_places_within_80_columns(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    done = chainsim("run", LIFT, *SHORT)
    lines = done.stdout.splitlines()
    assert max(map(len, lines)) <= 80
    order = ["Foyer wall", "finding ", "Balls", "Chain", "Space", "Drive", "Situations run",
             "Not run", "Recording", "Report"]  # fmt: skip
    starts = [next(i for i, line in enumerate(lines) if line.startswith(word)) for word in order]
    assert starts == sorted(starts)
    assert "Recording  out/foyer.lift.h5" in done.stdout


def test_a_failing_finding_has_status_1(tmp_path):
    done = chainsim("run", SCENARIOS / "too-fast.toml", "--out", tmp_path, "--no-report", "--json")
    assert done.exit_code == 1
    failing = {f["name"] for f in json.loads(done.stdout)["findings"] if f["outcome"] == "fails"}
    assert "balls_stay_seated" in failing


def test_missing_data_fails_only_when_strict(tmp_path):
    brief = ("--set", "run.duration=1 s", "--no-report", "--json", "--out", tmp_path)
    done = chainsim("run", LIFT, *brief)
    whys = {f.get("why") for f in json.loads(done.stdout)["findings"]}
    assert "not enough data" in whys
    assert done.exit_code == 0
    assert chainsim("run", LIFT, *brief, "--strict").exit_code == 1


def test_a_fault_of_one_file_does_not_keep_the_others_from_running(tmp_path, write_scenario):
    bad = write_scenario("format = 1\n", "bad.toml")
    done = chainsim("run", bad, LIFT, *SHORT, "--out", tmp_path, "--no-report", "--json")
    assert done.exit_code == 2
    first, second = json.loads(done.stdout)
    assert first["file"] == str(bad)
    assert first["status"] == 2
    assert Path(second["recording"]).exists()


def test_report_writes_page_plots_and_exports(short, tmp_path):
    folder, ran = short
    done = chainsim(
        "report", folder / "foyer.lift.h5", "--out", tmp_path, "--plots", tmp_path / "plots",
        "--csv", tmp_path / "csv", "--mat", tmp_path, "--json",
    )  # fmt: skip
    data = json.loads(done.stdout)
    assert data["findings"] == json.loads(ran.stdout)["findings"]
    assert done.exit_code == ran.exit_code
    assert Path(data["report"]) == tmp_path / "foyer.html"
    assert Path(data["mat"]) == tmp_path / "foyer.mat"
    assert (tmp_path / "plots" / "strand-tension.svg").exists()
    heading = (tmp_path / "csv" / "links_tension.csv").read_text(encoding="utf-8").split("\r\n")[0]
    assert heading.startswith("time [s],tension link 0 [N]")


def test_compare_names_what_differs(short, tmp_path):
    folder, _ = short
    heavier = ("--set", "sprocket.tail.mount.mass=0.4 kg")
    done = chainsim("run", LIFT, *SHORT, *heavier, "--out", tmp_path, "--no-report", "--json")
    other = json.loads(done.stdout)["recording"]
    done = chainsim("compare", folder / "foyer.lift.h5", other, "--out", tmp_path, "--json")
    assert done.exit_code == 0
    data = json.loads(done.stdout)
    assert [d["key"] for d in data["inputs"]] == ["sprocket.tail.mount.mass"]
    assert Path(data["report"]).exists()
    text = chainsim("compare", folder / "foyer.lift.h5", other, "--out", tmp_path).stdout
    assert "300 g" in text
    assert "400 g" in text


def test_build_writes_sheet_and_outlines(short, tmp_path):
    folder, ran = short
    done = chainsim("build", folder / "foyer.lift.h5", "--out", tmp_path, "--json")
    assert done.exit_code == ran.exit_code
    data = json.loads(done.stdout)
    assert all(Path(path).exists() for path in data["files"].values())
    assert {"outline head, SVG", "outline tail, SVG"} <= set(data["files"])
    done = chainsim("build", LIFT, "--out", tmp_path)
    assert done.exit_code == 0
    assert "NOT SIMULATED" in done.stdout


def spawn(*arguments, cwd, **settings):
    """Start a command as a user does, in a process of its own."""
    return subprocess.Popen(
        [sys.executable, "-m", "chainsim", *map(str, arguments)],
        stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, cwd=cwd, **settings,
    )  # fmt: skip


def wait_for_recording(folder: Path, process) -> None:
    """Wait until samples are on the disk."""
    for _ in range(600):
        if list(folder.glob("*.partial.tail")):
            return
        assert process.poll() is None, process.communicate()
        time.sleep(0.2)
    raise AssertionError("nothing was recorded in two minutes")


def test_ctrl_c_keeps_what_there_is(tmp_path):
    process = spawn("run", LIFT, *ENDLESS, "--out", tmp_path, "--json", cwd=tmp_path)
    wait_for_recording(tmp_path, process)
    process.send_signal(signal.SIGINT)
    output, errors = process.communicate(timeout=120)
    assert process.returncode == 130, errors
    assert "Traceback" not in errors
    data = json.loads(output)
    assert data["complete"] is False
    with open_recording(data["recording"]) as rec:
        assert not rec.complete
        assert len(rec.time) > 100


def test_after_a_kill_the_recording_can_be_reported(tmp_path):
    process = spawn("run", LIFT, *ENDLESS, "--out", tmp_path, cwd=tmp_path)
    wait_for_recording(tmp_path, process)
    process.kill()
    process.communicate()
    left = tmp_path / "foyer.lift.h5.partial"
    done = chainsim("report", left, "--json")
    assert done.exit_code in (0, 1), done.output
    assert json.loads(done.stdout)["complete"] is False


def test_a_full_disk_is_told_in_words(tmp_path):
    def hold_files_small():
        signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
        resource.setrlimit(resource.RLIMIT_FSIZE, (400_000, 400_000))

    process = spawn(
        "run", LIFT, *ENDLESS, "--out", tmp_path, cwd=tmp_path, preexec_fn=hold_files_small
    )
    _, errors = process.communicate(timeout=300)
    assert process.returncode == 3, errors
    assert "the disk is full" in errors
    assert "Traceback" not in errors


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write anywhere")
def test_a_folder_without_permission_is_told(tmp_path):
    tmp_path.chmod(0o500)
    done = chainsim("run", LIFT, "--out", tmp_path / "out")
    tmp_path.chmod(0o700)
    assert done.exit_code == 2
    assert "cannot be written to" in done.stderr


def test_first_compilation_is_announced_once(tmp_path, monkeypatch):
    monkeypatch.setattr("chainsim.cli.progress.will_compile", lambda: True)
    done = chainsim("run", LIFT, *SHORT, "--out", tmp_path, "--no-report")
    assert done.stderr.count("compiling the kernels") == 1
    monkeypatch.setattr("chainsim.cli.progress.will_compile", lambda: False)
    done = chainsim("run", LIFT, *SHORT, "--out", tmp_path, "--no-report")
    assert "compiling" not in done.stderr


def test_step_is_verified_on_request(tmp_path):
    brief = ("--set", "run.duration=1 s", "--no-report", "--quiet", "--json", "--out", tmp_path)
    data = json.loads(chainsim("run", LIFT, *brief, "--verify-step").stdout)
    assert [drift["name"] for drift in data["verify_step"]] == [row.judge.__name__ for row in ROWS]
    assert all(len(drift["outcomes"]) == 3 for drift in data["verify_step"])


def test_situations_are_run_on_request(tmp_path):
    brief = ("--set", "run.duration=1 s", "--no-report", "--quiet", "--json", "--out", tmp_path)
    done = chainsim("run", LIFT, *brief, "--situations", "stop, take-up blocked")
    data = json.loads(done.stdout)
    assert data["proving"]["situations"]["run"] == ["stop", "take-up blocked"]
    assert {"stop", "take-up blocked"} <= set(data["situations"]["run"])
    assert not {"stop", "take-up blocked"} & set(data["situations"]["not_run"])
    done = chainsim("run", LIFT, *brief, "--situations", "stoop")
    assert done.exit_code == 2
    assert "stoop" in done.stderr


def test_unsure_values_are_repeated_on_request(tmp_path, monkeypatch):
    from chainsim.study.unsure import Turn, Unsure

    turn = Turn("rate_met", "holds", "fails")
    found = [Unsure("chain.link_damping", "kind", 0.02, 0.1, 0.2, (turn,), (), 0.5, "rate_met")]
    monkeypatch.setattr("chainsim.study.unsure.unsure", lambda scenario, bench: found)
    brief = ("--set", "run.duration=1 s", "--no-report", "--out", tmp_path, "--unsure")
    data = json.loads(chainsim("run", LIFT, *brief, "--json").stdout)
    assert data["unsure"][0]["turns_at_low"] == [
        {"finding": "rate_met", "before": "holds", "after": "fails"}
    ]
    assert "Measure first: chain.link_damping" in chainsim("run", LIFT, *brief).stdout


class Terminal:
    """Collects what is written to a terminal."""

    def __init__(self):
        self.text = ""

    def isatty(self):
        return True

    def write(self, text):
        self.text += text

    def flush(self):
        pass


def test_progress_tells_speed_and_time_left():
    screen = Terminal()
    follow = RunProgress("demo", screen)
    follow(0.0, 40.0, 1.0)  # compiling took a second, which is no measure of the speed
    follow(10.0, 40.0, 3.0)
    # 10 s simulated in 2 s: 5 s per s; 30 s are left, which takes 6 s.
    assert "25%  10.0 of 40.0 s simulated, 5 simulated s per s, 6 s left" in screen.text
    follow.end()
    assert screen.text.endswith("demo: 10.0 s simulated in 3.0 s, 5 simulated s per s\n")


def test_scenarios_and_plans_go_through_sweep_and_limit(tmp_path):
    plan = SCENARIOS / "plans" / "head-or-tail.toml"
    done = chainsim("sweep", plan, "--out", tmp_path / "s", "--dry-run", "--json")
    assert done.exit_code == 0
    # Two ends to drive, nine masses, five speeds.
    assert json.loads(done.stdout)["planned"] == 2 * 9 * 5
    assert not (tmp_path / "s").exists()
    done = chainsim("sweep", plan, "--out", tmp_path / "s", "--list", "--json", "--part", "1/9")
    listed = json.loads(done.stdout)
    assert len(listed) == 10
    assert {run["state"] for run in listed} == {"to do"}


SMALL_PLAN = """\
format = 1
title = "Two speeds, for a test"
scenario = "{scenario}"
set = {{ "run.duration" = "0.5 s" }}

[[axis]]
key = "drive.chain_speed"
values = ["0.08 m/s", "0.09 m/s"]

[engine]
kind = "serial"
"""


def test_a_sweep_is_run_ranked_and_not_done_twice(tmp_path):
    plan = tmp_path / "plan.toml"
    plan.write_text(SMALL_PLAN.format(scenario=LIFT), encoding="utf-8")
    first = json.loads(chainsim("sweep", plan, "--csv", tmp_path / "t.csv", "--json").stdout)
    assert (first["computed"], first["reused"], first["failed"]) == (2, 0, 0)
    assert Path(first["report"]).exists()
    assert (tmp_path / "t.csv").read_text(encoding="utf-8").count("\n") == 3
    again = chainsim("sweep", plan)
    assert again.exit_code == 0
    assert "2 reused" in again.stderr
    assert "2 of 2 runs are completed" in again.stdout


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("takeup", "--finding", "rate_meet"), "did you mean 'rate_met'"),
        (("slack",), "takes up its own slack"),
        (("carriers.pocket.lipp",), "lip"),
        (("speed", "--from", "0.2"), "unit"),
        ((), "--mend"),
    ],
)
def test_limit_refuses_what_it_cannot_answer(arguments, words):
    done = chainsim("limit", LIFT, *arguments)
    assert done.exit_code == 2
    assert words in done.stderr
    assert "Traceback" not in done.output


def test_scenario_is_read_as_the_file_has_it(short):
    folder, _ = short
    with open_recording(folder / "foyer.lift.h5") as rec:
        asked = read_scenario(LIFT, SHORT[1::2])
        assert rec.scenario.sha256 == asked.sha256
