"""The sum over all periodic images against the open one, direct and by the tree."""

from __future__ import annotations

import ctypes
import os
from typing import Any

import numpy as np

from bench_cases import sums
from bench_cases.clouds import Floats

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
    """An endless beam: seconds with all images (periodic) and of the charges alone (open).

    The least of several of each, taken in turn.
    """
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
            often = 20 * repeats if n < 10_000 else repeats if n < 1_000_000 else 3
            opened(), closed()
            timed = [(opened(), closed()) for _ in range(often)]
            first, second = (min(each) for each in zip(*timed, strict=True))
            rows.append(
                {
                    "sum": kind,
                    "charges": n,
                    "threads": threads,
                    "periodic_over_open": second / first,
                    "open_seconds": first,
                    "periodic_seconds": second,
                }
            )
    return {"rows": rows}
