"""`driftwell info`: of a run, of what is no run, of one that is damaged."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from driftwell.cli.main import main
from tests.cli.small_runs import scenario, settings

Printed = pytest.CaptureFixture[str]


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A finished run."""
    folder = tmp_path_factory.mktemp("info")
    arguments = ["run", str(scenario(folder)), "-o", str(folder / "run"), "--no-pictures"]
    assert 0 == main([*arguments, *settings("duration=2 us")])
    return folder / "run"


@pytest.fixture
def run(made: Path, tmp_path: Path) -> Path:
    """A copy of the finished run."""
    return Path(shutil.copytree(made, tmp_path / "run"))


def test_a_run_is_summarised_by_its_folder_or_its_master(run: Path, capsys: Printed) -> None:
    assert 0 == main(["info", str(run)])
    printed = capsys.readouterr()
    lines = printed.out.splitlines()
    assert "" == printed.err
    assert ["Eight ions in a trap", "finished: The motion was followed to t = 2 us."] == lines[:2]
    assert "reached 2 us of 2 us" == lines[2]
    assert "  held    1.000 ± 0.056  8 of 8 charges" in lines
    assert 0 == main(["info", str(run / "run.h5")])
    assert printed.out == capsys.readouterr().out


def test_what_is_no_run_is_told_with_2(tmp_path: Path, capsys: Printed) -> None:
    (tmp_path / "file.h5").write_bytes(b"nothing")
    for path in (tmp_path, tmp_path / "missing", tmp_path / "file.h5", Path("/dev/null")):
        assert 2 == main(["info", str(path)])
        printed = capsys.readouterr()
        assert (
            f"{path}: no run found; a run's folder with run.h5 in it is needed. Name the folder "
            "that `driftwell run` wrote.\n"
        ) == printed.err
        assert "" == printed.out


@pytest.mark.parametrize(
    ("name", "content"),
    [
        ("run.h5", b""),
        ("run.h5", b"not HDF5 at all"),
        ("answers.h5", b""),
        ("answers.h5", b"\x89HDF\r\n\x1a\n" + bytes(2000)),
    ],
)
def test_a_damaged_file_is_named_with_what_to_do(
    name: str, content: bytes, run: Path, capsys: Printed
) -> None:
    (run / name).write_bytes(content)
    assert 2 == main(["info", str(run)])
    printed = capsys.readouterr()
    assert printed.err.startswith(f"{run / name}: damaged or not readable")
    assert 1 == printed.err.count("\n")
    assert "" == printed.out


def test_a_file_cut_anywhere_is_told_in_words(run: Path, capsys: Printed) -> None:
    for name in ("run.h5", "answers.h5", "segments/000001.h5"):
        whole = (run / name).read_bytes()
        for part in range(1, 16):
            (run / name).write_bytes(whole[: len(whole) * part // 16])
            code = main(["info", str(run)])
            printed = capsys.readouterr()
            assert code in (0, 2)
            assert "damaged" in printed.out + printed.err
            assert "Traceback" not in printed.err
        (run / name).write_bytes(whole)
    assert 0 == main(["info", str(run)])


def test_a_missing_segment_is_told_and_the_rest_is_shown(run: Path, capsys: Printed) -> None:
    (run / "segments" / "000001.h5").unlink()
    assert 0 == main(["info", str(run)])
    shown = capsys.readouterr().out
    assert "Eight ions in a trap" in shown
    assert "000001.h5: missing" in shown


def test_a_folder_where_a_file_should_be_is_told(run: Path, capsys: Printed) -> None:
    (run / "answers.h5").unlink()
    (run / "answers.h5").mkdir()
    assert 0 == main(["info", str(run)])
    assert "unfinished" in capsys.readouterr().out
