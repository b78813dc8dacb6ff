"""How runs end on the command line: one word, one sentence and one exit code for each outcome."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell import open_run
from driftwell.cli.main import main
from driftwell.cli.runs import run as command_module
from driftwell.errors import RecordError
from driftwell.report.pictures import run_pictures as pictures
from tests.cli.small_runs import PAIR, SMALL, scenario, settings
from tests.inexact import Inexact, inexact  # noqa: F401

Printed = pytest.CaptureFixture[str]

FAR = ("stepping.step=2 us", "wall=[]")
"""Steps so long that the ions are thrown out of the trap, and nothing stops them."""
TWO_CLOUDS = SMALL.replace(
    "[[field]]",
    """\
[[cloud]]
name = "probe"
species = "proton"
shape = { kind = "points", positions = [["0", "0", "0.1 mm"]] }

[[field]]""",
    1,
)


def run(folder: Path, *texts: str, text: str = SMALL, pictures: bool = False) -> int:
    """Exit code of a run of a small scenario into ``folder / "run"``."""
    arguments = ["run", str(scenario(folder, text)), "-o", str(folder / "run"), *settings(*texts)]
    return main(arguments if pictures else [*arguments, "--no-pictures"])


def test_a_finished_run_prints_its_answers_and_ends_with_0(tmp_path: Path, capsys: Printed) -> None:
    assert 0 == run(tmp_path)
    printed = capsys.readouterr()
    assert "Traceback" not in printed.err
    assert printed.err.startswith(
        "Eight ions in a trap\n8 charges, 1000 steps of at most 20 ns: the scenario says so\n"
    )
    assert printed.err.endswith("Coulomb sum: direct; 8 charges, too few for a tree to pay\n")
    lines = printed.out.splitlines()
    assert "finished: The motion was followed to t = 20 us." == lines[1]
    assert lines[2].startswith("8 real particles left, 0 lost; 1000 steps in ")
    assert lines[3].startswith("ledger residuals: energy ")
    assert "held    1.000 ± 0.056  8 of 8 charges" == lines[5]
    assert lines[6].startswith("warmth ")
    assert " K " in lines[6]
    assert f"record: {tmp_path / 'run' / 'run.h5'}" == lines[-1]


def test_a_broken_promise_of_the_coulomb_sum_stands_before_the_answers(
    tmp_path: Path,
    capsys: Printed,
    inexact: Inexact,  # noqa: F811
) -> None:
    """Warned of when it is found, and told again where the answers are read."""
    inexact.tolerance = inexact.best = 1.0
    settings = ("cloud.load.count=70", "coulomb.method=tree", "coulomb.accuracy=1e-3")
    assert 0 == run(tmp_path, *settings, "duration=2 us")
    printed = capsys.readouterr()
    told = " ".join(printed.out.split())
    assert "Coulomb sum: tree; the scenario says so; to 0.001 of the force\n" in printed.err
    assert "more than coulomb.accuracy = 0.001. Tightened as far as it goes" in printed.err
    doubt = told.index("Doubt: the Coulomb sum was less accurate than coulomb.accuracy = 0.001")
    assert doubt < told.index("70 of 70 charges") < told.index("coulomb error: rms ")


def test_the_pictures_are_named_after_the_answers(tmp_path: Path, capsys: Printed) -> None:
    assert 0 == run(tmp_path, pictures=True)
    files = list((tmp_path / "run" / "pictures").glob("*.png"))
    last = capsys.readouterr().out.splitlines()[-1]
    assert f"pictures: {len(files)} in {tmp_path / 'run' / 'pictures'}" == last
    assert len(files) >= 3


def test_pictures_that_cannot_be_written_take_nothing_from_the_answers(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    def refused(found: object) -> list[Path]:
        raise RecordError("pictures: the disk is full")

    monkeypatch.setattr(pictures, "draw", refused)
    assert 2 == run(tmp_path, pictures=True)
    printed = capsys.readouterr()
    assert "held    1.000 ± 0.056  8 of 8 charges" in printed.out
    assert printed.err.endswith("pictures: the disk is full\n")
    assert "finished" == open_run(tmp_path / "run").outcome.word


def test_no_questions_are_no_fault(tmp_path: Path, capsys: Printed) -> None:
    assert 0 == run(tmp_path, "question=[]")
    assert "The scenario asks no questions" in capsys.readouterr().out


def test_a_scenario_with_faults_ends_with_2_and_leaves_no_folder(
    tmp_path: Path, capsys: Printed
) -> None:
    assert 2 == run(tmp_path, "duration=-1 us")
    printed = capsys.readouterr()
    assert ("", 1) == (printed.out, printed.err.count("\n"))
    assert not (tmp_path / "run").exists()


def test_a_run_that_loses_every_charge_ends_with_3(tmp_path: Path, capsys: Printed) -> None:
    """Questions about the lost cloud are answered by none, with the reason."""
    assert 3 == run(tmp_path, *FAR[:1], "record.every=2 us")
    lines = capsys.readouterr().out.splitlines()
    assert lines[1].startswith("all lost: Every charge was lost by t = ")
    held, warmth = (line for line in lines if line.startswith(("held ", "warmth ")))
    assert "held    0.000 ± 0.056  0 of 8 charges" == held
    assert ["warmth", "none"] == warmth.split()[:2]
    assert 'no charge of "load" is left' in warmth
    outcome = open_run(tmp_path / "run").outcome
    assert ("all lost", 3) == (outcome.word, outcome.exit_code)


def test_a_charge_that_runs_away_fails_the_run_with_5(tmp_path: Path, capsys: Printed) -> None:
    assert 5 == run(tmp_path, *FAR, "record.every=20 us", "stepping.extent=10 m")
    told = capsys.readouterr().out.splitlines()[1]
    assert told.startswith("failed: The motion could not be continued after ")
    for part in (" steps, at t = ", " us: charge ", " has run away, at (", "put a wall, or set a"):
        assert part in told
    outcome = open_run(tmp_path / "run").outcome
    assert ("failed", 5) == (outcome.word, outcome.exit_code)
    assert f"failed: {outcome.sentence}" == told


def test_a_number_that_is_none_fails_the_run_with_5(tmp_path: Path, capsys: Printed) -> None:
    given = ('field.rods.voltage.amplitude="1e300 V"', "stepping.step=2 us", "wall=[]")
    assert 5 == run(tmp_path, *given)
    told = capsys.readouterr().out.splitlines()[1]
    for part in (
        "after 1 step, at t = 1 us: ",
        "velocity of charge ",
        "no longer a number",
        "shorter step",
    ):
        assert part in told


def test_opposite_charges_that_fall_together_fail_the_run_with_5(
    tmp_path: Path, capsys: Printed
) -> None:
    """The charge is named by its cloud and its number there, where there are several clouds."""
    assert 5 == run(tmp_path, text=PAIR)
    told = capsys.readouterr().out.splitlines()[1]
    assert "falls towards an opposite charge faster than the step can follow" in told
    assert "coulomb.softening" in told
    assert ": charge 2 falls" in told
    assert told.endswith('(Charge 2 is number 0 of "heavy".)')


def test_the_run_away_of_several_clouds_is_told_by_its_cloud(
    tmp_path: Path, capsys: Printed
) -> None:
    assert 5 == run(tmp_path, *FAR, "stepping.extent=1 m", "cloud.load.count=1", text=TWO_CLOUDS)
    told = capsys.readouterr().out.splitlines()[1]
    assert '(Charge 1 is number 0 of "probe".)' in told


def test_an_outcome_that_is_no_end_is_told_on_both_streams(tmp_path: Path, capsys: Printed) -> None:
    """Whoever keeps only one of them knows."""
    assert 3 == run(tmp_path, *FAR[:1])
    printed = capsys.readouterr()
    assert "all lost: Every charge was lost" in printed.out
    assert "all lost: Every charge was lost" in printed.err


def test_a_defect_is_told_without_a_traceback_and_ends_with_1(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: object, **__: object) -> None:
        raise KeyError("a thing")

    monkeypatch.setattr(command_module, "run", broken)
    monkeypatch.delenv("DRIFTWELL_TRACEBACK", raising=False)
    assert 1 == run(tmp_path)
    told = capsys.readouterr().err
    assert "defect of driftwell" in told
    assert "KeyError: 'a thing'" in told
    assert "Traceback" not in told


def test_a_defect_shows_where_it_is_to_whoever_asks(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: object, **__: object) -> None:
        raise KeyError("a thing")

    monkeypatch.setattr(command_module, "run", broken)
    monkeypatch.setenv("DRIFTWELL_TRACEBACK", "1")
    with pytest.raises(KeyError, match="a thing"):
        run(tmp_path)


def test_too_little_memory_is_told_in_words(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    def too_large(*_: object, **__: object) -> None:
        raise MemoryError("Unable to allocate 2.98 TiB")

    monkeypatch.setattr(command_module, "run", too_large)
    assert 2 == run(tmp_path)
    told = capsys.readouterr().err.splitlines()[-1]
    assert told.startswith("This machine has too little memory for the run (Unable to allocate")
    assert "fewer charges" in told
