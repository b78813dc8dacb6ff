"""`driftwell sweep`: what it prints and leaves, and its exit codes."""

from __future__ import annotations

import signal
from pathlib import Path

import pytest

from driftwell.cli.main import main
from driftwell.study.catalogue import Catalogue
from tests.cli.small_runs import LONG
from tests.study.swept import PATIENCE, children, gone, study, sweeping, waited_for

Printed = pytest.CaptureFixture[str]


def sweep(path: Path, folder: Path, *more: str) -> int:
    return main(["sweep", str(path), "-o", str(folder), "--no-pictures", *more])


def test_a_sweep_computes_tells_and_leaves_everything_and_does_it_once(
    tmp_path: Path, capsys: Printed
) -> None:
    path, folder = study(tmp_path), tmp_path / "sweep"
    assert 0 == sweep(path, folder)
    printed = capsys.readouterr()
    assert printed.err.startswith("How many ions\n")
    assert "runs side by side on 1 thread each" in printed.err
    assert "3 runs: 3 computed now" in printed.out
    assert f"answers: {folder / 'answers.csv'}\n" in printed.out
    left = {"study.toml", "scenario.toml", "catalogue.sqlite", "runs", "answers.csv"}
    assert {*left, "answers.h5", "summary.txt"} == {each.name for each in folder.iterdir()}
    assert path.read_bytes() == (folder / "study.toml").read_bytes()
    assert (tmp_path / "small.toml").read_bytes() == (folder / "scenario.toml").read_bytes()
    assert printed.out.strip() == (folder / "summary.txt").read_text().strip()
    stamps = {each: each.stat().st_mtime_ns for each in (folder / "runs").rglob("*")}
    assert 3 == len(list((folder / "runs").iterdir()))
    table = (folder / "answers.csv").read_bytes()
    assert 0 == sweep(path, folder)
    assert "3 runs: 3 there already" in capsys.readouterr().out
    assert stamps == {each: each.stat().st_mtime_ns for each in (folder / "runs").rglob("*")}
    assert table == (folder / "answers.csv").read_bytes()


def test_each_question_has_a_picture(tmp_path: Path, capsys: Printed) -> None:
    path, folder = study(tmp_path, "2, 4"), tmp_path / "sweep"
    assert 0 == main(["sweep", str(path), "-o", str(folder)])
    assert f"pictures: 2 in {folder / 'pictures'}\n" in capsys.readouterr().out
    drawn = {each.name for each in (folder / "pictures").iterdir()}
    assert {"held.png", "warmth.png"} == drawn


def test_more_cases_later_compute_only_what_is_new(tmp_path: Path, capsys: Printed) -> None:
    folder = tmp_path / "sweep"
    assert 0 == sweep(study(tmp_path, "2, 4"), folder)
    capsys.readouterr()
    assert 0 == sweep(study(tmp_path, "3, 4, 5"), folder)
    printed = capsys.readouterr()
    assert "3 runs: 2 computed now, 1 there already" in printed.out
    assert "was changed since the last sweep" in printed.err
    lines = (folder / "answers.csv").read_text().splitlines()
    assert 4 == len(lines)
    assert 4 == len(list((folder / "runs").iterdir()))


def test_a_case_that_fails_ends_the_sweep_with_7_when_all_others_are_there(
    tmp_path: Path, capsys: Printed
) -> None:
    settings = ("duration=2 us", "wall=[]", "stepping.extent=1 mm")
    path, folder = study(tmp_path, "2, 4", settings=settings), tmp_path / "sweep"
    text = path.read_text() + (
        '\n[[vary]]\nkey = "cloud.load.motion.temperature"\nvalues = ["10 K", "1e9 K"]\n'
    )
    path.write_text(text)
    assert 7 == sweep(path, folder)
    printed = capsys.readouterr()
    assert "4 runs: 2 computed now, 2 failed" in printed.out
    assert "  2 runs, such as number 2 (cloud.load.count = 2, cloud.load.motion." in printed.out
    assert "has run away" in printed.out
    assert "run 2 failed: The motion could not be continued" in printed.err
    assert 7 == sweep(path, folder)
    printed = capsys.readouterr()
    assert "--retry-failed starts them over" in printed.out
    assert "failed:" not in printed.err
    assert 7 == sweep(path, folder, "--retry-failed")
    assert "run 2 failed:" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("text", "told"),
    [
        (None, "there is no such file"),
        ('title = "x"\nscenario = "nothing.toml"\nreplicas = 2\n', "nothing.toml"),
        ("title = 3 =", "ions.toml:1"),
    ],
)
def test_a_study_that_cannot_be_used_is_told_with_exit_code_2(
    text: str | None, told: str, tmp_path: Path, capsys: Printed
) -> None:
    path = tmp_path / "ions.toml"
    if text is not None:
        path.write_text(text)
    assert 2 == sweep(path, tmp_path / "sweep")
    printed = capsys.readouterr()
    assert told in printed.err
    assert "" == printed.out
    assert not (tmp_path / "sweep").exists()


