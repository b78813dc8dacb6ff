"""The potential whose slopes come nearest to field components given on a grid.

Wanted are node values phi of a spline that minimise

    sum over axes a of |D_a phi + M_a E_a|^2

D_a derives the spline along axis a, M_a takes the component from the nodes to the same places: the
middles between nodes, because at nodes the slopes of +1, -1, +1, ... all vanish. The minimum solves

    sum_a D_a^T D_a phi = -sum_a D_a^T M_a E_a

and as each term works along one axis, the eigenvectors of the D_a^T D_a turn the equations into
divisions.

References
----------
R. E. Lynch, J. R. Rice and D. H. Thomas, Numer. Math. 6 (1964) 185, the direct solution of
equations that are sums over axes (from memory).
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.maps.grid import Grid, axis_coefficients
from driftwell.fields.maps.spline_sums import weights

Floats = NDArray[np.float64]

_NOTHING = 1e-11
"""Sums of eigenvalues below this part of the largest belong to the constant."""


def fitted_potential(grid: Grid, field: Sequence[Floats]) -> tuple[Floats, float]:
    """Node values, their mean 0, and the part of the field that no potential gives.

    Parameters
    ----------
    grid : where the field is given
    field : the component along each axis, (n0, n1, ...)

    Returns
    -------
    potential : (n0, n1, ...)
    left_over : rms of what is left, as part of the field's
    """
    right = np.zeros(grid.counts)
    sums = np.zeros(grid.counts)
    vectors = []
    for axis, component in enumerate(field):
        slopes = middle_slopes(grid, axis)
        right -= _along(slopes.T @ _middles(grid.counts[axis]), component, axis)
        values, turned = np.linalg.eigh(slopes.T @ slopes)
        vectors.append(turned)
        shape = [1] * grid.axes
        shape[axis] = -1
        sums += values.reshape(shape)
    for axis, turned in enumerate(vectors):
        right = _along(turned.T, right, axis)
    wanted = sums > _NOTHING * sums.max()
    right = np.where(wanted, right / np.where(wanted, sums, 1.0), 0.0)
    for axis, turned in enumerate(vectors):
        right = _along(turned, right, axis)
    potential = right - right.mean()
    left = sum(
        np.mean((component + _along(node_slopes(grid, axis), potential, axis)) ** 2)
        for axis, component in enumerate(field)
    )
    whole = sum(np.mean(component**2) for component in field)
    return potential, float(np.sqrt(left / whole)) if whole > 0.0 else 0.0


def middle_slopes(grid: Grid, axis: int) -> Floats:
    """Slopes of an axis' spline in the middles of its cells, from node values: (n - 1, n)."""
    count = grid.counts[axis]
    found = axis_coefficients(np.eye(count), grid.mirrors[axis])
    return _at(found, 0.5, 1) / grid.spacing[axis]


def node_slopes(grid: Grid, axis: int) -> Floats:
    """Slopes of an axis' spline at its nodes, from node values: (n, n)."""
    count = grid.counts[axis]
    found = axis_coefficients(np.eye(count), grid.mirrors[axis])
    slopes = np.concatenate([_at(found, 0.0, 1), _at(found, 1.0, 1)[-1:]])
    return slopes / grid.spacing[axis]


def _middles(count: int) -> Floats:
    """Values of a spline in the middles of its cells, from node values: (n - 1, n)."""
    return _at(axis_coefficients(np.eye(count), mirrored=False), 0.5, 0)


def _at(coefficients: Floats, t: float, derivative: int) -> Floats:
    """Rows for each cell of what stands at t in it."""
    cells = coefficients.shape[0] - 5
    row = weights(np.array([t]), derivative)[0]
    return np.asarray(sum(w * coefficients[k : k + cells] for k, w in enumerate(row)))


def _along(matrix: Floats, values: Floats, axis: int) -> Floats:
    """A matrix applied along one axis."""
    return np.moveaxis(np.tensordot(matrix, values, axes=(1, axis)), 0, axis)
