"""Words for where something happened."""

from __future__ import annotations


def on_strand(strand: str, distance: float, link: int | None = None) -> str:
    """Place on a strand.

    Parameters
    ----------
    strand : str
        Name of the strand.
    distance : float
        How far along it from its start [m].
    link : int or None
        Number of the link [dimensionless].

    Returns
    -------
    str
        Such as ``"link 37 at 0.31 m of strand tail-head"``.
    """
    place = f"{distance:.2f} m of strand {strand}"
    return place if link is None else f"link {link} at {place}"


def at_pin(strand: str, pin: int) -> str:
    """Place of a pin in a strand.

    Parameters
    ----------
    strand : str
        Name of the strand.
    pin : int
        Number of the pin [dimensionless].

    Returns
    -------
    str
        Such as ``"pin 12 in strand tail-head"``.
    """
    return f"pin {pin} in strand {strand}"


def on_sprocket(name: str) -> str:
    """Place of a sprocket.

    Parameters
    ----------
    name : str
        Name of the sprocket.

    Returns
    -------
    str
        Such as ``"sprocket tail"``.
    """
    return f"sprocket {name}"
