"""Quintic splines on an even grid: value and slopes of tensor products of B-splines.

    s(u) = sum_i c_i B(u - i + 2),    u = (x - origin) / spacing

B is the B-spline of degree 5 on whole numbers, which is not 0 on six cells; its fourth derivative
is continuous. In the cell i <= u < i + 1 six coefficients count, c_i to c_{i+5}, with weights that
are polynomials of t = u - i. Here they stand in lanes: one vector holds all six, and one load takes
the six neighbours in memory; the two lanes left over have weight 0, so an array of coefficients
must go on for :data:`SPARE` finite numbers.

Outside of the grid the polynomial of the nearest cell goes on.

References
----------
C. de Boor, A Practical Guide to Splines (1978), ch. IX and X (from memory).
I. J. Schoenberg, Quart. Appl. Math. 4 (1946) 45, eq. 4.1 for B by truncated powers (from memory).
"""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np

from driftwell.kernels.compiled import inner_kernel
from driftwell.kernels.lanes import LanesType, fused, lanes, load, repeated_lane, total

DEGREE = 5
SUPPORT = DEGREE + 1
"""Coefficients that count in one cell."""
BELOW = 2
"""How many coefficients come before that of the first node; as many come after the last."""
SPARE = 2
"""Numbers that must follow the last coefficient."""


def weight_polynomials() -> list[list[Fraction]]:
    """The coefficient of t^m in the weight of the k-th of six coefficients, as [m][k]."""
    table = [[Fraction(0)] * SUPPORT for _ in range(SUPPORT)]
    for k in range(SUPPORT):
        for j in range(SUPPORT - k):
            # B(x) = sum_j (-1)^j C(6, j) (x + 3 - j)_+^5 / 5!, at x = t + 2 - k
            part = Fraction((-1) ** j * math.comb(SUPPORT, j), math.factorial(DEGREE))
            for m in range(SUPPORT):
                table[m][k] += (
                    part * math.comb(DEGREE, m) * Fraction(DEGREE - k - j) ** (DEGREE - m)
                )
    return table


def _in_lanes(derivative: int) -> np.ndarray:
    """Factors of the powers of t in the weights' derivative, highest first, a vector each."""
    rows = []
    for m in range(DEGREE, derivative - 1, -1):
        factor = math.perm(m, derivative)
        rows.append([float(factor * value) for value in weight_polynomials()[m]] + [0.0, 0.0])
    return np.array(rows).ravel()


VALUE_WEIGHTS = _in_lanes(0)
SLOPE_WEIGHTS = _in_lanes(1)


@inner_kernel
def value_weights(t: float) -> LanesType:
    """Weights of the value at t of a cell, in six lanes."""
    x = lanes(t)
    w = fused(load(VALUE_WEIGHTS, 0), x, load(VALUE_WEIGHTS, 8))
    w = fused(w, x, load(VALUE_WEIGHTS, 16))
    w = fused(w, x, load(VALUE_WEIGHTS, 24))
    w = fused(w, x, load(VALUE_WEIGHTS, 32))
    return fused(w, x, load(VALUE_WEIGHTS, 40))


@inner_kernel
def slope_weights(t: float) -> LanesType:
    """Weights of the derivative by t, in six lanes."""
    x = lanes(t)
    w = fused(load(SLOPE_WEIGHTS, 0), x, load(SLOPE_WEIGHTS, 8))
    w = fused(w, x, load(SLOPE_WEIGHTS, 16))
    w = fused(w, x, load(SLOPE_WEIGHTS, 24))
    return fused(w, x, load(SLOPE_WEIGHTS, 32))


@inner_kernel
def cell_of(u: float, cells: float) -> int:
    """The cell of a grid coordinate, the first or last where it lies outside or is no number."""
    if not u > 0.0:
        return 0
    if u >= cells - 1.0:
        return int(cells) - 1
    return int(u)


@inner_kernel
def row_sum(data: np.ndarray, first: int, stride: int, weights: LanesType) -> LanesType:
    """Six rows of neighbours, `stride` apart, weighted and added."""
    a = repeated_lane(weights, 0) * load(data, first)
    a = fused(repeated_lane(weights, 1), load(data, first + stride), a)
    a = fused(repeated_lane(weights, 2), load(data, first + 2 * stride), a)
    a = fused(repeated_lane(weights, 3), load(data, first + 3 * stride), a)
    a = fused(repeated_lane(weights, 4), load(data, first + 4 * stride), a)
    return fused(repeated_lane(weights, 5), load(data, first + 5 * stride), a)


@inner_kernel
def spline_2d(
    data: np.ndarray, first: int, stride: int, s: float, t: float
) -> tuple[float, float, float]:
    """Value and both slopes at (s, t) of the cell whose coefficients begin at `first`."""
    across, along = value_weights(s), value_weights(t)
    a = row_sum(data, first, stride, across)
    b = row_sum(data, first, stride, slope_weights(s))
    return total(a * along), total(b * along), total(a * slope_weights(t))


@inner_kernel
def spline_3d(
    data: np.ndarray, first: int, slab: int, stride: int, q: float, s: float, t: float
) -> tuple[float, float, float, float]:
    """Value and three slopes at (q, s, t) of the cell whose coefficients begin at `first`."""
    outer, outer_slope = value_weights(q), slope_weights(q)
    across, across_slope = value_weights(s), slope_weights(s)
    along = value_weights(t)
    a = b = c = lanes(0.0)
    for k in range(SUPPORT):
        row = first + k * slab
        plain = row_sum(data, row, stride, across)
        sloped = row_sum(data, row, stride, across_slope)
        w = repeated_lane(outer, k)
        a = fused(w, plain, a)
        b = fused(repeated_lane(outer_slope, k), plain, b)
        c = fused(w, sloped, c)
    return total(a * along), total(b * along), total(c * along), total(a * slope_weights(t))
