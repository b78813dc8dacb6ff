"""Patches of triangles, sewn together where they meet."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components
from scipy.spatial import KDTree

from driftwell.geometry.solid import Mesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
_TOUCHING = 1e-10


@dataclass(frozen=True, slots=True)
class Patch:
    """Triangles over points (n, 3) of their own."""

    points: Floats
    triangles: Ints

    def turned_over(self) -> Patch:
        """The same seen from its other side."""
        return Patch(self.points, self.triangles[:, ::-1])


def grid_triangles(rows: int, columns: int, wrapped: bool) -> Ints:
    """Triangles over a grid of points, row by row, each quad cut along alternating diagonals.

    With even numbers of quads a mirrored grid has mirrored diagonals. wrapped : whether the last
    column is joined to the first. The quads go round as (row, column) does to a left-handed eye:
    from a point to the next row, then to the next column.
    """
    across = columns if wrapped else columns - 1
    i, j = np.divmod(np.arange((rows - 1) * across), across)
    right = (j + 1) % columns
    a, b = i * columns + j, (i + 1) * columns + j
    c, d = (i + 1) * columns + right, i * columns + right
    even = (i + j) % 2 == 0
    first = np.where(even[:, None], np.stack([a, b, c], 1), np.stack([a, b, d], 1))
    second = np.where(even[:, None], np.stack([a, c, d], 1), np.stack([b, c, d], 1))
    return np.stack([first, second], axis=1).reshape(-1, 3).astype(np.int64)


def sewn(patches: Sequence[Patch], closed: bool) -> Mesh:
    """One mesh of all patches; points that coincide become one, triangles of no area vanish."""
    points = np.concatenate([patch.points for patch in patches])
    offsets = np.cumsum([0, *(len(patch.points) for patch in patches)])
    triangles = np.concatenate(
        [patch.triangles + offset for patch, offset in zip(patches, offsets, strict=False)]
    )
    near = _TOUCHING * float(np.max(np.ptp(points, axis=0)))
    pairs = KDTree(points).query_pairs(near, output_type="ndarray")
    count = len(points)
    links = coo_array((np.ones(len(pairs)), (pairs[:, 0], pairs[:, 1])), shape=(count, count))
    number, which = connected_components(links, directed=False)
    first = np.full(number, count, dtype=np.int64)
    np.minimum.at(first, which, np.arange(count))
    order = np.argsort(first)
    rank = np.empty(number, dtype=np.int64)
    rank[order] = np.arange(number)
    triangles = rank[which[triangles]]
    whole = (
        (triangles[:, 0] != triangles[:, 1])
        & (triangles[:, 1] != triangles[:, 2])
        & (triangles[:, 2] != triangles[:, 0])
    )
    triangles, points = triangles[whole], points[first[order]]
    used = np.unique(triangles)
    if len(used) < len(points):
        renumbered = np.full(len(points), -1, dtype=np.int64)
        renumbered[used] = np.arange(len(used))
        triangles, points = renumbered[triangles], points[used]
    return Mesh(points, triangles, closed)
