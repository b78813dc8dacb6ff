"""Multi-indices (i, j, k) of Cartesian expansions, and their harmonic part.

A derivative of a harmonic function with two or more turns in z follows from those with fewer,
d^2/dz^2 = -(d^2/dx^2 + d^2/dy^2): of all indices of total order n, (n + 1)(n + 2)/2, the 2 n + 1
with k < 2 suffice.
"""

from __future__ import annotations

import math

Index = tuple[int, int, int]


def cartesian(order: int) -> list[Index]:
    """All multi-indices up to a total order, lower orders first."""
    return [
        (i, j, total - i - j)
        for total in range(order + 1)
        for i in range(total, -1, -1)
        for j in range(total - i, -1, -1)
    ]


def harmonic(order: int) -> list[Index]:
    """Those with k < 2."""
    return [index for index in cartesian(order) if index[2] < 2]


def plus(a: Index, b: Index) -> Index:
    """Sum of two multi-indices."""
    return a[0] + b[0], a[1] + b[1], a[2] + b[2]


def minus(a: Index, b: Index) -> Index:
    """Difference of two multi-indices."""
    return a[0] - b[0], a[1] - b[1], a[2] - b[2]


def valid(index: Index) -> bool:
    """Whether no part is negative."""
    return min(index) >= 0


def unit(axis: int) -> Index:
    """One along an axis."""
    return int(axis == 0), int(axis == 1), int(axis == 2)


def traded(index: Index) -> tuple[Index, Index]:
    """The two indices that replace one with k >= 2: two turns in z for two in x, or in y."""
    return plus(index, (2, 0, -2)), plus(index, (0, 2, -2))


def factorial(index: Index) -> int:
    """i! j! k!."""
    return math.factorial(index[0]) * math.factorial(index[1]) * math.factorial(index[2])
