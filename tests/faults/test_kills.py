"""Processes that are killed at any instant: nothing sealed is lost, and what goes on ends the same.

DRIFTWELL_KILLS sets how many; 200 and more were tried, see docs/reliability.md.
"""

from __future__ import annotations

import multiprocessing
import os
import random
import time
from pathlib import Path
from typing import Any

import pytest

from driftwell import open_run
from driftwell.record.index import sealed_numbers
from driftwell.record.reader import Run
from tests.cli.small_runs import scenario

KILLS = int(os.environ.get("DRIFTWELL_KILLS", "20"))
CROWD = """\
title = "Ions that leave a trap"
duration = "{duration} us"
seed = 5

[[cloud]]
name = "load"
species = "proton"
count = {count}
weight = {weight}
shape = {{ kind = "gaussian", sigma = ["0.12 mm", "0.12 mm", "0.2 mm"] }}
motion = {{ temperature = "300 K" }}

[[field]]
name = "rods"
kind = "rf-quadrupole"
radius = "2 mm"
voltage = {{ amplitude = "60 V", frequency = "20 MHz" }}

[[wall]]
name = "bore"
kind = "cylinder"
radius = "0.6 mm"

[[detector]]
name = "middle"
kind = "plane"
at = ["0 mm", "0 mm", "0.1 mm"]

[coulomb]
method = "{method}"
accuracy = 1e-2
softening = "2 um"

[stepping]
step = "3 ns"

[record]
every = "6 us"
snapshots = "20 us"

[[question]]
name = "held"
ask = "fraction-left"
of = "load"

[[question]]
name = "swing"
ask = "frequency"
of = "load"
axis = "x"
"""
TABLES = ("trajectory/time", "trajectory/state", "ledger", "moments", "losses", "crossings")
TABLES += ("trace/time", "trace/value")


def _child(words: list[str]) -> None:
    """A run that seals as often as it can."""
    from driftwell.cli.main import main
    from driftwell.record import sealing

    sealing.SHORTEST = sealing.LONGEST = 0.02
    raise SystemExit(main(words))


def begun(words: list[str]) -> Any:
    """A process that runs the command, forked from one that has imported everything."""
    context = multiprocessing.get_context("forkserver")
    context.set_forkserver_preload(["driftwell.cli.runs.run", "driftwell.run"])
    process = context.Process(target=_child, args=(words,))
    process.start()
    return process


def same(one: Run, other: Run) -> None:
    """Both say the same in every dataset, to the last bit."""
    for path in TABLES:
        assert one.rows(path).tobytes() == other.rows(path).tobytes(), path
    assert repr(one.answers) == repr(other.answers)  # none is not equal to itself
    assert one.snapshots == other.snapshots
    for each in one.snapshots:
        first, second = one.snapshot(each), other.snapshot(each)
        for name in ("id", "position", "velocity", "charge"):
            assert getattr(first, name).tobytes() == getattr(second, name).tobytes()


@pytest.mark.parametrize(("method", "count"), [("direct", 400), ("tree", 600)])
def test_a_run_killed_again_and_again_ends_where_the_unbroken_one_does(
    method: str, count: int, tmp_path: Path
) -> None:
    """Half of the kills of all; before some a warning comes, as on a cluster."""
    text = CROWD.format(
        method=method, count=count, weight=10_000 / count, duration=6 * (KILLS // 5)
    )
    path = scenario(tmp_path, text)
    words = ["run", str(path), "--no-pictures", "--threads", "1", "-o"]
    whole = begun([*words, str(tmp_path / "whole")])
    whole.join(300)
    assert 0 == whole.exitcode
    unbroken = open_run(tmp_path / "whole")
    assert unbroken.losses().size > 10
    chance = random.Random(method)
    folder, kills, warned, reached = tmp_path / "parts", 0, 0, 0
    while kills < KILLS // 2:
        process = begun([*words, str(folder)])
        before = sealed_numbers(folder)
        deadline = time.monotonic() + 120.0
        while process.exitcode is None and sealed_numbers(folder) == before:
            assert time.monotonic() < deadline
            time.sleep(0.005)
        time.sleep(chance.uniform(0.0, 0.15))
        if chance.random() < 0.3:
            process.terminate()
            warned += 1
            time.sleep(chance.uniform(0.0, 0.02))
        process.kill()
        process.join()
        kills += 1
        found = open_run(folder)
        assert [] == found.damage(thorough=True)
        assert len(found.segments) >= reached
        reached = len(found.segments)
        if process.exitcode == 0:
            break
    print(f"{kills} kills, {warned} of them after SIGTERM, {reached} segments")
    assert kills >= min(KILLS // 2, 4), "the run is too short to be killed"
    last = begun([*words, str(folder)])
    last.join(300)
    assert 0 == last.exitcode
    same(unbroken, open_run(folder))
    assert not list(folder.rglob("*.part"))
