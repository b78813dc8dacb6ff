"""How panels of conductors answer to charges: the influence of triangles on each other, inverted.

Each panel k carries its charge evenly. With p_k(x) the potential of one unit on it, over
1/(4 pi eps0), and A_kl the mean of p_k over panel l,

    U = -1/2 K b.A^-1.b,   b_k = sum_j q_j p_k(x_j)                                        (1)

is Galerkin's approximation of the energy of charges between grounded conductors: from above, for
of all charges on the panels that which answers makes the energy least. Means are taken by seven
points on near panels, by three far away, each through the closed form of the other, and A is made
symmetric.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), section 1.12 (the least energy).
R. F. Harrington, Field Computation by Moment Methods (1968), section 2-2 (from memory).
"""

from __future__ import annotations

import numpy as np
from numba import prange
from numpy.typing import NDArray
from scipy.linalg import LinAlgError, cho_factor, cho_solve

from driftwell.boundary.triangle import (
    BARYCENTRIC3,
    BARYCENTRIC7,
    WEIGHTS7,
    panel_potential,
    panel_rows,
)
from driftwell.errors import ScenarioError
from driftwell.kernels import threaded_kernel

Floats = NDArray[np.float64]

_NEAR = 4.0
"""Longest sides within which a mean is taken by seven points."""


@threaded_kernel
def panel_means(
    rows: np.ndarray,
    points: np.ndarray,
    weights7: np.ndarray,
    near2: float,
    out_matrix: np.ndarray,
) -> None:
    """Means over panel l of the potential of one unit on panel k.

    Parameters
    ----------
    rows : (k, 32) of :func:`panel_rows`
    points : (k, 10, 3) float64, m: seven points of each panel, then three
    weights7 : (7,); near2 : square of the distance in longest sides that counts as near
    out_matrix : (k, k) float64, 1/m, overwritten
    """
    for k in prange(rows.shape[0]):
        row = rows[k]
        inverse = 1.0 / row[21]
        for m in range(rows.shape[0]):
            dx, dy, dz = row[23] - rows[m, 23], row[24] - rows[m, 24], row[25] - rows[m, 25]
            size = max(row[22], rows[m, 22])
            total = 0.0
            if dx * dx + dy * dy + dz * dz < near2 * size * size:
                for g in range(7):
                    x, y, z = points[m, g, 0], points[m, g, 1], points[m, g, 2]
                    total += weights7[g] * panel_potential(row, x, y, z)
            else:
                for g in range(7, 10):
                    x, y, z = points[m, g, 0], points[m, g, 1], points[m, g, 2]
                    total += panel_potential(row, x, y, z) / 3.0
            out_matrix[k, m] = inverse * total


def influence(corners: Floats) -> Floats:
    """A of (1), (k, k) float64, 1/m, symmetric; corners : (k, 3 corners, 3 axes), m."""
    rows = panel_rows(corners)
    points = np.concatenate(
        [
            np.einsum("gc,kca->kga", BARYCENTRIC7, corners),
            np.einsum("gc,kca->kga", BARYCENTRIC3, corners),
        ],
        axis=1,
    )
    found = np.empty((len(corners), len(corners)))
    panel_means(rows, np.ascontiguousarray(points), WEIGHTS7, _NEAR**2, found)
    return np.asarray(0.5 * (found + found.T))


def answering(corners: Floats) -> Floats:
    """A^-1 of (1), (k, k) float64, m.

    Raises ScenarioError where panels lie on each other, so that they cannot answer apart.
    """
    matrix = influence(corners)
    try:
        factor = cho_factor(matrix, lower=True)
    except (LinAlgError, ValueError) as fault:
        raise ScenarioError(
            "[images]: the panels of the electrodes lie on each other or are crooked, and their "
            "charges cannot be told apart. Move electrodes that touch apart, join what is one "
            'body in one outline, or choose other "panels".'
        ) from fault
    inverse = cho_solve(factor, np.eye(len(corners)))
    return np.ascontiguousarray(0.5 * (inverse + inverse.T))
