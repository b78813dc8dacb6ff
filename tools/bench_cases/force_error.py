"""The error of a sum's forces, at some of the charges, against every pair's term."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numba import prange

from bench_cases.clouds import Floats
from driftwell.kernels import threaded_pair_kernel

SAMPLES = 1000


@threaded_pair_kernel
def _field_at(
    which: np.ndarray, position: np.ndarray, charge: np.ndarray, out_field: np.ndarray
) -> None:
    """Coulomb's law at the charges `which`, 1/(4 pi eps0) = 1; (3, k), overwritten."""
    for k in prange(which.size):
        i = which[k]
        fx = fy = fz = 0.0
        for j in range(charge.size):
            dx = position[0, i] - position[0, j]
            dy = position[1, i] - position[1, j]
            dz = position[2, i] - position[2, j]
            r2 = dx * dx + dy * dy + dz * dz
            r2 = r2 if r2 > 0.0 else math.inf
            s = charge[j] / (r2 * math.sqrt(r2))
            fx += s * dx
            fy += s * dy
            fz += s * dz
        out_field[0, k] = fx
        out_field[1, k] = fy
        out_field[2, k] = fz


@dataclass(frozen=True, slots=True)
class ForceError:
    """Of |dF| / |F| over the charges: its rms, median, and what 99 of 100 keep below."""

    rms: float
    median: float
    percentile_99: float


@dataclass(frozen=True, slots=True)
class Samples:
    """Some charges of a cloud and their true field (3, k)."""

    which: np.ndarray
    field: Floats

    def error(self, found: Floats) -> ForceError:
        """Of a field (3, n); |F| counts as at least 1/100 of its rms over the samples."""
        size = np.linalg.norm(self.field, axis=0)
        wrong = np.linalg.norm(found[:, self.which] - self.field, axis=0)
        relative = wrong / np.maximum(size, 0.01 * np.sqrt(np.mean(size**2)))
        return ForceError(
            rms=float(np.sqrt(np.mean(relative**2))),
            median=float(np.median(relative)),
            percentile_99=float(np.quantile(relative, 0.99)),
        )


def samples(position: Floats, charge: Floats, count: int = SAMPLES) -> Samples:
    """So many charges at random, and their field by every pair's term, on all threads."""
    which = np.random.default_rng(9).choice(charge.size, min(count, charge.size), replace=False)
    out = np.empty((3, which.size))
    _field_at(which, position, charge, out)
    return Samples(which, out)
