"""The whole scenario file as one table of tables."""

from __future__ import annotations

from typing import Literal

from chainsim.scenario.schema_balls import Balls, Carriers
from chainsim.scenario.schema_chain import Chain, Frame
from chainsim.scenario.schema_drive import Drive
from chainsim.scenario.schema_rails import Guide, Wall
from chainsim.scenario.schema_run import Bench, Event, Limits, Run, StatedOrigin, Study
from chainsim.scenario.schema_sprocket import Sprocket
from chainsim.scenario.table import Table, key

FORMAT = 1


class Document(Table):
    """A scenario: one lift, what happens to it, and what it is judged by."""

    format: Literal[1] = key(..., "Version of this file format.", example=FORMAT)
    title: str = key("", "One line that says what it is.", example="Foyer wall")
    view: Literal["front", "back"] = key(
        "front",
        "Side from which it is drawn and listed; it is described from the front.",
        example="front",
    )
    frame: Frame = key(Frame(), "What carries the lift.")
    chain: Chain = key(..., "The chain.")
    sprocket: tuple[Sprocket, ...] = key(
        ..., "The wheels in the order in which the chain meets them when it runs forward."
    )
    wall: tuple[Wall, ...] = key((), "Fixed surfaces that balls may touch.")
    guide: tuple[Guide, ...] = key((), "Fixed rails of the chain.")
    drive: Drive = key(..., "What turns the chain.")
    carriers: Carriers | None = key(None, "Carriers; left out, the chain is bare.")
    balls: Balls | None = key(None, "Balls; left out, the lift runs empty.")
    event: tuple[Event, ...] = key((), "Things that happen during the run.")
    run: Run = key(Run(), "How long to simulate, and what to record.")
    limits: Limits = key(Limits(), "What the findings are judged by.")
    study: Study = key(Study(), "Marks for studies of many runs.")
    bench: dict[str, Bench] = key({}, "Values that were measured, by dotted key.")
    resolved: dict[str, StatedOrigin] = key(
        {}, "Origins of values, written by chainsim into a scenario with every value filled in."
    )
