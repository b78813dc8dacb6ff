"""A sweep of 200 short runs: whether the cores are busy, and what a run costs beyond itself."""

from __future__ import annotations

import ctypes
import os
import resource
import tempfile
import time
from pathlib import Path
from typing import Any

from driftwell.study.catalogue import Catalogue
from driftwell.study.cores import Sharing
from driftwell.study.pool import Pool
from driftwell.study.progress import Failure, SweepProgress
from driftwell.study.read import read_study
from driftwell.study.sweep import Sweep
from driftwell.study.sweep_folder import CATALOGUE_FILE

RUNS = 200

SCENARIO = """
title    = "Eight ions in a trap, for a short time"
duration = "40 ms"
seed     = 7

[species.ion]
mass   = "138 u"
charge = "1 e"

[[cloud]]
name    = "load"
species = "ion"
count   = 8
shape   = { kind = "gaussian", sigma = "50 um" }
motion  = { temperature = "10 K" }

[[field]]
name    = "rods"
kind    = "rf-quadrupole"
radius  = "3.5 mm"
voltage = { amplitude = "180 V", frequency = "1.1 MHz" }

[[field]]
name = "caps"
kind = "static-quadrupole"
axial_frequency = { species = "ion", value = "80 kHz" }

[stepping]
step = "20 ns"

[record]
every = "1 ms"

[[question]]
name = "held"
ask  = "fraction-left"
of   = "load"
"""

STUDY = """
title    = "Many short runs"
scenario = "short.toml"
replicas = {runs}
"""


class Watch:
    """An observer of a sweep that only wants all runs done."""

    def begins(self, sharing: Sharing, progress: SweepProgress) -> None:
        """Nothing to show."""

    def told(self, sentence: str) -> None:
        """Nothing to show."""

    def failed(self, failure: Failure) -> None:
        raise SystemExit(f"run {failure.number} failed: {failure.reason}")

    def goes_on(self, progress: SweepProgress) -> bool:
        return True


def _swept(runs: int) -> dict[str, float]:
    """A sweep of so many runs, from nothing to the last answer in the catalogue."""
    seconds: list[float] = []

    class Timed(Pool):
        def next(self, timeout: float) -> Any:
            done = super().next(timeout)
            if done is not None and done.reply is not None:
                seconds.append(done.reply["seconds"])
            return done

    with tempfile.TemporaryDirectory() as place:
        folder = Path(place)
        (folder / "short.toml").write_text(SCENARIO)
        (folder / "many.toml").write_text(STUDY.format(runs=runs))
        (folder / "sweep").mkdir()
        before = resource.getrusage(resource.RUSAGE_CHILDREN)
        began, worked = time.perf_counter(), time.process_time()
        study = read_study(folder / "many.toml")
        with Catalogue(folder / "sweep" / CATALOGUE_FILE) as catalogue:
            sweep = Sweep(study, folder / "sweep", catalogue, Watch(), engine_of=Timed.of_runs)
            result = sweep.result()
        whole, driver = time.perf_counter() - began, time.process_time() - worked
        after = resource.getrusage(resource.RUSAGE_CHILDREN)
    assert result.sharing is not None
    cores = len(os.sched_getaffinity(0))
    used = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    own = sum(seconds)
    return {
        "seconds": whole,
        "seconds of a run": own / runs,
        "ms beyond a run": 1000.0 * (whole * result.sharing.workers - own) / runs,
        "percent of the time workers have a run": 100.0 * own / whole / result.sharing.workers,
        "percent of the cores used": 100.0 * (used + driver) / whole / cores,
        "processor ms of the driver a run": 1000.0 * driver / runs,
    }


def sweep(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """200 short runs of half a second: share of the cores busy, ms beyond the runs' own time."""
    _swept(2 * len(os.sched_getaffinity(0)))  # compiles
    return {"n": 8, "runs": RUNS, **_swept(RUNS)}
