"""Delaunay's triangles (scipy) inside a border, over points whose distances grow inwards.

An edge is one of Delaunay's where no other point lies in the circle about it, so points that come
too close to the border are left out. A border that a coordinate line mirrors is cut along it, one
part is filled, and its images are the others: so the triangles keep the mirror.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import Delaunay, KDTree, QhullError

from driftwell.geometry.stations import within

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

_SLOPE = 0.35
"""Growth of the distance between points with the depth."""
_SMOOTHINGS = 3
_SAME = 1e-9
"""Coordinates closer than this part of the border's extent are the same."""


@dataclass(frozen=True, slots=True)
class Border:
    """Edges (k, 2) between points (n, 2), of one loop or several; inside by odd crossings."""

    points: Floats
    edges: Ints

    @property
    def starts(self) -> Floats:
        """Where each edge begins."""
        return np.asarray(self.points[self.edges[:, 0]])

    @property
    def ends(self) -> Floats:
        """Where each edge ends."""
        return np.asarray(self.points[self.edges[:, 1]])

    def encloses(self, points: Floats) -> NDArray[np.bool_]:
        """Whether points lie inside."""
        return within(points, self.starts, self.ends)


def filled_within(border: Border, size: float) -> tuple[Floats, Ints] | None:
    """Points, the border's among them, and triangles, counter-clockwise; None where edges are lost.

    Points on mirror lines appear more than once.
    """
    axes = [axis for axis in range(2) if _is_mirrored(border, axis)]
    part = _cut(border, axes, size) if axes else None
    filled = None if part is None else _delaunay(part, size)
    if filled is None:
        return _delaunay(border, size)
    points, triangles = filled
    for axis in axes:
        image = points * np.where(np.arange(2) == axis, -1.0, 1.0)
        triangles = np.concatenate([triangles, triangles[:, ::-1] + len(points)])
        points = np.concatenate([points, image])
    return points, triangles


def _near(border: Border) -> float:
    return _SAME * float(np.max(np.ptp(border.points, axis=0)))


def _is_mirrored(border: Border, axis: int) -> bool:
    """Whether points and edges are their own images where a coordinate changes its sign."""
    apart, image = KDTree(border.points).query(
        border.points * np.where(np.arange(2) == axis, -1.0, 1.0)
    )
    if np.max(apart) > _near(border):
        return False
    own = np.unique(np.sort(border.edges, axis=1), axis=0)
    images = np.unique(np.sort(np.asarray(image)[border.edges], axis=1), axis=0)
    side = border.points[border.edges, axis]
    crossing = (np.min(side, axis=1) < -_near(border)) & (np.max(side, axis=1) > _near(border))
    return bool(np.array_equal(own, images) and not np.any(crossing))


def _cut(border: Border, axes: list[int], size: float) -> Border:
    """The part where the mirrored coordinates are positive, closed by edges along the lines."""
    near = _near(border)
    points = np.where(np.abs(border.points) <= near, 0.0, border.points)
    kept = np.all(points[:, axes] >= 0.0, axis=1)
    number = np.cumsum(kept) - 1
    edges = border.edges[np.all(kept[border.edges], axis=1)]
    along = np.any(np.all(points[edges][:, :, axes] == 0.0, axis=1), axis=1)
    found, joined = list(points[kept]), [number[edges[~along]]]
    at_origin = np.any(np.all(points == 0.0, axis=1))
    if len(axes) == 2 and not at_origin and border.encloses(np.full((1, 2), near))[0]:
        found.append(np.zeros(2))
    spacing = _Spacing(border, size)
    for axis in axes:
        other = 1 - axis
        line = [k for k, p in enumerate(found) if p[axis] == 0.0]
        line.sort(key=lambda k: float(found[k][other]))
        for a, b in pairwise(line):
            middle = 0.5 * (found[a] + found[b])
            middle[axis] = near
            if not bool(border.encloses(middle[None])[0]):
                continue
            chain = [a, *_between(found, a, b, spacing), b]
            joined.append(np.stack([chain[:-1], chain[1:]], axis=1))
    return Border(np.array(found), np.concatenate(joined).astype(np.int64))


def _between(found: list[Floats], a: int, b: int, spacing: _Spacing) -> list[int]:
    """Numbers of points put between two of `found`, to which they are appended."""
    middle = 0.5 * (found[a] + found[b])
    if np.linalg.norm(found[b] - found[a]) <= 1.4 * float(spacing(middle[None])[0]):
        return []
    found.append(middle)
    own = len(found) - 1
    return [*_between(found, a, own, spacing), own, *_between(found, own, b, spacing)]


