"""The page of hand calculations is what the table says, and every formula says all it has to."""

from __future__ import annotations

import importlib.util
from pathlib import Path
from types import ModuleType

import pytest

from driftwell.hand.table import HAND_KINDS

TOOL = Path(__file__).parents[2] / "tools" / "hand_calculations.py"


@pytest.fixture(scope="module")
def tool() -> ModuleType:
    spec = importlib.util.spec_from_file_location("hand_calculations", TOOL)
    assert spec is not None
    assert spec.loader is not None
    made = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(made)
    return made


def test_the_page_in_docs_is_what_the_table_says(tool: ModuleType) -> None:
    assert 0 == tool.main(["--check"]), "run `python tools/hand_calculations.py`"


def test_a_stale_page_is_told_and_written_anew(
    tool: ModuleType,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    monkeypatch.setattr(tool, "PAGE", tmp_path / "page.md")
    assert 1 == tool.main(["--check"])
    assert "stale" in capsys.readouterr().err
    assert 0 == tool.main([])
    assert 0 == tool.main(["--check"])


def test_every_formula_has_a_name_an_equation_a_source_and_a_range() -> None:
    formulas = [formula for kind in HAND_KINDS for formula in kind.formulas]
    assert len({formula.name for formula in formulas}) == len(formulas) >= 30
    for formula in formulas:
        for text in (formula.name, formula.equation, formula.source, formula.range):
            assert text.strip()
            assert text.isascii()