def test_a_folder_that_holds_something_else_is_told_with_exit_code_2(
    tmp_path: Path, capsys: Printed
) -> None:
    folder = tmp_path / "sweep"
    folder.mkdir()
    (folder / "scenario.toml").write_text("mine")
    assert 2 == sweep(study(tmp_path), folder)
    assert "holds another scenario.toml already" in capsys.readouterr().err
    assert ["scenario.toml"] == [each.name for each in folder.iterdir()]


def test_the_folder_is_named_after_the_study_where_none_is_given(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    study(tmp_path, "2", replicas=2, name="a study of é.toml")
    (tmp_path / "random.py").write_text("raise SystemExit('imported from the current folder')\n")
    assert 0 == main(["sweep", "a study of é.toml", "--no-pictures"])
    with Catalogue(tmp_path / "a study of é-sweep" / "catalogue.sqlite") as catalogue:
        assert {"finished": 2} == catalogue.counts()


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
def test_a_signal_seals_what_is_under_way_and_the_same_command_goes_on(
    number: signal.Signals, tmp_path: Path
) -> None:
    """No process is left, and the runs under way are begun twice, the third once."""
    settings = ("duration=200 ms", "stepping.step=20 ns", "record.every=1 ms")
    path, folder = study(tmp_path, "2, 4, 8", settings=settings), tmp_path / "sweep"
    process = sweeping(path, folder)
    waited_for(process, 2, folder, "runs/*/run.h5")
    pids = children(process.pid)
    assert 2 == len(pids)
    process.send_signal(number)
    out, err = process.communicate(timeout=60)
    assert 4 == process.returncode, err
    assert "Traceback" not in err
    assert "3 runs: 3 left" in out
    assert "Stopped on request; the same command goes on." in out
    assert gone(pids, 0.0)
    assert 0 == sweep(path, folder)
    with Catalogue(folder / "catalogue.sqlite") as catalogue:
        assert {"finished": 3} == catalogue.counts()
        assert 2 <= max(row.starts for row in catalogue.rows())


def test_a_second_signal_ends_all_processes_at_once(tmp_path: Path) -> None:
    settings = (*LONG, "record.tracks=0", 'coulomb.method="direct"')
    path, folder = study(tmp_path, "60000, 60001", settings=settings), tmp_path / "sweep"
    process = sweeping(path, folder)
    waited_for(process, 2, folder, "runs/*/run.h5")
    pids = children(process.pid)
    process.send_signal(signal.SIGINT)
    assert process.stderr is not None
    while not process.stderr.readline().startswith("Stopping after the steps under way"):
        pass
    process.send_signal(signal.SIGINT)
    _, err = process.communicate(timeout=PATIENCE)
    assert 130 == process.returncode, err
    assert gone(pids, 5.0)


def test_a_second_sweep_in_the_folder_is_refused_while_the_first_works(
    tmp_path: Path, capsys: Printed
) -> None:
    path, folder = study(tmp_path, "2, 4", settings=LONG), tmp_path / "sweep"
    process = sweeping(path, folder)
    try:
        waited_for(process, 1, folder, "runs/*/run.h5")
        assert 2 == sweep(path, folder)
        assert f"{folder}: in use by process {process.pid}" in capsys.readouterr().err
    finally:
        process.send_signal(signal.SIGTERM)
        process.communicate(timeout=60)
    assert 4 == process.returncode


def test_a_sweep_stops_by_the_clock_and_the_same_command_goes_on(
    tmp_path: Path, capsys: Printed
) -> None:
    path, folder = study(tmp_path, "2, 4"), tmp_path / "sweep"
    assert 4 == sweep(path, folder, "--stop-after", "0.01s")
    assert "2 runs: 2 computed now" not in capsys.readouterr().out
    assert 0 == sweep(path, folder)
    assert "2 runs: " in capsys.readouterr().out
