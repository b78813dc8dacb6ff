"""Kills in a sweep: every run is there in the end, once, and as if nothing had happened."""

from __future__ import annotations

import os
import random
import signal
import time
from pathlib import Path

import pytest

from driftwell import open_run
from driftwell.cli.main import main
from driftwell.study.catalogue import Catalogue, Row
from tests.study.swept import PATIENCE, children, gone, study, sweeping, waited_for

# 20 runs of about 0.3 s
SETTINGS = ("duration=20 ms", "stepping.step=20 ns", "record.every=1 ms")


@pytest.fixture(scope="module")
def unbroken(tmp_path_factory: pytest.TempPathFactory) -> tuple[Row, ...]:
    """The same sweep without kills."""
    folder = tmp_path_factory.mktemp("unbroken")
    path = study(folder, "4, 8", 10, SETTINGS)
    assert 0 == main(["sweep", str(path), "-o", str(folder / "s"), "--no-pictures"])
    return rows(folder / "s")


def rows(folder: Path) -> tuple[Row, ...]:
    with Catalogue(folder / "catalogue.sqlite", read_only=True) as catalogue:
        return catalogue.rows()


def assert_as_unbroken(folder: Path, expected: tuple[Row, ...]) -> None:
    found = rows(folder)
    assert 20 == len(found) == len({row.digest for row in found})
    for row, whole in zip(found, expected, strict=True):
        assert (whole.number, whole.digest, whole.word) == (row.number, row.digest, row.word)
        assert whole.answers == row.answers
        record = open_run(folder / "runs" / row.digest[:16])
        assert record.answers == row.answers
        assert [] == record.damage(thorough=True)
    assert 20 == len(list((folder / "runs").iterdir()))


def test_workers_killed_at_random_cost_no_run(tmp_path: Path, unbroken: tuple[Row, ...]) -> None:
    draw = random.Random(3)
    path, folder = study(tmp_path, "4, 8", 10, SETTINGS), tmp_path / "s"
    process = sweeping(path, folder)
    waited_for(process, 1, folder, "runs/*/run.h5")
    kills = 0
    while process.poll() is None and kills < 8:
        time.sleep(draw.uniform(0.3, 1.5))
        pids = children(process.pid)
        if pids:
            os.kill(draw.choice(pids), signal.SIGKILL)
            kills += 1
    out, err = process.communicate(timeout=PATIENCE)
    assert kills >= 3
    if process.returncode == 7:  # one run was struck three times; the next sweep takes it up
        assert "was lost 3 times" in out
    elif process.returncode == 2:  # so were three workers in a row, each as it started up
        assert "in a row were gone before they could work" in err
    if process.returncode in {2, 7}:
        again = sweeping(path, folder)
        out, err = again.communicate(timeout=PATIENCE)
        assert 0 == again.returncode, out + err
    else:
        assert 0 == process.returncode, out + err
    assert_as_unbroken(folder, unbroken)


def test_a_driver_killed_at_random_leaves_no_process_and_the_next_goes_on(
    tmp_path: Path, unbroken: tuple[Row, ...]
) -> None:
    draw = random.Random(5)
    path, folder = study(tmp_path, "4, 8", 10, SETTINGS), tmp_path / "s"
    pids: list[int] = []
    for _ in range(3):
        process = sweeping(path, folder)
        time.sleep(draw.uniform(2.5, 6.0))
        pids += children(process.pid)
        process.kill()
        process.communicate()
    process = sweeping(path, folder)
    out, err = process.communicate(timeout=PATIENCE)
    assert 0 == process.returncode, out + err
    assert gone(pids)
    assert_as_unbroken(folder, unbroken)
