"""Words and numbers for a reader: values with units, and texts that every report carries."""

from __future__ import annotations

import math
import re
from typing import Any

from chainsim.findings import judge

BLIND_SPOTS = (
    "The model is planar and its frame is rigid. It does not see motion out of the plane, twist of "
    "the chain, sideways misalignment of sprockets, flexing of the frame, the control electronics, "
    "dirt, or what visitors do. What a finding says holds only for what was simulated."
)

DEFERS = (
    "These figures are predictions of a model, not measurements. Guarding, electrical safety and "
    "structural fixing follow the local codes, and where those ask for it, a licensed professional."
)

GROUP_TITLES = {"balls": "Balls", "chain": "Chain", "space": "Space", "drive": "Drive"}

UNIT_TEXTS = {
    "m s-2": "m/s²",
    "m s-1": "m/s",
    "rad s-1": "rad/s",
    "s-1": "per s",
    "1": "",
}

OTHER_UNITS = {"m": (1e3, "mm"), "rad": (180.0 / math.pi, "°")}
"""Units that read better in another size: factor and text."""

SEATS = "seats"
"""Unit of the difference between a chain's travel and its sprocket's rotation."""

SHARE = "share"
"""Unit of a dimensionless value that is read in percent."""

DIMENSIONLESS_FINDINGS = {
    "no_tooth_skipped": SEATS,
    "ride_smooth": SHARE,
    "off_resonance": SHARE,
}
"""What the dimensionless value of a finding counts."""

PREFIXED_UNITS = ("N m", "W", "J", "A", "kg")
"""Units that small values carry in thousandths."""

PREFIX_BELOW = 0.1
"""Size below which a value is shown in thousandths of its unit [the unit]."""


def is_number(value: Any) -> bool:
    """Tell whether a value is a number that says something."""
    return isinstance(value, int | float) and math.isfinite(value)


def quantity(value: float | None, unit: str, digits: int = 3) -> str:
    """Return a value with its unit as a reader expects it.

    Parameters
    ----------
    value : float or None
        In `unit`.
    unit : str
        As the recording writes it, such as ``"m s-2"``.
    digits : int
        Significant digits [dimensionless].

    Returns
    -------
    str
        Such as ``"2.41 m/s²"``; ``"–"`` where there is no value.
    """
    if value is None or not is_number(float(value)):
        return "–"
    factor, text = _readable_unit(abs(float(value)), unit)
    number = significant(float(value) * factor, digits)
    if text == SEATS and number in ("1", "−1"):
        text = text.removesuffix("s")
    return f"{number} {text}".strip()


def unit_of(name: str, unit: str) -> str:
    """Return the unit in which a finding is read: that of its value, or what it counts."""
    return DIMENSIONLESS_FINDINGS.get(name, unit) if unit in ("", "1") else unit


def _readable_unit(size: float, unit: str) -> tuple[float, str]:
    """Return the factor and the text of the unit in which a size [`unit`] reads best."""
    if unit == SHARE:
        return 100.0, "%"
    if unit in OTHER_UNITS:
        return OTHER_UNITS[unit]
    if unit in PREFIXED_UNITS and 0.0 < size < PREFIX_BELOW:
        return 1e3, "g" if unit == "kg" else f"m{unit}"
    return 1.0, UNIT_TEXTS.get(unit, unit)


def significant(value: float, digits: int = 3) -> str:
    """Return a number as text, with an exponent only where it must have one.

    Parameters
    ----------
    value : float
        The number [any unit].
    digits : int
        Significant digits [dimensionless].
    """
    if value == 0.0:
        return "0"
    if not 1e-4 <= abs(value) < 1e6:
        return f"{value:.{digits - 1}e}".replace("-", "−")
    decimals = max(digits - 1 - math.floor(math.log10(abs(value))), 0)
    text = f"{value:.{decimals}f}"
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    return text.replace("-", "−")


def percent(share: float) -> str:
    """Return a share in percent; what rounds to nothing is said to be small.

    Parameters
    ----------
    share : float
        The share [dimensionless].
    """
    if 0.0 < abs(share) < 1e-5:
        return "less than 0.001 %"
    return f"{significant(100.0 * share)} %"


def signed(value: float | None, unit: str) -> str:
    """Return a margin with its sign and unit.

    Parameters
    ----------
    value : float or None
        In `unit`.
    unit : str
        As the recording writes it.
    """
    text = quantity(value, unit)
    return text if value is None or text == "–" or value < 0.0 else f"+{text}"


WRITTEN_QUANTITY = re.compile(
    r"(?<![\w.,(-])(-?\d+(?:\.\d+)?(?:e-?\d+)?) (m s-2|m s-1|rad s-1|s-1|N m|kg|m|J|W)(?![\w/²-])"
)


def readable(text: str) -> str:
    """Return a text whose quantities stand in the units of the recording, in a reader's units.

    Parameters
    ----------
    text : str
        Such as ``"gap of 0.00312 m"``, which becomes ``"gap of 3.12 mm"``.
    """
    return WRITTEN_QUANTITY.sub(lambda found: quantity(float(found[1]), found[2]), text)


def moment_text(time: float | None, place: str) -> str:
    """Return when and where something happened, in words.

    Parameters
    ----------
    time : float or None
        When [s].
    place : str
        Where.
    """
    parts = []
    if time is not None and math.isfinite(time):
        parts.append(f"at {time:.3f} s")
    if place:
        parts.append(readable(place))
    return ", ".join(parts)


def overall_outcome(findings: list) -> str:
    """Return the worst outcome of a list of findings: fails, close or holds."""
    outcomes = {finding.outcome for finding in findings}
    return next((o for o in ("fails", "close", "holds") if o in outcomes), "not-judged")


def findings_of(rec: Any) -> list:
    """Return the findings of a run: as they are stored, else judged now."""
    return list(rec.findings) or judge(rec)


def texts(values: Any) -> list[str]:
    """Return a stored list of texts, or one text, as a list of str."""
    if isinstance(values, str | bytes):
        values = [values] if values else []
    return [v.decode() if isinstance(v, bytes) else str(v) for v in values]
