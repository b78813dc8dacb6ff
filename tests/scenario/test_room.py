"""The room a run needs in memory and on the disk is known, and refused where there is none."""

from __future__ import annotations

import json
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import pytest

from driftwell.assembly import assembled
from driftwell.coulomb.form import Coulomb
from driftwell.errors import RecordError, ScenarioError
from driftwell.scenario import room
from driftwell.scenario.read import read_scenario
from driftwell.scenario.room import (
    Extent,
    extent_of,
    free_memory,
    free_space,
    in_words,
    refuse_beyond_disk,
    refuse_beyond_memory,
)
from tests.scenario.good_scenarios import BEAM, TRAP

OFF = Coulomb(method="off")
USUAL = Extent(
    charges=1000,
    tracked=1000,
    clouds=1,
    surfaces=2,
    records=202,
    samples=0,
    traces=0,
    snapshots=2,
    coulomb=Coulomb(method="direct"),
)


def test_how_much_a_run_is_follows_from_the_scenario(tmp_path: Path) -> None:
    path = tmp_path / "s.toml"
    path.write_text(TRAP)
    trap = read_scenario(path).scenario
    assert Extent(200, 200, 1, 2, 202, 0, 0, 2, trap.coulomb, 1) == extent_of(trap, 200)
    path.write_text(BEAM)
    scenario = read_scenario(path, ["coulomb.method=off"]).scenario
    assert Extent(5000, 20, 2, 3, 102, 40, 1, 3, scenario.coulomb, 1) == extent_of(
        scenario, 5000, 40, 1
    )


def test_a_run_put_together_counts_what_its_schedule_has(tmp_path: Path) -> None:
    """Snapshots that questions want, and records at their exact number."""
    path = tmp_path / "s.toml"
    path.write_text(TRAP)
    question = "question=[{name='q', ask='rms-size', of='load', axis='x', at='30 us'}]"
    loaded = read_scenario(path, ["duration=100 us", "record.every=10 us", question])
    found = assembled(loaded).extent
    assert (11, 0, 3) == (found.records, found.samples, found.snapshots)


@pytest.mark.parametrize("more", ["charges", "tracked", "records", "samples", "clouds", "surfaces"])
def test_more_of_anything_needs_more_memory(more: str) -> None:
    small = replace(USUAL, traces=1, coulomb=OFF)
    assert small.memory() < replace(small, **{more: getattr(small, more) + 1000}).memory()


@pytest.mark.parametrize("charges", [500, 3000, 200_000])
def test_each_way_to_sum_has_its_own_room(charges: int) -> None:
    """None where nothing is summed; the automatic choice has room for what it may take."""
    needed = {
        method: replace(USUAL, charges=charges, coulomb=Coulomb(method=method)).memory()
        for method in ("off", "direct", "tree", "auto")
    }
    assert needed["off"] < min(needed["direct"], needed["tree"])
    few, many = charges < 2000, charges > 100_000
    expected = needed["direct"] if few else needed["tree"] if many else max(needed.values())
    assert expected == needed["auto"]


@pytest.mark.parametrize("more", ["charges", "tracked", "records", "samples", "snapshots"])
def test_more_of_anything_needs_more_of_the_disk(more: str) -> None:
    small = replace(USUAL, traces=1)
    assert small.disk() < replace(small, **{more: getattr(small, more) + 1000}).disk()


def test_a_longer_run_writes_the_state_of_its_charges_more_often() -> None:
    """1e6 charges of 120 bytes are sealed every 240 s: 120 times in 8 hours."""
    large = replace(USUAL, charges=1_000_000, records=20_000, tracked=0, snapshots=0)
    assert 1 == large.segments(1.0)
    assert abs(120 - large.segments(8 * 3600.0)) < 3
    states = large.disk(8 * 3600.0) - large.disk(1.0)
    assert 116 * 120e6 < states < 122 * 120e6


@pytest.mark.parametrize(
    ("walls", "detectors", "expected"),
    [(0, 0, 0), (1, 0, 96), (2, 0, 96), (0, 2, 192), (1, 1, 192)],
)
def test_what_is_lost_and_passes_has_its_bytes(walls: int, detectors: int, expected: int) -> None:
    """A charge is lost once, on whichever wall; it may pass each detector."""
    some = replace(USUAL, charges=1, surfaces=walls + detectors, detectors=detectors)
    assert expected == some.events()


@pytest.mark.parametrize("sealed", ["once", "often"])
def test_the_record_on_the_disk_is_as_large_as_foretold(sealed: str, tmp_path: Path) -> None:
    """Within a twentieth of the whole folder, sealed once or whenever 300 kB are there."""
    path, folder = tmp_path / "s.toml", tmp_path / "run"
    path.write_text(TRAP)
    given = ["cloud.load.count=300", "duration=100 us", "record.every=0.5 us"]
    given += ["stepping.step=0.1 us", "question=[]"]
    given += ["record.snapshots=20 us"]
    words = [word for text in given for word in ("--set", text)]
    script = f"""
import sys
from driftwell.cli.main import main
from driftwell.record import sealing
from driftwell.scenario.read import read_scenario
from driftwell.assembly import assembled
if {sealed == "often"}:
    sealing.SMALLEST = sealing.LARGEST = 300_000
sealing.SHORTEST = sealing.LONGEST = 1e9
code = main(["run", sys.argv[1], "-o", sys.argv[2], "--no-pictures", *sys.argv[3:]])
extent = assembled(read_scenario(sys.argv[1], sys.argv[4::2])).extent
print("\\n", code, extent.segments(), extent.disk())
"""
    done = subprocess.run(
        [sys.executable, "-c", script, path, folder, *words],
        check=True,
        capture_output=True,
        text=True,
        timeout=300,
    )
    code, segments, foretold = map(int, done.stdout.split("\n")[-2].split())
    assert 0 == code
    assert (segments > 8) == (sealed == "often")
    assert abs(segments - len(list((folder / "segments").glob("*.h5")))) <= 1
    size = sum(file.stat().st_size for file in folder.rglob("*") if file.is_file())
    assert 0.95 * foretold < size < 1.05 * foretold


