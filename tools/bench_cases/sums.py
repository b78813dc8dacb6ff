"""The product's sums over pairs, bare: without a run around them."""

from __future__ import annotations

import time
from dataclasses import dataclass
from typing import Any

import numpy as np

from bench_cases.clouds import Floats
from driftwell.kernels.threads import on_threads

MIXED = 1e-6
"""From this accuracy on leaves are summed in mixed precision."""


@dataclass(frozen=True, slots=True)
class BareSum:
    """A sum with all it works in; 1/(4 pi eps0) = 1, no softening.

    position : (3, n); charge : (n,); field : (3, n), overwritten at each call
    """

    pair_sum: Any
    work: Floats
    position: Floats
    charge: Floats
    field: Floats
    threads: int

    def __call__(self) -> float:
        """Sum once: the seconds it took."""
        with on_threads(self.threads):
            began = time.perf_counter()
            self.pair_sum(self.position, self.charge, 0.0, 1.0, self.work, self.field)
            return time.perf_counter() - began


def direct(position: Floats, charge: Floats, threads: int, **settings: Any) -> BareSum:
    """The direct sum."""
    from driftwell.coulomb.direct import direct_sum, workspace

    n = charge.size
    summed = direct_sum(n, threads, **settings)
    return BareSum(summed, workspace(n), position, charge, np.empty_like(position), threads)


def tree(
    position: Floats, charge: Floats, threads: int, accuracy: float, settings: Any = None
) -> BareSum:
    """The tree at an accuracy, or with settings of its own; leaves mixed from 1e-6 on."""
    from driftwell.coulomb.tree import settings_for, tree_sum, tree_workspace

    chosen = settings or settings_for(accuracy)
    return BareSum(
        tree_sum(),
        tree_workspace(charge.size, threads, chosen, mixed=accuracy >= MIXED),
        position,
        charge,
        np.empty_like(position),
        threads,
    )
