"""The bare tree: against a published fast multipole library, by accuracy, and by number."""

from __future__ import annotations

import ctypes
import os
import time
from collections.abc import Callable
from typing import Any

import numpy as np

from bench_cases import sums
from bench_cases.clouds import CLOUDS, Floats
from bench_cases.force_error import Samples, samples
from bench_cases.timing import best_of

THREADS = min(2, os.cpu_count() or 1)
LIBRARY_PRECISION = 1e-3
ACCURACIES = [float(f"{10.0 ** (-k / 10.0):.2g}") for k in range(20, 51)]
"""From 1e-2 to 1e-5, ten a decade: of these the loosest with which the tree errs no more."""
TABLE_ACCURACIES = (1.5e-3, 1.6e-4, 5e-5, 1.2e-5)
TABLE_CLOUDS = ("gaussian", "cube", "plummer", "two signs")
GROWTH = (100_000, 200_000, 500_000, 1_000_000, 2_000_000, 5_000_000)
LARGE = 10_000_000


def _library_sum(place: Floats, charge: Floats) -> tuple[float, Floats]:
    """Seconds of the library's potential and gradient at its sources, and the field (3, n)."""
    import fmm3dpy

    sources = np.asfortranarray(place)
    began = time.perf_counter()
    found = fmm3dpy.lfmm3d(eps=LIBRARY_PRECISION, sources=sources, charges=charge, pg=2)
    seconds = time.perf_counter() - began
    return seconds, -4.0 * np.pi * found.grad


def _as_exact(
    place: Floats, charge: Floats, truth: Samples, wanted: float
) -> tuple[sums.BareSum, float]:
    """The tree at the loosest accuracy that errs by no more than `wanted`, and that accuracy."""
    found = None
    loose, tight = -1, len(ACCURACIES)
    while tight - loose > 1:
        middle = (loose + tight) // 2
        tree = sums.tree(place, charge, THREADS, ACCURACIES[middle])
        tree()
        if truth.error(tree.field).rms <= wanted:
            tight, found = middle, (tree, ACCURACIES[middle])
        else:
            loose = middle
    if found is None:
        raise SystemExit(f"no accuracy down to {ACCURACIES[-1]:g} errs less than {wanted:.2e}")
    return found


def against_library(n: int, library_repeats: int) -> Callable[..., dict[str, Any]]:
    """The case of `n` charges: the library at its precision 1e-3, the tree no less exact."""

    def case(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
        rows = []
        for name in ("gaussian", "ball"):
            place, charge = CLOUDS[name](n)
            truth = samples(place, charge)
            runs = [_library_sum(place, charge) for _ in range(library_repeats)]
            theirs, field = min(seconds for seconds, _ in runs), runs[-1][1]
            wanted = truth.error(field)
            del runs, field
            tree, accuracy = _as_exact(place, charge, truth, wanted.rms)
            seconds = best_of(3, tree)
            rows.append(
                {
                    "cloud": name,
                    "ratio": theirs / seconds,
                    "seconds": seconds,
                    "reference_seconds": theirs,
                    "rms": truth.error(tree.field).rms,
                    "reference_rms": wanted.rms,
                    "accuracy": accuracy,
                }
            )
        worst = min(rows, key=lambda row: float(row["ratio"]))
        return {
            **{key: worst[key] for key in ("ratio", "seconds", "reference_seconds")},
            "n": n,
            "threads": THREADS,
            "reference": "fmm3dpy lfmm3d, eps 1e-3",
            "rows": rows,
        }

    case.__doc__ = f"{n} charges: the tree against the library, at no larger error."
    return case


def tree_table(
    library: ctypes.CDLL, repeats: int, counts: tuple[int, ...] = (100_000, 1_000_000)
) -> dict[str, Any]:
    """Seconds and errors at several accuracies, clouds and numbers, on one thread and on two."""
    rows = []
    for n in counts:
        for name in TABLE_CLOUDS if n < LARGE else TABLE_CLOUDS[:1]:
            place, charge = CLOUDS[name](n)
            truth = samples(place, charge)
            for accuracy in TABLE_ACCURACIES:
                tree = sums.tree(place, charge, 1, accuracy)
                tree()
                seconds = best_of(2, tree)
                error = truth.error(tree.field)
                two = sums.tree(place, charge, THREADS, accuracy)
                two()
                rows.append(
                    {
                        "n": n,
                        "cloud": name,
                        "accuracy": accuracy,
                        "seconds": seconds,
                        "seconds_two_threads": best_of(2, two),
                        "same_bits": bool((two.field == tree.field).all()),
                        "rms": error.rms,
                        "median": error.median,
                        "percentile_99": error.percentile_99,
                    }
                )
    return {"threads": THREADS, "rows": rows}


def tree_growth(
    library: ctypes.CDLL, repeats: int, counts: tuple[int, ...] = GROWTH
) -> dict[str, Any]:
    """Seconds against the number of charges at 1e-4, and the exponent fitted to them."""
    rows, fitted = [], {}
    for name in ("gaussian", "cube"):
        seconds = []
        for n in counts:
            tree = sums.tree(*CLOUDS[name](n), THREADS, 1e-4)
            tree()
            took = best_of(2, tree)
            seconds.append(took)
            rows.append({"cloud": name, "n": n, "seconds": took, "us_per_charge": 1e6 * took / n})
        fitted[name] = float(np.polyfit(np.log(counts), np.log(seconds), 1)[0])
    return {"threads": THREADS, "exponent": max(fitted.values()), "fitted": fitted, "rows": rows}
