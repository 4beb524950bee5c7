"""The table of what a recording holds once: shapes of the parts that do not change in a run."""

from __future__ import annotations

from typing import NamedTuple

from chainsim.errors import RecordingError

LINK_AXES = ("along", "outward")
"""Labels of the axis of coordinates in a link's own frame: along t, and along n."""


class Shape(NamedTuple):
    """One row of the geometry table.

    Attributes
    ----------
    dims : tuple of str
        Names of the axes; one that ends in ``_point`` belongs to this dataset alone.
    unit : str
        Unit of its values; ``"1"`` where dimensionless.
    long_name : str
        What it is, in a few words.
    dtype : str
        Type in which it is stored.
    """

    dims: tuple[str, ...]
    unit: str
    long_name: str
    dtype: str = "f8"


SHAPES = {
    "geometry/tooth_outline": Shape(
        ("sprocket", "tooth_point", "axis"), "m", "tooth outlines in the frame of their wheel"
    ),
    "geometry/seat_radius": Shape(("sprocket",), "m", "radii through seated pins"),
    "geometry/teeth": Shape(("sprocket",), "1", "numbers of teeth, 0 for a smooth roller", "i4"),
    "geometry/pocket_outline": Shape(
        ("carrier", "pocket_point", "link_axis"),
        "m",
        "pocket outlines from the first pin of the link",
    ),
    "geometry/carrier_link": Shape(("carrier",), "1", "links that bear the carriers", "i4"),
    "geometry/chute": Shape(("chute_point", "axis"), "m", "discharge chute"),
    "geometry/trough": Shape(("trough_point", "axis"), "m", "collecting trough"),
    "geometry/ball_radius": Shape((), "m", "radius of a ball"),
    "geometry/roller_radius": Shape((), "m", "radius of a chain roller"),
    "geometry/pitch": Shape(("link",), "m", "unstretched pitch of each link"),
}
_FAMILIES = {
    "geometry/walls/": Shape(("wall_{}_point", "axis"), "m", "wall {}"),
    "geometry/guides/": Shape(("guide_{}_point", "axis"), "m", "guide {}"),
}


def shape(path: str) -> Shape:
    """Return the row of a geometry dataset.

    Parameters
    ----------
    path : str
        Path of the dataset.

    Returns
    -------
    Shape
        Its row; walls and guides share one, with their name filled in.

    Raises
    ------
    RecordingError
        If no geometry has this path.
    """
    if path in SHAPES:
        return SHAPES[path]
    for prefix, row in _FAMILIES.items():
        name = path.removeprefix(prefix)
        if name not in (path, "") and "/" not in name:
            dims = tuple(dim.format(name) for dim in row.dims)
            return Shape(dims, row.unit, row.long_name.format(name), row.dtype)
    raise RecordingError(f"geometry '{path}' is not in the geometry table")
