"""The validation tool: a few of its cases are carried out, and its page has all of them."""

from __future__ import annotations

import importlib
import subprocess
import sys
from pathlib import Path
from types import ModuleType

import pytest

TOOLS = Path(__file__).resolve().parents[2] / "tools"


def called(*arguments: str) -> subprocess.CompletedProcess[str]:
    """`python tools/validate.py` as a program of its own."""
    return subprocess.run(
        [sys.executable, str(TOOLS / "validate.py"), *arguments],
        capture_output=True,
        text=True,
        check=False,
    )


@pytest.fixture
def part(monkeypatch: pytest.MonkeyPatch):
    """Takes a module of the tool by name."""
    monkeypatch.syspath_prepend(str(TOOLS))

    def taken(name: str) -> ModuleType:
        return importlib.import_module(f"validation.{name}")

    return taken


def test_the_quick_cases_agree_with_what_is_published(tmp_path: Path) -> None:
    """They are run through the command line; one that was done is not done again."""
    output = tmp_path / "runs"
    first = called("--quick", "--output", str(output))
    assert 0 == first.returncode, first.stderr
    assert 3 <= len(list(output.glob("*/found.json")))
    again = called("--quick", "--output", str(output))
    assert first.stdout == again.stdout


def test_the_page_has_the_cases_of_the_table() -> None:
    """Each with its picture."""
    assert 0 == called("--check").returncode
    pictures = {path.stem for path in (TOOLS.parent / "docs" / "validation").glob("*.png")}
    listed = {line.split()[0] for line in called("--list").stdout.splitlines()}
    assert listed == pictures
    assert 40 <= len(listed)


def test_a_value_off_its_published_one_is_told(part) -> None:
    """A found value 5 errors away is beyond 4, one 3 errors away is not; none without a value."""
    case, results = part("case"), part("results")
    published = case.Published(10.0, 0.03, "a source", case.COMPUTED)

    def found(value: float):
        return case.Found("a value", "m", published, value, {"step": 0.04})

    def told(value: float, bars: float) -> int:
        result = results.Result("a case", "", 1.0, "0", (found(value),))
        return len(results.beyond([result], bars))

    assert 5.0 == pytest.approx(found(10.25).bars, rel=1e-9, abs=0.0)
    assert [1, 0, 1, 1] == [
        told(10.25, 4.0),
        told(10.15, 4.0),
        told(10.15, 2.0),
        told(float("nan"), 4.0),
    ]


@pytest.mark.parametrize(
    ("value", "error", "words"),
    [
        (1.23456, 0.012, "1.235 +- 0.012"),
        (-2899.4915, 115.0, "-2899 +- 115"),
        (2.7e-9, 1.5e-10, "(2.70 +- 0.15)e-9"),
        (20.0, 0.0, "20"),
        (1.0, 3e-14, "1 +- 3e-14"),
    ],
)
def test_a_value_is_written_with_two_digits_of_its_error(
    part, value: float, error: float, words: str
) -> None:
    """And without more than double precision has."""
    assert words == part("page").with_error(value, error)


def test_a_result_is_kept_until_its_case_changes(part, tmp_path: Path) -> None:
    """It reads back as it was, and not under another digest."""
    case, results = part("case"), part("results")
    published = case.Published(1.0, 0.1, "a source", case.FROM_MEMORY)
    found = case.Found("a value", "m", published, 1.05, {"step": 0.01})
    result = results.Result("a case", "abc", 2.5, "0", (found,))
    results.keep(tmp_path, result)
    assert result == results.kept(tmp_path, "abc")
    assert results.kept(tmp_path, "abd") is None
