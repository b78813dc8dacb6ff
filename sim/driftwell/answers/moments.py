"""Moments of one cloud at one time: what a run notes of every cloud at every record.

    kinetic energy = (gamma - 1) m c^2 = m u^2 / (gamma + 1),   gamma = sqrt(1 + u^2/c^2)     (1)
    covariance     = mean of (a - mean a)(b - mean b), divided by the count                   (2)

The sums are numpy's pairwise sums of products, never a library's matrix product: those cut their
sums by the number of threads, and the same run would not give the same bits.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import SPEED_OF_LIGHT

Floats = NDArray[np.float64]


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
    coordinate = np.concatenate([position, velocity])
    centre = coordinate.mean(axis=1)
    coordinate -= centre[:, None]
    covariance = np.empty((6, 6))
    for i in range(6):
        for j in range(i + 1):
            covariance[i, j] = covariance[j, i] = np.sum(coordinate[i] * coordinate[j]) / count
    energy = kinetic_energies(velocity, mass)
    mean = energy.mean()
    return MomentsRow(
        count, centre, covariance, float(mean), float(np.sum((energy - mean) ** 2) / count)
    )


def kinetic_energies(velocity: Floats, mass: float) -> Floats:
    """Kinetic energies, (n,) J, of proper velocities (3, n) in m/s, eq. 1."""
    square = velocity[0] ** 2 + velocity[1] ** 2 + velocity[2] ** 2
    gamma = np.sqrt(1.0 + square / SPEED_OF_LIGHT**2)
    return np.asarray(mass * square / (gamma + 1.0))