def test_a_run_uses_about_the_memory_foretold(tmp_path: Path) -> None:
    """Within three tenths for 300 000 charges, of which the program itself takes a half.

    The peak is the kernel's of the process alone: what getrusage tells counts its parent's too.
    """
    path = tmp_path / "s.toml"
    path.write_text(TRAP)
    script = """
import json, pathlib, sys
from driftwell.cli.main import main
code = main(sys.argv[1:])
status = pathlib.Path("/proc/self/status").read_text().splitlines()
peak = next(line.split()[1] for line in status if line.startswith("VmHWM"))
print(json.dumps([code, 1024 * int(peak)]))
"""
    given = ["count=300000", 'shape.sigma="0.4 mm"']
    words = [word for text in given for word in ("--set", f"cloud.load.{text}")]
    more = ["duration=2 us", "stepping.step=1 us", "record.every=1 us", "coulomb.method=off"]
    words += [word for text in [*more, "question=[]"] for word in ("--set", text)]
    arguments = ["run", path, "-o", tmp_path / "run", "--no-pictures", *words]
    done = subprocess.run(
        [sys.executable, "-c", script, *arguments],
        check=True,
        capture_output=True,
        text=True,
        timeout=300,
    )
    code, used = json.loads(done.stdout.splitlines()[-1])
    assert 0 == code
    foretold = Extent(300_000, 1000, 1, 2, 4, 0, 0, 2, OFF).memory()
    assert 0.7 * foretold < used < 1.3 * foretold


def test_a_run_that_fits_is_let_through(tmp_path: Path) -> None:
    said: list[str] = []
    assert not refuse_beyond_memory(USUAL, said.append)
    assert not refuse_beyond_disk(USUAL, tmp_path / "not" / "there" / "yet", said.append)
    assert [] == said


def test_too_little_memory_is_told_with_what_is_needed(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(room, "free_memory", lambda: 2_000_000_000)
    large = replace(USUAL, charges=10_000_000)
    with pytest.raises(ScenarioError) as told:
        refuse_beyond_memory(large)
    assert str(told.value).startswith(
        f"The run needs about {in_words(large.memory())} of memory, and 2 GB are free: it has "
        "10000000 charges"
    )
    assert "fewer charges of more weight" in str(told.value)
    said: list[str] = []
    assert refuse_beyond_memory(large, said.append)
    assert [f"Warning: {told.value} The run begins all the same, as --force says; "] == [
        each.partition("should")[0] for each in said
    ]


def test_too_small_a_disk_is_told_with_what_is_needed(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(room, "free_space", lambda folder: 1_000_000)
    with pytest.raises(RecordError) as told:
        refuse_beyond_disk(USUAL, tmp_path)
    assert str(told.value).startswith(f"{tmp_path}: the record needs at least 10.3 MB")
    assert "the disk has 1 MB: 202 records of 1000 tracked charges" in str(told.value)
    assert "2 snapshots of 1000, 1 state. Record less often" in str(told.value)
    said: list[str] = []
    assert refuse_beyond_disk(USUAL, tmp_path, said.append)
    assert said[0].startswith(f"Warning: {told.value}")
    assert said[0].endswith("what was sealed before is kept.")


def test_a_system_that_does_not_say_lets_every_run_through(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(room, "free_memory", lambda: None)
    monkeypatch.setattr(room, "free_space", lambda folder: None)
    refuse_beyond_memory(replace(USUAL, charges=10_000_000))
    refuse_beyond_disk(replace(USUAL, records=10**9), tmp_path)


def test_the_free_memory_is_the_least_that_any_limit_leaves(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    limit = tmp_path / "limit"
    for text, smaller in (("1000000", True), ("max\n", False), ("9223372036854771712", False)):
        limit.write_text(text)
        monkeypatch.setattr(room, "_LIMITS", (str(limit), str(tmp_path / "missing")))
        free = free_memory()
        assert free is not None
        assert smaller == (free == 1_000_000)


def test_free_space_is_known_for_a_folder_that_is_not_made_yet(tmp_path: Path) -> None:
    there, to_be = free_space(tmp_path), free_space(tmp_path / "a" / "b")
    assert there is not None
    assert to_be is not None
    assert abs(there - to_be) < 0.2 * there + 1e9


@pytest.mark.parametrize(
    ("count", "words"),
    [
        (0, "0 bytes"),
        (999, "999 bytes"),
        (1500, "1.5 kB"),
        (48_100_000, "48.1 MB"),
        (4.81e9, "4.81 GB"),
        (2e13, "20 TB"),
    ],
)
def test_bytes_are_said_in_words(count: float, words: str) -> None:
    assert words == in_words(int(count))
