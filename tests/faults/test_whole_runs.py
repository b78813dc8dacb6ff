"""Runs with something wrong around them: numbers, memory, disk, files. Settings invented."""

from __future__ import annotations

import errno
import os
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from driftwell.cli.main import main
from driftwell.record import sealing
from driftwell.record.reader import open_run
from driftwell.scenario import room
from tests.scenario.good_scenarios import TRAP, toml_file

Printed = pytest.CaptureFixture[str]
SMALL = TRAP.replace("2 ms", "20 us").replace('"1 ms"', '"10 us"').replace("= 200", "= 8")


def run(folder: Path, *settings: str, text: str = SMALL) -> int:
    """Exit code of a run into ``folder / "run"``."""
    path = folder / "s.toml"
    path.write_text(text, "utf-8")
    given = [word for each in settings for word in ("--set", each)]
    return main(["run", str(path), "-o", str(folder / "run"), "--no-pictures", *given])


def refused(folder: Path, capsys: Printed) -> str:
    """The last line on stderr of a run that did not begin: nothing else is left of it."""
    printed = capsys.readouterr()
    assert "" == printed.out
    assert not (folder / "run").exists()
    return printed.err.splitlines()[-1]


FREQUENCY = "question.1={ name = 'f', ask = 'frequency', of = 'load', axis = 'z'"


@pytest.mark.parametrize(
    ("settings", "told"),
    [
        (["duration=0 s"], "must be greater than 0"),
        (["duration=nan s"], "needs a time"),
        (["duration=1e400 s"], "needs a time"),
        (["duration=1e300 s", "record.every=1e299 s"], "would be 1.1e+308 steps of 9.091 ns (the"),
        (["duration=10 Gs", "record.every=1 Gs"], "steps of 9.091 ns (the drive of field"),
        (["stepping.steps_per_period=1e308"], "would be countless steps of 0 s"),
        (["stepping.step=1e-30 s"], "would be 2e+25 steps in 20 us; needs at most 1e+13"),
        (["stepping.coulomb_every=1000000000"], "must be at least 1 and at most 1000"),
        (["record.every=1 as"], "would be 2e+13 times in 20 us; needs at most 1000000"),
        (["record.snapshots=1 as"], "would be 2e+13 times in 20 us; needs at most 1000000"),
        ([FREQUENCY + ", every = '1e-30 s' }"], "would take 2e+25 samples, one every 1e-30 s"),
        ([FREQUENCY + "}", "duration=100 s", "record.every=1 s"], "would take 2.2e+09 samples"),
        (["seed=9223372036854775808"], "must lie between -2^63 and 2^63"),
        (["record.tracks=100000000000000000000"], "must lie between -2^63 and 2^63"),
        (['title="a\\u0000b"'], "needs 1 to 200 characters on one line"),
        (['title=""'], "needs 1 to 200 characters on one line"),
        (['cloud.1.name="a\\u0000b"', "question=[]"], "needs 1 to 60 characters on one line"),
        (["cloud=[]", "question=[]"], "needs at least one group of charges"),
        (["cloud.load.weight=1e300"], "steps of 0 s (the plasma oscillation"),
        (['field.rods.voltage.amplitude="1e200 V"'], '[[field]] "rods": its numbers'),
        (['wall.bore.radius="10 um"'], "make the cloud smaller, move it, or enlarge the wall"),
    ],
)
def test_numbers_and_names_beyond_all_bounds_are_refused_before_the_run(
    settings: list[str], told: str, tmp_path: Path, capsys: Printed
) -> None:
    assert 2 == run(tmp_path, *settings)
    assert told.lower() in refused(tmp_path, capsys).lower()


@pytest.mark.parametrize(
    "settings",
    [
        ["duration=1e-300 s", "record.every=1e-300 s", 'question.2.at="end"'],
        ["seed=9223372036854775807"],
        ["stepping.steps_per_period=1e-300"],
        ["cloud.load.weight=1e-300"],
        ["record.tracks=0"],
        ["record.tracks=9000000000000000000"],
        ['title="\\u202e\\uFFFD\\u2028 ☃"', 'cloud.1.name="☃ \\u202e"', "question=[]"],
    ],
)
def test_numbers_and_names_at_the_bounds_run(settings: list[str], tmp_path: Path) -> None:
    assert 0 == run(tmp_path, *settings)
    assert "finished" == open_run(tmp_path / "run").outcome.word


@pytest.mark.parametrize(
    "field",
    [
        {"kind": "quadro-logarithmic", "curvature": "1 V/m^2", "characteristic_radius": "1e300 m"},
        {
            "kind": "wire-in-cylinder",
            "wire_radius": "1 um",
            "cylinder_radius": "1e300 m",
            "voltage": "1 V",
        },
        {
            "kind": "rf-quadrupole",
            "radius": "1e-300 m",
            "voltage": {"amplitude": "1 V", "frequency": "1 MHz"},
        },
    ],
)
def test_fields_too_large_to_compute_with_are_refused_by_name(
    field: dict[str, str], tmp_path: Path, capsys: Printed
) -> None:
    table = {
        "title": "a check",
        "duration": "1 us",
        "cloud": [
            {
                "name": "one",
                "species": "proton",
                "shape": {"kind": "points", "positions": [["1 mm", "0", "0"]]},
            }
        ],
        "field": [{"name": "odd one", **field}],
    }
    assert 2 == run(tmp_path, text=toml_file(table))
    assert refused(tmp_path, capsys).startswith('[[field]] "odd one": its numbers')


