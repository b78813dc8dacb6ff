"""Where a run may be written: a folder of its own, or a clear word before anything is computed."""

from __future__ import annotations

import os
import re
from pathlib import Path

import pytest

from driftwell import open_run
from driftwell.cli.main import main
from driftwell.cli.runs import run as command_module
from driftwell.record import claim as claim_module
from driftwell.record.index import SEGMENTS
from tests.cli.small_runs import SMALL, scenario, settings, started

Printed = pytest.CaptureFixture[str]
SHORT = settings("duration=2 us")


def run(folder: Path, output: Path) -> int:
    path = scenario(folder)
    return main(["run", str(path), "-o", str(output), "--no-pictures", *SHORT])


def told(capsys: Printed) -> str:
    """What is told on stderr at the end, in one line; nothing stands on stdout."""
    printed = capsys.readouterr()
    assert "" == printed.out
    title, *_, line = printed.err.splitlines()
    assert "Eight ions in a trap" == title
    return line


def test_another_scenario_in_the_folder_is_not_overwritten(tmp_path: Path, capsys: Printed) -> None:
    kept = scenario(tmp_path, "# my own\n" + SMALL, "scenario.toml")
    assert 2 == run(tmp_path, tmp_path)
    assert "holds another scenario.toml already" in told(capsys)
    assert kept.read_text().startswith("# my own")


def test_a_run_may_go_where_its_scenario_lies(tmp_path: Path) -> None:
    path = scenario(tmp_path, name="scenario.toml")
    assert 0 == main(["run", str(path), "-o", str(tmp_path), "--no-pictures", *SHORT])
    assert "finished" == open_run(tmp_path).outcome.word


def test_folders_on_the_way_are_made(tmp_path: Path) -> None:
    assert 0 == run(tmp_path, tmp_path / "a" / "b" / "c")
    assert "finished" == open_run(tmp_path / "a" / "b" / "c").outcome.word


def test_a_file_in_place_of_the_folder_is_told(tmp_path: Path, capsys: Printed) -> None:
    (tmp_path / "run").write_text("mine")
    assert 2 == run(tmp_path, tmp_path / "run")
    assert f"{tmp_path / 'run'}: is a file; a run needs a folder. Name another with -o." == told(
        capsys
    )
    assert 2 == run(tmp_path, tmp_path / "run" / "below")
    assert f"lies below the file {tmp_path / 'run'}; a run needs a folder." in told(capsys)
    assert "mine" == (tmp_path / "run").read_text()


def test_a_folder_without_permission_is_told(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    """For a user; root may write anywhere, so the system's word is feigned."""
    monkeypatch.setattr(claim_module.os, "access", lambda path, mode: False)
    assert 2 == run(tmp_path, tmp_path / "run")
    assert (
        f"{tmp_path / 'run'}: cannot be written (no permission to write in {tmp_path}); a run "
        "needs a folder it may write to, on a disk with space. Name another with -o."
    ) == told(capsys)


@pytest.mark.parametrize("name", ["x" * 300, "/proc/nothing/run", "a\0b"])
def test_a_name_the_system_refuses_is_told(name: str, tmp_path: Path, capsys: Printed) -> None:
    assert 2 == run(tmp_path, tmp_path / name)
    assert "a run needs a folder" in told(capsys)


def test_a_folder_taken_while_the_run_is_prepared_is_told(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    real = command_module.run

    def late(loaded: object, folder: Path, display: object, threads: int, **more: object) -> object:
        begins = display.begins  # type: ignore[attr-defined]

        def takes(*given: object) -> None:
            begins(*given)
            (folder / SEGMENTS).mkdir(parents=True)

        monkeypatch.setattr(display, "begins", takes)
        return real(loaded, folder, display, threads, **more)  # type: ignore[arg-type]

    monkeypatch.setattr(command_module, "run", late)
    assert 2 == run(tmp_path, tmp_path / "run")
    assert "holds segments already" in capsys.readouterr().err


def test_of_two_runs_started_at_once_into_one_folder_one_is_refused(tmp_path: Path) -> None:
    path = scenario(tmp_path)
    arguments = (
        "run",
        path,
        "-o",
        tmp_path / "run",
        "--no-pictures",
        *settings("duration=400 ms", "record.every=40 ms"),  # some seconds: the two meet
    )
    both = [started(*arguments), started(*arguments)]
    talk = [process.communicate(timeout=300) for process in both]
    assert [0, 2] == sorted(process.returncode for process in both), talk
    refused = next(k for k in (0, 1) if both[k].returncode == 2)
    assert re.search("in use by process|already; a run needs a folder", talk[refused][1])
    assert all("Traceback" not in err for _, err in talk)
    found = open_run(tmp_path / "run")
    assert ("finished", []) == (found.outcome.word, found.damage(thorough=True))


def test_a_folder_refused_by_a_full_disk_stays_free_for_the_next_run(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(handle: int, data: object) -> int:
        raise OSError(28, "No space left on device")

    with monkeypatch.context() as disk:
        disk.setattr(os, "write", full)
        assert 2 == run(tmp_path, tmp_path / "run")
    assert "cannot be written (No space left on device)" in capsys.readouterr().err
    assert 0 == run(tmp_path, tmp_path / "run")
