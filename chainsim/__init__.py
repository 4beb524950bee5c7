"""chainsim: simulates chain lifts for ball machines and says what holds, what is close, what fails.

    import chainsim as cs

    recording = cs.run(cs.read_scenario("lift.toml"))
    for finding in recording.findings:
        print(finding.title, finding.outcome)

The names below are imported when they are first used: `import chainsim` alone is fast, and needs
neither numpy nor numba.
"""

from __future__ import annotations

import sys
from importlib import import_module
from types import ModuleType
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from chainsim.findings import judge, situations, verdict
    from chainsim.model.lift import build_lift
    from chainsim.recording import Recording, open_recording
    from chainsim.run import run
    from chainsim.scenario import Scenario, json_schema, parse_scenario, read_scenario, starter

__version__ = "0.1.0"

_HOMES = {
    "Recording": "recording",
    "Scenario": "scenario",
    "build_lift": "model.lift",
    "json_schema": "scenario",
    "judge": "findings",
    "open_recording": "recording",
    "parse_scenario": "scenario",
    "read_scenario": "scenario",
    "run": "run",
    "situations": "findings",
    "starter": "scenario",
    "verdict": "findings",
}
"""Public name -> the part of the package that it is imported from."""


class _Face(ModuleType):
    """The package, in which `run` is the function also once the module of that name is imported."""

    def __setattr__(self, name: str, value: Any) -> None:
        if name == "run" and isinstance(value, ModuleType):
            value = value.run
        super().__setattr__(name, value)


sys.modules[__name__].__class__ = _Face


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f"{__name__}.{_HOMES[name]}"), name)


def __dir__() -> list[str]:
    return sorted({*globals(), *_HOMES})


__all__ = [
    "Recording",
    "Scenario",
    "build_lift",
    "json_schema",
    "judge",
    "open_recording",
    "parse_scenario",
    "read_scenario",
    "run",
    "situations",
    "starter",
    "verdict",
]
