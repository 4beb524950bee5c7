"""Lines of the keys of a TOML text, for messages.

The standard reader gives no positions, so a small scanner walks the text once more, and only
when there is something to complain of. It trusts that the text has been read without error.
"""

from __future__ import annotations

import bisect
import re
from collections.abc import Mapping

Path = tuple[str | int, ...]

_BLANK = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_SPACE = re.compile(r"[ \t]*")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_BARE_VALUE = re.compile(r"[^,\]}\n#]*")
_STRINGS = (
    re.compile(r'"""(?:\\.|[^\\])*?"""(?!")', re.DOTALL),
    re.compile(r"'''.*?'''(?!')", re.DOTALL),
    re.compile(r'"(?:\\.|[^"\\])*"'),
    re.compile(r"'[^']*'"),
)


class _Scanner:
    """Walks a text and notes the line of every key."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.position = 0
        self.lines: dict[Path, int] = {}
        self._newlines = [i for i, letter in enumerate(text) if letter == "\n"]
        self._array_sizes: dict[Path, int] = {}

    def scan(self) -> None:
        """Walk the whole text."""
        table: Path = ()
        self._skip(_BLANK)
        while self.position < len(self.text):
            if self._peek() == "[":
                table = self._header()
            else:
                self._pair(table)
            self._skip(_BLANK)

    def _peek(self) -> str:
        return self.text[self.position : self.position + 1]

    def _skip(self, pattern: re.Pattern[str]) -> str:
        """Step over what matches here, and return it."""
        match = pattern.match(self.text, self.position)
        if match is None:
            return ""
        self.position = match.end()
        return match.group()

    def _note(self, path: Path) -> None:
        line = bisect.bisect_left(self._newlines, self.position) + 1
        self.lines.setdefault(path, line)

    def _header(self) -> Path:
        """Read `[table]` or `[[array]]`."""
        is_array = self.text.startswith("[[", self.position)
        self.position += 2 if is_array else 1
        keys = self._dotted_key()
        path: Path = ()
        for i, name in enumerate(keys):
            path = (*path, name)
            is_last = i == len(keys) - 1
            if is_last and is_array:
                self._note(path)
                self._array_sizes[path] = self._array_sizes.get(path, 0) + 1
            if path in self._array_sizes:
                path = (*path, self._array_sizes[path] - 1)
            self._note(path)
        self._skip(_SPACE)
        self.position += 2 if is_array else 1
        return path

    def _pair(self, table: Path) -> None:
        """Read `key = value`."""
        start = self.position
        path = table
        for name in self._dotted_key():
            path = (*path, name)
            end, self.position = self.position, start
            self._note(path)
            self.position = end
        self._skip(_SPACE)
        self.position += 1  # the equals sign
        self._skip(_SPACE)
        self._value(path)

    def _dotted_key(self) -> list[str]:
        keys = []
        while True:
            self._skip(_SPACE)
            keys.append(self._simple_key())
            self._skip(_SPACE)
            if self._peek() != ".":
                return keys
            self.position += 1

    def _simple_key(self) -> str:
        for pattern in _STRINGS[2:]:
            quoted = self._skip(pattern)
            if quoted:
                return quoted[1:-1]
        name = self._skip(_BARE_KEY)
        if not name:
            self.position += 1  # cannot be in a valid text; go on all the same
        return name

    def _value(self, path: Path) -> None:
        first = self._peek()
        if first == "[":
            self._array(path)
        elif first == "{":
            self._inline_table(path)
        elif not any(self._skip(pattern) for pattern in _STRINGS):
            self._skip(_BARE_VALUE)

    def _array(self, path: Path) -> None:
        self.position += 1
        for i in range(len(self.text)):
            self._skip(_BLANK)
            if self._peek() in ("]", ""):
                break
            self._note((*path, i))
            self._value((*path, i))
            self._skip(_BLANK)
            if self._peek() == ",":
                self.position += 1
        self.position += 1

    def _inline_table(self, path: Path) -> None:
        self.position += 1
        while True:
            self._skip(_BLANK)
            if self._peek() in ("}", ""):
                break
            self._pair(path)
            self._skip(_BLANK)
            if self._peek() == ",":
                self.position += 1
        self.position += 1


def key_lines(text: str) -> dict[Path, int]:
    """Find the line of every key and table of a valid TOML text.

    Parameters
    ----------
    text : str
        The text, read without error before.

    Returns
    -------
    dict of tuple to int
        Path of keys and array places -> line, counted from 1 (dimensionless).
    """
    scanner = _Scanner(text)
    scanner.scan()
    return scanner.lines


def line_of(path: Path, lines: Mapping[Path, int]) -> int:
    """Line of a key, or of the innermost table round it; 1 where there is none.

    Parameters
    ----------
    path : tuple of str or int
        Keys and array places.
    lines : mapping
        What `key_lines` found.

    Returns
    -------
    int
        Line, counted from 1 (dimensionless).
    """
    for length in range(len(path), 0, -1):
        if path[:length] in lines:
            return lines[path[:length]]
    return 1
