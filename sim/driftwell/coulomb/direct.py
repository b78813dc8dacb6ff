"""The direct sum of Coulomb's law: every pair, exactly, with the third law kept term by term.

The field at charge i (Q macro-charges, e the softening length):

    E_i = 1/(4 pi eps0) sum_{j != i} Q_j (x_i - x_j) / (|x_i - x_j|^2 + e^2)^(3/2)        (1)
    U   = 1/(4 pi eps0) sum_{i < j} Q_i Q_j / (|x_i - x_j|^2 + e^2)^(1/2)                 (2)

Charges are taken in tiles of 64. A tile of sources stands in one small flat buffer, together with
the sums of its own field, so that the compiler sees constant distances and vectorises; each pair
of tiles is visited once and what i does to j is minus what j does to i, from the same r^-3.
Columns of tiles are dealt to a number of groups that depends on n alone, each group adds into its
own buffer, and the buffers are merged in order: the bits do not depend on the number of threads.
All of it is made part of the sum's own code: sums the compiler may reorder must not stand in code
of their own, which is compiled anew for each caller, and of which the linker takes the first that
was loaded.

Up to 64 charges both halves of a pair are computed, in lanes over the charges that are pushed;
x_i - x_j and its negative round alike, so the terms still cancel exactly where charges are equal,
and to rounding elsewhere.

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

from driftwell.kernels import (
    inner_kernel,
    inner_pair_kernel,
    outer_kernel,
    pair_kernel,
    threaded_pair_kernel,
)
from driftwell.kernels.compiled import CompiledFunction

TILE = 64
_T1, _T2, _T3, _T4, _T5, _T6 = TILE, 2 * TILE, 3 * TILE, 4 * TILE, 5 * TILE, 6 * TILE
BUFFER = 7 * TILE
"""float64 of one tile's buffer: x, y, z, Q, and the three sums of its field."""
SMALL = 64
"""Up to this many charges the sum needs no tiles."""
THREADED = 512
"""From this many charges on threads pay for their start."""
PairSum = CompiledFunction
"""What the time loop takes as the sum over pairs: (position, charge, softening2, constant, work,
out_field), as :func:`direct_field`. It is handed over as a pointer, so that the loop is compiled
once, whichever sum it is given."""
_FAR = 1e12


_SIGNATURE = "void(float64[:,::1], float64[::1], float64, float64, float64[:,::1], float64[:,::1])"


def direct_sum(n: int, threads: int) -> PairSum:
    """The direct sum for `n` charges on so many threads."""
    threaded = threads > 1 and n >= THREADED
    return CompiledFunction(threaded_direct_field if threaded else direct_field, _SIGNATURE)


def groups(n: int) -> int:
    """Number of separate buffers the columns of tiles are dealt to; a function of n alone."""
    if n < THREADED:
        return 1
    return 8 if n < 32 * TILE else 16 if n < 128 * TILE else 32


def workspace(n: int) -> NDArray[np.float64]:
    """(groups, 3 n + BUFFER) float64: one row of sums and one tile buffer for each group."""
    return np.empty((groups(n), 3 * n + BUFFER))


