"""What a night's safety costs: record, ledger and checkpoints, and the start after a kill."""

from __future__ import annotations

import ctypes
import os
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from typing import Any

from bench_cases.start import FIRST_STEP
from bench_cases.timing import driftwell_run
from bench_cases.whole_run import STEP, text

THREADS = min(2, os.cpu_count() or 1)
COUNT, STEPS, EVERY = 10_000, 1000, 50
SEGMENT = 100_000_000
"""Bytes written at once to see how fast the record can go to the disk."""
STOPPED = """
import sys
from driftwell.cli.main import main
sys.exit(main(["run", sys.argv[1], "-o", sys.argv[2], "--no-pictures", "--stop-after", "3 s"]))
"""


def record_1e4(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """10 000 charges, a record every 50 steps, against the same run with one at its end."""
    scenario = text(COUNT, STEPS, records=STEPS // EVERY).replace('"tree"', '"direct"')
    bare = text(COUNT, STEPS, records=1).replace('"tree"', '"direct"')
    every = f"[record]\ntracks = {COUNT}\n"
    scenario, bare = (each.replace("[record]\n", every) for each in (scenario, bare))
    driftwell_run(text(COUNT, 2, records=1).replace('"tree"', '"direct"'), THREADS)
    pairs = [
        (driftwell_run(scenario, THREADS)[0], driftwell_run(bare, THREADS)[0])
        for _ in range(max(2, repeats // 2))
    ]
    ours, theirs = (min(pair[k] for pair in pairs) for k in (0, 1))
    return {
        "n": COUNT,
        "threads": THREADS,
        "seconds": ours,
        "reference": "one record at the end",
        "reference_seconds": theirs,
        "ratio": theirs / ours,
        "records_cost": ours / theirs - 1.0,
        "mb_per_second": _throughput(),
    }


def _throughput() -> float:
    """MB/s of a file of a segment's size, forced to the disk, as segments are."""
    from driftwell.record.commit import commit

    image = os.urandom(SEGMENT)
    with tempfile.TemporaryDirectory() as folder:
        began = time.perf_counter()
        commit(Path(folder) / "000001.h5", image)
        return SEGMENT / 1e6 / (time.perf_counter() - began)


def resume(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """10 000 charges: process start to the next step of a stopped run, and to a new one's first."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        file = folder / "night.toml"
        file.write_text(text(COUNT, steps=200_000, records=20).replace('"tree"', '"direct"'))
        for place in ("cut", "compiled"):
            subprocess.run(
                [sys.executable, "-c", STOPPED, str(file), str(folder / place)],
                check=False,
                capture_output=True,
            )
        again = min(_to_next_step(file, folder / "cut") for _ in range(max(2, repeats // 2)))
        anew = min(_to_next_step(file, folder / f"new{k}") for k in range(max(2, repeats // 2)))
    return {
        "n": COUNT,
        "threads": THREADS,
        "seconds": again,
        "reference": "a new run",
        "reference_seconds": anew,
        "ratio": anew / again,
        "step": STEP,
    }


def _to_next_step(file: Path, folder: Path) -> float:
    """Seconds from the process's start to its first step; it is killed then."""
    began = time.perf_counter()
    with subprocess.Popen(
        [sys.executable, "-c", FIRST_STEP, str(file), str(folder)],
        stdout=subprocess.PIPE,
        text=True,
    ) as process:
        assert process.stdout is not None
        told = process.stdout.readline()
        seconds = time.perf_counter() - began
        process.kill()
    if told.strip() != "first step":
        raise SystemExit("the run that should tell its next step failed")
    return seconds
