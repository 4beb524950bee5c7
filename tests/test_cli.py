"""The command line without a run: help, starters, checks, faults in words, exit statuses."""

import json
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest
from click.testing import CliRunner

from chainsim.cli.main import commands
from chainsim.cli.quantities import recording_unit
from chainsim.scenario import LAYOUTS, json_schema, parse_scenario, starter

LIFT = Path(__file__).parent / "data" / "foyer.toml"
HEAVY = ("numpy", "scipy", "numba", "h5py", "matplotlib", "pydantic", "rich", "jinja2")


def chainsim(*arguments):
    """Run a command in this process; output and errors apart."""
    return CliRunner().invoke(commands, [str(argument) for argument in arguments])


def spawned(*arguments, cwd=None):
    """Run a command in a process of its own."""
    command = [sys.executable, "-m", "chainsim", *map(str, arguments)]
    return subprocess.run(command, capture_output=True, text=True, cwd=cwd, check=False)


@pytest.fixture
def broken(write_scenario):
    """Write the lift with a text replaced by another; the path."""

    def write(old: str, new: str) -> Path:
        text = LIFT.read_text(encoding="utf-8")
        assert old in text
        return write_scenario(text.replace(old, new), "broken.toml")

    return write


def imported_after(code: str) -> list[str]:
    """Heavy packages that are imported once a program has run."""
    program = f"{code}\nimport sys\nprint([n for n in {HEAVY!r} if n in sys.modules])"
    done = subprocess.run(
        [sys.executable, "-c", program], capture_output=True, text=True, check=True
    )
    return json.loads(done.stdout.splitlines()[-1].replace("'", '"'))


def test_help_imports_nothing_heavy():
    code = (
        "from click.testing import CliRunner\nfrom chainsim.cli.main import commands\n"
        "assert CliRunner().invoke(commands, ['--help']).exit_code == 0"
    )
    assert imported_after(code) == []


def test_the_package_alone_imports_nothing_heavy():
    assert imported_after("import chainsim") == []


@pytest.mark.parametrize("name", list(commands.commands))
def test_every_command_explains_itself(name):
    done = chainsim(name, "--help")
    assert done.exit_code == 0
    assert f" {name} " in chainsim("--help").output
    options = [p for p in commands.commands[name].params if p.param_type_name == "option"]
    undocumented = [option.name for option in options if not option.help]
    assert not undocumented


def test_python_m_chainsim_does_the_same():
    done = spawned("--version")
    assert done.returncode == 0
    assert done.stdout == chainsim("--version").stdout


@pytest.mark.parametrize("layout", LAYOUTS)
def test_new_prints_a_starter_that_can_be_read(layout):
    done = chainsim("new", "--layout", layout, "--height", "800 mm", "--rate", "0.5 /s")
    assert done.exit_code == 0
    assert done.stdout == starter(layout, "800 mm", rate="0.5 /s")
    parse_scenario(done.stdout)


def test_new_keeps_a_file_that_is_there(tmp_path):
    path = tmp_path / "lift.toml"
    assert chainsim("new", path).exit_code == 0
    first = path.read_text(encoding="utf-8")
    again = chainsim("new", path, "--height", "700 mm")
    assert again.exit_code == 2
    assert "--force" in again.stderr
    assert path.read_text(encoding="utf-8") == first
    assert chainsim("new", path, "--height", "700 mm", "--force").exit_code == 0
    assert path.read_text(encoding="utf-8") != first


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("--layout", "head-driven-hung-ider"), "did you mean 'head-driven-hung-idler'"),
        (("--height", "80"), "height"),
        (("--ball", "16 s"), "ball"),
        (("--rate", "1,5 /s"), "rate"),
    ],
)
def test_new_refuses_a_demand_it_cannot_read(arguments, words):
    done = chainsim("new", *arguments)
    assert done.exit_code == 2
    assert words in done.stderr
    assert done.stdout == ""


def test_new_as_json_names_the_file(tmp_path):
    done = chainsim("new", tmp_path / "a.toml", "--json")
    data = json.loads(done.stdout)
    assert data["file"] == str(tmp_path / "a.toml")
    assert tomllib.loads(data["scenario"])["format"] == 1


def test_schema_is_that_of_the_package():
    done = chainsim("check", "--schema")
    assert done.exit_code == 0
    assert json.loads(done.stdout) == json.loads(json.dumps(json_schema()))


def test_check_draws_and_sizes_within_80_columns():
    done = chainsim("check", LIFT, "--full")
    assert done.exit_code == 0
    lines = done.stdout.splitlines()
    assert max(map(len, lines)) <= 80
    for words in ("112 links", "pocket rate", "What would help most", "from the kind of chain"):
        assert words in done.stdout
    assert "\x1b" not in done.stdout


def test_check_simulates_nothing(monkeypatch):
    from chainsim.kernels import motion

    def refuse(*_):
        raise AssertionError("a kernel was called")

    for name in [n for n in vars(motion) if callable(getattr(motion, n)) and not n.startswith("_")]:
        monkeypatch.setattr(motion, name, refuse)
    assert chainsim("check", LIFT).exit_code == 0


