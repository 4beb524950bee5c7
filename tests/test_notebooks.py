"""Notebooks: stored without output, listed, and run in their small form, one after the other."""

from __future__ import annotations

import os
import sys
from pathlib import Path

import nbformat
import pytest

FOLDER = Path(__file__).parents[1] / "notebooks"
NOTEBOOKS = sorted(FOLDER.glob("*.ipynb"))
LONGEST_CELL = 600
"""Time allowed for one cell [s]: its first run may compile the kernels."""


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda path: path.stem)
def test_stored_without_output(path):
    book = nbformat.read(path, as_version=4)
    nbformat.validate(book)
    code = [cell for cell in book.cells if cell.cell_type == "code"]
    assert code
    assert all(not cell.outputs and cell.execution_count is None for cell in code)


def test_every_notebook_is_listed():
    assert len(NOTEBOOKS) >= 4
    text = (FOLDER / "README.md").read_text(encoding="utf-8")
    assert all(f"({path.name})" in text for path in NOTEBOOKS)


@pytest.mark.timeout(1200)
@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda path: path.stem)
def test_runs_in_its_small_form(path, monkeypatch):
    nbclient = pytest.importorskip("nbclient", reason="nbclient comes with the extra dev")
    pytest.importorskip("ipykernel", reason="ipykernel comes with the extra dev")
    monkeypatch.setenv("CHAINSIM_FAST", "1")
    # the notebook's kernel must find this checkout and this interpreter
    root = str(FOLDER.parent)
    monkeypatch.setenv("PYTHONPATH", os.pathsep.join([root, os.environ.get("PYTHONPATH", "")]))
    book = nbformat.read(path, as_version=4)
    client = nbclient.NotebookClient(
        book,
        timeout=LONGEST_CELL,
        kernel_name="python3",
        resources={"metadata": {"path": str(FOLDER)}},
    )
    client.create_kernel_manager()
    client.km.kernel_cmd = [sys.executable, "-m", "ipykernel_launcher", "-f", "{connection_file}"]
    client.execute()
    ran = [cell for cell in book.cells if cell.cell_type == "code"]
    assert all(cell.execution_count for cell in ran)
