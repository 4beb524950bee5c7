"""What every test shares: caches, options of generated tests, and the ledger of claims."""

import os
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings

# Kernels are compiled once and kept between runs and worker processes; a command that a test
# starts inherits it. Set before anything imports numba.
os.environ.setdefault("NUMBA_CACHE_DIR", str(Path(__file__).parents[1] / ".pytest_cache" / "numba"))
os.environ.setdefault("MPLBACKEND", "Agg")

from tests.claims import (
    claim,
    pytest_addoption,
    pytest_configure,
    pytest_terminal_summary,
)

__all__ = ["claim", "pytest_addoption", "pytest_configure", "pytest_terminal_summary"]

# The same examples on every run; no deadline, since a first example may compile a kernel.
settings.register_profile(
    "chainsim",
    derandomize=True,
    deadline=None,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.function_scoped_fixture],
)
settings.load_profile("chainsim")


@pytest.fixture
def write_scenario(tmp_path):
    """Write TOML text into a scenario file of its own and return its path."""

    def write(text: str, name: str = "lift.toml") -> Path:
        path = tmp_path / name
        path.write_text(text, encoding="utf-8")
        return path

    return write
