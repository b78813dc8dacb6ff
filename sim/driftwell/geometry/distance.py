"""Signed distance from points to bodies: negative inside, positive outside; of thin ones >= 0.

A point is turned into the body's own coordinates. Of a revolved outline the distance is that of
(r, z) to the outline; of an extruded one, with d the distance to the outline in the plane and e
that along the length, |z| - half,

    outside: sqrt(max(d, 0)^2 + max(e, 0)^2),    inside: max(d, e)                          (1)

both exact. Of several bodies the least counts: outside it is the distance to the nearest surface,
inside its sign is right, and everywhere it changes by no more than the way between two points.
A body whose box is farther than what has been found is left out.
"""

from __future__ import annotations

import math

import numpy as np
from numba import prange
from numpy.typing import ArrayLike, NDArray

from driftwell.geometry.body_table import (
    AXES,
    EXTRUDED,
    HALF,
    HIGH,
    KIND,
    LOW,
    MESH,
    ORIGIN,
    OWNER,
    ROOT,
    VOLUME,
    BodyTable,
)
from driftwell.geometry.mesh_distance import to_triangles
from driftwell.geometry.outline_distance import to_pieces, within
from driftwell.kernels import inner_kernel, outer_kernel, threaded_kernel

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


def distances(table: BodyTable, points: ArrayLike) -> tuple[Floats, Ints]:
    """Signed distances (n,), m, of points (n, 3) to the nearest body, and its owner (n,).

    Without bodies the distance is infinite and the owner -1.
    """
    places = np.ascontiguousarray(np.asarray(points, dtype=np.float64).reshape(-1, 3))
    distance = np.empty(len(places))
    owner = np.empty(len(places), dtype=np.int64)
    _all_nearest(table, places, distance, owner)
    return distance, owner


def plane_distances(table: BodyTable, points: ArrayLike, axisymmetric: bool) -> tuple[Floats, Ints]:
    """The same for points (n, 2) of a drawing: (r, z) if axisymmetric, else (x, y).

    The bodies are drawn ones about the origin.
    """
    drawn = np.asarray(points, dtype=np.float64).reshape(-1, 2)
    places = np.zeros((len(drawn), 3))
    places[:, 0] = drawn[:, 0]
    places[:, 2 if axisymmetric else 1] = drawn[:, 1]
    return distances(table, places)


@threaded_kernel
def _all_nearest(
    table: BodyTable, points: np.ndarray, out_distance: np.ndarray, out_owner: np.ndarray
) -> None:
    """The nearest body of every point; both outputs are overwritten."""
    for i in prange(points.shape[0]):
        distance, body, _ = nearest_body(table, points[i, 0], points[i, 1], points[i, 2])
        out_distance[i] = distance
        out_owner[i] = table.whole[body, OWNER] if body >= 0 else -1


@outer_kernel
def nearest_body(table: BodyTable, x: float, y: float, z: float) -> tuple[float, int, float]:
    """Signed distance to the nearest body, m, its row, and the side of its surface, +1 or -1.

    (inf, -1, 1) where there is none. Of a body that bounds a volume the side is the distance's
    sign; of a thin one it tells its two faces apart, next to it.
    """
    best, body, side = np.inf, -1, 1.0
    for b in range(table.whole.shape[0]):
        away2 = _to_box2(table.number[b], x, y, z)
        if away2 > 0.0 and (best <= 0.0 or away2 >= best * best):
            continue
        found, face = to_body(table, b, x, y, z)
        if found < best:
            best, body, side = found, b, face
    return best, body, side


@outer_kernel
def to_body(table: BodyTable, b: int, x: float, y: float, z: float) -> tuple[float, float]:
    """Signed distance to one body, m, and the side of its surface."""
    kind, root = table.whole[b, KIND], table.whole[b, ROOT]
    volume = table.whole[b, VOLUME] != 0
    if kind == MESH:
        distance, side = to_triangles(table.node, table.link, table.triangle, root, x, y, z)
        return (distance * side if volume else distance), side
    p = table.number[b]
    dx, dy, dz = x - p[ORIGIN], y - p[ORIGIN + 1], z - p[ORIGIN + 2]
    u = p[AXES] * dx + p[AXES + 1] * dy + p[AXES + 2] * dz
    v = p[AXES + 3] * dx + p[AXES + 4] * dy + p[AXES + 5] * dz
    w = p[AXES + 6] * dx + p[AXES + 7] * dy + p[AXES + 8] * dz
    if kind != EXTRUDED:
        r = math.sqrt(u * u + v * v)
        distance, side = to_pieces(table.node, table.link, table.piece, root, r, w)
        if volume:
            side = -1.0 if within(table.node, table.link, table.piece, root, r, w) else 1.0
            distance *= side
        return distance, side
    distance, side = to_pieces(table.node, table.link, table.piece, root, u, v)
    beyond = abs(w) - p[HALF]
    if volume or p[HALF] == 0.0:
        if within(table.node, table.link, table.piece, root, u, v):
            distance = -distance
        if distance <= 0.0 and beyond <= 0.0:
            distance = max(distance, beyond)
        else:
            distance = math.sqrt(max(distance, 0.0) ** 2 + max(beyond, 0.0) ** 2)
        if volume:
            return distance, (-1.0 if distance < 0.0 else 1.0)
        return distance, (1.0 if w >= 0.0 else -1.0)
    if beyond > 0.0:
        distance = math.sqrt(distance * distance + beyond * beyond)
    return distance, side


@inner_kernel
def _to_box2(p: np.ndarray, x: float, y: float, z: float) -> float:
    """Square of the distance to a body's box, m^2."""
    dx = max(p[LOW] - x, 0.0, x - p[HIGH])
    dy = max(p[LOW + 1] - y, 0.0, y - p[HIGH + 1])
    dz = max(p[LOW + 2] - z, 0.0, z - p[HIGH + 2])
    return float(dx * dx + dy * dy + dz * dz)
