"""How a lift goes together, step by step."""

from __future__ import annotations

from chainsim.report.build_case import Case
from chainsim.report.build_direction import turning
from chainsim.report.build_line import place_text
from chainsim.report.build_takeup import movable_axles, resting_travel, travel_of, way_of
from chainsim.report.layout_notes import mount_text


def assembly_steps(case: Case) -> list[str]:
    """Say how the lift goes together.

    Parameters
    ----------
    case : Case
        The lift.

    Returns
    -------
    list of str
        Steps in their order, with figures.
    """
    n, movable = case.lift.n_links, movable_axles(case)
    driven = case.lift.wheels[case.driven].name
    steps = [
        "Lay all parts out and count them against the first list. Measure the check square of each "
        "printed drawing before anything is cut from it.",
        "Set the fixed axles to their places, level and parallel, sprockets in one plane.",
    ]
    if movable:
        names = " and ".join(case.lift.wheels[k].name for k in movable)
        steps.append(
            f"Mount {names} so that it is free along its way over the whole travel told, with the "
            "catching stop in place; hold it up."
        )
    if case.scenario.carriers is not None:
        carriers = case.scenario.carriers
        where = "the links listed" if carriers.at else f"every {carriers.every} links"
        up = "lips up on the strand that rises, pockets outward"
        steps.append(f"Fit the carriers to the open chain, one on {where}: {up}.")
    order = ", ".join(case.lift.wheel_names)
    steps.append(
        f"Lay the chain round {order}, in this order of travel, and close it at {n} links."
    )
    for k in movable:
        mount = case.scenario.sprocket[k].mount
        rest = resting_travel(case, k)
        stands = rest if rest is not None else travel_of(case, k).new
        x, y = (float(part) for part in stands * way_of(case, k))
        steps.append(
            f"Let {case.lift.wheels[k].name} down gently until the chain carries it "
            f"({mount_text(mount)}). It comes to stand {place_text(case.across(x), y)} from its "
            "place on the drawing, right and up, within the band of the checks."
        )
    if not movable:
        steps.append("Set the screwed axle until the chain is taut without being strained.")
    steps += [
        f"Turn {driven} by hand one whole turn of the chain, {turning(case)}: nothing may touch, "
        "and no carrier may catch.",
        "Check the motor's direction before it is coupled, then couple it with the end play told.",
        "Fit the guards. Then go through the checks at commissioning, empty first, then with "
        "balls.",
    ]
    return steps
