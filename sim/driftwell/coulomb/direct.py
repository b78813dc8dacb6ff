"""The direct sum of Coulomb's law: every pair, exactly, with the third law kept term by term.

The field at charge i (Q macro-charges, e the softening length):

    E_i = 1/(4 pi eps0) sum_{j != i} Q_j (x_i - x_j) / (|x_i - x_j|^2 + e^2)^(3/2)        (1)

Charges are taken in tiles of 64, each pair of tiles is visited once (`tile.py`). Columns of tiles
are dealt to a number of groups that depends on n alone, each group adds into its own buffer, and
the buffers are merged in order: the bits do not depend on the number of threads. All of it is
written in lanes, which the compiler does not reorder, so that they do not depend either on what was
compiled with what.

Up to 4 charges are summed pair by pair. Up to 24, both halves of a pair are computed, in lanes over
the charges that are pushed; x_i - x_j and its negative round alike, so the terms still cancel
exactly where charges are equal, and to rounding elsewhere. Up to 64 are one tile.

The mixed variant takes r^-3 of each pair to 3e-8, once for both its halves, and sums in double all
the same: its third law is as exact. Up to 64 charges are always summed in double.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), eq. 1.5. Constant: CODATA 2022.
S. J. Aarseth, Mon. Not. R. Astron. Soc. 126 (1963) 223 (softened force; from memory).
"""

from __future__ import annotations

import math

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.coulomb.eight_places import NEAREST2, field_at_eight
from driftwell.coulomb.pair_sum import SIGNATURE, PairSum
from driftwell.coulomb.potential import potential_at, potentials, threaded_potentials
from driftwell.coulomb.tile import BUFFER, TILE, add_across, add_within, fill_tile, take_tile
from driftwell.kernels import inner_kernel, kernel, threaded_kernel
from driftwell.kernels.cache_lines import room
from driftwell.kernels.lanes import ROUGH_SCALE, lanes, load, load_some, store_some
from driftwell.kernels.pointers import CompiledFunction

__all__ = [
    "BUFFER",
    "SMALL",
    "THREADED",
    "TILE",
    "PairSum",
    "direct_field",
    "direct_sum",
    "groups",
    "mixed_field",
    "potential_at",
    "potentials",
    "small_field",
    "threaded_direct_field",
    "threaded_mixed_field",
    "threaded_potentials",
    "workspace",
    "workspace_shape",
]

SMALL = 64
"""Up to this many charges the sum is made part of the time loop."""
THREADED = 512
"""From this many charges on threads pay for their start."""
_PAIRS = 4
"""Up to this many charges lanes do not pay."""
_FEW = 24
"""Up to this many charges a tile does not pay."""
_MERGED = 4096
"""From this many charges on the groups are merged on all threads."""
_PART = 512
"""Charges merged by one pass of a thread; a multiple of 8."""


def direct_sum(n: int, threads: int, mixed: bool = False) -> PairSum:
    """The direct sum for `n` charges on so many threads; `mixed`: each pair to 3e-8."""
    threaded = threads > 1 and n >= THREADED
    if mixed and n > SMALL:
        return CompiledFunction(threaded_mixed_field if threaded else mixed_field, SIGNATURE)
    return CompiledFunction(threaded_direct_field if threaded else direct_field, SIGNATURE)


def groups(n: int) -> int:
    """Number of separate buffers the columns of tiles are dealt to; a function of n alone."""
    if n < THREADED:
        return 1
    return 8 if n < 32 * TILE else 16 if n < 128 * TILE else 32


def workspace_shape(n: int) -> tuple[int, int]:
    """(groups, size): for each group a row of three sums, in whole vectors, and a tile."""
    return groups(n), 3 * (n + 7 & ~7) + BUFFER


def workspace(n: int) -> NDArray[np.float64]:
    """float64 of :func:`workspace_shape` that begin on a cache line; any contents will do."""
    return room(workspace_shape(n))


