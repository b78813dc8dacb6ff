"""The sum over all periodic images against the open one, direct and by the tree."""

from __future__ import annotations

import ctypes
import os
from typing import Any

import numpy as np

from bench_cases import sums
from bench_cases.clouds import Floats
from bench_cases.timing import side_by_side

WIDTH = 0.05
"""Radius of the beam in periods."""
ACCURACY = 1e-4
COUNTS = ((2_000, "direct"), (16_384, "direct"), (100_000, "tree"), (1_000_000, "tree"))


def beam(n: int) -> Floats:
    """An even round beam, as long as the cell: places (3, n) in periods."""
    random = np.random.default_rng(5)
    r, turn = WIDTH * np.sqrt(random.random(n)), 2.0 * np.pi * random.random(n)
    return np.array([r * np.cos(turn), r * np.sin(turn), random.random(n) - 0.5])


def periodic(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """An endless beam: all images (periodic) over the charges alone (open), as few as 2.5 times."""
    from driftwell.coulomb.cell import Cell
    from driftwell.coulomb.periodic.direct import periodic_direct_sum, periodic_workspace
    from driftwell.coulomb.periodic.tree import periodic_tree_sum, periodic_tree_workspace
    from driftwell.coulomb.tree import settings_for

    cell = Cell(axis="z", length="1 m")
    rows = []
    for n, kind in COUNTS:
        place, charge = beam(n), np.ones(n)
        many = min(2, os.cpu_count() or 1)
        for threads in (1, many) if kind == "direct" and many > 1 else (many,):
            if kind == "direct":
                opened = sums.direct(place, charge, threads)
                summed = periodic_direct_sum(n, threads)
                work = periodic_workspace(n, cell)
            else:
                opened = sums.tree(place, charge, threads, ACCURACY)
                summed = periodic_tree_sum()
                settings = settings_for(ACCURACY)
                work = periodic_tree_workspace(n, threads, settings, cell, mixed=True)
            closed = sums.BareSum(summed, work, place, charge, np.empty((3, n)), threads)
            timed = side_by_side(opened, closed, repeats if n < 1_000_000 else 3)
            rows.append(
                {
                    "sum": kind,
                    "charges": n,
                    "threads": threads,
                    "periodic_over_open": timed["ratio"],
                    "open_seconds": timed["seconds"],
                    "periodic_seconds": timed["reference_seconds"],
                }
            )
    return {"rows": rows}
