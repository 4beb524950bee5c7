"""Root attributes of a recording: what it is, from which scenario, made by which versions."""

from __future__ import annotations

import platform
from datetime import UTC, datetime
from importlib.metadata import PackageNotFoundError, version
from typing import Any

import chainsim

FORMAT = "chainsim-recording"
FORMAT_VERSION = 1
CONVENTIONS = "CF-1.11"
PACKAGES = ("numpy", "scipy", "numba", "h5py")
NOT_FINISHED = "not finished"


def root_attributes(scenario: Any) -> dict[str, Any]:
    """Collect the root attributes that are known before the run.

    Parameters
    ----------
    scenario : Scenario
        What is simulated.

    Returns
    -------
    dict of str to object
        Attributes by name; ``complete`` is False until the end.
    """
    attributes = {
        "Conventions": CONVENTIONS,
        "format": FORMAT,
        "format_version": FORMAT_VERSION,
        "complete": False,
        "stop_reason": NOT_FINISHED,
        "title": getattr(scenario, "title", "") or "",
        "stem": scenario.stem,
        "chainsim_version": chainsim.__version__,
        "scenario_sha256": scenario.sha256,
        "created": datetime.now(UTC).isoformat(timespec="seconds"),
        "python_version": platform.python_version(),
        "platform": platform.platform(),
    }
    return attributes | {f"{name}_version": _version(name) for name in PACKAGES}


def scenario_texts(scenario: Any) -> dict[str, str]:
    """Collect the texts of the scenario that a recording holds.

    Parameters
    ----------
    scenario : Scenario
        What is simulated.

    Returns
    -------
    dict of str to str
        The text as given and the resolved one, by dataset name.
    """
    return {
        "text": scenario.text,
        "resolved": scenario.resolved_toml(),
        "resolved_json": scenario.resolved_json(),
    }


def _version(package: str) -> str:
    try:
        return version(package)
    except PackageNotFoundError:
        return "unknown"