class _Spacing:
    """Distances wanted between points: those of the edges nearby, growing inwards to `size`."""

    def __init__(self, border: Border, size: float) -> None:
        self._length = np.linalg.norm(border.ends - border.starts, axis=1)
        self._tree = KDTree(0.5 * (border.starts + border.ends))
        self._size = size

    def __call__(self, points: Floats, taken_off: float = 0.0) -> Floats:
        """At points (n, 2); as if so much closer to the border."""
        distance, nearest = self._tree.query(points)
        inward = np.maximum(distance - taken_off, 0.0)
        return np.asarray(np.minimum(self._size, self._length[nearest] + _SLOPE * inward))


def _delaunay(border: Border, size: float) -> tuple[Floats, Ints] | None:
    """Points and triangles within a border; None where the triangles lack one of its edges."""
    count = len(border.points)
    inside = _spread(border, size)
    for left in range(_SMOOTHINGS, -1, -1):
        points = np.concatenate([border.points, inside])
        try:
            every = Delaunay(points).simplices.astype(np.int64)
        except QhullError:
            return None
        kept = every[border.encloses(points[every].mean(axis=1))]
        if left == 0 or len(inside) == 0:
            break
        inside = _smoothed(points, kept, count)
        inside = inside[_clear(inside, border)]
    corners = points[kept]
    u, v = corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]
    turn = u[:, 0] * v[:, 1] - u[:, 1] * v[:, 0]
    kept = np.where((turn > 0.0)[:, None], kept, kept[:, ::-1])
    return (points, kept) if _has_edges(kept, border) else None


def _has_edges(triangles: Ints, border: Border) -> bool:
    """Whether the rim of the triangles is just the border."""
    edges = np.sort(
        np.concatenate([triangles[:, [0, 1]], triangles[:, [1, 2]], triangles[:, [2, 0]]])
    )
    each, times = np.unique(edges, axis=0, return_counts=True)
    expected = np.unique(np.sort(border.edges, axis=1), axis=0)
    return bool(np.max(times) <= 2) and np.array_equal(each[times == 1], expected)


def _spread(border: Border, size: float) -> Floats:
    """Points inside, in the middles of squares that are halved until they are small enough."""
    spacing = _Spacing(border, size)
    least = 0.05 * float(np.min(np.linalg.norm(border.ends - border.starts, axis=1)))
    low, high = border.points.min(axis=0), border.points.max(axis=0)
    cells = np.maximum(np.ceil((high - low) / size), 1.0).astype(int)
    step = (high - low) / cells
    x, y = (low[axis] + (np.arange(cells[axis]) + 0.5) * step[axis] for axis in range(2))
    centres = np.stack([each.ravel() for each in np.meshgrid(x, y, indexing="ij")], axis=1)
    found = []
    while len(centres):
        width = float(np.max(step))
        # a coarse cell's middle may miss a narrow place: asked with the cell's reach taken off
        large = (width > 1.3 * spacing(centres)) | (width > 2.0 * spacing(centres, 0.7 * width))
        found.append(centres[~large])
        corners = np.array([[-1.0, -1.0], [1.0, -1.0], [-1.0, 1.0], [1.0, 1.0]])
        centres = (centres[large][:, None] + 0.25 * step * corners).reshape(-1, 2)
        step = 0.5 * step
        if float(np.max(step)) < least:
            break
    points = np.concatenate(found)
    points = points[border.encloses(points)]
    return np.asarray(points[_clear(points, border)])


def _clear(points: Floats, border: Border) -> NDArray[np.bool_]:
    """Whether points are inside and keep clear of the circles about all edges."""
    if not len(points):
        return np.zeros(0, dtype=bool)
    middle = 0.5 * (border.starts + border.ends)
    length = np.linalg.norm(border.ends - border.starts, axis=1)
    clear = border.encloses(points)
    for which in KDTree(points).query_ball_point(middle, 0.6 * length):
        clear[which] = False
    return clear


def _smoothed(points: Floats, triangles: Ints, fixed: int) -> Floats:
    """The points behind the first `fixed`, each moved to the middle of its neighbours."""
    total, times = np.zeros_like(points), np.zeros(len(points))
    for a, b in ((0, 1), (1, 2), (2, 0), (1, 0), (2, 1), (0, 2)):
        np.add.at(total, triangles[:, a], points[triangles[:, b]])
        np.add.at(times, triangles[:, a], 1.0)
    moved = points.copy()
    has = times > 0
    moved[has] = total[has] / times[has, None]
    return moved[fixed:]
