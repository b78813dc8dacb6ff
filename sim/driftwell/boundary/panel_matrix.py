"""Potentials of panels, averaged over panels: the entries of the equations for the densities.

The potential of panel j is demanded on panel i as a mean over three points of degree 2,

    A_ij = 1/3 sum_q I_j(r_iq)                                                                (1)

with I of triangle.py. That is a Galerkin method whose outer integral is a quadrature: charges and
potentials elsewhere err far less than with the middle of the panel alone.
"""

from __future__ import annotations

import math

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.boundary.triangle import BARYCENTRIC3, panel_potential
from driftwell.kernels import inner_kernel, threaded_kernel

Floats = NDArray[np.float64]
POINTS = len(BARYCENTRIC3)
"""Points of a panel, each for the same part of its area."""


def panel_points(rows: Floats) -> Floats:
    """(n, POINTS, 3), m, the points of panels of rows (n, COLUMNS)."""
    origin, e1, e2 = rows[:, None, 0:3], rows[:, None, 3:6], rows[:, None, 6:9]
    b, c = BARYCENTRIC3[:, 1], BARYCENTRIC3[:, 2]
    along = b * rows[:, 12, None] + c * rows[:, 13, None]
    across = c * rows[:, 14, None]
    return np.asarray(origin + along[:, :, None] * e1 + across[:, :, None] * e2)


@inner_kernel
def entry(points: np.ndarray, row: np.ndarray) -> float:
    """A_ij of eq. (1), m, of the panel `row` at the points (POINTS, 3) of another."""
    total = 0.0
    for q in range(POINTS):
        total += panel_potential(row, points[q, 0], points[q, 1], points[q, 2])
    return total / POINTS


@inner_kernel
def entry_by_points(points: np.ndarray, others: np.ndarray, area: float) -> float:
    """What stands for A_ij where panel j is its points; points at the same place are left out."""
    total = 0.0
    for q in range(POINTS):
        for p in range(POINTS):
            dx = points[q, 0] - others[p, 0]
            dy = points[q, 1] - others[p, 1]
            dz = points[q, 2] - others[p, 2]
            square = dx * dx + dy * dy + dz * dz
            if square > 0.0:
                total += 1.0 / math.sqrt(square)
    return area * total / (POINTS * POINTS)


@threaded_kernel
def fill_matrix(
    rows: np.ndarray, points: np.ndarray, group: np.ndarray, out_matrix: np.ndarray
) -> None:
    """A summed over the panels of each group; one row for each set of points.

    rows : (n, COLUMNS); points : (m, POINTS, 3); group : (n,) int64; out_matrix : (m, groups)
    """
    for i in prange(points.shape[0]):
        out_matrix[i, :] = 0.0
        for k in range(rows.shape[0]):
            out_matrix[i, group[k]] += entry(points[i], rows[k])


@threaded_kernel
def fill_entries(
    rows: np.ndarray,
    points: np.ndarray,
    every_point: np.ndarray,
    starts: np.ndarray,
    which: np.ndarray,
    out_exact: np.ndarray,
    out_missing: np.ndarray,
) -> None:
    """Some entries of A, and what they differ by from the points' sums.

    rows, every_point : of all panels; points : (m, POINTS, 3) of the panels asked for
    starts : (m + 1,), which : the panels of each row's entries; out_exact, out_missing alike
    """
    for i in prange(points.shape[0]):
        for k in range(starts[i], starts[i + 1]):
            j = which[k]
            exact = entry(points[i], rows[j])
            out_exact[k] = exact
            out_missing[k] = exact - entry_by_points(points[i], every_point[j], rows[j, 21])


@threaded_kernel
def fill_blocks(
    rows: np.ndarray,
    points: np.ndarray,
    members: np.ndarray,
    member_starts: np.ndarray,
    blocks: np.ndarray,
    out_blocks: np.ndarray,
) -> None:
    """Square pieces of the matrix of groups.

    points : (groups, POINTS, 3) of each group's first panel; members, member_starts : its panels
    blocks : (b, k) int64, groups of each piece; -1 for none, which gets a row of the identity
    """
    k = blocks.shape[1]
    for part in prange(blocks.shape[0] * k):
        b, i = part // k, part % k
        for j in range(k):
            here, there = blocks[b, i], blocks[b, j]
            value = 0.0
            if here < 0 or there < 0:
                value = 1.0 if i == j else 0.0
            else:
                for m in range(member_starts[there], member_starts[there + 1]):
                    value += entry(points[here], rows[members[m]])
            out_blocks[b, i, j] = value
