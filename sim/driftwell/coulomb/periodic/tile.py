"""A tile of charges against others and their near images, each pair once; see coulomb/tile.py.

Of a pair all images within m periods are summed before they are multiplied with the charges:

    s = sum_{|k|<=m} r_k^-3,    t = sum_{|k|<=m} (z - k L) r_k^-3                           (1)

so that an image costs its r^-3 and little more. The axis is the last coordinate here. What i does
to j is minus what j does to i, from the same s and t; an own image and its opposite cancel.
"""

from __future__ import annotations

import numpy as np

from driftwell.coulomb.eight_places import NEAREST2
from driftwell.coulomb.tile import BUFFER, TILE
from driftwell.kernels import inner_kernel
from driftwell.kernels.lanes import (
    LanesType,
    fused,
    inverse_cube,
    lanes,
    load,
    load_one,
    store,
    totals,
)

__all__ = ["BUFFER", "TILE", "add_across", "add_within", "fill_tile"]

_T1, _T2, _T3, _T4, _T5, _T6, _ROWS = (k * TILE for k in range(1, 8))
_FAR = 1e12
"""Where the charges of 0 stand that fill up a tile, m."""


@inner_kernel
def fill_tile(
    x: np.ndarray,
    y: np.ndarray,
    z: np.ndarray,
    charge: np.ndarray,
    first: int,
    filled: int,
    tile: np.ndarray,
) -> None:
    """Put charges `first` to ``first + filled - 1`` into the tile; overwrites it."""
    for k in range(filled):
        tile[k] = x[first + k]
        tile[_T1 + k] = y[first + k]
        tile[_T2 + k] = z[first + k]
        tile[_T3 + k] = charge[first + k]
    for k in range(filled, TILE if first > 0 else filled + 7 & ~7):  # across, all of it is read
        tile[k] = _FAR
        tile[_T1 + k] = tile[_T2 + k] = tile[_T3 + k] = 0.0
    for k in range(3 * TILE):
        tile[_T4 + k] = 0.0


@inner_kernel
def add_across(
    x: np.ndarray,
    y: np.ndarray,
    z: np.ndarray,
    charge: np.ndarray,
    last: int,
    softening2: float,
    period: float,
    images: int,
    tile: np.ndarray,
    sums: np.ndarray,
    stride: int,
) -> None:
    """Charges before `last`, a multiple of 8, against the tile and its images.

    Adds to the sums in the tile and to `sums`, three rows each of length `stride`.
    """
    soft = lanes(softening2 + NEAREST2)
    for i in range(0, last, 8):
        for row in range(0, 8, 2):
            _pass_two(x, y, z, charge, i + row, row, 0, TILE, False, soft, period, images, tile)
        _add_rows(tile, sums, stride, i)


@inner_kernel
def add_within(
    filled: int,
    softening2: float,
    period: float,
    images: int,
    tile: np.ndarray,
    sums: np.ndarray,
    stride: int,
    first: int,
) -> None:
    """The tile's charges against each other; adds to the sums in the tile and from `first` on."""
    x, y, z, charge = tile, tile[_T1:], tile[_T2:], tile[_T3:]
    end = filled + 7 & ~7
    soft = lanes(softening2 + NEAREST2)
    for i in range(0, filled, 8):
        for row in range(0, 8, 2):
            _pass_two(x, y, z, charge, i + row, row, i + 8, end, True, soft, period, images, tile)
        _add_rows(tile, sums, stride, first + i)


@inner_kernel
def pushes(
    square: LanesType, z: LanesType, period: float, images: int
) -> tuple[LanesType, LanesType]:
    """s and t of eq. (1); square : squared distance across the axis, softened."""
    s = inverse_cube(fused(z, z, square))
    t = s * z
    for k in range(1, images + 1):
        up, down = z - lanes(k * period), z + lanes(k * period)
        a = inverse_cube(fused(up, up, square))
        b = inverse_cube(fused(down, down, square))
        s = s + (a + b)
        t = fused(a, up, fused(b, down, t))
    return s, t


@inner_kernel
def _pass_two(
    x: np.ndarray,
    y: np.ndarray,
    z: np.ndarray,
    charge: np.ndarray,
    i: int,
    row: int,
    first: int,
    end: int,
    within: bool,
    soft: LanesType,
    period: float,
    images: int,
    tile: np.ndarray,
) -> None:
    """Charges i and i + 1 against the tile's, `first` to ``end - 1``; their lanes go to `row`."""
    j = i + 1
    xi, yi, zi, qi = load_one(x, i), load_one(y, i), load_one(z, i), load_one(charge, i)
    xj, yj, zj, qj = load_one(x, j), load_one(y, j), load_one(z, j), load_one(charge, j)
    fx = fy = fz = gx = gy = gz = lanes(0.0)
    if within:
        k = first - 8
        q = load(tile, _T3 + k)
        dx, dy, dz = xi - load(tile, k), yi - load(tile, _T1 + k), zi - load(tile, _T2 + k)
        s, t = pushes(fused(dx, dx, fused(dy, dy, soft)), dz, period, images)
        s = s * q
        fx, fy, fz = s * dx, s * dy, t * q
        dx, dy, dz = xj - load(tile, k), yj - load(tile, _T1 + k), zj - load(tile, _T2 + k)
        s, t = pushes(fused(dx, dx, fused(dy, dy, soft)), dz, period, images)
        s = s * q
        gx, gy, gz = s * dx, s * dy, t * q
    for k in range(first, end, 8):
        dx, dy, dz = xi - load(tile, k), yi - load(tile, _T1 + k), zi - load(tile, _T2 + k)
        ex, ey, ez = xj - load(tile, k), yj - load(tile, _T1 + k), zj - load(tile, _T2 + k)
        s, t = pushes(fused(dx, dx, fused(dy, dy, soft)), dz, period, images)
        v, w = pushes(fused(ex, ex, fused(ey, ey, soft)), ez, period, images)
        q = load(tile, _T3 + k)
        to_i, by_i = s * q, s * qi
        to_j, by_j = v * q, v * qj
        fx, fy, fz = fused(to_i, dx, fx), fused(to_i, dy, fy), fused(t, q, fz)
        gx, gy, gz = fused(to_j, ex, gx), fused(to_j, ey, gy), fused(w, q, gz)
        store(tile, _T4 + k, fused(by_j, ex, fused(by_i, dx, load(tile, _T4 + k))))
        store(tile, _T5 + k, fused(by_j, ey, fused(by_i, dy, load(tile, _T5 + k))))
        store(tile, _T6 + k, fused(w, qj, fused(t, qi, load(tile, _T6 + k))))
    at = _ROWS + 8 * row
    store(tile, at, fx)
    store(tile, at + 8, gx)
    store(tile, at + 64, fy)
    store(tile, at + 72, gy)
    store(tile, at + 128, fz)
    store(tile, at + 136, gz)


@inner_kernel
def _add_rows(tile: np.ndarray, sums: np.ndarray, stride: int, i: int) -> None:
    """Add the lanes of eight rows to the sums of charges i to i + 7."""
    for axis in range(3):
        at = axis * stride + i
        store(sums, at, load(sums, at) + totals(tile, _ROWS + 64 * axis))
