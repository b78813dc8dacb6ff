"""`driftwell estimate`: what a run would cost, or why there would be none."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

import pytest

from driftwell.cli.main import main
from driftwell.cli.runs import counts
from driftwell.cli.runs import estimate as module
from driftwell.cli.runs.estimate import estimate_lines
from driftwell.cli.terminal.clock import by_the_clock, lasting
from driftwell.estimate import Change, Estimate
from driftwell.timed_run import Stretch
from tests.cli.small_runs import PAIR, SMALL, scenario, settings

Printed = pytest.CaptureFixture[str]
RINGS = """
[electrodes]
geometry = "axisymmetric"

[[electrode]]
name = "ring"
voltage = "10 V"
shape = [{ kind = "rectangle", low = ["5 mm", "-4 mm"], high = ["6 mm", "4 mm"] }]
"""

NIGHT = Estimate(
    charges=20_000,
    threads=2,
    method="direct",
    because="the scenario says so",
    steps=1_000_000,
    records=2001,
    snapshots=5,
    segments=500,
    seconds=30_000.0,
    least=26_000.0,
    most=36_000.0,
    parts={"the pair sum": 27_000.0, "fields and motion": 2400.0, "the record": 600.0},
    memory=600_000_000,
    disk=2_000_000_000,
    events=5_000_000,
    timed=Stretch(100, 3.0, 0.026, 0.036, 20_000, 20_000),
    ended=False,
    changes=(
        Change("half the charges, each of twice the weight", (), 8000.0),
        Change("steps twice as long", ("stepping.step=2 ns",), 15_000.0),
    ),
)


def text(found: Estimate) -> str:
    """The lines as one, with single spaces."""
    return " ".join(" ".join(estimate_lines(found, 100)).split())


def test_the_command_says_time_memory_disk_and_what_would_be_cheaper(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    file = str(scenario(tmp_path))
    arguments = ["estimate", file, "--measure", "--seconds", "0.3", "--threads", "1"]
    assert 0 == main([*arguments, *settings("duration=2 ms")])
    printed = capsys.readouterr()
    cost, _, by_hand = printed.out.partition("\nBy hand, of the scenario as it begins:\n")
    heads = [line[:9].strip() for line in cost.splitlines()]
    assert ["time", "goes to", "steps", "memory", "disk", "cheaper"] == [h for h in heads if h]
    assert "secular frequency of ion along z  80 kHz" in by_hand
    assert max(map(len, printed.out.splitlines())) <= 100
    assert re.search(
        r"time     about [\d.]+ s on 1 thread, from [\d.]+ s to [\d.]+ s; begun now, done \d\d:",
        printed.out,
    )
    assert "steps    100000, of " in printed.out
    assert "2001 records, 2 snapshots and 1 segment" in " ".join(printed.out.split())
    assert printed.err.startswith("Eight ions in a trap\n")
    assert "8 charges, 100000 steps of at most 20 ns: the scenario says so\n" in printed.err
    assert "Coulomb sum: direct; 8 charges, too few for a tree to pay\n" in printed.err
    assert ["small.toml"] == [each.name for each in tmp_path.iterdir()]


@pytest.mark.parametrize(
    ("given", "told"),
    [
        (["cloud.load.count=x"], 'count = "x"'),
        (["duration=100 Gs", "record.every=1 Gs"], "needs at most 1e+13"),
    ],
)
def test_a_scenario_that_cannot_be_run_is_told_with_2(
    given: list[str], told: str, tmp_path: Path, capsys: Printed
) -> None:
    assert 2 == main(["estimate", str(scenario(tmp_path)), *settings(*given)])
    printed = capsys.readouterr()
    assert "" == printed.out
    assert told in printed.err


def test_a_file_that_is_not_there_is_told_with_2(tmp_path: Path, capsys: Printed) -> None:
    assert 2 == main(["estimate", str(tmp_path / "missing.toml")])
    assert "missing.toml" in capsys.readouterr().err


def test_motion_that_cannot_be_continued_is_told_with_the_exit_code_of_the_run(
    tmp_path: Path, capsys: Printed
) -> None:
    assert 5 == main(["estimate", str(scenario(tmp_path, PAIR)), "--measure", "--seconds", "0.5"])
    printed = capsys.readouterr()
    assert "" == printed.out
    assert re.search(r"The run would fail after \d+ steps, at t = .*opposite charge", printed.err)


def test_memory_that_runs_out_is_told_with_2(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(*given: object) -> None:
        raise MemoryError("Unable to allocate 229. MiB for an array")

    monkeypatch.setattr(module, "counted", full)
    assert 2 == main(["estimate", str(scenario(tmp_path))])
    assert "too little memory for the run (Unable to allocate" in capsys.readouterr().err


def test_without_being_asked_to_nothing_is_timed(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Things are counted and worked out by hand; pictures and timing are not even loaded."""

    def never(*given: object, **more: object) -> None:
        raise AssertionError("a step was taken")

    monkeypatch.setattr("driftwell.stepping.loop.TimeLoop.to_mark", never)
    arguments = ["estimate", str(scenario(tmp_path)), "--threads", "1"]
    assert 0 == main([*arguments, *settings("duration=2 ms", "field.rods.voltage.amplitude=2 kV")])
    printed = capsys.readouterr()
    counted, _, by_hand = printed.out.partition("\nBy hand, of the scenario as it begins:\n")
    heads = [line[:9].strip() for line in counted.splitlines()]
    expected = ["charges", "steps", "records", "memory", "disk", "time"]
    assert expected == [head for head in heads if head]
    assert "charges  8; every pair is summed\n" in counted
    assert "steps    100000, of at most 20 ns: the scenario says so\n" in counted
    assert "time     not timed: --measure times the first steps" in counted
    assert "the motion grows: nothing is held along x" in " ".join(by_hand.split())
    assert "source: W. Paul, Rev. Mod. Phys. 62 (1990) 531" in by_hand
    assert "Caution: Voltages up to 2 kV kill" in by_hand
    assert "licensed practitioners" in " ".join(by_hand.split())
    assert max(map(len, printed.out.splitlines())) <= 100
    assert "Eight ions in a trap\n" == printed.err


