"""Measure speed, cost of effects, and work against precision; writes benchmarks/README.md.

``python -m benchmarks.measure`` takes some minutes. Times are processor times of one process, so
that they mean something on a shared machine; wall times stand beside them.
"""

from __future__ import annotations

import resource
import statistics
import subprocess
import sys
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import numpy as np

from chainsim.findings import judge
from chainsim.integration.loop import Simulation
from chainsim.integration.solvers import integrate
from chainsim.integration.start import Prepared, prepare
from chainsim.kernels.march import march
from chainsim.model.lift import build_lift
from chainsim.run import run
from chainsim.scenario import parse_scenario

HERE = Path(__file__).parent
CASE = (HERE / "speed-case.toml").read_text(encoding="utf-8")
REPEATS = 3
STRETCH = 0.02
EFFECT_TIME = 0.5


def case(links: int = 120, seconds: float = 4.0, swaps: Sequence[tuple[str, str]] = ()) -> Any:
    """Return the speed case with another number of links, duration [s], or other text."""
    text = CASE.replace("links = 120", f"links = {links}")
    text = text.replace('"560 mm"', f'"{560 + 5 * (links - 120)} mm"')
    text = text.replace('duration = "4 s"', f'duration = "{seconds} s"')
    for old, new in swaps:
        if old not in text:
            raise ValueError(f"the speed case has no text {old!r}")
        text = text.replace(old, new)
    return parse_scenario(text)


def timed(work: Callable[[], Any]) -> tuple[float, float]:
    """Return processor time and wall time of some work [s]."""
    cpu, wall = time.process_time(), time.perf_counter()
    work()
    return time.process_time() - cpu, time.perf_counter() - wall


def spread(values: Sequence[float], digits: int = 2) -> str:
    """Return the median, with the smallest and the largest value."""
    low, high = min(values), max(values)
    return f"{statistics.median(values):.{digits}f} ({low:.{digits}f}–{high:.{digits}f})"


