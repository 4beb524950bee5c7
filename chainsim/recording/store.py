"""What a recording asks of the place where its values are kept."""

from __future__ import annotations

from pathlib import Path
from typing import Any, Protocol

import numpy as np

from chainsim.recording.tables import Choice


class Store(Protocol):
    """Where a recording's values are kept.

    1. `names` lists channels and geometry by path; `read` gives the values of one of them.
    2. `table` gives the columns of a table, none for one that was never written.
    3. `attributes` gives the root attributes, `labels` the labels along an axis, `texts` the
       scenario's texts.
    4. A value that is missing or damaged raises RecordingError, nothing else.
    """

    path: Path | None

    def names(self) -> list[str]: ...
    def read(self, name: str, window: slice) -> np.ndarray: ...
    def table(self, name: str) -> dict[str, np.ndarray | Choice]: ...
    def attributes(self) -> dict[str, Any]: ...
    def labels(self, dim: str) -> tuple[str, ...]: ...
    def texts(self) -> dict[str, str]: ...
    def scenario(self) -> Any: ...
    def close(self) -> None: ...
