"""The notebooks run from their first cell to their last, and show what they say they show."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import nbformat
import pytest
from nbclient import NotebookClient

import driftwell

FOLDER = Path(__file__).resolve().parents[2] / "docs" / "notebooks"
SHOWN = {
    "how-many-ions-fit": (
        "Gaussian of rms size",
        "did you mean &quot;temperature&quot;?",
        "<b>finished</b>",
        "image/png",
    ),
    "a-pulse-read-and-drawn": (
        "<td style='text-align:left;padding:.1em 1em .1em 0;white-space:normal'>rms duration</td>",
        "61 records x 500 charges x 3, m",
        "0.8 ns: ",
        " eV",
        "no snapshot at t = 5e-10 s",
        "image/png",
        "times as long",
    ),
}
"""What stands in the outputs of each notebook."""


def book(name: str) -> Any:
    return nbformat.read(FOLDER / f"{name}.ipynb", as_version=4)


def test_every_notebook_is_listed_here() -> None:
    assert set(SHOWN) == {path.stem for path in FOLDER.glob("*.ipynb")}


@pytest.mark.parametrize("name", SHOWN)
def test_a_notebook_keeps_no_outputs(name: str) -> None:
    code = [cell for cell in book(name).cells if cell.cell_type == "code"]
    assert all(not cell.outputs and cell.execution_count is None for cell in code)


@pytest.mark.filterwarnings("ignore::DeprecationWarning", "ignore::ResourceWarning")
@pytest.mark.parametrize("name", SHOWN)
def test_a_notebook_runs_to_its_end_and_shows_its_results(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("PYTHONPATH", str(Path(driftwell.__file__).parents[1]))
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path / "ipython"))
    found = book(name)
    client = NotebookClient(
        found, timeout=120, kernel_name="python3", resources={"metadata": {"path": str(tmp_path)}}
    )
    client.execute()  # raises where a cell does
    shown = str([cell.outputs for cell in found.cells if cell.cell_type == "code"])
    plain = shown.replace("\\'", "'")
    assert [] == [text for text in SHOWN[name] if text not in plain]
