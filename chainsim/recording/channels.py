"""The table of everything a recording may hold per sample: one row per channel.

A new channel is one new row here; recorders, readers and exports follow the table. Trajectories are
float32; time, angles, energies and places of axles are float64, because small differences of them
matter (a slide that creeps, an energy residual).
"""

from __future__ import annotations

from typing import NamedTuple

from chainsim.errors import RecordingError

AXES = ("x", "y")
DIRECTIONS = ("lateral", "longitudinal")
BALL_STATES = ("empty", "waiting", "free", "seated")
"""Texts of `balls/state`, by its value."""


class Channel(NamedTuple):
    """One row of the channel table.

    Attributes
    ----------
    path : str
        Path of the dataset in the recording.
    dims : tuple of str
        Names of its axes after the first, which is always time.
    unit : str
        Unit of its values; ``"1"`` where dimensionless.
    long_name : str
        What it is, in a few words.
    dtype : str
        Type in which it is stored.
    share : float
        Part of its plain size that is left after packing [dimensionless], as measured where all
        values carry noise; used to announce the size of a recording.
    bulk : bool
        Whether a summary leaves it out.
    """

    path: str
    dims: tuple[str, ...]
    unit: str
    long_name: str
    dtype: str = "f4"
    share: float = 0.85
    bulk: bool = False


_TRAJECTORIES = (
    Channel("pins/position", ("pin", "axis"), "m", "positions of the pins", "f4", 0.58, True),
    Channel("pins/velocity", ("pin", "axis"), "m s-1", "velocities of the pins", "f4", 0.77, True),
    Channel("links/tension", ("link",), "N", "mean tension of the links", "f4", 0.77, True),
    Channel("balls/position", ("slot", "axis"), "m", "centers of the balls", "f4", 0.6, True),
    Channel(
        "balls/velocity", ("slot", "axis"), "m s-1", "velocities of the balls", "f4", 0.75, True
    ),
    Channel(
        "balls/acceleration",
        ("slot", "direction"),
        "m s-2",
        "mean accelerations of the balls along n and t of their carrier",
        "f4",
        0.78,
        True,
    ),
    Channel("balls/angle", ("slot",), "rad", "rolling angles of the balls", "f8", 0.4, True),
)

_BALLS = (
    Channel(
        "balls/seat_reserve", ("slot",), "m s-2", "seat reserve, least in the interval", "f4", 0.78
    ),
    Channel("balls/raw_peak", ("slot",), "m s-2", "largest raw acceleration", "f4", 0.8),
    Channel("balls/play", ("slot",), "m", "play of the balls in their pockets", "f4", 0.1),
    Channel("balls/number", ("slot",), "1", "numbers of the balls, -1 in empty slots", "i4", 0.02),
    Channel("balls/pocket", ("slot",), "1", "carriers that hold the balls, -1 none", "i4", 0.02),
    Channel("balls/state", ("slot",), "1", "states of the slots", "i1", 0.02),
    Channel("carriers/loaded", ("carrier",), "1", "held balls per carrier", "i1", 0.02),
)

_WHEELS = (
    Channel("sprockets/angle", ("sprocket",), "rad", "angles of the sprockets", "f8"),
    Channel("sprockets/rate", ("sprocket",), "rad s-1", "rates of the sprockets"),
    Channel("sprockets/torque", ("sprocket",), "N m", "mean torque of the chain on the sprockets"),
    Channel("sprockets/center", ("sprocket", "axis"), "m", "places of the axles", "f8", 0.5),
    Channel(
        "sprockets/force", ("sprocket", "axis"), "N", "mean force of the chain on the sprockets"
    ),
    Channel("sprockets/skip", ("sprocket",), "1", "seats that the chain is ahead of the sprocket"),
    Channel("sprockets/ride_height", ("sprocket",), "m", "largest height of a pin over its seat"),
    Channel("sprockets/engaged", ("sprocket",), "1", "pins in contact", "i2", 0.1),
    Channel("mounts/angle", ("sprocket",), "rad", "angles of the mounts", "f8", 0.5),
    Channel(
        "mounts/travel", ("sprocket",), "m", "travel of the mounts along their axis", "f8", 0.5
    ),
    Channel("mounts/weight", ("sprocket",), "m", "drop of the counterweights", "f8", 0.1),
)

_SCALARS = (
    Channel("drive/torque", (), "N m", "mean torque of the drive on its sprocket"),
    Channel("drive/rate", (), "rad s-1", "rate of the drive"),
    Channel("drive/power", (), "W", "mean mechanical power of the drive at its sprocket"),
    Channel("drive/current", (), "A", "mean current of the motor", "f4", 0.4),
    Channel("drive/set_speed", (), "m s-1", "chain speed that is asked for", "f4", 0.05),
    Channel("contacts/penetration", (), "m", "deepest contact in the interval"),
)

_STRANDS = (
    Channel("strands/excursion", ("strand",), "m", "largest excursion, positive outward"),
    Channel("strands/sag", ("strand",), "m", "largest distance below the chord"),
    Channel("strands/tension_start", ("strand",), "N", "mean tension at the start of the strand"),
    Channel("strands/tension_end", ("strand",), "N", "mean tension at the end of the strand"),
)

_ENERGIES = tuple(
    Channel(f"energy/{name}", (), "J", long_name, "f8", 0.7)
    for name, long_name in (
        ("work_drive", "work of the drive"),
        ("work_knock", "work of knocks"),
        ("balls_in", "energy of the balls that came"),
        ("balls_out", "energy of the balls that left"),
        ("kinetic", "kinetic energy"),
        ("potential", "potential energy"),
        ("stored", "energy stored in links, contacts and springs"),
        ("residual", "residual of the energy balance"),
    )
)

TIME = Channel("time", (), "s", "time", "f8", 0.4)
CHANNELS = {
    row.path: row
    for row in (TIME, *_TRAJECTORIES, *_BALLS, *_WHEELS, *_SCALARS, *_STRANDS, *_ENERGIES)
}
_LOSS = "energy/loss_"
_ENERGY = "energy/"


def channel(path: str) -> Channel:
    """Return the row of a channel; losses and other energies need no row of their own.

    Parameters
    ----------
    path : str
        Path of the dataset.

    Returns
    -------
    Channel
        Its row.

    Raises
    ------
    RecordingError
        If no channel has this path.
    """
    if path in CHANNELS:
        return CHANNELS[path]
    if path.startswith(_LOSS):
        cause = path.removeprefix(_LOSS).replace("_", " ")
        return Channel(path, (), "J", f"energy lost to {cause}", "f8", 0.7)
    if path.startswith(_ENERGY):
        name = path.removeprefix(_ENERGY).replace("_", " ")
        return Channel(path, (), "J", f"energy: {name}", "f8", 0.7)
    raise RecordingError(f"channel '{path}' is not in the channel table")


def is_kept(path: str, keep: str | tuple[str, ...]) -> bool:
    """Say whether a channel is to be recorded.

    Parameters
    ----------
    path : str
        Path of the dataset.
    keep : str or tuple of str
        ``"all"``, ``"summary"`` (all but the bulk), or the paths and groups to keep.

    Returns
    -------
    bool
        Whether it is kept [dimensionless]; time always is.
    """
    if keep == "all" or path == TIME.path:
        return True
    if keep == "summary":
        return not channel(path).bulk
    return path in keep or path.split("/")[0] in keep
