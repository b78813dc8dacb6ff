"""The room a run needs in memory and on the disk is known, and refused where there is none."""

from __future__ import annotations

import json
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import pytest

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
    assert Extent(200, 200, 1, 2, 202, 0, 0, 2, trap.coulomb) == extent_of(trap, 200)
    path.write_text(BEAM)
    scenario = read_scenario(path, ["coulomb.method=off"]).scenario
    assert Extent(5000, 20, 2, 3, 102, 40, 1, 3, scenario.coulomb) == extent_of(
        scenario, 5000, 40, 1
    )


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


def test_the_record_on_the_disk_is_as_large_as_foretold(tmp_path: Path) -> None:
    """Within a tenth, and what is never written aside: HDF5's own structures."""
    path, folder = tmp_path / "s.toml", tmp_path / "run"
    path.write_text(TRAP)
    given = ["cloud.load.count=300", "duration=100 us", "record.every=0.5 us"]
    given += ["stepping.step=0.1 us", "question=[]"]
    words = [word for text in given for word in ("--set", text)]
    subprocess.run(
        [sys.executable, "-m", "driftwell", "run", path, "-o", folder, "--no-pictures", *words],
        check=True,
        capture_output=True,
        timeout=300,
    )
    size = sum(file.stat().st_size for file in (folder / "segments").glob("*.h5"))
    foretold = Extent(300, 300, 1, 2, 202, 0, 0, 2, USUAL.coulomb).disk()
    assert 0.9 * foretold < size < 1.1 * foretold + 60_000


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
    refuse_beyond_memory(USUAL)
    refuse_beyond_disk(USUAL, tmp_path / "not" / "there" / "yet")


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


def test_too_small_a_disk_is_told_with_what_is_needed(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(room, "free_space", lambda folder: 1_000_000)
    with pytest.raises(RecordError) as told:
        refuse_beyond_disk(USUAL, tmp_path)
    assert str(told.value).startswith(f"{tmp_path}: the record needs at least 10 MB")
    assert "the disk has 1 MB: 202 records of 1000 tracked charges" in str(told.value)


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
