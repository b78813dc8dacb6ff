"""The reference page is made from the declarations, is fresh, and its links lead somewhere."""

from __future__ import annotations

import importlib.util
import re
from pathlib import Path
from types import ModuleType

import pytest

from driftwell.forms.declared import Keys, declared_keys, forms_within
from driftwell.scenario.model import Scenario
from driftwell.study.convergence.axes import AXES
from driftwell.study.convergence.table import ANSWERS, RUNS, axis_entry
from driftwell.study.convergence.table import HEADER as CONVERGENCE_HEADER
from driftwell.study.form import StudyForm
from driftwell.study.limit_table import HEADER as LIMIT_HEADER
from driftwell.study.limit_table import intervals_entry, runs_entry

TOOL = Path(__file__).parents[2] / "tools" / "scenario_reference.py"


@pytest.fixture(scope="module")
def tool() -> ModuleType:
    spec = importlib.util.spec_from_file_location("scenario_reference", TOOL)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_the_page_in_the_repository_is_fresh(tool: ModuleType) -> None:
    assert 0 == tool.main(["--check"]), "run `python tools/scenario_reference.py`"


def test_a_stale_or_missing_page_is_told_and_written_anew(
    tool: ModuleType,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    page = tmp_path / "scenario-reference.md"
    monkeypatch.setattr(tool, "PAGE", page)
    monkeypatch.setattr(tool, "STUDY_PAGE", tmp_path / "study-reference.md")
    assert 1 == tool.main(["--check"])
    told = capsys.readouterr().err
    assert "scenario-reference.md is stale" in told
    assert "study-reference.md is stale" in told
    assert 0 == tool.main([])
    assert 0 == tool.main(["--check"])
    page.write_text(page.read_text(encoding="utf-8") + "x", encoding="utf-8")
    assert 1 == tool.main(["--check"])


def test_every_key_of_every_form_is_on_the_page(tool: ModuleType) -> None:
    page = tool.page()
    missing = {
        f"{form.__name__}.{name}"
        for form in forms_within(Keys(Scenario))
        for name in declared_keys(form)
        if f"| `{name}` |" not in page and f"[{name}]" not in page and f"[{name}." not in page
    }
    assert set() == missing


def test_every_key_of_a_study_is_on_its_page_and_every_dataset_of_its_table(
    tool: ModuleType,
) -> None:
    page = tool.study_page()
    for form in forms_within(Keys(StudyForm)):
        for name in declared_keys(form):
            assert f"| `{name}` |" in page or f"[{name}]" in page, name
    for path in ("cases/run", "cases/varied/N", "cases/answer/N", "means/point", "means/answer/N"):
        assert f"### `{path}`" in page


def test_what_limits_and_convergence_leave_is_on_that_page(tool: ModuleType) -> None:
    limit, convergence = tool.study_page().split("## What a convergence study leaves")
    limit = limit.split("## What a limit leaves")[1]
    for entry in LIMIT_HEADER:
        assert f"| `{entry.name}` |" in limit
    for entry in CONVERGENCE_HEADER:
        assert f"| `{entry.name}` |" in convergence
    for table, part in (
        (runs_entry("", ""), limit),
        (intervals_entry(""), limit),
        (ANSWERS, convergence),
        (axis_entry("NAME"), convergence),
        (RUNS, convergence),
    ):
        assert f"### `{table.path}`" in part
        for column in table.columns:
            assert f"| `{column.name}` |" in part
    assert all(f"`{axis}`" in convergence for axis in AXES)


def test_every_link_leads_to_one_heading(tool: ModuleType) -> None:
    page = tool.page()
    headings = [
        tool._anchor(line.lstrip("# ")) for line in page.splitlines() if line.startswith("#")
    ]
    links = set(re.findall(r"\]\(#([^)]*)\)", page))
    assert len(links) > 20
    assert set() == links - set(headings)
    assert len(set(headings)) == len(headings)


def test_every_row_of_every_table_has_four_cells(tool: ModuleType) -> None:
    rows = [line for line in tool.page().splitlines() if line.startswith("|")]
    assert len(rows) > 100
    assert {5} == {len(re.findall(r"(?<!\\)\|", row)) for row in rows}
