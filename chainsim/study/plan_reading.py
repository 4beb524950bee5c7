"""From a plan file to a `Plan`, all faults at once with file, line, key, value and rule."""

from __future__ import annotations

import difflib
import re
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from chainsim.errors import CallError, Problem, ScenarioError
from chainsim.study.axis_reading import MOST_VALUES, read_axis
from chainsim.study.plan import (
    ENGINE_KINDS,
    PLAN_FORMAT,
    SAMPLE_KINDS,
    EngineChoice,
    Keep,
    Plan,
    Sample,
)
from chainsim.study.plan_faults import Faults

LARGEST_FILE = 1_000_000
"""Longest plan file that is read [bytes]."""
_TOP = (
    "format", "title", "scenario", "seed", "set", "axis", "sample", "keep", "engine",
)  # fmt: skip


def read_plan(path: str | Path) -> Plan:
    """Read a plan file.

    Parameters
    ----------
    path : str or Path
        The plan file (TOML, UTF-8).

    Returns
    -------
    Plan
        The plan; its scenario files are not opened here.

    Raises
    ------
    CallError
        If the file cannot be read.
    ScenarioError
        If it is no valid plan; all faults at once.
    """
    path = Path(path)
    try:
        if path.stat().st_size > LARGEST_FILE:
            raise CallError(f"{path}: too long for a plan (over 1 MB)")
        text = path.read_text(encoding="utf-8-sig")
    except (OSError, UnicodeDecodeError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "not UTF-8 text"
        raise CallError(f"{path}: the plan cannot be read ({reason})") from None
    return parse_plan(text, str(path), path.parent)


def parse_plan(text: str, file: str = "<text>", folder: Path = Path()) -> Plan:
    """Read a plan from text.

    Parameters
    ----------
    text : str
        TOML text.
    file : str
        Name for messages.
    folder : Path
        Folder from which the plan's paths are taken.

    Returns
    -------
    Plan
        The plan.

    Raises
    ------
    ScenarioError
        If it is no valid plan; all faults at once.
    """
    try:
        data = tomllib.loads(text)
    except RecursionError:
        rule = "tables or lists are nested too deeply"
        raise ScenarioError([Problem(file, None, "", "", rule)]) from None
    except tomllib.TOMLDecodeError as error:
        match = re.search(r"\(at line (\d+)", str(error))
        line = int(match[1]) if match else None
        raise ScenarioError([Problem(file, line, "", "", f"not valid TOML: {error}")]) from None
    faults = Faults(file, text)
    faults.unknown("", data, _TOP)
    if data.get("format") != PLAN_FORMAT:
        faults.add(
            "format", data.get("format"), f"this chainsim reads plans of format {PLAN_FORMAT}"
        )
    axes = _axes(data, faults)
    plan = Plan(
        file=file,
        folder=folder,
        title=_text(data, "title", Path(file).stem, faults),
        scenario=_text(data, "scenario", None, faults),
        axes=tuple(axes),
        fixed=_mapping(data, "set", faults),
        sample=_sample(data, axes, faults),
        keep=_keep(data, faults),
        engine=_engine(data, faults),
        seed=_whole(data, "seed", None, 0, faults),
        lines={axis.name: faults.line(f"axis.{i}") or 1 for i, axis in enumerate(axes, 1)},
    )
    if faults.problems:
        raise ScenarioError(faults.problems)
    return plan


def _axes(data: dict[str, Any], faults: Faults) -> list[Any]:
    tables = data.get("axis")
    if not isinstance(tables, list) or not all(isinstance(table, dict) for table in tables):
        faults.add("axis", tables, "a plan needs at least one [[axis]] table")
        return []
    axes = [read_axis(f"axis.{i}", table, faults) for i, table in enumerate(tables, 1)]
    found = [axis for axis in axes if axis is not None]
    names = [axis.name for axis in found]
    for name in sorted({name for name in names if names.count(name) > 1}):
        faults.add("axis", name, "two axes share this name; give one of them another `name`")
    return found


def _sample(data: dict[str, Any], axes: list[Any], faults: Faults) -> Sample:
    table = _mapping(data, "sample", faults)
    faults.unknown("sample", table, ("kind", "count"))
    kind = table.get("kind", "grid")
    if kind not in SAMPLE_KINDS:
        faults.add("sample.kind", kind, f"one of {', '.join(SAMPLE_KINDS)}")
        return Sample()
    if kind == "grid":
        for i, axis in enumerate(axes, 1):
            if axis.choices is None:
                faults.add(
                    f"axis.{i}.distribution", axis.kind,
                    'a distribution cannot be listed in a grid; add [sample] with kind = "sobol"',
                )  # fmt: skip
        return Sample()
    count = _whole(table, "count", 0, 1, faults, "sample.")
    if not count or count > MOST_VALUES:
        faults.add("sample.count", table.get("count"), f"the number of points, 1 to {MOST_VALUES}")
    elif kind in ("sobol", "indices") and count & (count - 1):
        faults.add("sample.count", count, "a power of 2, so that the points stay balanced")
    return Sample(kind, count or 0)


def _keep(data: dict[str, Any], faults: Faults) -> Keep:
    table = _mapping(data, "keep", faults)
    faults.unknown("keep", table, ("findings", "summary", "trajectories"))
    names = {}
    for key in ("findings", "summary"):
        value = table.get(key, [])
        if value == "all":
            value = []
        if not isinstance(value, list) or not all(isinstance(name, str) for name in value):
            faults.add(f"keep.{key}", value, 'a list of names, or "all"')
            value = []
        for name in value:
            _check_name(f"keep.{key}", name, faults)
        names[key] = tuple(value)
    trajectories = table.get("trajectories", False)
    if not isinstance(trajectories, bool):
        faults.add("keep.trajectories", trajectories, "true or false")
    return Keep(names["findings"], names["summary"], bool(trajectories))


def _check_name(key: str, name: str, faults: Faults) -> None:
    """Note a finding or summary value that no run gives."""
    if key == "keep.findings":
        from chainsim.findings.table import ROWS

        known = [row.judge.__name__ for row in ROWS]
    else:
        from chainsim.analysis import UNITS

        known = [*UNITS, "stop_reason", "complete", "axle_load", "takeup_low", "takeup_high"]
    if name.partition(".")[0] not in known:
        near = difflib.get_close_matches(name, known, 1)
        hint = f"did you mean {near[0]!r}?" if near else f"known are {', '.join(known)}"
        faults.add(key, name, f"no run gives this; {hint}")


def _engine(data: dict[str, Any], faults: Faults) -> EngineChoice:
    table = _mapping(data, "engine", faults)
    known = ("kind", "workers", "address", "slurm", "wall_limit", "give_up_after")
    faults.unknown("engine", table, known)
    kind = table.get("kind", "processes")
    if kind not in ENGINE_KINDS:
        faults.add("engine.kind", kind, f"one of {', '.join(ENGINE_KINDS)}")
    limit = table.get("wall_limit")
    if limit is not None and (not isinstance(limit, int | float) or limit <= 0):
        faults.add("engine.wall_limit", limit, "a number of seconds above zero")
        limit = None
    slurm = _mapping(table, "slurm", faults, "engine.") if "slurm" in table else None
    faults.unknown("engine.slurm", slurm or {}, ("queue", "account", "walltime", "jobs", "memory"))
    address = _text(table, "address", "", faults, "engine.") or None
    if kind != "dask" and (address or slurm):
        faults.add("engine.kind", kind, 'an address or a SLURM queue needs kind = "dask"')
    return EngineChoice(
        kind=kind,
        workers=_whole(table, "workers", None, 1, faults, "engine."),
        address=address,
        slurm=slurm,
        wall_limit=limit,
        give_up_after=_whole(table, "give_up_after", 20, 1, faults, "engine.") or 20,
    )


def _text(
    table: Mapping[str, Any], key: str, default: str | None, faults: Faults, where: str = ""
) -> str:
    value = table.get(key, default)
    if not isinstance(value, str):
        faults.add(where + key, value, "text in quotes is needed here")
        return ""
    return value


def _mapping(table: Mapping[str, Any], key: str, faults: Faults, where: str = "") -> dict[str, Any]:
    value = table.get(key, {})
    if not isinstance(value, dict):
        faults.add(where + key, value, "a table is needed here")
        return {}
    return value


def _whole(
    table: Mapping[str, Any], key: str, default: int | None, least: int, faults: Faults,
    where: str = "",
) -> int | None:  # fmt: skip
    value = table.get(key, default)
    if value is None:
        return None
    if isinstance(value, bool) or not isinstance(value, int) or value < least:
        faults.add(where + key, value, f"a whole number, at least {least}")
        return default
    return value
