"""What people look at: report page, playback, plots, animation, comparison. Reads recordings only.

The names below are imported when they are first used, since drawing takes long to import.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

_HOMES = {
    "animate": "animation",
    "compare": "comparison",
    "comparison_table": "comparison_views",
    "render_comparison": "comparison_views",
    "render_report": "page",
    "write_plots": "plots",
}


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f"{__name__}.{_HOMES[name]}"), name)


__all__ = [
    "animate",
    "compare",
    "comparison_table",
    "render_comparison",
    "render_report",
    "write_plots",
]
