"""The same bits on any number of threads: sums, and whole runs."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import numba
import numpy as np
import pytest

import driftwell
from driftwell.coulomb.direct import (
    direct_field,
    direct_sum,
    mixed_field,
    potentials,
    threaded_direct_field,
    threaded_mixed_field,
    threaded_potentials,
    workspace,
)
from driftwell.coulomb.sampled import sampled_field
from driftwell.record.reader import Run, open_run
from tests.running import quantity, species
from tests.scenario.good_scenarios import toml_file

TWO = pytest.mark.skipif(numba.config.NUMBA_NUM_THREADS < 2, reason="needs two threads")


def gas(count: int) -> tuple[np.ndarray, np.ndarray]:
    """Places (3, n) and charges (n,) of both signs."""
    random = np.random.default_rng(count)
    return random.normal(size=(3, count)), random.uniform(-1.0, 1.0, count)


@TWO
@pytest.mark.parametrize("count", [2, 8, 24, 25, 64, 65, 511, 512, 2000, 5000])
@pytest.mark.parametrize("softening", [0.0, 0.1])
def test_the_direct_sum_has_the_same_bits_on_one_thread_and_two(
    count: int, softening: float
) -> None:
    """Of the sum a run would take, and of the threaded sum itself at every size."""
    place, charge = gas(count)
    work = workspace(count)
    results = []
    for threads in (1, 2):
        numba.set_num_threads(threads)
        for summed in (direct_sum(count, threads), direct_field, threaded_direct_field):
            if count <= 64 and summed is threaded_direct_field:
                continue  # few charges have no tiles
            field = np.full((3, count), np.nan)
            summed(place, charge, softening**2, 9e9, work, field)
            assert np.isfinite(field).all()
            results.append(field.tobytes())
    numba.set_num_threads(numba.config.NUMBA_NUM_THREADS)
    assert {results[0]} == set(results)


@TWO
@pytest.mark.parametrize("count", [65, 512, 2000, 5000])
def test_the_mixed_sum_has_the_same_bits_on_one_thread_and_two(count: int) -> None:
    """The groups are merged on all threads where there are many charges."""
    place, charge = gas(count)
    work = workspace(count)
    results = []
    for threads in (1, 2):
        numba.set_num_threads(threads)
        for summed in (direct_sum(count, threads, mixed=True), mixed_field, threaded_mixed_field):
            field = np.full((3, count), np.nan)
            summed(place, charge, 0.0, 9e9, work, field)
            assert np.isfinite(field).all()
            results.append(field.tobytes())
    numba.set_num_threads(numba.config.NUMBA_NUM_THREADS)
    assert {results[0]} == set(results)


@TWO
def test_the_field_at_some_charges_has_the_same_bits_on_one_thread_and_two() -> None:
    place, charge = gas(2000)
    which = np.arange(3, 2000, 19)
    results = []
    for threads in (1, 2):
        numba.set_num_threads(threads)
        field = np.full((3, which.size), np.nan)
        sampled_field(which, place, charge, 0.0, 9e9, field)
        assert np.isfinite(field).all()
        results.append(field.tobytes())
    numba.set_num_threads(numba.config.NUMBA_NUM_THREADS)
    assert {results[0]} == set(results)


@TWO
@pytest.mark.parametrize("count", [512, 2000])
def test_the_energy_has_the_same_bits_on_one_thread_and_two(count: int) -> None:
    place, charge = gas(count)
    results = []
    for threads in (1, 2):
        numba.set_num_threads(threads)
        for summed in (potentials, threaded_potentials):
            potential = np.full(count, np.nan)
            summed(place, charge, 0.0, 9e9, potential)
            assert np.isfinite(potential).all()
            results.append(potential.tobytes())
    numba.set_num_threads(numba.config.NUMBA_NUM_THREADS)
    assert {results[0]} == set(results)


def executed(folder: Path, threads: int, cache: Path | None = None) -> Run:
    """700 ions in rods with a narrow bore, by the command, on so many threads.

    cache : where machine code is kept, if not where it always is
    """
    table = {
        "title": "a check",
        "duration": "1 us",
        "seed": 5,
        "species": {"ion": species(2.29e-25)},
        "cloud": [
            {
                "name": "load",
                "species": "ion",
                "count": 700,
                "shape": {"kind": "ball", "radius": "0.59 mm"},
                "motion": {"temperature": "300 K"},
            }
        ],
        "field": [
            {
                "name": "rods",
                "kind": "rf-quadrupole",
                "radius": "1.2 mm",
                "voltage": {"amplitude": "100 V", "frequency": "2 MHz"},
            }
        ],
        "electrodes": {"field_accuracy": 1e-2, "region": {"r": "3 mm", "z": ["-3 mm", "3 mm"]}},
        "electrode": [
            {
                "name": "rod",
                "voltage": "3 V",
                "shape": [{"kind": "circle", "centre": ["0.6 mm", "0.4 mm"], "radius": "60 um"}],
            }
        ],
        "wall": [{"name": "bore", "kind": "cylinder", "radius": quantity(0.6e-3, "m")}],
        "detector": [{"name": "middle", "kind": "plane", "at": ["0 m", "0 m", "0.1 mm"]}],
        "stepping": {"step": "10 ns"},
        "record": {"every": "0.1 us", "snapshots": "0.5 us"},
        "question": [
            {"name": "swing", "ask": "frequency", "of": "load", "axis": "x", "every": "20 ns"}
        ],
    }
    folder.mkdir()
    (folder / "ions.toml").write_text(toml_file(table))
    sources = Path(driftwell.__file__).resolve().parent.parent
    command = [sys.executable, "-m", "driftwell", "run", "ions.toml", "-o", "run", "--no-pictures"]
    done = subprocess.run(
        [*command, "--threads", str(threads)],
        cwd=folder,
        env={
            **os.environ,
            "PYTHONPATH": str(sources),
            **({} if cache is None else {"DRIFTWELL_CACHE": str(cache)}),
        },
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return open_run(folder / "run")


def test_a_whole_run_leaves_the_same_record_on_one_thread_and_two(tmp_path: Path) -> None:
    """Trajectories, moments, losses, crossings, ledger, traces, snapshots and the last state."""
    one, two = (executed(tmp_path / f"on{threads}", threads) for threads in (1, 2))
    assert one.trajectory[1].tobytes() == two.trajectory[1].tobytes()
    for rows in ("moments", "losses", "crossings", "ledger", "trace/time", "trace/value"):
        assert one.rows(rows).tobytes() == two.rows(rows).tobytes(), rows
    assert one.losses().size > 10
    last = len(one.header.walls) - 1  # between them the edges of the rod's field
    assert ("bore", "rod") == (one.header.walls[0], one.header.walls[last])
    assert {0, last} == set(one.losses()["wall"])
    assert one.crossings().size > 10
    assert len(one.snapshots) == 3
    for time in one.snapshots:
        for name in ("id", "position", "velocity"):
            left, right = (getattr(each.snapshot(time), name) for each in (one, two))
            assert left.tobytes() == right.tobytes(), name
    first, second = one.state(), two.state()
    assert first.keys() == second.keys()
    for name, values in first.items():
        if name != "run/seconds":
            assert values.tobytes() == second[name].tobytes(), name
