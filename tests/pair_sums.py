"""Sums over pairs as tests see them: charges in, field and potential out, and what they promise."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.direct import direct_sum, workspace
from driftwell.coulomb.potential import threaded_potentials
from driftwell.coulomb.tree import settings_for, tree_sum, tree_workspace
from driftwell.kernels.threads import on_threads

Floats = NDArray[np.float64]
Sum = Callable[[Floats, Floats, float, float], Floats]
"""(position (3, n), charge (n,), softening length, constant) -> field (3, n) or potential (n,)."""

MIXED = 1e-6
"""From this accuracy on leaves are summed in mixed precision."""


@dataclass(frozen=True, slots=True)
class PairSumCase:
    """One way to sum over the pairs.

    relative_error : rms over the charges of a cloud, as :func:`rms_error` takes it
    """

    name: str
    relative_error: float
    field: Sum
    potential: Sum | None = None

    def __str__(self) -> str:
        return self.name


def rms_error(expected: Floats, found: Floats) -> float:
    """Rms of |dF| / |F| over the charges; |F| counts as at least 1/100 of its own rms.

    expected, found : (3, n), or (n,) for potentials
    """
    shape = (-1, expected.shape[-1])
    size = np.linalg.norm(expected.reshape(shape), axis=0)
    wrong = np.linalg.norm((found - expected).reshape(shape), axis=0)
    least = 0.01 * np.sqrt(np.mean(size**2))
    return float(np.sqrt(np.mean((wrong / np.maximum(size, least)) ** 2)))


def direct(threads: int, mixed: bool = False) -> PairSumCase:
    """The direct sum; in mixed precision each pair errs by up to 3e-8."""

    def field(place: Floats, charge: Floats, softening: float, constant: float) -> Floats:
        out, work = np.full_like(place, np.nan), workspace(charge.size)
        work[:] = np.nan
        with on_threads(threads) as given:
            summed = direct_sum(charge.size, given, mixed)
            summed(place, charge, softening**2, constant, work, out)
        return out

    def potential(place: Floats, charge: Floats, softening: float, constant: float) -> Floats:
        out = np.full_like(charge, np.nan)
        with on_threads(threads):
            threaded_potentials(place, charge, softening**2, constant, out)
        return out

    words = "one thread" if threads == 1 else f"{threads} threads"
    if mixed:
        return PairSumCase(f"direct, mixed, {words}", 5e-8, field)
    return PairSumCase(f"direct, {words}", 1e-14, field, potential)


def tree(accuracy: float, threads: int = 2) -> PairSumCase:
    """The tree, with leaves in mixed precision where the accuracy allows it, as a run has it."""
    settings = settings_for(accuracy)

    def fill(place: Floats, charge: Floats, softening: float, constant: float, out: Floats) -> None:
        mixed = accuracy >= MIXED
        with on_threads(threads) as given:
            work = tree_workspace(charge.size, given, settings, softening > 0.0, mixed)
            tree_sum()(place, charge, softening**2, constant, work, out)

    def field(place: Floats, charge: Floats, softening: float, constant: float) -> Floats:
        out = np.full_like(place, np.nan)
        fill(place, charge, softening, constant, out)
        return out

    def potential(place: Floats, charge: Floats, softening: float, constant: float) -> Floats:
        out = np.full((4, charge.size), np.nan)
        fill(place, charge, softening, constant, out)
        return out[3]

    return PairSumCase(f"tree, {accuracy:g}", accuracy, field, potential)
