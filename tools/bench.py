"""Speed of driftwell beside what a user would do by hand, measured side by side in one run.

    python tools/bench.py [--json FILE] [--only NAME] [--repeats N]

Every case times driftwell and its reference in turn, several times, and gives the median of the
ratios pair by pair: larger is better for driftwell. Reading the scenario, loading and compiling
stay outside the timing (save in `startup`); recording, ledger and answers are inside it. Needs gcc.
"""

from __future__ import annotations

import argparse
import ctypes
import json
import os
import platform
import shutil
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

HERE = Path(__file__).resolve().parent
GCC = ("gcc", "-O3", "-march=native", "-ffast-math")

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


class Watch:
    """An observer that notes when the first step is about to be taken: all is compiled by then."""

    began = 0.0

    def begins(self, choice: Any, plan: Any, particles: Any) -> None:
        self.began = 0.0

    def goes_on(self, progress: Any) -> bool:
        self.began = self.began or time.perf_counter()
        return True


def driftwell_run(text: str, threads: int = 1) -> tuple[float, Any]:
    """Seconds of a whole run (stepping, ledger, record, answers), and its record."""
    from driftwell.record.reader import open_run
    from driftwell.run import run
    from driftwell.scenario.read import read_scenario

    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "bench.toml"
        file.write_text(text)
        watch = Watch()
        run(read_scenario(file), Path(folder) / "run", watch, threads)
        seconds = time.perf_counter() - watch.began
        record = open_run(Path(folder) / "run")
        return seconds, record.snapshot(record.end_time)


def reference_library(folder: Path) -> ctypes.CDLL:
    """The loops of bench_reference.c, compiled."""
    made = folder / "reference.so"
    subprocess.run(
        [*GCC, "-shared", "-fPIC", str(HERE / "bench_reference.c"), "-o", str(made), "-lm"],
        check=True,
    )
    return ctypes.CDLL(str(made))


def pointers(*arrays: NDArray[np.float64]) -> list[Any]:
    return [array.ctypes.data_as(ctypes.POINTER(ctypes.c_double)) for array in arrays]


def side_by_side(
    ours: Callable[[], float], theirs: Callable[[], float], repeats: int
) -> dict[str, float]:
    """Median seconds of both, and the median ratio theirs/ours of pairs taken in turn."""
    ours(), theirs()
    return summarised([(ours(), theirs()) for _ in range(repeats)])


def summarised(pairs: list[tuple[float, float]]) -> dict[str, float]:
    """Medians of pairs of seconds, driftwell's and the reference's."""
    ratios = [second / first for first, second in pairs]
    return {
        "ratio": statistics.median(ratios),
        "ratio_least": min(ratios),
        "ratio_most": max(ratios),
        "seconds": statistics.median(first for first, _ in pairs),
        "reference_seconds": statistics.median(second for _, second in pairs),
    }


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


CASES: dict[str, Callable[[ctypes.CDLL, int], dict[str, Any]]] = {
    "small-trap": small_trap,
    "direct-2k": direct_2k,
    "script": script,
    "startup": startup,
}


def machine() -> dict[str, Any]:
    """What the figures were measured on."""
    listing = Path("/proc/cpuinfo")
    names = (
        [line for line in listing.read_text().splitlines() if line.startswith("model name")]
        if listing.is_file()
        else []
    )
    return {
        "processor": names[0].partition(":")[2].strip() if names else platform.processor(),
        "cores": os.cpu_count(),
        "python": platform.python_version(),
        "numpy": np.__version__,
    }


def main() -> int:
    """Measure, print, and write the JSON file where asked."""
    parser = argparse.ArgumentParser(description=__doc__.split("\n\n")[0])
    parser.add_argument("--json", type=Path, metavar="FILE", help="write the figures to FILE")
    parser.add_argument("--only", choices=CASES, action="append", help="measure this case only")
    parser.add_argument("--repeats", type=int, default=5, help="pairs of timings a case")
    asked = parser.parse_args()
    if shutil.which(GCC[0]) is None:
        print("tools/bench.py needs gcc for its references", file=sys.stderr)
        return 2
    cases: dict[str, Any] = {}
    with tempfile.TemporaryDirectory() as folder:
        library = reference_library(Path(folder))
        for name in asked.only or CASES:
            cases[name] = found = CASES[name](library, asked.repeats)
            print(
                f"{name:12} ratio {found['ratio']:8.3g} "
                f"({found['ratio_least']:.3g} to {found['ratio_most']:.3g})  "
                f"driftwell {found['seconds']:.4g} s, {found['reference']} "
                f"{found['reference_seconds']:.4g} s"
            )
            for extra in (
                "ratio_to_all_terms",
                "two_threads_over_one",
                "steps_per_second",
                "error_m",
            ):
                if extra in found:
                    print(f"{'':12} {extra.replace('_', ' ')}: {found[extra]:.4g}")
    if asked.json:
        asked.json.write_text(json.dumps({"machine": machine(), "cases": cases}, indent=2) + "\n")
    return 0


if __name__ == "__main__":
    sys.exit(main())