def test_check_as_json_gives_sheet_and_values():
    done = chainsim("check", LIFT, "--json", "--full")
    data = json.loads(done.stdout)
    assert data["links"] == 112
    assert [choice["links"] for choice in data["link_choices"]] == [111, 112, 113]
    rows = {row["name"]: row for row in data["sizing"]}
    # One pocket every four links of 10 mm at 0.09 m/s.
    assert rows["pocket rate"]["value"] == pytest.approx(0.09 / 0.04)
    assert rows["pocket rate"]["unit"] == "s-1"
    values = {value["key"]: value for value in data["values"]}
    assert values["chain.link_mass"] | {"note": ""} == {
        "key": "chain.link_mass", "value": 1e-3, "unit": "kg", "source": "given",
        "low": 1e-3, "high": 1e-3, "note": "",
    }  # fmt: skip
    assert values["chain.link_damping"]["source"] == "kind"


def test_check_of_several_files_gives_an_array_and_the_worst_status(broken):
    done = chainsim("check", LIFT, broken("teeth = 8", "teeth = 3"), "--json")
    assert done.exit_code == 2
    good, bad = json.loads(done.stdout)
    assert good["links"] == 112
    assert bad["status"] == 2
    assert {problem["key"] for problem in bad["problems"]} == {
        "sprocket.head.teeth", "sprocket.tail.teeth",
    }  # fmt: skip


def test_check_writes_a_drawing_and_replaces_none(tmp_path):
    for name in ("foyer.svg", "foyer-2.svg"):
        done = chainsim("check", LIFT, "--out", tmp_path, "--json")
        assert json.loads(done.stdout)["drawing"] == str(tmp_path / name)
        assert (tmp_path / name).read_text(encoding="utf-8").startswith("<svg")
    chainsim("check", LIFT, "--out", tmp_path, "--force")
    assert len(list(tmp_path.iterdir())) == 2


def test_values_can_be_changed_in_the_call():
    done = chainsim("check", LIFT, "--set", "drive.chain_speed=0.18 m/s", "--json")
    rows = {row["name"]: row["value"] for row in json.loads(done.stdout)["sizing"]}
    assert rows["pocket rate"] == pytest.approx(0.18 / 0.04)


def test_warnings_are_told_with_their_key_and_fail_only_when_strict(broken):
    heavy = broken('diameter = "16 mm"', 'diameter = "16 mm"\nmass = "900 kg"')
    done = chainsim("check", heavy)
    assert done.exit_code == 0
    assert "warning: balls.mass: 900 kg is unusual" in done.stderr
    assert chainsim("check", heavy, "--strict").exit_code == 1
    assert chainsim("check", LIFT, "--strict").exit_code == 0


# One fault each: what is replaced in the lift, by what, and what the message must say.
FAULTS = {
    "unknown key": ("link_mass", "link_mas", "did you mean"),
    "no unit": ('pitch = "10 mm"', "pitch = 10", "unit"),
    "decimal comma": ('"0.5 s"', '"0,5 s"', "decimal"),
    "wrong kind of unit": ('"0.09 m/s"', '"0.09 kg"', "speed"),
    "Hz for a speed": ('rate = "1 /s"', 'rate = "1 Hz"', "Hz"),
    "too few teeth": ('name = "tail"\nteeth = 8', 'name = "tail"\nteeth = 3', "teeth"),
    "chain too short": ("links = 112", "links = 12", "links"),
    "half a link": ("every = 4", "every = 0.5", "whole"),
    "pocket too narrow": ('floor = "18 mm"', 'floor = "8 mm"', "ball"),
    "unknown sprocket": ('sprocket = "head"', 'sprocket = "haed"', "haed"),
    "no TOML": ("[chain]", "[chain", "broken.toml"),
    "newer format": ("format = 1", "format = 7", "format"),
    "not a number": ('"0.09 m/s"', '"nan m/s"', "nan"),
    "clockwise": ('center = ["0 mm", "520 mm"]', 'center = ["0 mm", "0.1 mm"]', "sprocket"),
}


@pytest.mark.parametrize("name", FAULTS)
@pytest.mark.parametrize("command", ["check", "run"])
def test_every_fault_is_told_in_words(name, command, broken, tmp_path):
    old, new, words = FAULTS[name]
    out = ("--out", tmp_path / "out")
    done = chainsim(command, broken(old, new), *out)
    assert done.exit_code == 2, done.output
    assert words in done.stderr
    assert "Traceback" not in done.output
    assert done.stdout == ""


def test_all_faults_are_told_at_once_with_file_and_line(broken):
    text = LIFT.read_text(encoding="utf-8")
    path = broken("link_mass", "link_mas")
    path.write_text(
        path.read_text(encoding="utf-8").replace('ramp = "0.5 s"', 'ramp = "0.5"'), encoding="utf-8"
    )
    done = chainsim("check", path)
    lines = done.stderr.splitlines()
    numbers = [text[: text.index(key)].count("\n") + 1 for key in ("link_mass", 'ramp = "0.5')]
    assert [line.split(": ")[0] for line in lines] == [f"{path}:{n}" for n in numbers]


