"""Ions in a linear RF trap: whole runs against C loops and a scipy script."""

from __future__ import annotations

import ctypes
import os
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from bench_cases.reference import pointers
from bench_cases.timing import driftwell_run, side_by_side, summarised

ION_MASS_U = 137.905
RADIUS, VOLTAGE, DRIVE, AXIAL = 3.5e-3, 180.0, 1.1e6, 80e3

TRAP = """
title    = "{n} ions in a linear RF trap"
duration = "{duration!r} s"
seed     = 3

[species.ion]
mass   = "137.905 u"
charge = "1 e"

[[cloud]]
name    = "ions"
species = "ion"
count   = {n}
motion  = {{ temperature = "{kelvin} K" }}
shape   = {{ kind = "gaussian", sigma = ["{s0} um", "{s0} um", "{s1} um"] }}

[[field]]
name    = "rods"
kind    = "rf-quadrupole"
radius  = "3.5 mm"
voltage = {{ amplitude = "180 V", frequency = "1.1 MHz" }}

[[field]]
name = "end caps"
kind = "static-quadrupole"
axial_frequency = {{ species = "ion", value = "80 kHz" }}

[stepping]
step          = "{step!r} s"
scheme        = "{scheme}"
coulomb_every = {every_step}

[record]
every = "{every!r} s"

[[question]]
name = "left"
ask  = "fraction-left"
of   = "ions"
"""


def trap(
    n: int,
    duration: float,
    step: float,
    records: int,
    scheme: str = "kick-drift-kick",
    every_step: int = 1,
    kelvin: int = 300,
    sizes: tuple[int, int] = (60, 250),
) -> str:
    """The scenario of a trap with `n` ions; sizes in um."""
    return TRAP.format(
        n=n,
        duration=duration,
        step=step,
        every=duration / records,
        scheme=scheme,
        every_step=every_step,
        kelvin=kelvin,
        s0=sizes[0],
        s1=sizes[1],
    )


