"""The even grid of a map, and spline coefficients from values at its nodes.

A spline of degree 5 through n values has n + 4 coefficients along an axis, so 4 conditions are
free. At an end of the grid the two are that the fifth derivative does not jump at the first two
inner nodes (not-a-knot); at a mirrored end, that the coefficients mirror each other, which makes
the spline even. Coefficients of a tensor product are found axis by axis.

References
----------
C. de Boor, A Practical Guide to Splines (1978), ch. IV (not-a-knot) and XVII (tensor products)
(from memory).
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import solve_banded

from driftwell.kernels.spline import BELOW, DEGREE

Floats = NDArray[np.float64]

FEWEST = 6
"""Nodes along an axis, at least: as many as a polynomial of degree 5 needs."""
_BANDS = 6
_AT_NODES = np.array([1.0, 26.0, 66.0, 26.0, 1.0]) / 120.0
_SIXTH = np.array([(-1.0) ** k * math.comb(6, k) for k in range(7)])


@dataclass(frozen=True, slots=True)
class Grid:
    """Nodes of a map: ``origin + spacing * i``, 0 <= i < counts, for each of d axes.

    A mirrored axis begins at 0 and holds the positive half.
    """

    origin: tuple[float, ...]
    spacing: tuple[float, ...]
    counts: tuple[int, ...]
    mirrors: tuple[bool, ...]

    def __post_init__(self) -> None:
        if any(n < FEWEST for n in self.counts):
            raise ValueError(f"a map needs at least {FEWEST} nodes along each axis")
        if any(m and low != 0.0 for m, low in zip(self.mirrors, self.origin, strict=True)):
            raise ValueError("a mirrored axis of a map begins at 0")

    @property
    def axes(self) -> int:
        return len(self.counts)

    @property
    def size(self) -> int:
        """Number of nodes."""
        return math.prod(self.counts)

    @property
    def coefficient_counts(self) -> tuple[int, ...]:
        """Spline coefficients along each axis."""
        return tuple(n + DEGREE - 1 for n in self.counts)

    def axis(self, which: int) -> Floats:
        """Coordinates of the nodes along an axis."""
        steps = np.arange(self.counts[which], dtype=np.float64)
        return self.origin[which] + self.spacing[which] * steps

    def nodes(self) -> Floats:
        """(n, d), the last axis fastest."""
        mesh = np.meshgrid(*(self.axis(a) for a in range(self.axes)), indexing="ij")
        return np.stack([part.ravel() for part in mesh], axis=1)

    def region(self) -> tuple[tuple[float, float], ...]:
        """From and to along each axis, with the mirrored half."""
        return tuple(
            (-high if mirrored else low, high)
            for low, high, mirrored in (
                (self.origin[a], float(self.axis(a)[-1]), self.mirrors[a]) for a in range(self.axes)
            )
        )

    def parameters(self) -> tuple[float, ...]:
        """Origin, 1/spacing, cells and mirrors as the kernels take them, three of each."""
        missing = (0.0,) * (3 - self.axes)
        return (
            *(*self.origin, *missing),
            *(*(1.0 / h for h in self.spacing), *missing),
            *(*(float(n - 1) for n in self.counts), *missing),
            *(*(float(m) for m in self.mirrors), *missing),
        )


def grid_over(
    region: tuple[tuple[float, float], ...], counts: tuple[int, ...], mirrors: tuple[bool, ...]
) -> Grid:
    """The grid with nodes on the borders of a region; of a mirrored axis, on its positive half."""
    low = tuple(0.0 if m else ends[0] for ends, m in zip(region, mirrors, strict=True))
    spacing = tuple(
        (ends[1] - first) / (n - 1) for ends, first, n in zip(region, low, counts, strict=True)
    )
    return Grid(low, spacing, counts, mirrors)


def spline_coefficients(values: Floats, mirrors: tuple[bool, ...]) -> Floats:
    """Coefficients (e, n0 + 4, n1 + 4, ...) of the splines through values (e, n0, n1, ...)."""
    found = np.asarray(values, dtype=np.float64)
    for axis, mirrored in enumerate(mirrors, start=1):
        lines = np.moveaxis(found, axis, 0)
        solved = axis_coefficients(lines.reshape(lines.shape[0], -1), mirrored)
        found = np.moveaxis(solved.reshape(-1, *lines.shape[1:]), 0, axis)
    return np.ascontiguousarray(found)


def axis_coefficients(values: Floats, mirrored: bool) -> Floats:
    """Coefficients (n + 4, m) of the m splines through the columns of values (n, m)."""
    count = values.shape[0]
    size = count + DEGREE - 1
    bands = np.zeros((2 * _BANDS + 1, size))

    def put(row: int, column: int, numbers: Floats) -> None:
        for k, number in enumerate(numbers):
            bands[_BANDS + row - (column + k), column + k] = number

    for k, number in enumerate(_AT_NODES):  # row j + 2 holds node j: coefficients j to j + 4
        bands[_BANDS + BELOW - k, k : k + count] = number
    if mirrored:
        put(0, 0, np.array([1.0, 0.0, 0.0, 0.0, -1.0]))
        put(1, 1, np.array([1.0, 0.0, -1.0]))
    else:
        put(0, 0, _SIXTH)
        put(1, min(1, size - 7), _SIXTH)
    put(size - 2, max(size - 8, 2), _SIXTH)
    put(size - 1, size - 7, _SIXTH)
    right = np.zeros((size, values.shape[1]))
    right[BELOW : BELOW + count] = values
    found = solve_banded((_BANDS, _BANDS), bands, right, overwrite_b=True, check_finite=False)
    if mirrored:  # exactly, so that slopes at 0 are 0
        found[0], found[1] = found[4], found[3]
    return np.asarray(found)
