"""A sweep's folder: one sweep at a time, nothing of another kind overwritten."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.errors import BusyError, RecordError
from driftwell.study.sweep_folder import CATALOGUE_FILE, run_folder, taken


def test_the_texts_are_kept_as_given_and_runs_have_a_place(tmp_path: Path) -> None:
    folder = tmp_path / "a" / "b"
    with taken(folder, "study é\r\n", "scenario\n") as changed:
        assert not changed
    assert "study é\r\n".encode() == (folder / "study.toml").read_bytes()
    assert b"scenario\n" == (folder / "scenario.toml").read_bytes()
    assert (folder / "runs").is_dir()
    assert folder / "runs" / "0123456789abcdef" == run_folder(folder, "0123456789abcdef" + "9" * 48)


def test_a_second_sweep_is_kept_out_while_the_first_works(tmp_path: Path) -> None:
    with taken(tmp_path, "a", "b"):
        with pytest.raises(BusyError, match="in use by process"), taken(tmp_path, "a", "b"):
            pass
        assert (tmp_path / "study.toml").exists()
    with taken(tmp_path, "a", "b"):
        pass


def test_a_changed_study_is_told_and_replaces_the_old_text(tmp_path: Path) -> None:
    with taken(tmp_path, "a", "b"):
        (tmp_path / CATALOGUE_FILE).touch()
    with taken(tmp_path, "a", "b") as changed:
        assert not changed
    with taken(tmp_path, "a", "b2") as changed:
        assert changed
    assert "b2" == (tmp_path / "scenario.toml").read_text()


@pytest.mark.parametrize(
    ("name", "content", "told"),
    [
        ("run.h5", "", "holds run.h5 already, and no sweep"),
        ("study.toml", "mine", "holds another study.toml already"),
        ("scenario.toml", "mine", "holds another scenario.toml already"),
    ],
)
def test_a_folder_with_something_else_in_it_is_refused_and_stays(
    name: str, content: str, told: str, tmp_path: Path
) -> None:
    (tmp_path / name).write_text(content)
    with pytest.raises(RecordError, match=told), taken(tmp_path, "a", "b"):
        pass
    assert [name] == [path.name for path in tmp_path.iterdir()]
    assert content == (tmp_path / name).read_text()


def test_a_sweep_may_go_where_its_own_files_lie(tmp_path: Path) -> None:
    """Also where an editor has put a byte order mark before the text."""
    (tmp_path / "study.toml").write_bytes(b"\xef\xbb\xbfa")
    (tmp_path / "scenario.toml").write_text("b")
    with taken(tmp_path, "a", "b") as changed:
        assert not changed
    assert b"\xef\xbb\xbfa" == (tmp_path / "study.toml").read_bytes()


def test_a_folder_that_cannot_be_is_told(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("mine")
    for folder, told in (
        (tmp_path / "file", "is a file; a sweep needs a folder"),
        (tmp_path / "file" / "below", "cannot be written"),
        (tmp_path / "a\0b", "null character"),
        (tmp_path / ("x" * 300), "cannot be written"),
    ):
        with pytest.raises(RecordError, match=told), taken(folder, "a", "b"):
            pass


def test_what_goes_wrong_inside_is_not_taken_for_the_folders_fault(tmp_path: Path) -> None:
    with pytest.raises(OSError, match="my own"), taken(tmp_path, "a", "b"):
        raise OSError("my own")