@pair_kernel
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
    position : (3, n) float64, m
    charge : (n,) float64, C, macro-charges; 0 takes a charge out of the sum
    softening2 : e^2, m^2
    constant : 1/(4 pi eps0), N m^2/C^2
    work : from :func:`workspace`, overwritten
    out_field : (3, n) float64, V/m, overwritten
    """
    n = charge.size
    if n <= SMALL:
        small_field(position, charge, softening2, constant, work[0], out_field)
        return
    for g in range(work.shape[0]):
        _group(g, work.shape[0], position, charge, softening2, work[g])
    _merge(n, constant, work, out_field)


@threaded_pair_kernel
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
        _group(g, work.shape[0], position, charge, softening2, work[g])
    _merge(charge.size, constant, work, out_field)


@inner_pair_kernel
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
    for axis in range(3):
        x = position[axis]
        for i in range(n):
            work_row[axis * TILE + i] = x[i]
    for i in range(n):
        work_row[_T3 + i] = 0.0
        work_row[_T4 + i] = 0.0
        work_row[_T5 + i] = 0.0
    for j in range(n):
        xj, yj, zj = work_row[j], work_row[_T1 + j], work_row[_T2 + j]
        pushes = constant * charge[j]
        for i in range(n):
            dx = work_row[i] - xj
            dy = work_row[_T1 + i] - yj
            dz = work_row[_T2 + i] - zj
            r2 = dx * dx + dy * dy + dz * dz + softening2
            r2 = r2 if r2 > 0.0 else 1.0  # the charge itself
            s = pushes / (r2 * math.sqrt(r2))
            work_row[_T3 + i] += s * dx
            work_row[_T4 + i] += s * dy
            work_row[_T5 + i] += s * dz
    for axis in range(3):
        e = out_field[axis]
        for i in range(n):
            e[i] = work_row[(3 + axis) * TILE + i]


@inner_pair_kernel
def _group(
    g: int,
    group_count: int,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    work_row: np.ndarray,
) -> None:
    """Add the columns of tiles dealt to group `g` into its own sums."""
    n = charge.size
    x, y, z = position[0], position[1], position[2]
    sum_x, sum_y, sum_z = work_row[:n], work_row[n : 2 * n], work_row[2 * n : 3 * n]
    tile = work_row[3 * n :]
    for i in range(3 * n):
        work_row[i] = 0.0
    columns = (n + TILE - 1) // TILE
    for c in range(columns):
        if _dealt(columns - 1 - c, group_count) != g:
            continue
        first = c * TILE
        filled = min(TILE, n - first)
        for k in range(filled):
            tile[k] = x[first + k]
            tile[_T1 + k] = y[first + k]
            tile[_T2 + k] = z[first + k]
            tile[_T3 + k] = charge[first + k]
        for k in range(filled, TILE):
            tile[k] = _FAR
            tile[_T1 + k] = tile[_T2 + k] = tile[_T3 + k] = 0.0
        for k in range(3 * TILE):
            tile[_T4 + k] = 0.0
        for i in range(first):
            fx, fy, fz = _across(x[i], y[i], z[i], charge[i], softening2, tile)
            sum_x[i] += fx
            sum_y[i] += fy
            sum_z[i] += fz
        for k in range(filled):
            i = first + k
            fx, fy, fz = _within(x[i], y[i], z[i], softening2, tile)
            sum_x[i] += fx
            sum_y[i] += fy
            sum_z[i] += fz
        for k in range(filled):
            sum_x[first + k] += tile[_T4 + k]
            sum_y[first + k] += tile[_T5 + k]
            sum_z[first + k] += tile[_T6 + k]


@inner_kernel
def _dealt(place: int, group_count: int) -> int:
    """The group of a column by its place from the longest down.

    Columns are dealt back and forth, and in turn to the first and the last groups, so that any
    run of neighbouring groups, which is what a thread gets, has its share of the work.
    """
    deal = place % group_count
    if (place // group_count) % 2 == 1:
        deal = group_count - 1 - deal
    return deal // 2 if deal % 2 == 0 else group_count - 1 - deal // 2


@inner_pair_kernel
def _across(
    xi: float, yi: float, zi: float, qi: float, softening2: float, tile: np.ndarray
) -> tuple[float, float, float]:
    """One charge against a tile, each pair once: its own sums are returned, the tile's added."""
    fx = fy = fz = 0.0
    for k in range(TILE):
        dx = xi - tile[k]
        dy = yi - tile[_T1 + k]
        dz = zi - tile[_T2 + k]
        r2 = dx * dx + dy * dy + dz * dz + softening2
        r2 = r2 if r2 > 0.0 else 1.0  # two charges at one place push nowhere
        s = 1.0 / (r2 * math.sqrt(r2))
        to_i = s * tile[_T3 + k]
        to_k = s * qi
        fx += to_i * dx
        fy += to_i * dy
        fz += to_i * dz
        tile[_T4 + k] -= to_k * dx
        tile[_T5 + k] -= to_k * dy
        tile[_T6 + k] -= to_k * dz
    return fx, fy, fz


