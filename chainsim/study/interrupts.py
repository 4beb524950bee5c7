"""Ctrl-C during a study: the first asks to stop, the second stops at once."""

from __future__ import annotations

import signal
import threading
from types import FrameType, TracebackType
from typing import Any


class StopRequest:
    """Notes the wish to stop while it is open.

    The first SIGINT or SIGTERM sets `asked`; the second SIGINT raises KeyboardInterrupt, which
    ends the workers at once. In a thread that cannot receive signals nothing is installed.

    Attributes
    ----------
    asked : bool
        True once the user has asked to stop.
    """

    def __init__(self) -> None:
        self.asked = False
        self._before: dict[int, Any] = {}

    def __enter__(self) -> StopRequest:
        if threading.current_thread() is threading.main_thread():
            for number in (signal.SIGINT, signal.SIGTERM):
                self._before[number] = signal.signal(number, self._ask)
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        for number, handler in self._before.items():
            signal.signal(number, handler)

    def _ask(self, number: int, frame: FrameType | None) -> None:
        if self.asked and number == signal.SIGINT:
            raise KeyboardInterrupt
        self.asked = True
