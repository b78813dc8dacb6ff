"""Moments of one cloud at one time: what a run notes of every cloud at every record.

    kinetic energy = (gamma - 1) m c^2 = m u^2 / (gamma + 1),   gamma = sqrt(1 + u^2/c^2)     (1)
    covariance     = mean of (a - mean a)(b - mean b), divided by the count                   (2)

The sums are taken in blocks of 1024 charges, in lanes, and the blocks' sums in order, with their
rounding carried along; never by a library's matrix product: those cut their sums by the number of
threads, and the same run would not give the same bits.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.kernels import inner_sum_kernel, kernel
from driftwell.kernels.sums import add_compensated

Floats = NDArray[np.float64]

_BLOCK = 1024
_SPREADS = 22
"""The lower triangle of the covariance, row by row, and the variance of the energy."""


@dataclass(frozen=True, slots=True)
class MomentsRow:
    """One row of :class:`driftwell.answers.evidence.Moments`, without its time.

    count : simulated charges alive
    centre : (6,) mean of (x, y, z, ux, uy, uz), m and m/s; NaN where none is alive
    covariance : (6, 6) of the same six
    kinetic_energy, kinetic_variance : J and J^2, of one real particle
    """

    count: int
    centre: Floats
    covariance: Floats
    kinetic_energy: float
    kinetic_variance: float


def moments_of(position: Floats, velocity: Floats, mass: float) -> MomentsRow:
    """Moments of a cloud's charges alive.

    Parameters
    ----------
    position : (3, n) float64, m
    velocity : (3, n) float64, proper velocity, m/s
    mass : kg, of one real particle
    """
    count = position.shape[1]
    if count == 0:
        return MomentsRow(0, np.full(6, np.nan), np.full((6, 6), np.nan), np.nan, np.nan)
    x, y, z, ux, uy, uz = (np.ascontiguousarray(row, np.float64) for row in (*position, *velocity))
    means, carry, spreads = np.zeros(7), np.zeros(_SPREADS), np.zeros(_SPREADS)
    _means(x, y, z, ux, uy, uz, SPEED_OF_LIGHT**2, carry, means)
    carry[:] = 0.0
    _spreads(x, y, z, ux, uy, uz, SPEED_OF_LIGHT**2, means, carry, spreads)
    covariance = np.empty((6, 6))
    lower = np.tril_indices(6)
    covariance[lower] = spreads[:-1]
    covariance.T[lower] = spreads[:-1]
    return MomentsRow(
        count, means[:6].copy(), covariance, mass * float(means[6]), mass**2 * float(spreads[-1])
    )


def kinetic_energies(velocity: Floats, mass: float) -> Floats:
    """Kinetic energies, (n,) J, of proper velocities (3, n) in m/s, eq. 1."""
    square = velocity[0] ** 2 + velocity[1] ** 2 + velocity[2] ** 2
    gamma = np.sqrt(1.0 + square / SPEED_OF_LIGHT**2)
    return np.asarray(mass * square / (gamma + 1.0))


@kernel
def _means(
    x: np.ndarray,
    y: np.ndarray,
    z: np.ndarray,
    ux: np.ndarray,
    uy: np.ndarray,
    uz: np.ndarray,
    light2: float,
    work_carry: np.ndarray,
    out_means: np.ndarray,
) -> None:
    """Means of the six, and of the kinetic energy over the mass; from zeros."""
    n = x.size
    for first in range(0, n, _BLOCK):
        last = min(first + _BLOCK, n)
        sums = _sums_of(
            x[first:last],
            y[first:last],
            z[first:last],
            ux[first:last],
            uy[first:last],
            uz[first:last],
            light2,
        )
        for k in range(7):
            add_compensated(out_means, work_carry, k, sums[k])
    for k in range(7):
        out_means[k] = (out_means[k] + work_carry[k]) / n


@kernel
def _spreads(
    x: np.ndarray,
    y: np.ndarray,
    z: np.ndarray,
    ux: np.ndarray,
    uy: np.ndarray,
    uz: np.ndarray,
    light2: float,
    means: np.ndarray,
    work_carry: np.ndarray,
    out_spreads: np.ndarray,
) -> None:
    """Covariance (2) of the six, lower triangle, and variance of the energy; from zeros."""
    n = x.size
    for first in range(0, n, _BLOCK):
        last = min(first + _BLOCK, n)
        six = (
            x[first:last],
            y[first:last],
            z[first:last],
            ux[first:last],
            uy[first:last],
            uz[first:last],
        )
        k = 0
        for a in range(6):
            for b in range(a + 1):
                product = _product(six[a], six[b], means[a], means[b])
                add_compensated(out_spreads, work_carry, k, product)
                k += 1
        energy = _energy_spread(six[3], six[4], six[5], light2, means[6])
        add_compensated(out_spreads, work_carry, k, energy)
    for k in range(_SPREADS):
        out_spreads[k] = (out_spreads[k] + work_carry[k]) / n


@inner_sum_kernel
def _sums_of(
    x: np.ndarray,
    y: np.ndarray,
    z: np.ndarray,
    ux: np.ndarray,
    uy: np.ndarray,
    uz: np.ndarray,
    light2: float,
) -> tuple[float, float, float, float, float, float, float]:
    sx = sy = sz = 0.0
    wx = wy = wz = 0.0
    energy = 0.0
    for i in range(x.size):
        sx += x[i]
        sy += y[i]
        sz += z[i]
        wx += ux[i]
        wy += uy[i]
        wz += uz[i]
        u2 = ux[i] * ux[i] + uy[i] * uy[i] + uz[i] * uz[i]
        energy += u2 / (1.0 + math.sqrt(1.0 + u2 / light2))
    return sx, sy, sz, wx, wy, wz, energy


@inner_sum_kernel
def _product(a: np.ndarray, b: np.ndarray, mean_a: float, mean_b: float) -> float:
    total = 0.0
    for i in range(a.size):
        total += (a[i] - mean_a) * (b[i] - mean_b)
    return total


@inner_sum_kernel
def _energy_spread(
    ux: np.ndarray, uy: np.ndarray, uz: np.ndarray, light2: float, mean: float
) -> float:
    total = 0.0
    for i in range(ux.size):
        u2 = ux[i] * ux[i] + uy[i] * uy[i] + uz[i] * uz[i]
        apart = u2 / (1.0 + math.sqrt(1.0 + u2 / light2)) - mean
        total += apart * apart
    return total