@inner_pair_kernel
def _within(
    xi: float, yi: float, zi: float, softening2: float, tile: np.ndarray
) -> tuple[float, float, float]:
    """One charge against its own tile."""
    fx = fy = fz = 0.0
    for k in range(TILE):
        dx = xi - tile[k]
        dy = yi - tile[_T1 + k]
        dz = zi - tile[_T2 + k]
        r2 = dx * dx + dy * dy + dz * dz + softening2
        r2 = r2 if r2 > 0.0 else 1.0  # the charge itself
        s = tile[_T3 + k] / (r2 * math.sqrt(r2))
        fx += s * dx
        fy += s * dy
        fz += s * dz
    return fx, fy, fz


@outer_kernel
def _merge(n: int, constant: float, work: np.ndarray, out_field: np.ndarray) -> None:
    """Sum the groups in their order."""
    for axis in range(3):
        out = out_field[axis]
        row = work[0, axis * n : (axis + 1) * n]
        for i in range(n):
            out[i] = row[i]
        for g in range(1, work.shape[0]):
            row = work[g, axis * n : (axis + 1) * n]
            for i in range(n):
                out[i] += row[i]
        for i in range(n):
            out[i] *= constant


@inner_pair_kernel
def potential_at(
    i: int, position: np.ndarray, charge: np.ndarray, softening2: float, constant: float
) -> float:
    """Potential at charge `i` of all others, V; of one at its very place none, if unsoftened."""
    x, y, z = position[0], position[1], position[2]
    xi, yi, zi = x[i], y[i], z[i]
    total = 0.0
    for j in range(charge.size):
        dx = xi - x[j]
        dy = yi - y[j]
        dz = zi - z[j]
        r2 = dx * dx + dy * dy + dz * dz + softening2
        r2 = r2 if r2 != 0.0 else math.inf
        r2 = r2 if j != i else math.inf  # taken away afterwards, its own term would swamp far ones
        total += charge[j] / math.sqrt(r2)
    return constant * total


@pair_kernel
def potentials(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    out_potential: np.ndarray,
) -> None:
    """Potential at each charge of all others, V; the energy (2) is half the sum of Q times it."""
    for i in range(charge.size):
        out_potential[i] = potential_at(i, position, charge, softening2, constant)


@threaded_pair_kernel
def threaded_potentials(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    out_potential: np.ndarray,
) -> None:
    """The same as :func:`potentials`, with the same bits, on all of numba's threads."""
    for i in prange(charge.size):
        out_potential[i] = potential_at(i, position, charge, softening2, constant)


@outer_kernel
def unresolved_pair(
    position: np.ndarray,
    charge: np.ndarray,
    mass: np.ndarray,
    constant: float,
    limit: float,
) -> int:
    """Index of a charge that falls towards an opposite one faster than the step can follow, or -1.

    A pair's own rate is sqrt(|Q_i Q_j| / (4 pi eps0 mu r^3)); `limit` is the largest one allowed,
    squared, 1/s^2.
    """
    x, y, z = position[0], position[1], position[2]
    for i in range(charge.size):
        for j in range(i):
            if charge[i] * charge[j] < 0.0:
                dx = x[i] - x[j]
                dy = y[i] - y[j]
                dz = z[i] - z[j]
                r2 = dx * dx + dy * dy + dz * dz
                strength = -constant * charge[i] * charge[j] * (1.0 / mass[i] + 1.0 / mass[j])
                if strength > limit * r2 * math.sqrt(r2):
                    return i
    return -1