@pytest.mark.parametrize("command", ["check", "run", "report", "compare", "sweep"])
def test_a_missing_file_is_no_traceback(command, tmp_path):
    out = () if command == "report" else ("--out", tmp_path / "out")
    done = chainsim(command, tmp_path / "nothing.toml", tmp_path / "nothing.toml", *out)
    if command == "sweep":
        done = chainsim(command, tmp_path / "nothing.toml")
    assert done.exit_code == 2
    assert "nothing.toml" in done.stderr
    assert "Traceback" not in done.output


@pytest.mark.parametrize("content", [b"", b"\xff\xfe\x00", b"\x89HDF\r\n\x1a\n" + b"\0" * 100])
@pytest.mark.parametrize("command", ["check", "report", "sweep"])
def test_a_foreign_file_is_no_traceback(command, content, tmp_path):
    path = tmp_path / "foreign"
    path.write_bytes(content)
    done = chainsim(command, path)
    assert done.exit_code == 2
    assert "foreign" in done.stderr


def test_a_folder_is_no_file(tmp_path):
    for command in ("check", "report", "sweep"):
        done = chainsim(command, tmp_path)
        assert done.exit_code == 2
        assert "Traceback" not in done.output


@pytest.mark.parametrize("arguments", [(), ("rnu",), ("check", "--no-such"), ("limit", LIFT)])
def test_a_wrong_call_has_status_2(arguments):
    assert chainsim(*arguments).exit_code == 2


def test_a_folder_that_cannot_be_written_to_is_told_before_the_run(tmp_path):
    taken = tmp_path / "taken"
    taken.write_text("no folder", encoding="utf-8")
    done = chainsim("run", LIFT, "--out", taken / "deep")
    assert done.exit_code == 2
    assert "cannot be written to" in done.stderr


def test_errors_in_json_stand_on_standard_output_too(tmp_path):
    done = chainsim("check", tmp_path / "nothing.toml", "--json")
    data = json.loads(done.stdout)
    assert data["status"] == done.exit_code == 2
    assert data["problems"][0]["file"].endswith("nothing.toml")
    assert data["error"] in done.stderr


def test_a_fault_of_chainsim_itself_is_said_to_be_one(monkeypatch):
    def fail(*_):
        raise ZeroDivisionError("no reason")

    monkeypatch.setattr("chainsim.scenario.read_scenario", fail)
    done = chainsim("check", LIFT)
    assert done.exit_code == 3
    assert "fault of chainsim itself" in done.stderr
    assert "ZeroDivisionError: no reason" in done.stderr


def test_ready_lists_what_is_needed():
    done = chainsim("ready", "--json")
    data = json.loads(done.stdout)
    assert data["ready"] is True
    assert done.exit_code == 0
    names = {item["name"] for item in data["items"] if item["is_needed"]}
    assert {"Python", "numpy", "numba", "h5py", "free disk here"} <= names


def test_ready_fails_where_a_package_is_missing(monkeypatch):
    from chainsim.cli import ready

    monkeypatch.setattr(ready, "NEEDED", (*ready.NEEDED, "no-such-package"))
    done = chainsim("ready")
    assert done.exit_code == 1
    assert "MISSING" in done.stdout
    assert "pip install no-such-package" in done.stdout


@pytest.mark.parametrize(
    ("kind", "unit"),
    [
        ("acceleration", "m s-2"), ("rate", "s-1"), ("damping", "N s m-1"), ("torque", "N m"),
        ("torsional_damping", "N m s rad-1"), ("density", "kg m-3"), ("fraction", "1"),
        ("", "1"), (None, "1"),
    ],
)  # fmt: skip
def test_units_of_json_are_written_as_in_recordings(kind, unit):
    assert recording_unit(kind) == unit


STRETCH = "# kind = stretch\n# length = 1 m\nload [N],growth [mm]\n1,2.0\n2,4.1\n3,5.9\n4,8.1\n"


def test_fit_writes_a_scenario_that_says_where_its_value_came_from(tmp_path):
    table = tmp_path / "stretch.csv"
    table.write_text(STRETCH, encoding="utf-8")
    done = chainsim("fit", LIFT, table, "--out", tmp_path, "--json")
    assert done.exit_code == 0, done.output
    data = json.loads(done.stdout)
    (stiffness,) = data["parameters"]
    # Hooke: 100 links of 10 mm grow by 2 mm for each newton, so one link takes 50 kN/m.
    assert stiffness["low"] < 50e3 < stiffness["high"]
    assert stiffness["unit"] == "N m-1"
    fitted = Path(data["scenario"])
    assert fitted == tmp_path / "foyer-fitted.toml"
    assert json.loads(chainsim("check", fitted, "--json", "--full").stdout)["links"] == 112


def test_fit_refuses_a_column_without_its_unit(tmp_path):
    table = tmp_path / "stretch.csv"
    table.write_text(STRETCH.replace("growth [mm]", "growth"), encoding="utf-8")
    done = chainsim("fit", LIFT, table, "--out", tmp_path)
    assert done.exit_code == 2
    assert "stretch.csv:3" in done.stderr
    assert "Traceback" not in done.output
