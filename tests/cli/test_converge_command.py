"""`driftwell converge`: what it prints and leaves, and its exit codes."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.cli.commands.converge import AXES, axes, replicas, share
from driftwell.cli.main import main
from tests.cli.small_runs import SMALL, scenario, settings

Printed = pytest.CaptureFixture[str]
SHORT = settings("duration=2 us", "cloud.load.count=4")


def converge(path: Path, folder: Path, *more: str) -> int:
    words = ["converge", str(path), "-o", str(folder), "--axes", "step", "--workers", "2"]
    return main([*words, *SHORT, *more])


def test_the_exit_code_is_the_verdict_and_what_is_there_is_not_computed_again(
    tmp_path: Path, capsys: Printed
) -> None:
    path, folder = scenario(tmp_path), tmp_path / "c"
    assert 4 == converge(path, folder, "--stop-after", "0.01s")
    assert "Stopped; the same command goes on." in capsys.readouterr().err
    assert 12 == converge(path, folder, "--within", "1e-9", "--no-pictures")
    printed = capsys.readouterr()
    assert printed.err.startswith("Eight ions in a trap\n")
    assert "step: half and a quarter of the step (2 runs)\n" in printed.err
    assert "2 runs to compute: about " in printed.err
    assert "held: 1.000 ± " in printed.out or "held: 1.00 ± " in printed.out
    assert "dominated by chance" in printed.out
    assert f"table: {folder / 'convergence.csv'}\n" in printed.out
    stamps = {each: each.stat().st_mtime_ns for each in (folder / "runs").rglob("*")}
    assert 3 == len(list((folder / "runs").iterdir()))
    assert 0 == converge(path, folder, "--within", "50%", "--question", "held")
    printed = capsys.readouterr()
    assert "Nothing is to be computed: all runs are there." in printed.err
    assert "; converged\n" in printed.out
    assert f"picture: {folder / 'pictures' / 'convergence.png'}\n" in printed.out
    assert printed.out.split("\n\ntable")[0].strip() in (folder / "summary.txt").read_text()
    assert stamps == {each: each.stat().st_mtime_ns for each in (folder / "runs").rglob("*")}
    assert 0 == converge(path, folder, "--no-pictures")
    assert "changed since the last time" not in capsys.readouterr().err
    assert 12 == converge(path, folder, "--no-pictures", "--within", "1e-9", "--replicas", "3")
    assert "changed since the last time; runs that are the same are kept" in capsys.readouterr().err


def test_a_run_that_fails_ends_it_with_7(tmp_path: Path, capsys: Printed) -> None:
    path = scenario(tmp_path)
    more = settings("wall=[]", "stepping.extent=1 mm", "cloud.load.motion.temperature=1e9 K")
    assert 7 == converge(path, tmp_path / "c", *more)
    assert "has run away" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("more", "words"),
    [
        (("--question", "hold"), '--question "hold": the scenario asks no such question; it asks'),
        (("--set", "duration=1"), "needs a time"),
    ],
)
def test_what_cannot_be_used_is_refused_in_a_line(
    tmp_path: Path, capsys: Printed, more: tuple[str, ...], words: str
) -> None:
    assert 2 == converge(scenario(tmp_path), tmp_path / "c", *more)
    assert words in capsys.readouterr().err
    assert not (tmp_path / "c").exists()


def test_a_study_and_a_scenario_without_questions_are_refused(
    tmp_path: Path, capsys: Printed
) -> None:
    study = scenario(tmp_path, 'title = "s"\nscenario = "small.toml"\nreplicas = 2\n', "s.toml")
    assert 2 == converge(study, tmp_path / "c")
    assert "is a study; converge judges one run" in capsys.readouterr().err
    silent = scenario(tmp_path, SMALL[: SMALL.index("[[question]]")], "silent.toml")
    assert 2 == converge(silent, tmp_path / "c")
    assert "asks no questions" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("text", "value"), [("1%", 0.01), ("0.5 %", 0.005), ("0.02", 0.02), ("2e-3", 0.002)]
)
def test_a_tolerance_is_a_share_or_so_many_percent(text: str, value: float) -> None:
    assert value == pytest.approx(share(text), rel=1e-12, abs=0.0)


@pytest.mark.parametrize(
    "words",
    [
        ["--within", "0"],
        ["--within", "100%"],
        ["--within", "1 mm"],
        ["--axes", "step,mesh"],
        ["--axes", ""],
        ["--replicas", "0"],
        ["--replicas", "many"],
    ],
)
def test_arguments_that_mean_nothing_are_refused(words: list[str], capsys: Printed) -> None:
    with pytest.raises(SystemExit) as left:
        main(["converge", "small.toml", *words])
    assert 2 == left.value.code
    assert "needs" in capsys.readouterr().err or words[0] == "--replicas"


def test_axes_are_named_in_any_order_and_once() -> None:
    assert ("step", "field-map") == axes("field_map, step,step")
    assert AXES == axes(",".join(AXES))
    assert 12 == replicas("12")