@kernel
def direct_field(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The field of all charges at each of them, eq. (1), on one thread.

    Parameters
    ----------
    position : (3, n) float64, m; below 1e-42 m apart the push is softened
    charge : (n,) float64, C, macro-charges; 0 takes a charge out of the sum
    softening2 : e^2, m^2
    constant : 1/(4 pi eps0), N m^2/C^2
    work : from :func:`workspace`, overwritten
    out_field : (3, n) float64, V/m, overwritten
    """
    if charge.size <= SMALL:
        small_field(position, charge, softening2, constant, work[0], out_field)
        return
    for g in range(work.shape[0]):
        _group(g, work.shape[0], position, charge, softening2, False, work[g])
    _merge(0, charge.size, constant, work, out_field)


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
    for g in prange(work.shape[0]):
        _group(g, work.shape[0], position, charge, softening2, False, work[g])
    n = charge.size
    if n < _MERGED:
        _merge(0, n, constant, work, out_field)
    else:
        for part in prange((n + _PART - 1) // _PART):
            _merge(_PART * part, min(_PART * part + _PART, n), constant, work, out_field)


@kernel
def mixed_field(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The sum (1) with r^-3 of each pair to 3e-8, on one thread; as :func:`direct_field`."""
    for g in range(work.shape[0]):
        _group(g, work.shape[0], position, charge, softening2, True, work[g])
    _merge(0, charge.size, constant * ROUGH_SCALE, work, out_field)


@threaded_kernel
def threaded_mixed_field(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The same sum as :func:`mixed_field`, with the same bits, on all of numba's threads."""
    for g in prange(work.shape[0]):
        _group(g, work.shape[0], position, charge, softening2, True, work[g])
    n, scale = charge.size, constant * ROUGH_SCALE
    if n < _MERGED:
        _merge(0, n, scale, work, out_field)
    else:
        for part in prange((n + _PART - 1) // _PART):
            _merge(_PART * part, min(_PART * part + _PART, n), scale, work, out_field)


@inner_kernel
def small_field(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    work_row: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The same sum for up to :data:`SMALL` charges, made part of the time loop.

    work_row : one row of :func:`workspace`, overwritten
    """
    n = charge.size
    if n <= _PAIRS:
        _pair_by_pair(position, charge, softening2, constant, out_field)
        return
    if n > _FEW:
        _group(0, 1, position, charge, softening2, False, work_row)
        for axis in range(3):
            for i in range(n):
                out_field[axis, i] = constant * work_row[axis * (n + 7 & ~7) + i]
        return
    for i in range(0, n, 8):
        x = load_some(position[0], i, n - i)
        y = load_some(position[1], i, n - i)
        z = load_some(position[2], i, n - i)
        ex, ey, ez = field_at_eight(x, y, z, position, charge, softening2)
        store_some(out_field[0], i, n - i, lanes(constant) * ex)
        store_some(out_field[1], i, n - i, lanes(constant) * ey)
        store_some(out_field[2], i, n - i, lanes(constant) * ez)


@inner_kernel
def _pair_by_pair(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    out_field: np.ndarray,
) -> None:
    """The same sum for so few charges that most lanes would stay empty."""
    x, y, z = position[0], position[1], position[2]
    ex, ey, ez = out_field[0], out_field[1], out_field[2]
    for i in range(charge.size):
        fx = 0.0 * x[i]  # a charge that is nowhere feels no number, even alone
        fy = 0.0 * y[i]
        fz = 0.0 * z[i]
        for j in range(i):
            dx, dy, dz = x[i] - x[j], y[i] - y[j], z[i] - z[j]
            r2 = dx * dx + dy * dy + dz * dz + softening2 + NEAREST2
            s = constant / (r2 * math.sqrt(r2))
            to_i, by_i = s * charge[j], s * charge[i]
            fx += to_i * dx
            fy += to_i * dy
            fz += to_i * dz
            ex[j] -= by_i * dx
            ey[j] -= by_i * dy
            ez[j] -= by_i * dz
        ex[i], ey[i], ez[i] = fx, fy, fz


@inner_kernel
def _group(
    g: int,
    group_count: int,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    rough: bool,
    work_row: np.ndarray,
) -> None:
    """Add the columns of tiles dealt to group `g` into its own sums."""
    n = charge.size
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
        fill_tile(position, charge, first, filled, tile)
        add_across(position, charge, first, softening2, rough, tile, work_row, stride)
        add_within(filled, softening2, rough, tile, work_row, stride, first)
        take_tile(tile, filled, work_row, stride, first)


@inner_kernel
def dealt(place: int, group_count: int) -> int:
    """The group of a column by its place from the longest down.

    Columns are dealt back and forth, and in turn to the first and the last groups, so that any
    run of neighbouring groups, which is what a thread gets, has its share of the work.
    """
    deal = place % group_count
    if (place // group_count) % 2 == 1:
        deal = group_count - 1 - deal
    return deal // 2 if deal % 2 == 0 else group_count - 1 - deal // 2


@inner_kernel
def _merge(first: int, last: int, constant: float, work: np.ndarray, out_field: np.ndarray) -> None:
    """Sum the groups in their order, for charges `first`, a multiple of 8, to ``last - 1``."""
    stride = out_field.shape[1] + 7 & ~7
    for axis in range(3):
        for i in range(first, last, 8):
            at = axis * stride + i
            result = load(work[0], at)
            for g in range(1, work.shape[0]):
                result = result + load(work[g], at)
            store_some(out_field[axis], i, last - i, lanes(constant) * result)
