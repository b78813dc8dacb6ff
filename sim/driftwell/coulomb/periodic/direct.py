"""The direct sum in a periodic cell: every pair with its near images, and the far ones by moments.

    E_i = 1/(4 pi eps0) sum_j Q_j sum_k (d - k L e) / (|d - k L e|^2 + e^2)^(3/2)           (1)

d = x_i - x_j, over all whole k. Images within m periods are summed pair by pair (tile.py), the
others, unsoftened, by a polynomial (far.py). m and its degree follow from the extent of the
charges, so that no pair's force errs by more than 1e-11 of that between two neighbouring images of
one charge. Sums and groups are ordered as in coulomb/direct.py: the same bits on any number of
threads.

Where the last argument has four rows the fourth is the potential of all others and their images,

    phi_i = 1/(4 pi eps0) sum_{j != i} Q_j [1/|d| + sum_{k != 0} (1/|d - k L e| - 1/(|k| L))]  (2)

A charge's own images, of constant energy, are left out; where the net charge is 0 and nothing is
softened, (2) is the potential as such.
"""

from __future__ import annotations

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.coulomb.cell import Cell
from driftwell.coulomb.direct import THREADED, dealt, groups
from driftwell.coulomb.pair_sum import SIGNATURE, PairSum
from driftwell.coulomb.periodic.far import (
    AXIS,
    GROUPS,
    IMAGES,
    LENGTH,
    far_field,
    far_potential,
    far_size,
    finish_far,
    prepare_far,
    settle_far,
    signed,
    sum_moments,
)
from driftwell.coulomb.periodic.potential import near_potential
from driftwell.coulomb.periodic.tile import BUFFER, TILE, add_across, add_within, fill_tile
from driftwell.coulomb.tile import take_tile
from driftwell.kernels import inner_kernel, kernel, threaded_kernel
from driftwell.kernels.cache_lines import room
from driftwell.kernels.lanes import lanes, load, load_some, store_some
from driftwell.kernels.pointers import CompiledFunction

EXACT = 1e-11
"""Largest error of a pair's force, in units of that between two neighbouring images of a charge."""
HIGHEST, MOST_IMAGES = 64, 64
"""Limits of the degree and of the near images: room for a beam 60 times as wide as the cell."""
_PART = 512
"""Charges of one pass of a thread; a multiple of 8."""


def periodic_direct_sum(n: int, threads: int) -> PairSum:
    """The direct sum for `n` charges on so many threads."""
    threaded = threads > 1 and n >= THREADED
    return CompiledFunction(threaded_direct_field if threaded else direct_field, SIGNATURE)


def periodic_workspace(n: int, cell: Cell) -> NDArray[np.float64]:
    """(1, size) float64 that begins on a cache line: the far images, then a row for each group."""
    work = room((1, periodic_size(n)))
    prepare_far(work[0], groups(n), cell.number, cell.length, EXACT, HIGHEST, MOST_IMAGES)
    return work


def periodic_size(n: int) -> int:
    """float64 of the work space for `n` charges."""
    return far_size(groups(n)) + groups(n) * (3 * (n + 7 & ~7) + BUFFER)


@kernel
def direct_field(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The field of all charges and their images at each charge, eq. (1), on one thread.

    position : (3, n) m; charge : (n,) C; softening2 : m^2; constant : N m^2/C^2
    work : of :func:`periodic_workspace`; out_field : (3, n) V/m, or (4, n) with eq. (2), V;
    overwritten
    """
    n, row = charge.size, 3 * (charge.size + 7 & ~7) + BUFFER
    count = int(work[0, GROUPS])
    far, rows = work[0], work[0, work.shape[1] - count * row :]
    settle_far(position, far)
    for g in range(count):
        sum_moments(g, count, position, charge, far)
    finish_far(count, charge, far)
    for g in range(count):
        _group(g, count, position, charge, softening2, far, rows[g * row : (g + 1) * row])
    for part in range((n + _PART - 1) // _PART):
        _merge(part, count, row, position, charge, softening2, constant, far, rows, out_field)


@threaded_kernel
def threaded_direct_field(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The same sum as :func:`direct_field`, with the same bits, on all of numba's threads."""
    n, row = charge.size, 3 * (charge.size + 7 & ~7) + BUFFER
    count = int(work[0, GROUPS])
    far, rows = work[0], work[0, work.shape[1] - count * row :]
    settle_far(position, far)
    for g in prange(count):
        sum_moments(signed(g), count, position, charge, far)
    finish_far(count, charge, far)
    for g in prange(count):
        k = signed(g)
        _group(k, count, position, charge, softening2, far, rows[k * row : (k + 1) * row])
    for part in prange((n + _PART - 1) // _PART):
        _merge(
            signed(part),
            count,
            row,
            position,
            charge,
            softening2,
            constant,
            far,
            rows,
            out_field,
        )


@inner_kernel
def _group(
    g: int,
    group_count: int,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    far: np.ndarray,
    work_row: np.ndarray,
) -> None:
    """Add the columns of tiles dealt to group `g` into its own sums, the axis last."""
    n = charge.size
    axis, period, images = int(far[AXIS]), far[LENGTH], int(far[IMAGES])
    x, y, z = position[(axis + 1) % 3], position[(axis + 2) % 3], position[axis]
    stride = n + 7 & ~7
    tile = work_row[3 * stride :]
    for i in range(3 * stride):
        work_row[i] = 0.0
    columns = (n + TILE - 1) // TILE
    for c in range(columns):
        if dealt(columns - 1 - c, group_count) != g:
            continue
        first = c * TILE
        filled = min(TILE, n - first)
        fill_tile(x, y, z, charge, first, filled, tile)
        add_across(x, y, z, charge, first, softening2, period, images, tile, work_row, stride)
        add_within(filled, softening2, period, images, tile, work_row, stride, first)
        take_tile(tile, filled, work_row, stride, first)


@inner_kernel
def _merge(
    part: int,
    count: int,
    row: int,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    far: np.ndarray,
    rows: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """Sum the groups in their order, and add the far images, for one part of the charges."""
    n = charge.size
    axis, stride = int(far[AXIS]), n + 7 & ~7
    a, b = (axis + 1) % 3, (axis + 2) % 3
    scale = lanes(constant)
    for i in range(_PART * part, min(_PART * part + _PART, n), 8):
        left = n - i
        x, y = load_some(position[a], i, left), load_some(position[b], i, left)
        z = load_some(position[axis], i, left)
        ex, ey, ez = far_field(x, y, z, far)
        for g in range(count):
            ex = ex + load(rows, g * row + i)
            ey = ey + load(rows, g * row + stride + i)
            ez = ez + load(rows, g * row + 2 * stride + i)
        store_some(out_field[a], i, left, scale * ex)
        store_some(out_field[b], i, left, scale * ey)
        store_some(out_field[axis], i, left, scale * ez)
        if out_field.shape[0] == 4:
            level = near_potential(x, y, z, i, position, charge, softening2, far)
            level = level + far_potential(x, y, z, far)
            store_some(out_field[3], i, left, scale * level)