def small_trap(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """8 ions in a linear RF trap: a whole run against the same loop in C.

    The ratio is to the loop as one writes it, each pair once. `ratio_to_all_terms` is to the loop
    over all n^2 terms with arrays promised not to overlap, which gcc vectorises for so few ions.
    """
    from driftwell import constants

    n, steps = 8, 5_000_000
    step = 1.0 / (DRIVE * 100.0)
    text = trap(n, steps * step, step, records=100)
    mass = ION_MASS_U * constants.ATOMIC_MASS
    ratio = constants.ELEMENTARY_CHARGE / mass
    rng = np.random.default_rng(3)
    start = rng.normal(size=(3, n)) * np.array([[60e-6], [60e-6], [250e-6]])

    def in_c(loop: Any) -> Callable[[], float]:
        def once() -> float:
            x = start.copy()
            u = np.zeros((3, n))
            a = np.zeros((3, n))
            began = time.perf_counter()
            loop(
                ctypes.c_long(steps),
                ctypes.c_int(n),
                *pointers(*x, *u, *a),
                *(
                    ctypes.c_double(value)
                    for value in (
                        ratio,
                        constants.COULOMB_CONSTANT * constants.ELEMENTARY_CHARGE * ratio,
                        VOLTAGE / RADIUS**2,
                        2.0 * np.pi * DRIVE,
                        (2.0 * np.pi * AXIAL) ** 2 / ratio,
                        step,
                    )
                ),
            )
            return time.perf_counter() - began

        return once

    plain = side_by_side(lambda: driftwell_run(text)[0], in_c(library.trap_pairs_once), repeats)
    tuned = side_by_side(lambda: driftwell_run(text)[0], in_c(library.trap_all_terms), repeats)
    return {
        **plain,
        "n": n,
        "threads": 1,
        "steps": steps,
        "steps_per_second": steps / plain["seconds"],
        "reference": "C loop, each pair once",
        "ratio_to_all_terms": tuned["ratio"],
        "all_terms_seconds": tuned["reference_seconds"],
    }


def direct_2k(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """2000 ions: time of a step of a whole run against the C pair loop, one core each."""
    n, steps = 2000, 500
    step = 1.0 / (DRIVE * 100.0)
    text = trap(n, steps * step, step, records=4, sizes=(200, 800))
    rng = np.random.default_rng(3)
    x, q, e = rng.normal(size=(3, n)), np.ones(n), np.zeros((3, n))

    def pair_loop() -> float:
        began = time.perf_counter()
        for _ in range(steps):
            library.pair_loop(ctypes.c_int(n), *pointers(*x, q, *e))
        return time.perf_counter() - began

    found = side_by_side(lambda: driftwell_run(text)[0], pair_loop, repeats)
    result = {**found, "n": n, "threads": 1, "steps": steps, "reference": "C pair loop, all terms"}
    if (os.cpu_count() or 1) > 1:
        two = side_by_side(
            lambda: driftwell_run(text, threads=2)[0], lambda: driftwell_run(text)[0], repeats
        )
        result["two_threads_over_one"] = two["ratio"]
    return result


def script(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """64 hot ions: driftwell against scipy's DOP853 with a numpy force, at equal final error.

    driftwell follows the drive with 16 steps a period of the fourth order and sums the pairs every
    8th step; the script has the loosest tolerance that errs no more at the end. The truth both
    are held against is a run of the sixth order with 200 steps a period and every pair sum.
    """
    from scipy.integrate import solve_ivp

    from driftwell import constants

    n, duration = 64, 2e-3
    mass = ION_MASS_U * constants.ATOMIC_MASS
    ratio = constants.ELEMENTARY_CHARGE / mass
    pair = constants.COULOMB_CONSTANT * constants.ELEMENTARY_CHARGE * ratio
    gradient, curvature = VOLTAGE / RADIUS**2, (2.0 * np.pi * AXIAL) ** 2 / ratio

    def text(scheme: str, steps_per_drive: int, every_step: int) -> str:
        step = 1.0 / (DRIVE * steps_per_drive)
        return trap(n, duration, step, 2, scheme, every_step, kelvin=5000, sizes=(800, 1000))

    def force(t: float, state: NDArray[np.float64]) -> NDArray[np.float64]:
        x = state[: 3 * n].reshape(3, n)
        g = gradient * np.cos(2.0 * np.pi * DRIVE * t)
        d = x[:, :, None] - x[:, None, :]
        r2 = (d * d).sum(axis=0)
        np.fill_diagonal(r2, 1.0)
        a = pair * (d / (r2 * np.sqrt(r2))).sum(axis=2)
        a[0] += ratio * (0.5 * curvature - g) * x[0]
        a[1] += ratio * (0.5 * curvature + g) * x[1]
        a[2] -= ratio * curvature * x[2]
        return np.concatenate([state[3 * n :], a.ravel()])

    ours_text = text("composed-4", 16, 8)
    start = _start_of(ours_text)
    truth = driftwell_run(text("composed-6", 200, 1))[1].position.T

    def error(x: NDArray[np.float64]) -> float:
        return float(np.sqrt(((x - truth) ** 2).mean()))

    def integrate(tolerance: float) -> tuple[float, float]:
        began = time.perf_counter()
        found = solve_ivp(
            force, (0.0, duration), start, method="DOP853", rtol=tolerance, atol=tolerance * 1e-6
        )
        return time.perf_counter() - began, error(found.y[: 3 * n, -1].reshape(3, n))

    ours = error(driftwell_run(ours_text)[1].position.T)
    for tolerance in (1e-3, 3e-4, 1e-4, 3e-5, 1e-5, 1e-6):
        seconds, theirs = integrate(tolerance)
        if theirs <= ours:
            break
    pairs = [(driftwell_run(ours_text)[0], seconds)]
    pairs += [
        (driftwell_run(ours_text)[0], integrate(tolerance)[0]) for _ in range(min(repeats, 3) - 1)
    ]
    return {
        **summarised(pairs),
        "n": n,
        "threads": 1,
        "error_m": ours,
        "reference_error_m": theirs,
        "reference": f"solve_ivp DOP853, rtol {tolerance:.0e}, numpy force",
        "stepping": "composed-4, 16 steps a drive period, pairs every 8th step",
    }


def _start_of(text: str) -> NDArray[np.float64]:
    """Positions and velocities at time zero, as the integrator wants them."""
    from driftwell.particles.species import bodies
    from driftwell.scenario.read import read_scenario

    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "bench.toml"
        file.write_text(text)
        loaded = read_scenario(file)
        scenario = loaded.scenario
        part = scenario.cloud[0].load(
            scenario.seed, bodies(scenario.species), 0, 0, 0, loaded.folder
        )
        return np.concatenate([part.position.ravel(), part.velocity.ravel()])
