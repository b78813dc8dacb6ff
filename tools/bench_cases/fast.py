"""Fast charges in fields: whole runs against a C loop, and charges moved in a second."""

from __future__ import annotations

import ctypes
import time
from collections.abc import Callable
from typing import Any

import numpy as np

from bench_cases.reference import pointers
from bench_cases.timing import driftwell_run, side_by_side

MAGNET, ELECTRIC, VOLTAGE, SIZE = 0.1, 1e6, 1e3, 20e-3
SCHEMES = ("midpoint-rotation", "kick-drift-kick")
PUSHED = """
[[field]]
name     = "plates"
kind     = "uniform-electric"
strength = "1 MV/m"
along    = [1, 0, 0]

[[field]]
name        = "caps"
kind        = "static-quadrupole"
voltage     = "1 kV"
radius      = "28.284271247461902 mm"
half_length = "20 mm"
"""
SCENARIO = """
title    = "{n} electrons in a magnet"
duration = "{duration!r} s"
seed     = 3

[[cloud]]
name    = "electrons"
species = "electron"
count   = {n}
motion  = {{ kinetic_energy = "2 MeV", along = [0.6, 0, 0.8], temperature = "1e6 K" }}
shape   = {{ kind = "gaussian", sigma = ["1 mm", "1 mm", "1 mm"] }}

[[field]]
name     = "coil"
kind     = "uniform-magnetic"
strength = "0.1 T"
{fields}
[coulomb]
method = "off"

[stepping]
step   = "{step!r} s"
scheme = "{scheme}"

[record]
every  = "{every!r} s"
tracks = 0

[[question]]
name = "left"
ask  = "fraction-left"
of   = "electrons"
"""


def relativistic(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """2 MeV electrons in a magnet, with and without electric fields: against the same loop in C.

    Both on one core. The C loop does the arithmetic of midpoint-rotation in one pass and keeps no
    accounts. The ratio of the table's first row, with fields, is the case's.
    """
    rows = []
    for fields, pushed in (("crossed", True), ("magnet", False)):
        for n in (1000, 100_000):
            in_c = _in_c(library, n, pushed)
            for scheme in SCHEMES:
                found = side_by_side(lambda: _run(n, pushed, scheme), in_c, repeats)  # noqa: B023
                moved = n * _steps(n)
                rows.append(
                    {
                        "fields": fields,
                        "n": n,
                        "scheme": scheme,
                        "ratio": found["ratio"],
                        "million_a_second": moved / found["seconds"] / 1e6,
                        "C_million_a_second": moved / found["reference_seconds"] / 1e6,
                        "seconds": found["seconds"],
                        "reference_seconds": found["reference_seconds"],
                    }
                )
    first = rows[0]
    kept = ("ratio", "seconds", "reference_seconds")
    return {
        **{name: first[name] for name in kept},
        "threads": 1,
        "reference": "C loop",
        "rows": rows,
    }


def _steps(n: int) -> int:
    return 200_000_000 // n


def _step() -> float:
    """A hundredth of a turn at 2 MeV, s."""
    from driftwell import constants

    gamma = 1.0 + 2e6 * constants.ELEMENTARY_CHARGE / (
        constants.ELECTRON_MASS * constants.SPEED_OF_LIGHT**2
    )
    rate = constants.ELEMENTARY_CHARGE * MAGNET / (gamma * constants.ELECTRON_MASS)
    return 2.0 * np.pi / rate / 100.0


def _run(n: int, pushed: bool, scheme: str) -> float:
    duration = _steps(n) * _step()
    text = SCENARIO.format(
        n=n,
        duration=duration,
        step=_step(),
        scheme=scheme,
        every=duration / 2.0,
        fields=PUSHED if pushed else "",
    )
    return driftwell_run(text)[0]


def _in_c(library: ctypes.CDLL, n: int, pushed: bool) -> Callable[[], float]:
    from driftwell import constants

    rng = np.random.default_rng(3)
    start = rng.normal(scale=1e-3, size=(3, n))
    proper = 4.8 * constants.SPEED_OF_LIGHT * np.array([[0.6], [0.0], [0.8]]) * np.ones((3, n))
    curvature = VOLTAGE / SIZE**2 if pushed else -1.0

    def once() -> float:
        x, u = start.copy(), proper.copy()
        numbers = (
            -constants.ELEMENTARY_CHARGE / constants.ELECTRON_MASS,
            MAGNET,
            ELECTRIC,
            curvature,
            _step(),
            constants.SPEED_OF_LIGHT,
        )
        began = time.perf_counter()
        library.relativistic(
            ctypes.c_long(_steps(n)),
            ctypes.c_int(n),
            *pointers(*x, *u),
            *(ctypes.c_double(value) for value in numbers),
        )
        return time.perf_counter() - began

    return once
