"""How long a user waits before anything moves."""

from __future__ import annotations

import ctypes
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

from bench_cases.timing import side_by_side
from bench_cases.whole_run import text

FIRST_STEP = """
import sys
from pathlib import Path
from driftwell.run import run
from driftwell.scenario.read import read_scenario

class Watch:
    def begins(self, choice, plan, particles):
        pass
    def told(self, sentence):
        pass
    def goes_on(self, progress):
        print("first step", flush=True)
        return True

run(read_scenario(sys.argv[1]), Path(sys.argv[2]), Watch(), 2)
"""


def startup(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """`driftwell --help` against an empty Python."""

    def timed(*command: str) -> Callable[[], float]:
        def once() -> float:
            began = time.perf_counter()
            subprocess.run([sys.executable, *command], check=True, capture_output=True)
            return time.perf_counter() - began

        return once

    found = side_by_side(timed("-m", "driftwell", "--help"), timed("-c", "pass"), max(repeats, 5))
    return {**found, "n": 0, "threads": 1, "reference": "python -c pass"}


def _to_first_step(cache: Path) -> float:
    """Seconds from the process's start to the first step of a run with the tree."""
    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "start.toml"
        file.write_text(text(20_000, steps=2, records=1))
        began = time.perf_counter()
        with subprocess.Popen(
            [sys.executable, "-c", FIRST_STEP, str(file), str(Path(folder) / "run")],
            env={**os.environ, "DRIFTWELL_CACHE": str(cache)},
            stdout=subprocess.PIPE,
            text=True,
        ) as process:
            assert process.stdout is not None
            told = process.stdout.readline()
            seconds = time.perf_counter() - began
            process.communicate()
        if told.strip() != "first step" or process.returncode != 0:
            raise SystemExit("the run that should tell its first step failed")
    return seconds


def start(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """20 000 charges, the tree: process start to first step, compiled anew and from the cache."""
    with tempfile.TemporaryDirectory() as folder:
        cache = Path(folder)
        cold = _to_first_step(cache)
        warm = min(_to_first_step(cache) for _ in range(max(2, min(repeats, 5))))
    return {
        "n": 20_000,
        "threads": 2,
        "seconds": warm,
        "reference": "compiled anew",
        "reference_seconds": cold,
        "ratio": cold / warm,
    }