def test_the_field_of_electrodes_is_not_solved_to_count(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Where it is not kept, the steps that follow from it are not told; a step stated is."""
    monkeypatch.setenv("DRIFTWELL_FIELDS", str(tmp_path / "none"))
    text = SMALL.replace('[stepping]\nstep = "20 ns"', "[stepping]") + RINGS
    file = str(scenario(tmp_path, text))
    assert 0 == main(["estimate", file, "--threads", "1"])
    printed = " ".join(capsys.readouterr().out.split())
    assert "steps follow from the field of the electrodes, which is not solved yet" in printed
    assert "no formula here knows: `driftwell fields` solves it" in printed
    assert 0 == main(["estimate", file, *settings("stepping.step=20 ns")])
    assert "steps 1000, of at most 20 ns" in " ".join(capsys.readouterr().out.split())
    assert not (tmp_path / "none").exists()


def test_a_night_is_told_in_readable_numbers(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(counts, "free_memory", lambda: 16_000_000_000)
    monkeypatch.setattr(counts, "free_space", lambda folder: 80_000_000_000)
    told = text(NIGHT)
    for words in (
        "time about 8 h 20 min on 2 threads, from 7 h 13 min to 10 h; begun now, done ",
        "Timed: 100 steps in 3 s. Compiling,",
        "goes to the pair sum 90 %, fields and motion 8 %, the record 2 %",
        "steps 1000000, of 0.03 s each; 2001 records, 5 snapshots and 500 segments",
        "memory about 600 MB; 16 GB are free",
        "disk about 2 GB; 80 GB are free here",
        "cheaper half the charges, each of twice the weight: 2 h 13 min steps twice as long: "
        "4 h 10 min (--set 'stepping.step=2 ns')",
    ):
        assert words in told


def test_what_does_not_fit_what_is_lost_and_what_cannot_be_helped_is_told(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(counts, "free_memory", lambda: None)
    monkeypatch.setattr(counts, "free_space", lambda folder: 1_000_000_000)
    lossy = replace(NIGHT.timed, left=15_000)
    told = text(replace(NIGHT, timed=lossy, changes=(), events=10**9))
    assert "in which 5000 of 20000 charges were lost; the shorter time is for losses" in told
    assert "disk about 2 GB, and 1 GB more if every charge meets every surface once" in told
    assert "1 GB are free here, too little: record less often" in told
    assert "memory about 600 MB disk" in told
    assert told.endswith("cheaper nothing that is known to help")
    monkeypatch.setattr(counts, "free_space", lambda folder: None)
    told = text(replace(NIGHT, timed=replace(lossy, left=0), ended=True))
    assert "in which every charge was lost: the run ends there." in told
    assert "free here" not in told


@pytest.mark.parametrize(
    ("seconds", "words"),
    [
        (0.0, "0 s"),
        (0.0123, "0.012 s"),
        (9.96, "10 s"),
        (42.4, "42 s"),
        (119.4, "119 s"),
        (125.0, "2 min 5 s"),
        (599.7, "10 min"),
        (1500.0, "25 min"),
        (3600.0, "1 h"),
        (30_000.0, "8 h 20 min"),
        (50_000.0, "14 h"),
        (5 * 86400.0, "5 days"),
        (100 * 86400.0, "100 days"),
        (1e12, "32000 years"),
    ],
)
def test_lengths_of_time_are_said_in_words(seconds: float, words: str) -> None:
    assert words == lasting(seconds)


def test_a_time_beyond_the_calendar_is_said_in_words() -> None:
    for rest in (1e15, float("inf"), float("nan")):
        assert "in no time that can be told" == by_the_clock(rest)
