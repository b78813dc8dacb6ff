"""Arguments of the command: which are refused and how, and what becomes of the others."""

from __future__ import annotations

import os
import shlex
from pathlib import Path

import pytest

from driftwell import open_run
from driftwell.cli.main import main
from driftwell.cli.terminal.thread_limit import usable_threads
from tests.cli.small_runs import command, scenario, settings


@pytest.mark.parametrize(
    ("arguments", "told"),
    [
        ([], "COMMAND"),
        (["fly"], "'fly' is no command"),
        (["run"], "file"),
        (["run", "s.toml", "--threads", "0"], "'0' is not a whole number from 1 to 1024"),
        (["run", "s.toml", "--threads", "x"], "'x' is not a whole number from 1 to 1024"),
        (["run", "s.toml", "--threads", "1e9"], "'1e9' is not a whole number from 1 to 1024"),
        (["run", "s.toml", "--seed", "x"], "'x' is not a whole number from 0 to"),
        (["run", "s.toml", "--seed", "-1"], "'-1' is not a whole number from 0 to"),
        (["run", "s.toml", "--seed", str(2**63)], "is not a whole number from 0 to"),
        (["run", "s.toml", "--seed", "9" * 5000], "is not a whole number from 0 to"),
        (["run", "s.toml", "-o", " "], "needs the name of a folder"),
        (["run", "s.toml", "--set"], "expected one argument"),
        (["run", "s.toml", "--fast"], "unrecognized arguments: --fast"),
        (["check", "s.toml", "--seed", "1"], "unrecognized arguments: --seed 1"),
        (["estimate"], "file"),
        (["estimate", "s.toml", "--seconds", "0"], "'0' is not a number of seconds from 0.1 to"),
        (["estimate", "s.toml", "--seconds", "nan"], "'nan' is not a number of seconds from 0.1"),
        (["estimate", "s.toml", "--seconds", "x"], "'x' is not a number of seconds from 0.1 to"),
        (["estimate", "s.toml", "--seconds", "3"], "--seconds says how long --measure times"),
        (["estimate", "s.toml", "-o", "x"], "unrecognized arguments: -o x"),
        (["watch"], "FOLDER"),
    ],
)
def test_arguments_that_cannot_be_used_are_told_with_exit_code_2(
    arguments: list[str], told: str, capsys: pytest.CaptureFixture[str]
) -> None:
    with pytest.raises(SystemExit) as left:
        main(arguments)
    assert 2 == left.value.code
    printed = capsys.readouterr()
    assert "" == printed.out
    assert printed.err.startswith("driftwell")
    assert told in printed.err
    assert len(printed.err) < 600


@pytest.mark.parametrize(
    ("given", "told"),
    [
        ("clod.load=3", '--set clod.load=3: [clod]: unknown key; did you mean "cloud"?'),
        ("duration", '--set duration: needs the form key=value, for example "duration=1 ms".'),
        ("duration=1", 'needs a time such as "2 ms"'),
        ("cloud.lod.count=3", 'no entry of cloud is "lod"; did you mean "load"?'),
        ("seed=x", 'seed = "x"'),
        ("title=a\0b", "--set"),
    ],
)
def test_settings_that_cannot_be_used_are_told_with_exit_code_2(
    given: str, told: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    arguments = ["run", str(scenario(tmp_path)), "-o", str(tmp_path / "run"), "--set", given]
    assert 2 == main(arguments)
    printed = capsys.readouterr()
    assert told in printed.err
    assert 1 == printed.err.count("\n")
    assert not (tmp_path / "run").exists()


def test_settings_and_seed_take_effect_and_stand_in_the_record_with_the_command(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path, folder = scenario(tmp_path), tmp_path / "run"
    given = settings("duration=2 us", "cloud.load.count=3")
    arguments = ["run", str(path), "-o", str(folder), "--seed", "11", "--no-pictures", *given]
    assert 0 == main(arguments)
    header = open_run(folder).header
    assert (2e-6, 3, 11) == (header.duration, header.clouds[0].count, header.seed)
    assert ("duration=2 us", "cloud.load.count=3", "seed=11") == header.settings
    expected = f"driftwell run {path} --set 'duration=2 us' --set cloud.load.count=3 --set seed=11"
    assert expected == header.command
    capsys.readouterr()
    assert 0 == main(["info", str(folder)])
    printed = capsys.readouterr().out
    assert f"made by: {expected}\n" in printed
    assert "settings: 'duration=2 us' cloud.load.count=3 seed=11\n" in printed
    assert f"digest of the content: {header.digest}\n" in printed


def test_the_command_in_the_record_makes_the_same_run_again(tmp_path: Path) -> None:
    path = scenario(tmp_path)
    given = ["--seed", "5", *settings("duration=2 us", 'wall.bore.radius="0.9 mm"')]
    assert 0 == main(["run", str(path), "-o", str(tmp_path / "first"), "--no-pictures", *given])
    first = open_run(tmp_path / "first")
    program, *words = shlex.split(first.header.command)
    assert "driftwell" == program
    assert 0 == main([*words, "-o", str(tmp_path / "again"), "--no-pictures"])
    again = open_run(tmp_path / "again")
    assert first.header.digest == again.header.digest
    assert first.header.command == again.header.command
    assert first.trajectory[1].tobytes() == again.trajectory[1].tobytes()


def test_the_folder_is_named_after_the_file_where_none_is_given(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    scenario(tmp_path, name="pair of.toml")
    given = settings("duration=2 us")
    assert 0 == main(["run", "pair of.toml", "--no-pictures", *given])
    assert "finished" == open_run(tmp_path / "pair of-run").outcome.word


def test_threads_follow_the_argument_then_the_environment_then_the_cores(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    cores = len(os.sched_getaffinity(0))
    for said, asked, expected in (
        (None, None, cores),
        ("3", None, 3),
        ("3", 1, 1),
        ("0", None, cores),
        ("many", None, cores),
        ("9" * 5000, None, cores),
        ("", None, cores),
    ):
        if said is None:
            monkeypatch.delenv("NUMBA_NUM_THREADS", raising=False)
        else:
            monkeypatch.setenv("NUMBA_NUM_THREADS", said)
        assert expected == usable_threads(asked)


def test_more_threads_than_cores_are_used_and_called_no_faster(tmp_path: Path) -> None:
    many = len(os.sched_getaffinity(0)) + 2
    path, folder = scenario(tmp_path), tmp_path / "run"
    given = settings("duration=1 us", "cloud.load.count=600", "coulomb.softening=1 um")
    done = command(
        *("run", path, "-o", folder, "--no-pictures", "--threads", str(many), *given),
        NUMBA_NUM_THREADS="1",
    )
    assert 0 == done.returncode, done.stderr
    assert done.stderr.startswith(f"{many} threads on {many - 2} core")
    assert many == open_run(folder).header.threads


@pytest.mark.parametrize(
    ("name", "value", "told"),
    [
        ("NUMBA_THREADING_LAYER", "none of them", "Unset NUMBA_THREADING_LAYER"),
        ("NUMBA_DISABLE_JIT", "1", "NUMBA_DISABLE_JIT is set"),
    ],
)
def test_an_environment_that_lets_nothing_run_is_told(
    name: str, value: str, told: str, tmp_path: Path
) -> None:
    arguments = ("run", scenario(tmp_path), "-o", tmp_path / "run", "--threads", "2")
    done = command(*arguments, **{name: value})
    assert 2 == done.returncode
    assert told in done.stderr
    assert "Traceback" not in done.stderr
    assert not (tmp_path / "run").exists()
