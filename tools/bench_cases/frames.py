"""What it costs to sum a fast bunch in its own rest frame, beside the plain sum."""

from __future__ import annotations

import ctypes
import os
import time
from collections.abc import Callable
from typing import Any

import numpy as np

from bench_cases.clouds import gaussian
from driftwell.constants import COULOMB_CONSTANT, SPEED_OF_LIGHT
from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.frame_sum import frame_sum
from driftwell.coulomb.frame_table import ROWS, frame_table
from driftwell.coulomb.summation import Summation
from driftwell.kernels.cache_lines import room
from driftwell.kernels.threads import on_threads

THREADS = min(2, os.cpu_count() or 1)
CASES = (
    (8, "direct", "0 m"),
    (1000, "direct", "0 m"),
    (1000, "direct", "0.1 m"),
    (10_000, "direct", "0 m"),
    (10_000, "direct", "0.1 m"),
    (100_000, "tree", "0 m"),
    (100_000, "tree", "0.1 m"),
    (1_000_000, "tree", "0 m"),
)
_LEAST = 0.02
"""s that one timing lasts at least."""


def frames(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """Seconds of a sum of a Gaussian bunch of gamma 5, plain and in its frame, in turn."""
    return {"reference": "", "rows": [_row(*case, repeats) for case in CASES]}


def _row(n: int, method: Any, softening: Any, repeats: int) -> dict[str, Any]:
    position, charge = gaussian(n)
    velocity = np.zeros((3, n))
    velocity[2] = SPEED_OF_LIGHT * np.sqrt(24.0)
    form = Coulomb(method=method, softening=softening)
    with on_threads(THREADS) as threads:
        summed = Summation(form, n, threads)
        out, table, nothing = room((3, n)), frame_table(1), np.zeros((3, n))
        rows, one, cloud = room((ROWS, n)), np.zeros(1, dtype=np.int64), np.zeros(n, np.int64)
        framed, mass = frame_sum(True), np.ones(n)

        def plain() -> None:
            summed.field(position, charge, out)

        def in_frame() -> None:
            framed(
                summed.pair_sum,
                position,
                velocity,
                charge,
                mass,
                cloud,
                nothing,
                summed.softening2,
                COULOMB_CONSTANT,
                SPEED_OF_LIGHT**2,
                0.0,
                one,
                summed.method == "tree",
                summed.work,
                table,
                rows,
                out,
                out,
            )

        plain()
        in_frame()
        pairs = [(_seconds(plain), _seconds(in_frame)) for _ in range(max(repeats, 3))]
    bare, whole = (min(each[k] for each in pairs) for k in (0, 1))
    return {
        "charges": n,
        "sum": summed.method,
        "softened": "yes" if summed.softening2 else "no",
        "plain_s": bare,
        "in_frame_s": whole,
        "ratio": whole / bare,
    }


def _seconds(once: Callable[[], None]) -> float:
    """Seconds of one call, on the average over so many that the clock can tell."""
    calls, began = 0, time.perf_counter()
    while calls == 0 or time.perf_counter() - began < _LEAST:
        once()
        calls += 1
    return (time.perf_counter() - began) / calls
