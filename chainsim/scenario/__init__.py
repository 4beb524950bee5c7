"""Scenario files: text to checked values in SI.

`read_scenario` and `parse_scenario` give a `Scenario`, frozen, with every value filled in and
its origin; `json_schema` describes the format; `starter` writes a first file.
"""

from chainsim.scenario.filler import Origin
from chainsim.scenario.json_schema import json_schema
from chainsim.scenario.read import parse_scenario, read_scenario
from chainsim.scenario.scenario import Scenario
from chainsim.scenario.starter import starter
from chainsim.scenario.starter_layouts import LAYOUTS

__all__ = [
    "LAYOUTS",
    "Origin",
    "Scenario",
    "json_schema",
    "parse_scenario",
    "read_scenario",
    "starter",
]
