"""Workers of a cluster killed at random: every run is there in the end, and counted once.

DRIFTWELL_CLUSTER_RUNS is the number of runs; 14 where it is not set.
"""

from __future__ import annotations

import os
import random
import signal
import time
from contextlib import suppress
from pathlib import Path

import pytest

pytest.importorskip("distributed")

from driftwell import open_run
from driftwell.cli.main import main
from driftwell.study.catalogue import Catalogue, Row
from tests.cli.small_runs import started
from tests.study.small_cluster import cluster
from tests.study.swept import PATIENCE, study, waited_for

RUNS = int(os.environ.get("DRIFTWELL_CLUSTER_RUNS", "14"))
SETTINGS = ("duration=20 ms", "stepping.step=20 ns", "record.every=1 ms")  # about 0.3 s a run


def rows(folder: Path) -> tuple[Row, ...]:
    with Catalogue(folder / "catalogue.sqlite", read_only=True) as catalogue:
        return catalogue.rows()


def test_workers_killed_at_random_cost_no_run_and_no_run_counts_twice(tmp_path: Path) -> None:
    draw = random.Random(7)
    path = study(tmp_path, "4, 8", RUNS // 2, SETTINGS)
    assert 0 == main(["sweep", str(path), "-o", str(tmp_path / "whole"), "--no-pictures"])
    folder, kills = tmp_path / "s", 0
    with cluster() as made:
        arguments = ("sweep", path, "-o", folder, "--no-pictures")
        process = started(*arguments, "--on", "dask", "--scheduler", made.address)
        waited_for(process, 1, folder, "runs/*/run.h5")
        while process.poll() is None:
            time.sleep(draw.uniform(1.0, 5.0))
            pids = made.workers()
            if pids:
                with suppress(ProcessLookupError):
                    os.kill(draw.choice(pids), signal.SIGKILL)
                    kills += 1
        out, err = process.communicate(timeout=PATIENCE)
    assert 0 == process.returncode, out + err
    assert f"{RUNS} runs: {RUNS} computed now" in out
    print(f"{kills} kills")
    assert kills >= 2
    found, whole = rows(folder), rows(tmp_path / "whole")
    assert RUNS == len({row.digest for row in found}) == len(list((folder / "runs").iterdir()))
    for row, expected in zip(found, whole, strict=True):
        assert (expected.digest, "finished") == (row.digest, row.word)
        assert expected.answers == row.answers
        record = open_run(folder / "runs" / row.digest[:16])
        assert record.answers == row.answers
        assert [] == record.damage(thorough=True)
