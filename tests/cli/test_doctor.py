"""``driftwell doctor``: what is sound, what is sick, and a remedy behind what is."""

from __future__ import annotations

import sys
import tomllib
from collections.abc import Iterator
from importlib.metadata import PackageNotFoundError
from pathlib import Path

import pytest

from driftwell.cli.doctor import extras, kept, output, processor, room, versions
from driftwell.cli.doctor.line import FAULT, NOTE, OK, Line
from driftwell.cli.doctor.look import report
from driftwell.cli.terminal.thread_limit import usable_cores

PROJECT = tomllib.loads((Path(__file__).parents[2] / "pyproject.toml").read_text("utf-8"))


def name_of(requirement: str) -> str:
    """The name of the library that is required."""
    return requirement.partition(">")[0]


def test_every_library_and_extra_of_the_project_is_looked_at() -> None:
    project = PROJECT["project"]
    assert set(map(name_of, project["dependencies"])) == set(versions.LIBRARIES)
    assert set(project["optional-dependencies"]) - {"docs", "test", "dev"} == set(extras.USES)


def test_a_fault_ends_with_2_and_a_note_with_0(capsys: pytest.CaptureFixture[str]) -> None:
    note, fault = Line(NOTE, "disk", "little", "make space"), Line(FAULT, "numba", "none", "get it")
    assert 0 == report({"a": [lambda: [note]]})
    assert "-> make space" in capsys.readouterr().out
    assert 2 == report({"a": [lambda: [note], lambda: [fault]]})
    printed = capsys.readouterr().out
    assert "-> get it" in printed
    assert "1 fault stops runs here; 1 note." in printed


def test_a_check_that_cannot_cope_is_a_note_and_the_others_go_on(
    capsys: pytest.CaptureFixture[str],
) -> None:
    def broken() -> Iterator[Line]:
        raise RuntimeError("odd")

    assert 0 == report({"a": [broken, lambda: [Line(OK, "disk", "ample")]]})
    printed = capsys.readouterr().out
    assert "cannot be looked at here (RuntimeError: odd)" in printed
    assert "ample" in printed


def test_a_library_that_is_missing_too_old_or_does_not_load_is_a_fault(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def installed(name: str) -> str:
        if name == "pint":
            raise PackageNotFoundError
        return {"tqdm": "1.0"}.get(name, "99.0")

    monkeypatch.setattr(versions, "version", installed)
    monkeypatch.setattr(versions, "wanted", lambda: {"tqdm": ">=4.66"})
    monkeypatch.setitem(sys.modules, "h5py", None)
    found = {line.what: line for line in versions.libraries()}
    assert {"pint", "tqdm", "h5py"} == {n for n, line in found.items() if line.word == FAULT}
    assert "1.0, where driftwell wants >=4.66" == found["tqdm"].found
    assert "pip install 'tqdm>=4.66'" == found["tqdm"].remedy
    assert "does not load" in found["h5py"].found


@pytest.mark.parametrize(
    ("said", "word", "told"),
    [
        (None, OK, "one for each core"),
        ("many", NOTE, "'many' is not a number of threads"),
        ("1000", NOTE, "no faster"),
    ],
)
def test_threads_that_do_not_suit_are_noted(said: str | None, word: str, told: str) -> None:
    found = next(line for line in processor.cores(said) if line.what == "threads")
    assert word == found.word
    assert told in found.found
    assert bool(found.remedy) == (word == NOTE)


def test_a_share_of_cores_is_noted(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    quota = tmp_path / "cpu.max"
    monkeypatch.setattr(processor, "_QUOTA", quota)
    monkeypatch.setattr(processor, "usable_cores", lambda: 8)
    quota.write_text("max 100000\n")
    assert "share of cores" not in {line.what for line in processor.cores()}
    quota.write_text("250000 100000\n")
    found = {line.what: line for line in processor.cores()}["share of cores"]
    assert "the work of 2.5 cores" in found.found
    assert "export NUMBA_NUM_THREADS=2" == found.remedy
    assert usable_cores() >= 1


def test_a_compiler_that_is_switched_off_is_a_fault() -> None:
    found = {line.what: line for line in processor.compiler("1")}
    assert (FAULT, "unset NUMBA_DISABLE_JIT") == (found["compiler"].word, found["compiler"].remedy)
    assert "compiler" not in {line.what for line in processor.compiler("0")}


def test_a_folder_that_is_none_is_not_written(tmp_path: Path) -> None:
    assert kept.writable(tmp_path / "not" / "yet")
    (tmp_path / "file").touch()
    assert not kept.writable(tmp_path / "file" / "within")


@pytest.mark.parametrize(
    ("free", "word"), [(5_000_000, FAULT), (500_000_000, NOTE), (50_000_000_000, OK)]
)
def test_little_free_space_is_noted_and_none_is_a_fault(
    free: int, word: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("driftwell.scenario.room.free_space", lambda _: free)
    assert [word, word] == [line.word for line in room.disk()]


def test_a_terminal_without_the_signs_is_noted(monkeypatch: pytest.MonkeyPatch) -> None:
    class Ascii:
        encoding = "ascii"

    monkeypatch.setattr(sys, "stdout", Ascii())
    monkeypatch.delenv(output.ENCODING, raising=False)
    assert "PYTHONUTF8=1" in next(output.output()).remedy
    monkeypatch.setenv(output.ENCODING, "ascii")
    assert f"unset {output.ENCODING}" == next(output.output()).remedy


def test_a_missing_encoder_is_a_note(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    monkeypatch.setenv("PATH", str(tmp_path))
    found = list(extras.programs())
    assert [NOTE] == [line.word for line in found]
    assert "ffmpeg" in found[0].remedy
