"""A scenario that has been read, checked and completed."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from typing import Any

from pydantic import PrivateAttr

from chainsim.errors import Remark
from chainsim.scenario.filler import Origin
from chainsim.scenario.paths import nearest
from chainsim.scenario.schema import Document
from chainsim.scenario.write import as_json, as_toml, values_only


class Scenario(Document):
    """One lift with every value in SI; attributes are named as the keys of the file.

    Members of arrays (`sprocket`, `wall`, `guide`, `event`) are tuples; `from` and `to` of a
    guide are `start` and `end`. Made by `read_scenario` and `parse_scenario`.
    """

    _text: str = PrivateAttr("")
    _file: str = PrivateAttr("<text>")
    _tables: dict[str, Any] = PrivateAttr(default_factory=dict)
    _origins: dict[str, Origin] = PrivateAttr(default_factory=dict)
    _remarks: tuple[Remark, ...] = PrivateAttr(())

    @property
    def text(self) -> str:
        """The file as given; changes made to it since are noted at its end."""
        return self._text

    @property
    def file(self) -> str:
        """Name of the file, as it was given."""
        return self._file

    @property
    def stem(self) -> str:
        """Name of the file without folder and ending."""
        name = self._file.replace("\\", "/").rsplit("/", 1)[-1]
        stem = name.removesuffix(".toml")
        return stem if stem and not stem.startswith("<") else "scenario"

    @property
    def remarks(self) -> tuple[Remark, ...]:
        """Cautions about values that are legal but look unlikely."""
        return self._remarks

    @property
    def sha256(self) -> str:
        """Hash of every value, in hexadecimal; the same whether stated or filled in."""
        text = json.dumps(values_only(self), sort_keys=True, ensure_ascii=False)
        return hashlib.sha256(text.encode()).hexdigest()

    def origin(self, dotted_key: str) -> Origin:
        """Where a value came from, and its range.

        Parameters
        ----------
        dotted_key : str
            Such as `sprocket.tail.mount.mass`.

        Returns
        -------
        Origin
            Source and low, typical, high [SI].

        Raises
        ------
        KeyError
            No value has this key; the text offers the nearest.
        """
        if dotted_key not in self._origins:
            near = nearest(dotted_key, self._origins)
            hint = f"; did you mean '{near}'?" if near else ""
            raise KeyError(f"no value is called '{dotted_key}'{hint}")
        return self._origins[dotted_key]

    def origins(self) -> Mapping[str, Origin]:
        """Every value's dotted key -> where it came from, in the order of the schema."""
        return self._origins

    def uncertain(self) -> list[tuple[str, Origin]]:
        """Numbers that are assumed, or come from a kind, and have a range.

        Returns
        -------
        list of tuple
            Dotted key and origin, in the order of the schema.
        """
        return [
            (key, origin)
            for key, origin in self._origins.items()
            if origin.source in ("assumed", "kind") and origin.low != origin.high
        ]

    def with_values(self, values: Mapping[str, Any]) -> Scenario:
        """Make a scenario that differs in some values, checked again as a whole.

        Parameters
        ----------
        values : mapping
            Dotted key -> value as in a file, or a bare number in SI.

        Returns
        -------
        Scenario
            A new one; what is worked out from the changed values is worked out anew.

        Raises
        ------
        ScenarioError
            A key is unknown, or the changed scenario is not possible.
        """
        from chainsim.scenario.read import changed_scenario

        return changed_scenario(self, values)

    def resolved_toml(self) -> str:
        """Every value with its SI unit and origin, as TOML that reads back to the same."""
        return as_toml(self, self._origins)

    def resolved_json(self) -> str:
        """Every value in SI and every origin, as JSON."""
        return as_json(self, self._origins)
