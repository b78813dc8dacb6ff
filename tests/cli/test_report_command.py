"""`driftwell report`: where the page is written, and what is said where it cannot be."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.cli.main import main
from tests.cli.small_runs import scenario, settings

Printed = pytest.CaptureFixture[str]


def test_a_run_is_written_as_one_page_in_its_folder_or_elsewhere(
    tmp_path: Path, capsys: Printed
) -> None:
    folder = tmp_path / "run"
    arguments = ["run", str(scenario(tmp_path)), "-o", str(folder), "--no-pictures"]
    assert 0 == main([*arguments, *settings("duration=2 us")])
    capsys.readouterr()
    assert 0 == main(["report", str(folder)])
    printed = capsys.readouterr()
    assert "" == printed.err
    assert printed.out.startswith(f"report: {folder / 'report.html'} (")
    other = tmp_path / "other.html"
    assert 0 == main(["report", str(folder / "run.h5"), "-o", str(other)])
    assert (folder / "report.html").read_bytes() == other.read_bytes()
    assert [] == list(tmp_path.rglob("*.part"))


def test_what_cannot_be_written_or_read_is_told_in_one_message(
    tmp_path: Path, capsys: Printed
) -> None:
    assert 2 == main(["report", str(tmp_path)])
    assert "holds neither a run nor a study" in capsys.readouterr().err
    assert 2 == main(["report", str(tmp_path / "none")])
    assert "holds neither a run nor a study" in capsys.readouterr().err
