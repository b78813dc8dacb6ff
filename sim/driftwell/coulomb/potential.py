"""Potentials of the charges at each other, for the energy and for what a lost charge takes along.

    U = 1/(4 pi eps0) sum_{i < j} Q_i Q_j / (|x_i - x_j|^2 + e^2)^(1/2)

The energy U is half the sum of Q times the potential.
"""

from __future__ import annotations

import math

import numpy as np
from numba import prange

from driftwell.coulomb.eight_places import potential_at_eight
from driftwell.kernels import inner_kernel, inner_pair_kernel, kernel, threaded_kernel
from driftwell.kernels.lanes import lanes, load_some, store_some


@kernel
def potentials(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    out_potential: np.ndarray,
) -> None:
    """Potential at each charge of all others, V, on one thread.

    position : (3, n) m; charge : (n,) C; softening2 : m^2; out_potential : (n,) V, overwritten
    """
    for block in range((charge.size + 7) // 8):
        _eight(8 * block, position, charge, softening2, constant, out_potential)


@threaded_kernel
def threaded_potentials(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    out_potential: np.ndarray,
) -> None:
    """The same as :func:`potentials`, with the same bits, on all of numba's threads."""
    for block in prange((charge.size + 7) // 8):
        _eight(8 * block, position, charge, softening2, constant, out_potential)


@inner_kernel
def _eight(
    i: int,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    out_potential: np.ndarray,
) -> None:
    """The potentials at charges i to i + 7."""
    left = charge.size - i
    x, y, z = (
        load_some(position[0], i, left),
        load_some(position[1], i, left),
        load_some(position[2], i, left),
    )
    level = potential_at_eight(x, y, z, i, position, charge, softening2)
    store_some(out_potential, i, left, lanes(constant) * level)


@inner_pair_kernel
def potential_at(
    i: int, position: np.ndarray, charge: np.ndarray, softening2: float, constant: float
) -> float:
    """Potential at charge `i` of all others, V; of one at its very place none, if unsoftened."""
    x, y, z = position[0], position[1], position[2]
    xi, yi, zi = x[i], y[i], z[i]
    total = 0.0
    for j in range(charge.size):
        dx = xi - x[j]
        dy = yi - y[j]
        dz = zi - z[j]
        r2 = dx * dx + dy * dy + dz * dz + softening2
        r2 = r2 if r2 != 0.0 else math.inf
        r2 = r2 if j != i else math.inf  # taken away afterwards, its own term would swamp far ones
        total += charge[j] / math.sqrt(r2)
    return constant * total
