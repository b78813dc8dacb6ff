"""The bare direct sum against the C pair loop."""

from __future__ import annotations

import ctypes
import inspect
import os
import time
from typing import Any

import numpy as np

from bench_cases import sums
from bench_cases.clouds import gaussian
from bench_cases.reference import pointers
from bench_cases.timing import side_by_side


def direct_16k(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """16 384 charges, one call: one thread against the C loop, and two threads against one."""
    from driftwell.coulomb.direct import direct_sum

    n = 16384
    place, charge = gaussian(n)
    out = np.empty((3, n))

    def in_c() -> float:
        began = time.perf_counter()
        library.pair_loop(ctypes.c_int(n), *pointers(*place, charge, *out))
        return time.perf_counter() - began

    one = sums.direct(place, charge, 1)
    result: dict[str, Any] = {
        **side_by_side(one, in_c, repeats),
        "n": n,
        "threads": 1,
        "reference": "C pair loop, all terms",
    }
    agreement = np.abs(one.field - out).max() / np.abs(out).max()
    result["disagreement"] = float(agreement)
    many = (os.cpu_count() or 1) > 1
    if many:
        two = sums.direct(place, charge, 2)
        result["two_threads_over_one"] = side_by_side(two, one, repeats)["ratio"]
    if "mixed" in inspect.signature(direct_sum).parameters:
        mixed = sums.direct(place, charge, 1, mixed=True)
        result["mixed_ratio"] = side_by_side(mixed, in_c, repeats)["ratio"]
        if many:
            two = sums.direct(place, charge, 2, mixed=True)
            result["mixed_two_threads_over_one"] = side_by_side(two, mixed, repeats)["ratio"]
    return result
