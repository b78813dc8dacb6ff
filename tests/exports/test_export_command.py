"""``driftwell export``: where it writes, and what it says where it cannot."""

from __future__ import annotations

import resource
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from driftwell.cli.main import main
from driftwell.exports.names import FORMATS
from driftwell.record.reader import Run

Printed = pytest.CaptureFixture[str]


def test_each_format_is_written_beside_under_a_usual_name(
    run: Run, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Printed
) -> None:
    monkeypatch.chdir(tmp_path)
    for name in FORMATS:
        assert 0 == main(["export", str(run.folder), name])
    made = sorted(each.name for each in tmp_path.iterdir())
    assert ["run-csv", "run-openpmd.h5", "run-parquet", "run-vtk"] == made
    assert capsys.readouterr().out.startswith("openpmd: run-openpmd.h5 (0.0")


@pytest.mark.parametrize("name", FORMATS)
def test_what_is_there_already_is_left_as_it_is(
    run: Run, tmp_path: Path, name: str, capsys: Printed
) -> None:
    there = tmp_path / "there"
    there.write_text("kept")
    assert 2 == main(["export", str(run.folder), name, "-o", str(there)])
    assert capsys.readouterr().err.startswith(f"{there}: exists already, and nothing was written")
    assert "kept" == there.read_text()
    assert [there] == list(tmp_path.iterdir())


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        (["csv", "--times", "soon"], 'times: "soon" is not a time'),
        (["csv", "--times", "2 us..1 us"], 'times: "2 us..1 us" ends before it begins'),
        (["openpmd", "--times", "1.5 us"], "nothing was recorded at these times. Its snapshots"),
        (["vtk", "--times", "1.5 us"], "nothing was recorded at these times. Its snapshots"),
        (["vtk", "--what", "moments"], "vtk: what is moments; needs snapshots, trajectory or both"),
        (["openpmd", "--what", "snapshots", "trajectory"], "one of the two"),
    ],
)
def test_what_cannot_be_written_is_told_and_leaves_nothing(
    run: Run, tmp_path: Path, arguments: list[str], told: str, capsys: Printed
) -> None:
    assert 2 == main(["export", str(run.folder), *arguments, "-o", str(tmp_path / "out")])
    assert told in capsys.readouterr().err
    assert [] == list(tmp_path.iterdir())


@pytest.mark.parametrize(
    ("name", "module", "extra"),
    [("parquet", "pyarrow", "parquet"), ("vtk", "vtkmodules", "vtk")],
)
def test_a_missing_library_is_one_sentence_with_the_command(
    run: Run,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    name: str,
    module: str,
    extra: str,
    capsys: Printed,
) -> None:
    for loaded in [each for each in sys.modules if each.split(".")[0] == module]:
        monkeypatch.setitem(sys.modules, loaded, None)
    monkeypatch.setitem(sys.modules, module, None)
    assert 2 == main(["export", str(run.folder), name, "-o", str(tmp_path / "out")])
    lines = capsys.readouterr().err.splitlines()
    assert 1 == len(lines)
    assert lines[0].endswith(f"install it with: pip install 'driftwell[{extra}]'")
    assert [] == list(tmp_path.iterdir())


@pytest.fixture
def small_files() -> Iterator[None]:
    """No file may grow beyond 2000 bytes, as on a disk that is nearly full."""
    before = resource.getrlimit(resource.RLIMIT_FSIZE)
    resource.setrlimit(resource.RLIMIT_FSIZE, (2000, before[1]))
    yield
    resource.setrlimit(resource.RLIMIT_FSIZE, before)


@pytest.mark.parametrize("name", FORMATS)
def test_a_disk_that_refuses_leaves_nothing_that_could_be_taken_for_whole(
    run: Run, tmp_path: Path, name: str, capfd: pytest.CaptureFixture[str], small_files: None
) -> None:
    assert 2 == main(["export", str(run.folder), name, "-o", str(tmp_path / "out")])
    told = capfd.readouterr().err
    assert 1 == len(told.splitlines())
    assert told.startswith(f"{tmp_path / 'out'}: cannot be written (")
    assert [] == list(tmp_path.iterdir())
