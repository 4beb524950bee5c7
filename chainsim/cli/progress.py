"""How far a run is: a line that is redrawn on a terminal, a plain line now and then elsewhere."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import TextIO

EVERY = 5.0
"""Time between two plain lines [s]."""

REDRAWN_EVERY = 0.2
"""Time between two pictures of the line on a terminal [s]."""

CLEAR = "\r\x1b[K"
"""Back to the start of the line, and wipe it (ECMA-48: CR, EL)."""


class RunProgress:
    """Follows one run on standard error.

    Parameters
    ----------
    name : str
        What is run.
    stream : TextIO or None
        Where to write; None takes standard error.
    """

    def __init__(self, name: str, stream: TextIO | None = None) -> None:
        self._name = name
        self._stream = stream or sys.stderr
        self._is_live = self._stream.isatty()
        self._start: tuple[float, float] | None = None
        self._last = (0.0, 0.0)
        self._shown = 0.0

    def __call__(self, simulated: float, duration: float, wall: float) -> None:
        """Say how far the run is, if it is time to.

        Parameters
        ----------
        simulated, duration : float
            Time that is simulated, and that is to be [s].
        wall : float
            Time since the start of the run, by the clock on the wall [s].
        """
        if self._start is None:
            self._start = (simulated, wall)
            self._shown = wall
        self._last = (simulated, wall)
        if wall - self._shown < (REDRAWN_EVERY if self._is_live else EVERY):
            return
        self._shown = wall
        text = f"{self._name}: {self.standing(simulated, duration, wall)}"
        self._stream.write(f"{CLEAR}{text}" if self._is_live else f"{text}\n")
        self._stream.flush()

    def standing(self, simulated: float, duration: float, wall: float) -> str:
        """Return how far the run is, how fast, and how long it will take.

        Parameters
        ----------
        simulated, duration : float
            Time that is simulated, and that is to be [s].
        wall : float
            Time since the start of the run, by the clock on the wall [s].
        """
        from chainsim.study.forecast import duration_text

        text = f"{simulated / duration:4.0%}  {simulated:.1f} of {duration:.1f} s simulated"
        first, begun = self._start or (0.0, 0.0)
        if wall <= begun or simulated <= first:
            return text
        speed = (simulated - first) / (wall - begun)
        left = duration_text((duration - simulated) / speed)
        return f"{text}, {speed:.3g} simulated s per s, {left} left"

    def end(self) -> None:
        """Say how much was simulated, and how fast."""
        if self._start is None:
            return
        (first, begun), (simulated, wall) = self._start, self._last
        text = f"{self._name}: {simulated:.1f} s simulated in {wall:.1f} s"
        if wall > begun:  # the first call comes when all is compiled
            text += f", {(simulated - first) / (wall - begun):.3g} simulated s per s"
        self._stream.write(f"{CLEAR if self._is_live else ''}{text}\n")
        self._stream.flush()


def will_compile() -> bool:
    """Whether the first run has to compile its kernels, as no compiled ones are kept yet."""
    import numba

    import chainsim.kernels  # noqa: F401 - tells numba where compiled kernels are kept

    return not any(Path(numba.config.CACHE_DIR).rglob("*.nbi"))  # type: ignore[attr-defined]
