"""Splines of a grid at many points in plain numpy: any derivative, for many maps at once.

For the fit, its check and second derivatives; the time loop has its own kernels.
"""

from __future__ import annotations

import itertools
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.maps.grid import Grid
from driftwell.kernels.spline import SUPPORT, weight_polynomials

Floats = NDArray[np.float64]

_AT_ONCE = 4096
_POLYNOMIALS = np.array([[float(x) for x in row] for row in weight_polynomials()])


def spline_sums(
    grid: Grid, coefficients: Floats, points: Floats, derivatives: Sequence[tuple[int, ...]]
) -> Floats:
    """Derivatives of every spline of a map at some points.

    Parameters
    ----------
    grid : of d axes
    coefficients : (e, n0 + 4, n1 + 4, ...)
    points : (n, d), m
    derivatives : for each number wanted, how often to derive along each axis

    Returns
    -------
    (e, n, len(derivatives)) float64
    """
    out = np.empty((coefficients.shape[0], len(points), len(derivatives)))
    for start in range(0, len(points), _AT_ONCE):
        some = slice(start, start + _AT_ONCE)
        out[:, some] = _sums(grid, coefficients, points[some], derivatives)
    return out


def _sums(
    grid: Grid, coefficients: Floats, points: Floats, derivatives: Sequence[tuple[int, ...]]
) -> Floats:
    signs = []
    cells = []
    inside = []
    for axis in range(grid.axes):
        x = points[:, axis]
        signs.append(np.where(grid.mirrors[axis] & (x < 0.0), -1.0, 1.0))
        u = (x * signs[axis] - grid.origin[axis]) / grid.spacing[axis]
        cell = np.clip(np.floor(u), 0, grid.counts[axis] - 2).astype(np.int64)
        cells.append(cell[:, None] + np.arange(SUPPORT))
        inside.append(u - cell)
    letters = "abc"[: grid.axes]
    index: list[NDArray[np.int64]] = []
    for axis in range(grid.axes):
        shape = [len(points)] + [1] * grid.axes
        shape[axis + 1] = SUPPORT
        index.append(cells[axis].reshape(shape))
    near = coefficients[(slice(None), *index)]  # type: ignore[arg-type]
    terms = f"en{letters}," + ",".join(f"n{letter}" for letter in letters) + "->en"
    found = []
    for orders in derivatives:
        factors = [
            weights(inside[axis], order) * (signs[axis] / grid.spacing[axis])[:, None] ** order
            for axis, order in enumerate(orders)
        ]
        found.append(np.einsum(terms, near, *factors, optimize=True))
    return np.stack(found, axis=-1)


def weights(t: Floats, derivative: int) -> Floats:
    """Weights (n, 6) of the six coefficients of a cell at t, or of their derivative by t."""
    powers = np.arange(SUPPORT)
    factor = np.ones(SUPPORT)
    for k in range(derivative):
        factor *= np.maximum(powers - k, 0)
    raised = t[:, None] ** np.maximum(powers - derivative, 0) * factor
    return np.asarray(raised @ _POLYNOMIALS)


def first_derivatives(axes: int) -> list[tuple[int, ...]]:
    """The derivatives of a gradient."""
    return [tuple(int(a == axis) for a in range(axes)) for axis in range(axes)]


def second_derivatives(axes: int) -> list[tuple[int, ...]]:
    """All pairs of axes, those of equal ones first by rows: (0, 0), (0, 1), ... ."""
    return [
        tuple(int(a == first) + int(a == second) for a in range(axes))
        for first, second in itertools.product(range(axes), repeat=2)
    ]
