"""`chainsim ready`: whether this machine is set up."""

from __future__ import annotations

import os
import platform
import shutil
import sys
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import NamedTuple

from chainsim.cli.frame import FAILS, HOLDS, command, json_option, print_json
from chainsim.cli.screen import show

NEEDED = (
    "numpy", "scipy", "numba", "h5py", "matplotlib", "pydantic", "click", "rich", "jinja2",
    "tomlkit", "pillow",
)  # fmt: skip
OPTIONAL = {
    "distributed": "sweeps on a cluster: pip install 'chainsim[cluster]'",
    "ezdxf": "sprocket outlines as DXF: pip install 'chainsim[cad]'",
    "xarray": "Recording.to_xarray(): pip install 'chainsim[xarray]'",
    "isal": "recordings written faster: pip install 'chainsim[fast]'",
}
LEAST_PYTHON = (3, 11)
LEAST_DISK = 1e9
"""Free disk below which recordings may not fit [bytes]."""


class Item(NamedTuple):
    """One thing that was looked at.

    Attributes
    ----------
    name : str
        What it is.
    is_fine : bool
        Whether chainsim can work with it.
    is_needed : bool
        Whether chainsim cannot work without it.
    text : str
        What was found, or what to do.
    """

    name: str
    is_fine: bool
    is_needed: bool
    text: str


@command("ready", short_help="Say whether this machine is set up.")
@json_option
def ready(as_json: bool) -> int:
    """Say whether this machine is set up; status 1 where something needed is missing."""
    items = [item for look in (_python, _packages, _machine, _programs) for item in look()]
    is_ready = all(item.is_fine for item in items if item.is_needed)
    if as_json:
        print_json({"ready": is_ready, "items": [item._asdict() for item in items]})
        return HOLDS if is_ready else FAILS
    for item in items:
        word = "ok" if item.is_fine else ("MISSING" if item.is_needed else "not there")
        show(f"{word:9} {item.name:20} {item.text}")
    show("", "This machine is ready." if is_ready else "This machine is not ready: see MISSING.")
    return HOLDS if is_ready else FAILS


def _python() -> list[Item]:
    found = platform.python_version()
    return [Item("Python", sys.version_info >= LEAST_PYTHON, True, f"{found} (3.11 or newer)")]


def _packages() -> list[Item]:
    items = [Item("chainsim", True, True, _own_version())]
    for name in NEEDED:
        found = _version(name)
        items.append(Item(name, found is not None, True, found or f"pip install {name}"))
    for name, use in OPTIONAL.items():
        found = _version(name)
        items.append(Item(name, found is not None, False, found or f"for {use}"))
    return items


def _own_version() -> str:
    from chainsim import __version__

    return __version__


def _version(name: str) -> str | None:
    try:
        return version(name)
    except PackageNotFoundError:
        return None


def _machine() -> list[Item]:
    """Cores, disk, and whether results and compiled kernels can be kept."""
    from chainsim.study.engines import cores

    free = shutil.disk_usage(".").free
    here = Path.cwd()
    items = [
        Item("cores", True, False, f"{cores()}, one run at a time on each"),
        Item("free disk here", free > LEAST_DISK, True, f"{free / 1e9:.0f} GB"),
        Item("this folder", os.access(here, os.W_OK), True, f"{here} (can be written to)"),
    ]
    return [*items, _kernels()]


def _kernels() -> Item:
    """The folder of compiled kernels."""
    try:
        import numba

        from chainsim.cli.progress import will_compile

        state = "will be compiled by the first run" if will_compile() else "compiled"
        folder = Path(numba.config.CACHE_DIR)  # type: ignore[attr-defined]
    except ImportError as error:
        return Item("kernels", False, True, str(error))
    known = next(place for place in (folder, *folder.parents) if place.exists())
    can_write = os.access(known, os.W_OK)
    note = "" if can_write else ", cannot be written to: every run will compile anew"
    return Item("kernels", can_write, False, f"{state}; kept in {folder}{note}")


def _programs() -> list[Item]:
    browsers = ("chromium", "chromium-browser", "google-chrome")
    found = next((place for place in map(shutil.which, browsers) if place), None)
    ffmpeg = shutil.which("ffmpeg")
    return [
        Item("ffmpeg", ffmpeg is not None, False, ffmpeg or "for animations as MP4"),
        Item("Chromium", found is not None, False, found or "for the tests of the report page"),
    ]