def table(headings: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """Return a table as text."""
    lines = [headings, ["---"] * len(headings), *rows]
    return "\n".join(f"| {' | '.join(line)} |" for line in lines)


def without(header: str) -> tuple[str, str]:
    """Return the swap that takes a whole table out of the speed case."""
    start = CASE.index(f"[{header}]")
    end = CASE.index("\n[", start) + 1
    return CASE[start:end], ""


def speed() -> str:
    """Simulated seconds per second of whole runs: rest, march, recording and findings."""
    rolling = (('model = "fixed"', 'model = "rolling"'),)
    steel = (('"50 kN/m"', '"1000 kN/m"'),)
    cases = [
        ("60 links", 60, 4.0, ()), ("120 links, the speed case", 120, 4.0, ()),
        ("240 links", 240, 4.0, ()), ("480 links", 480, 2.0, ()),
        ("120 links, rolling balls", 120, 1.0, rolling),
        ("120 links of steel, 1e6 N/m", 120, 1.0, steel),
    ]  # fmt: skip
    rows = []
    for name, links, seconds, swaps in cases:
        scenario = case(links, seconds, swaps)
        lift, marches, walls, rests = build_lift(scenario), [], [], []
        for _ in range(REPEATS):
            made: list[Simulation] = []
            rests.append(timed(lambda lift=lift, made=made: made.append(Simulation(lift)))[0])
            cpu, wall = timed(lambda made=made: list(made[0]))
            marches.append(seconds / cpu)
            walls.append(seconds / wall)
        step = f"{made[0].prepared.dt * 1e6:.1f}"
        reached = made[0].ending.stop_reason
        rows.append([name, step, spread(marches, 1), spread(walls, 1), spread(rests), reached])
    headings = [
        "case", "step [us]", "by processor time", "by wall time", "coming to rest [s]", "end",
    ]  # fmt: skip
    return f"## Simulated seconds per second\n\n{table(headings, rows)}"


def recording() -> str:
    """Return the share of recording and findings in a run."""
    scenario = case()
    alone, whole, judged = [], [], []
    for _ in range(REPEATS):
        alone.append(timed(lambda: list(Simulation(build_lift(scenario))))[0])
        kept: list[Any] = []
        whole.append(timed(lambda kept=kept: kept.append(run(scenario)))[0])
        judged.append(timed(lambda kept=kept: judge(kept[0]))[0])
    shares = [1 - a / w for a, w in zip(alone, whole, strict=True)]
    rows = [
        ["whole run of 4 s [s]", spread(whole)],
        ["of that without recording and findings [s]", spread(alone)],
        ["findings alone [s]", spread(judged)],
        ["share of recording and findings", spread(shares)],
    ]
    return f"## Recording (in memory) and findings\n\n{table(['what', 'value'], rows)}"


def step_cost(prepared: Prepared) -> float:
    """Return the processor time per link and inner step [ns], over a stretch from rest."""
    packed, steps = prepared.packed, round(EFFECT_TIME / prepared.dt)
    start = packed.flat.copy()
    packed.work.search_in[0] = 0
    cpu, _ = timed(
        lambda: march(
            0.0, prepared.dt, steps, packed.parts, packed.state, packed.rate, packed.work, 0.0
        )
    )
    packed.flat[:] = start
    return 1e9 * cpu / (steps * prepared.lift.n_links)


def effects() -> str:
    """Return the cost per link and inner step with effects taken out, one after the other."""
    joints = ("friction = 0.15, pin", "friction = 0.0, pin")
    balls, carriers = without("balls"), without("carriers")
    variants = [
        ("everything", ()), ("without joint friction", (joints,)),
        ("without balls", (balls,)), ("without balls and carriers", (balls, carriers)),
        ("links, contact and take-up alone", (balls, carriers, joints)),
    ]  # fmt: skip
    ready = [(name, prepare(build_lift(case(swaps=swaps)))) for name, swaps in variants]
    costs: dict[str, list[float]] = {name: [] for name, _ in ready}
    for _ in range(2 * REPEATS + 1):  # in turns, so that a loaded machine hits all alike
        for name, prepared in ready:
            costs[name].append(step_cost(prepared))
    whole = statistics.median(costs["everything"])
    rows = [
        [name, spread(found, 1), f"{statistics.median(found) / whole:.0%}"]
        for name, found in costs.items()
    ]
    return f"## ns per link and inner step, 120 links\n\n{table(['on', 'ns', 'share'], rows)}"


def running(lift: Any, scale: float = 1.0) -> Prepared:
    """Return a lift at rest whose drive runs at its rate from the start."""
    prepared = prepare(lift, scale)
    drive = prepared.packed.parts.drive
    drive["rate_from"] = drive["rate_to"] = 0.15 / drive["speed_per_rate"]
    return prepared


def precision() -> str:
    """Return error against cost of scipy's methods and of ours, on the same right-hand side."""
    lift = build_lift(case())
    n = lift.n_links
    exact = integrate(running(lift), STRETCH, "DOP853", rtol=1e-9).copy()

    def row(name: str, prepared: Prepared, method: str, rtol: float) -> tuple[list[str], float]:
        cpu, _ = timed(lambda: integrate(prepared, STRETCH, method, rtol))
        flat, first = prepared.packed.flat, int(prepared.packed.ends[0])
        dx, dy = flat[:n] - exact[:n], (flat - exact)[first : first + n]
        error = float(np.hypot(dx, dy).max())
        return [name, f"{1e6 * error:.3g}", f"{cpu / STRETCH:.3g}"], cpu

    integrate(running(lift), STRETCH)  # compiled before it is timed
    rows, costs = [], {}
    for scale in (1.0, 0.5, 0.25, 0.125):
        name = f"ours, {scale:g} of the usual step"
        line, costs[name] = row(name, running(lift, scale), "chainsim", 0.0)
        rows.append(line)
    for method, rtol in [(m, r) for m in ("RK23", "RK45", "DOP853") for r in (1e-3, 1e-6)]:
        name = f"{method}, rtol {rtol:g}"
        line, costs[name] = row(name, running(lift), method, rtol)
        rows.append(line)
    ratio = costs["RK45, rtol 0.001"] / costs["ours, 1 of the usual step"]
    headings = ["method", "largest error of a pin's place [um]", "seconds per simulated second"]
    return (
        f"## Work and precision over {1e3 * STRETCH:g} ms\n\n{table(headings, rows)}\n\n"
        f"RK45 at rtol 1e-3 costs {ratio:.0f} times as much as ours at its usual step. The "
        "reference is DOP853 at rtol 1e-9; single measurements."
    )


def memory() -> str:
    """Return the peak memory of runs of several lengths, each in a process of its own."""
    rows = []
    for seconds in (5, 20):
        command = [sys.executable, "-m", "benchmarks.measure", str(seconds)]
        done = subprocess.run(command, capture_output=True, text=True, check=True, cwd=HERE.parent)
        rows.append([f"{seconds} s", f"{float(done.stdout):.0f} MB"])
    return f"## Peak memory, recording kept in memory\n\n{table(['run', 'peak'], rows)}"


def main() -> None:
    """Measure section by section; the page is written anew after each."""
    parts = [
        "# Benchmarks\n\n`python -m benchmarks.measure` writes this page from `speed-case.toml`; "
        "[million_runs.py](million_runs.py) has a command of its own. Values are medians with the "
        "smallest and largest of their repeats. The machine is shared: ratios and processor "
        "times mean more than wall times."
    ]
    for section in (effects, recording, speed, memory, precision):
        parts.append(section())
        print(parts[-1], flush=True)
        (HERE / "README.md").write_text("\n\n".join(parts) + "\n", encoding="utf-8")


if __name__ == "__main__":
    if len(sys.argv) > 1:
        run(case(seconds=float(sys.argv[1])))
        print(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024)
    else:
        main()
