"""Scenario texts for the tests of the reader, and where the scenario files are."""

from pathlib import Path

REPOSITORY = Path(__file__).parents[2]
SCENARIO_FILES = sorted((REPOSITORY / "scenarios").glob("*.toml"))
ALL_KEYS_FILE = Path(__file__).with_name("scenario_all_keys.toml")

BASE = """\
format = 1
title = "Test lift"
[chain]
kind = "moulded_sturdy"
pitch = "10 mm"
links = 112
[[sprocket]]
name = "head"
teeth = 8
center = ["0 mm", "520 mm"]
[[sprocket]]
name = "tail"
teeth = 8
center = ["0 mm", "0 mm"]
mount = { kind = "hung", mass = "0.30 kg", free = "y" }
[drive]
sprocket = "head"
chain_speed = "0.1 m/s"
[carriers]
every = 4
pocket = { floor = "18 mm", lip = "5 mm", tilt = "5 deg", offset = "4 mm" }
[balls]
diameter = "16 mm"
feed = { kind = "set down", rate = "1 /s" }
"""
"""A small lift, one key a line, so that messages can name lines."""


def edited(old: str, new: str) -> str:
    """`BASE` with one piece of text exchanged."""
    assert BASE.count(old) == 1, old
    return BASE.replace(old, new)
