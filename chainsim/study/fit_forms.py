"""What a file of bench measurements has to hold, kind by kind.

Every kind names its columns, what stands in the comment lines above them, and how few rows
are too few.
"""

from __future__ import annotations

from types import MappingProxyType
from typing import NamedTuple

COUNT = "count"
"""Unit kind of a column of whole numbers, whose heading has no unit."""


class Item(NamedTuple):
    """A column, or a value in the comment lines.

    Attributes
    ----------
    name : str
        Its name.
    kinds : tuple of str
        Unit kinds that it may have, keys of `chainsim.units.UNITS`, or `COUNT`.
    words : tuple of str
        Words it may be, instead of a quantity.
    required : bool
        Whether it must be there.
    """

    name: str
    kinds: tuple[str, ...] = ()
    words: tuple[str, ...] = ()
    required: bool = True


class Form(NamedTuple):
    """One kind of measurement.

    Attributes
    ----------
    text : str
        How it is done, in one sentence.
    stated : tuple of Item
        Values in the comment lines.
    columns : tuple of Item
        Columns of the table.
    least_rows : int
        Fewest rows that are of use (dimensionless).
    """

    text: str
    stated: tuple[Item, ...]
    columns: tuple[Item, ...]
    least_rows: int


_LOAD = ("force", "mass")

FORMS = MappingProxyType(
    {
        "stretch": Form(
            "a length of chain hangs straight; a load is hung on its lower end, and the growth "
            "of the length against hanging without that load is read",
            (Item("length", ("length",)),),
            (Item("load", _LOAD), Item("growth", ("length",))),
            3,
        ),
        "decay": Form(
            "a hung strand with a load on its end is let go; the displacement is logged, time "
            "counted from there. Along: the load is pulled down and released. Across: the lower "
            "end is clamped once the load hangs, and the strand is plucked sideways",
            (
                Item("length", ("length",)),
                Item("load", _LOAD),
                Item("motion", words=("along", "across")),
                Item("at", ("length",), required=False),
            ),
            (Item("time", ("time",)), Item("displacement", ("length",))),
            20,
        ),
        "tilt": Form(
            "for each load on the end of a hung strand, a known weight is set down gently on an "
            "arm at its middle link, and the tilt of that link against plumb is read",
            (Item("length", ("length",)), Item("weight", _LOAD), Item("arm", ("length",))),
            (Item("load", _LOAD), Item("tilt", ("angle",))),
            4,
        ),
        "motor": Form(
            "the motor turns against a known torque at its rated supply, from running free to "
            "stalled (speed 0); speed, current or both are read",
            (Item("shaft", words=("motor", "sprocket")),),
            (
                Item("torque", ("torque",)),
                Item("speed", ("angular_speed",), required=False),
                Item("current", ("current",), required=False),
            ),
            3,
        ),
        "losses": Form(
            "the lift itself runs at a chain speed; balls fed and balls lost are counted",
            (),
            (Item("speed", ("speed",)), Item("fed", (COUNT,)), Item("lost", (COUNT,))),
            1,
        ),
    }
)
"""Kind of measurement -> its form."""
