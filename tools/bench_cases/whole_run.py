"""A whole run of a million charges against the bare sums it makes."""

from __future__ import annotations

import ctypes
import os
import time
from typing import Any

import numpy as np

from bench_cases.timing import driftwell_run

THREADS = min(2, os.cpu_count() or 1)
COUNT, STEPS = 1_000_000, 100
STEP = 1.0 / (1.1e6 * 100.0)

SCENARIO = """
title    = "A million macro-charges in a linear RF trap"
duration = "{duration!r} s"
seed     = 3

[species.ion]
mass   = "137.905 u"
charge = "1 e"

[[cloud]]
name    = "ions"
species = "ion"
count   = {n}
weight  = 10
motion  = {{ temperature = "300 K" }}
shape   = {{ kind = "gaussian", sigma = ["0.5 mm", "0.5 mm", "2 mm"] }}

[[field]]
name    = "rods"
kind    = "rf-quadrupole"
radius  = "3.5 mm"
voltage = {{ amplitude = "180 V", frequency = "1.1 MHz" }}

[[field]]
name = "end caps"
kind = "static-quadrupole"
axial_frequency = {{ species = "ion", value = "80 kHz" }}

[[wall]]
name   = "bore"
kind   = "cylinder"
radius = "3.5 mm"

[coulomb]
method    = "tree"
accuracy  = 1e-4
softening = "5 um"

[stepping]
step = "{step!r} s"

[record]
every = "{every!r} s"

[[question]]
name = "held"
ask  = "fraction-left"
of   = "ions"
"""


def text(n: int, steps: int, records: int) -> str:
    """The scenario with so many charges, steps and records after the first."""
    duration = steps * STEP
    return SCENARIO.format(n=n, duration=duration, step=STEP, every=duration / records)


def run_1e6(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """Fields, walls, ledger, record and answers of 100 steps: seconds a step, over a bare sum's."""
    from driftwell.coulomb.form import Coulomb
    from driftwell.coulomb.promise import Promise, Scene
    from driftwell.coulomb.summation import Summation
    from driftwell.kernels.threads import on_threads

    scenario = text(COUNT, STEPS, records=2)
    driftwell_run(text(20_000, 2, records=1), THREADS)  # compiled by then
    seconds, snapshot = driftwell_run(scenario, THREADS)
    position = np.ascontiguousarray(snapshot.position.T)
    charge = snapshot.charge * snapshot.weight
    field = np.empty_like(position)
    form = Coulomb(method="tree", accuracy=1e-4, softening="5 um")
    with on_threads(THREADS) as threads:
        summation = Summation(form, charge.size, threads)
        summation.field(position, charge, field)
        start = Scene(0.0, 0, 0.0, position, charge, np.arange(charge.size), field)
        summation, _, _ = Promise(1e-4).look(summation, start)  # fitted to the cloud, as the run's
        times = []
        for _ in range(4):
            began = time.perf_counter()
            summation.field(position, charge, field)
            times.append(time.perf_counter() - began)
    bare = min(times[1:])
    return {
        "n": COUNT,
        "threads": THREADS,
        "steps": STEPS,
        "seconds": seconds / STEPS,
        "reference": "bare force sum",
        "reference_seconds": bare,
        "ratio": bare / (seconds / STEPS),
        "step_over_sum": seconds / STEPS / bare,
    }