def test_a_run_that_would_not_fit_in_memory_is_refused_before_it_is_loaded(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(room, "free_memory", lambda: 1_000_000_000)
    assert 2 == run(tmp_path, "cloud.load.count=10000000")
    told = refused(tmp_path, capsys)
    assert told.startswith("The run needs about ")
    assert " of memory, and 1 GB are free: it has 10000000 charges" in told


def test_samples_that_would_not_fit_in_memory_are_refused(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(room, "free_memory", lambda: 1_000_000_000)
    assert 2 == run(tmp_path, FREQUENCY + ", every = '2 ps' }")
    assert "10000000 samples" in refused(tmp_path, capsys)


def test_a_record_that_would_not_fit_on_the_disk_is_refused(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(room, "free_space", lambda folder: 1_000_000)
    assert 2 == run(tmp_path, "record.every=1 ns", "cloud.load.count=1000")
    assert "the record needs at least " in refused(tmp_path, capsys)


def test_what_looks_too_large_is_begun_all_the_same_where_it_is_forced(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Each shortage is told once, as a warning, and the run goes to its end."""
    monkeypatch.setattr(room, "free_memory", lambda: 1_000_000)
    monkeypatch.setattr(room, "free_space", lambda folder: 10_000)
    (tmp_path / "s.toml").write_text(SMALL)
    arguments = ["run", str(tmp_path / "s.toml"), "-o", str(tmp_path / "run"), "--no-pictures"]
    assert 0 == main([*arguments, "--force"])
    told = capsys.readouterr().err
    assert 1 == told.count("Warning: The run needs about ")
    assert 1 == told.count("the record needs at least ")
    assert 2 == told.count("The run begins all the same, as --force says; ")


def test_memory_that_runs_out_while_loading_is_told_in_words(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(*given: object, **more: object) -> None:
        raise MemoryError("Unable to allocate 229. MiB for an array")

    monkeypatch.setattr(np, "ascontiguousarray", full)
    assert 2 == run(tmp_path)
    told = refused(tmp_path, capsys)
    assert told.startswith("This machine has too little memory for the run (Unable to allocate")


@pytest.fixture
def sealed_at_once(monkeypatch: pytest.MonkeyPatch) -> None:
    """Every record is sealed in a segment of its own."""
    monkeypatch.setattr(sealing, "SHORTEST", 0.0)
    monkeypatch.setattr(sealing, "LONGEST", 0.0)


def disk_of(room_left: int) -> Callable[[int, object], int]:
    """A write that refuses once so many bytes are on the disk."""
    real, written = os.write, [0]

    def write(handle: int, data: object) -> int:
        size = len(memoryview(data))  # type: ignore[arg-type]
        if handle > 2 and written[0] + size > room_left:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        if handle > 2:
            written[0] += size
        return real(handle, data)  # type: ignore[arg-type]

    return write


@pytest.mark.usefixtures("sealed_at_once")
@pytest.mark.parametrize("room_left", [0, 1_000, 40_000, 100_000, 300_000, 700_000])
def test_a_disk_that_fills_up_ends_the_run_with_what_is_kept(
    room_left: int, tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Whatever was sealed before can be read, and is never taken for a whole run."""
    with monkeypatch.context() as disk:
        disk.setattr(os, "write", disk_of(room_left))
        code = run(tmp_path, "record.every=1 us")
    printed = capsys.readouterr()
    told = next(line for line in printed.err.splitlines() if "No space left" in line)
    if "cannot be written" in told:  # before the first step
        assert (2, "") == (code, printed.out)
        assert room_left < 10_000
        return
    assert 6 == code
    assert told.startswith("not recorded: ")
    assert "Make space or give access; the same command then goes on from there." in told
    found = open_run(tmp_path / "run")
    assert ("unfinished", ()) == (found.outcome.word, found.answers)
    assert [] == found.damage(thorough=True)
    assert f"Kept: {len(found.segments)} segment" in told or "Kept: nothing yet" in told
    times, states = found.trajectory
    assert len(times) == len(states)
    assert 0 == main(["info", str(tmp_path / "run")])
    assert 0 == run(tmp_path, "record.every=1 us")
    assert "finished" == open_run(tmp_path / "run").outcome.word


def test_a_scenario_that_vanishes_after_it_was_read_is_not_missed(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    from driftwell.cli.runs import run as command

    real = command.read_scenario

    def read(path: str, settings: object) -> object:
        loaded = real(path, settings)  # type: ignore[arg-type]
        Path(path).unlink()
        return loaded

    monkeypatch.setattr(command, "read_scenario", read)
    assert 0 == run(tmp_path)
    assert SMALL == (tmp_path / "run" / "scenario.toml").read_text("utf-8")


def test_a_file_of_charges_that_vanishes_after_it_was_read_is_told(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    from driftwell.cli.runs import run as command

    text = SMALL.replace("count   = 8\n", "").replace(
        'shape   = { kind = "gaussian", sigma = ["60 um", "60 um", "250 um"] }',
        'shape   = { kind = "file", path = "start.csv" }',
    )
    charges = tmp_path / "start.csv"
    charges.write_text("x_m,y_m,z_m\n0,0,0\n0,0,1e-4\n")
    real = command.read_scenario

    def read(path: str, settings: object) -> object:
        loaded = real(path, settings)  # type: ignore[arg-type]
        charges.unlink()
        return loaded

    monkeypatch.setattr(command, "read_scenario", read)
    assert 2 == run(tmp_path, text=text)
    told = refused(tmp_path, capsys)
    assert "start.csv" in told
