"""The equations for the densities of many panels, solved one way or the other.

Few unknowns: the whole matrix, and its factors. Many: the generalised method of minimal residuals
(GMRES), where a product with the matrix is the tree sum of the panels' points, and for panels near
each other what their closed form differs by, kept as a sparse matrix.

Each unknown is scaled with the area, so that small panels count as little as they carry. What
makes GMRES quick is an approximate inverse: panels in blocks of 64, for each the inverse of its
equations together with those of the 64 panels it feels most (restricted Schwarz).

References
----------
Y. Saad and M. H. Schultz, SIAM J. Sci. Stat. Comput. 7 (1986) 856 (GMRES).
X.-C. Cai and M. Sarkis, SIAM J. Sci. Comput. 21 (1999) 792 (restricted Schwarz; from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import scipy.linalg
import scipy.sparse
import scipy.sparse.linalg
from numpy.typing import NDArray

from driftwell.boundary.mirror_orbits import Orbits
from driftwell.boundary.panel_bounds import bounds_of, count_near, list_near
from driftwell.boundary.panel_matrix import (
    POINTS,
    fill_blocks,
    fill_entries,
    fill_matrix,
    panel_points,
)
from driftwell.boundary.point_sum import PointSum
from driftwell.errors import DriftwellError
from driftwell.kernels.threads import on_threads

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

DENSE = 5000
"""Unknowns up to which the whole matrix is formed."""
NEAR = 3.0
"""Distance, in longest sides of a panel, within which its closed form is taken."""
_OWN = 0.7
"""Farthest point of a panel from its middle, in longest sides, and a little more."""
_BLOCK, _BESIDE = 64, 64
_RESIDUAL = 1e-7
"""Of the potentials wanted, where the iteration ends."""
_ENOUGH = 1e-5
"""What it may end with where the tree's sums are no better: with charges beside a large surface,
whose potentials there are far larger than what is left of them."""
_MOST_ITERATIONS = 200


@dataclass(frozen=True, slots=True)
class Solved:
    """Densities (groups, e), without 4 pi eps0; and how many iterations each took, 0 if none."""

    density: Floats
    iterations: tuple[int, ...]


def solved(
    rows: Floats, orbits: Orbits, wanted: Floats, threads: int, dense: int = DENSE
) -> Solved:
    """Densities for which the groups have the potentials `wanted` (groups, e)."""
    if len(orbits.first) <= dense:
        return _by_factors(rows, orbits, wanted, threads)
    return _by_iteration(rows, orbits, wanted, threads)


def _by_factors(rows: Floats, orbits: Orbits, wanted: Floats, threads: int) -> Solved:
    count = len(orbits.first)
    matrix = np.empty((count, count))
    with on_threads(threads):
        fill_matrix(rows, panel_points(rows[orbits.first]), orbits.group, matrix)
    density = scipy.linalg.solve(matrix, wanted, overwrite_a=True, check_finite=False)
    return Solved(np.asarray(density).reshape(wanted.shape), (0,) * wanted.shape[1])


def _by_iteration(rows: Floats, orbits: Orbits, wanted: Floats, threads: int) -> Solved:
    product = Product(rows, orbits, threads)
    count = len(orbits.first)
    # rows are weighed by the root of the area, columns are charges over it
    weight = np.sqrt(rows[orbits.first, 21])
    inverse = NearInverse(rows, orbits, product, threads)

    def times(scaled: Floats) -> Floats:
        return np.asarray(weight * product(scaled / weight))

    def nearly_inverse(scaled: Floats) -> Floats:
        return np.asarray(weight * inverse(scaled / weight))

    shape = (count, count)
    matrix: Any = scipy.sparse.linalg.LinearOperator(shape, matvec=times, dtype=np.float64)
    nearly: Any = scipy.sparse.linalg.LinearOperator(shape, matvec=nearly_inverse, dtype=np.float64)
    density = np.empty_like(wanted)
    iterations = []
    for e in range(wanted.shape[1]):
        steps: list[float] = []
        asked = weight * wanted[:, e]
        found, fault = scipy.sparse.linalg.gmres(
            matrix,
            asked,
            M=nearly,
            rtol=_RESIDUAL,
            restart=_MOST_ITERATIONS,
            maxiter=2,
            callback=steps.append,
            callback_type="pr_norm",
        )
        if fault != 0 and not (left := _left_over(times(found), asked)) <= _ENOUGH:
            raise NotFoundError(e, len(steps), left)
        density[:, e] = found / weight
        iterations.append(len(steps))
    return Solved(density, tuple(iterations))


class NotFoundError(DriftwellError):
    """The charges of the electrode number `electrode` could not be found.

    iterations : that were made; left : part of the potentials wanted that they still miss
    """

    def __init__(self, electrode: int, iterations: int, left: float) -> None:
        self.electrode, self.iterations, self.left = electrode, iterations, left
        super().__init__(
            f"the charges for 1 V on electrode {electrode + 1} were not found: after {iterations} "
            f"iterations the potentials of the surfaces still miss {left:.1g} of what is wanted; "
            f"needs {_ENOUGH:g}"
        )


def _left_over(found: Floats, asked: Floats) -> float:
    """Part of the potentials asked for (groups,) that those found lack."""
    return float(np.linalg.norm(asked - found) / np.linalg.norm(asked))


class Product:
    """The matrix of all groups, as what it makes of densities.

    exact : sparse, entries of panels near each other; missing : what their points' sums lack
    """

    exact: Any
    missing: Any

    def __init__(self, rows: Floats, orbits: Orbits, threads: int) -> None:
        first, group = orbits.first, orbits.group
        every_point = panel_points(rows)
        self._own = (first[:, None] * POINTS + np.arange(POINTS)).reshape(-1)
        self._group, self._share = group, rows[:, 21] / POINTS
        self._sum = PointSum(every_point.reshape(-1, 3), threads)
        middle = np.ascontiguousarray(rows[:, 23:26])
        bounds = bounds_of(middle, NEAR * rows[:, 22])
        own = np.ascontiguousarray(middle[first])
        reach = _OWN * rows[first, 22]
        counts = np.zeros(len(first), dtype=np.int64)
        with on_threads(threads):
            count_near(own, reach, bounds, counts)
            starts = np.concatenate([[0], np.cumsum(counts)])
            which = np.empty(starts[-1], dtype=np.int64)
            list_near(own, reach, bounds, starts, which)
            exact, missing = np.empty(len(which)), np.empty(len(which))
            fill_entries(
                rows,
                np.ascontiguousarray(every_point[first]),
                every_point,
                starts,
                which,
                exact,
                missing,
            )
        shape = (len(first), len(first))
        columns = group[which].astype(np.int32)
        self.exact = scipy.sparse.csr_array((exact, columns, starts), shape=shape)
        self.missing = scipy.sparse.csr_array((missing, columns, starts), shape=shape)

    def __call__(self, density: Floats) -> Floats:
        """Potentials (groups,) for densities (groups,)."""
        charge = np.repeat(density[self._group] * self._share, POINTS)
        potential = self._sum(charge)[3, self._own].reshape(-1, POINTS).mean(axis=1)
        return np.asarray(potential + self.missing @ density)


class NearInverse:
    """An approximate inverse: exact for blocks of groups together with what they feel most."""

    def __init__(self, rows: Floats, orbits: Orbits, product: Product, threads: int) -> None:
        first = orbits.first
        blocks = _halves(rows[first, 23:26])
        diagonal = product.exact.diagonal()
        indices = np.full((len(blocks), _BLOCK + _BESIDE), -1, dtype=np.int64)
        for k, own in enumerate(blocks):
            near = product.exact[own]
            strength = np.zeros(len(first))
            np.maximum.at(strength, near.indices, np.abs(near.data) / diagonal[near.indices])
            strength[own] = 0.0
            felt = np.flatnonzero(strength)
            beside = felt[np.argsort(-strength[felt], kind="stable")[:_BESIDE]]
            indices[k, : len(own)] = own
            indices[k, _BLOCK : _BLOCK + len(beside)] = beside
        members = np.argsort(orbits.group, kind="stable")
        member_starts = np.searchsorted(orbits.group[members], np.arange(len(first) + 1))
        self._inverse = np.empty((len(blocks), _BLOCK, _BLOCK + _BESIDE))
        points = panel_points(rows[first])
        for low in range(0, len(blocks), 256):
            part = indices[low : low + 256]
            pieces = np.empty((len(part), part.shape[1], part.shape[1]))
            with on_threads(threads):
                fill_blocks(rows, points, members, member_starts, part, pieces)
            self._inverse[low : low + 256] = np.linalg.inv(pieces)[:, :_BLOCK]
        self._from = np.where(indices >= 0, indices, 0)
        self._used = indices >= 0
        self._to = indices[:, :_BLOCK]

    def __call__(self, potential: Floats) -> Floats:
        """Densities (groups,) for potentials (groups,), about."""
        taken = np.where(self._used, potential[self._from], 0.0)
        found = np.matmul(self._inverse, taken[:, :, None])[:, :, 0]
        density = np.zeros(len(potential))
        own = self._to >= 0
        density[self._to[own]] = found[own]
        return density


def _halves(place: Floats) -> list[Ints]:
    """Blocks of up to 64 places each, by halving along the longest side."""
    waiting, found = [np.arange(len(place))], []
    while waiting:
        own = waiting.pop()
        if len(own) <= _BLOCK:
            found.append(own)
            continue
        axis = int(np.argmax(np.ptp(place[own], axis=0)))
        order = own[np.argsort(place[own, axis], kind="stable")]
        half = len(own) // 2
        waiting += [order[half:], order[:half]]
    return found
