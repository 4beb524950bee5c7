"""Changes to a scenario from the command line: `KEY=VALUE`."""

from __future__ import annotations

import tomllib
from typing import Any

from chainsim.scenario.faults import Fault
from chainsim.scenario.paths import KeyNotFoundError, Path, assign, resolve


def parse_override(text: str) -> tuple[str, Any]:
    """Split `KEY=VALUE` and read the value.

    Parameters
    ----------
    text : str
        Such as `sprocket.tail.mount.mass=0.3 kg`; quotes round the value may be left out.

    Returns
    -------
    tuple
        Dotted key, and the value as TOML would give it.

    Raises
    ------
    ValueError
        There is no `=`, or no key before it.
    """
    key, equals, value = text.partition("=")
    if not equals or not key.strip():
        raise ValueError("KEY=VALUE is due, such as sprocket.tail.mount.mass=0.3 kg")
    return key.strip(), _value(value.strip())


def _value(text: str) -> Any:
    """Read a TOML value; what is none is text without its quotes."""
    try:
        return tomllib.loads(f"value = {text}")["value"]
    except (tomllib.TOMLDecodeError, ValueError, RecursionError):
        return text


def apply_overrides(tables: dict[str, Any], overrides: Any) -> tuple[set[Path], list[Fault]]:
    """Put overrides into the tables of a file.

    Parameters
    ----------
    tables : dict
        Tables of the file, changed in place.
    overrides : sequence of str
        Each `KEY=VALUE`.

    Returns
    -------
    tuple
        Paths that were set, and a fault for each override that could not be.
    """
    paths: set[Path] = set()
    faults: list[Fault] = []
    for text in overrides:
        try:
            key, value = parse_override(text)
            path = resolve(key, tables)
            assign(tables, path, value)
            paths.add(path)
        except KeyNotFoundError as error:
            faults.append(Fault((text.partition("=")[0].strip(),), "", str(error)))
        except ValueError as error:
            faults.append(Fault((), f"'{text}'", str(error)))
    return paths, faults
