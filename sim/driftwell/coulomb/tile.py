"""A tile: 64 charges in one flat buffer, against which others are summed, each pair once.

Eight rows (charges) pass the tile at a time, two of them together: what is loaded of the tile
serves both. A row's own sums stay in registers, lane by lane, the tile's sums in its buffer; the
lanes of eight rows are then added crosswise. What i does to j is minus what j does to i, from the
same r^-3.

Within the tile the rows meet the vectors that come after their own each pair once; in their own
vector both halves of a pair are computed: x_i - x_j and its negative round alike, so they cancel.

The buffer: x, y, z, Q, the three sums of the tile's field, and room for the lanes of eight rows.
"""

from __future__ import annotations

import numpy as np

from driftwell.coulomb.eight_places import NEAREST2
from driftwell.kernels import inner_kernel
from driftwell.kernels.lanes import (
    LanesType,
    fused,
    inverse_cube,
    lanes,
    load,
    load_one,
    scaled_rough_inverse_cube,
    store,
    totals,
)

TILE = 64
BUFFER = 7 * TILE + 3 * 64
"""float64 of one tile's buffer."""
_T1, _T2, _T3, _T4, _T5, _T6, _ROWS = (k * TILE for k in range(1, 8))
_FAR = 1e12
"""Where the charges of 0 stand that fill up a tile, m."""


@inner_kernel
def fill_tile(
    position: np.ndarray, charge: np.ndarray, first: int, filled: int, tile: np.ndarray
) -> None:
    """Put charges `first` to ``first + filled - 1`` into the tile; overwrites it."""
    for k in range(filled):
        tile[k] = position[0, first + k]
        tile[_T1 + k] = position[1, first + k]
        tile[_T2 + k] = position[2, first + k]
        tile[_T3 + k] = charge[first + k]
    for k in range(filled, TILE if first > 0 else filled + 7 & ~7):  # across, all of it is read
        tile[k] = _FAR
        tile[_T1 + k] = tile[_T2 + k] = tile[_T3 + k] = 0.0
    for k in range(3 * TILE):
        tile[_T4 + k] = 0.0


@inner_kernel
def add_across(
    position: np.ndarray,
    charge: np.ndarray,
    last: int,
    softening2: float,
    rough: bool,
    tile: np.ndarray,
    sums: np.ndarray,
    stride: int,
) -> None:
    """Charges before `last`, a multiple of 8, against the tile.

    Adds to the sums in the tile and to `sums`, three rows each of length `stride`.
    """
    x, y, z = position[0], position[1], position[2]
    soft = lanes(softening2 + NEAREST2)
    for i in range(0, last, 8):
        for row in range(0, 8, 2):
            _pass_two(x, y, z, charge, i + row, row, 0, TILE, False, soft, rough, tile)
        _add_rows(tile, sums, stride, i)


@inner_kernel
def add_within(
    filled: int,
    softening2: float,
    rough: bool,
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
            _pass_two(x, y, z, charge, i + row, row, i + 8, end, True, soft, rough, tile)
        _add_rows(tile, sums, stride, first + i)


@inner_kernel
def take_tile(tile: np.ndarray, filled: int, sums: np.ndarray, stride: int, first: int) -> None:
    """Subtract from the sums from `first` on what the tile's charges were found to do to others."""
    for k in range(0, filled, 8):
        for axis in range(3):
            at = axis * stride + first + k
            store(sums, at, load(sums, at) - load(tile, _T4 + axis * TILE + k))


@inner_kernel
def _inverse_cube(a: LanesType, rough: bool) -> LanesType:
    """a^(-3/2), or its rough multiple; `rough` is known where the code is made."""
    if rough:
        return scaled_rough_inverse_cube(a)
    return inverse_cube(a)


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
    rough: bool,
    tile: np.ndarray,
) -> None:
    """Charges i and i + 1 against the tile's, `first` to ``end - 1``; their lanes go to `row`."""
    j = i + 1
    xi, yi, zi, qi = load_one(x, i), load_one(y, i), load_one(z, i), load_one(charge, i)
    xj, yj, zj, qj = load_one(x, j), load_one(y, j), load_one(z, j), load_one(charge, j)
    fx = fy = fz = gx = gy = gz = lanes(0.0)
    if within:
        k = first - 8
        dx, dy, dz = xi - load(tile, k), yi - load(tile, _T1 + k), zi - load(tile, _T2 + k)
        ex, ey, ez = xj - load(tile, k), yj - load(tile, _T1 + k), zj - load(tile, _T2 + k)
        s = _inverse_cube(fused(dx, dx, fused(dy, dy, fused(dz, dz, soft))), rough)
        t = _inverse_cube(fused(ex, ex, fused(ey, ey, fused(ez, ez, soft))), rough)
        s, t = s * load(tile, _T3 + k), t * load(tile, _T3 + k)
        fx, fy, fz = s * dx, s * dy, s * dz
        gx, gy, gz = t * ex, t * ey, t * ez
    for k in range(first, end, 8):
        dx, dy, dz = xi - load(tile, k), yi - load(tile, _T1 + k), zi - load(tile, _T2 + k)
        ex, ey, ez = xj - load(tile, k), yj - load(tile, _T1 + k), zj - load(tile, _T2 + k)
        s = _inverse_cube(fused(dx, dx, fused(dy, dy, fused(dz, dz, soft))), rough)
        t = _inverse_cube(fused(ex, ex, fused(ey, ey, fused(ez, ez, soft))), rough)
        to_i, by_i = s * load(tile, _T3 + k), s * qi
        to_j, by_j = t * load(tile, _T3 + k), t * qj
        fx, fy, fz = fused(to_i, dx, fx), fused(to_i, dy, fy), fused(to_i, dz, fz)
        gx, gy, gz = fused(to_j, ex, gx), fused(to_j, ey, gy), fused(to_j, ez, gz)
        store(tile, _T4 + k, fused(by_j, ex, fused(by_i, dx, load(tile, _T4 + k))))
        store(tile, _T5 + k, fused(by_j, ey, fused(by_i, dy, load(tile, _T5 + k))))
        store(tile, _T6 + k, fused(by_j, ez, fused(by_i, dz, load(tile, _T6 + k))))
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
