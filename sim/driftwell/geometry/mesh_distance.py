"""Distance from a point to a triangle mesh, and the side of it the point is on.

The nearest point of a triangle lies in it, on an edge or at a corner; which, the signs of a few
products tell. The side is that of the nearest feature's normal: the triangle's own; of an edge the
sum of both triangles'; of a corner the sum of all weighted with their angles there. With these
normals the side is right wherever the nearest feature is, which it is with no other weights.

References
----------
J. A. Baerentzen and H. Aanaes, Signed distance computation using the angle weighted pseudonormal,
IEEE Trans. Visual. Comput. Graphics 11 (2005) 243. C. Ericson, Real-Time Collision Detection
(2005), sec. 5.1.5 (nearest point of a triangle). Both from memory.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.box_tree import FIRST, LAST, SKIP
from driftwell.geometry.solid import Mesh
from driftwell.kernels import inner_kernel, outer_kernel

Floats = NDArray[np.float64]

COLUMNS = 30
"""Numbers of a packed triangle: corners a, b, c (9), unit normal (3), normals of the edges ab, bc,
ca (9) and of the corners (9)."""
_CORNERS, _NORMAL, _EDGES, _AT_CORNERS = 0, 9, 12, 21


def packed_triangles(mesh: Mesh) -> Floats:
    """The mesh's triangles (t, 30); those without an area are left out.

    Raises
    ------
    ValueError
        No triangle has an area.
    """
    corner = mesh.vertices[mesh.triangles]
    normal = np.cross(corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0])
    area = np.linalg.norm(normal, axis=1)
    real = area > 0.0
    if not real.any():
        raise ValueError("no triangle has an area")
    triangles, corner = mesh.triangles[real], corner[real]
    normal = normal[real] / area[real, None]
    # corners at one place are one corner, whatever their numbers
    _, place = np.unique(mesh.vertices + 0.0, axis=0, return_inverse=True)
    triangles = place.ravel()[triangles]
    at_corner = np.zeros((int(place.max()) + 1, 3))
    for k in range(3):
        to_next = corner[:, (k + 1) % 3] - corner[:, k]
        to_last = corner[:, (k + 2) % 3] - corner[:, k]
        across = np.linalg.norm(np.cross(to_next, to_last), axis=1)
        angle = np.arctan2(across, np.einsum("ij,ij->i", to_next, to_last))
        np.add.at(at_corner, triangles[:, k], angle[:, None] * normal)
    ends = np.stack([triangles, np.roll(triangles, -1, axis=1)], axis=2).reshape(-1, 2)
    ends = np.sort(ends, axis=1)
    _, edge = np.unique(ends, axis=0, return_inverse=True)
    edge = edge.reshape(-1, 3)
    on_edge = np.zeros((int(edge.max()) + 1, 3))
    for k in range(3):
        np.add.at(on_edge, edge[:, k], normal)
    t = len(triangles)
    return np.concatenate(
        [
            corner.reshape(t, 9),
            normal,
            on_edge[edge].reshape(t, 9),
            at_corner[triangles].reshape(t, 9),
        ],
        axis=1,
    )


def triangle_boxes(packed: Floats) -> tuple[Floats, Floats]:
    """Lowest and highest corners of the triangles' boxes, (t, 3) each."""
    corner = packed[:, :9].reshape(-1, 3, 3)
    return corner.min(axis=1), corner.max(axis=1)


@outer_kernel
def to_triangles(
    node: np.ndarray,
    link: np.ndarray,
    triangle: np.ndarray,
    root: int,
    x: float,
    y: float,
    z: float,
) -> tuple[float, float]:
    """Distance to the nearest triangle of the tree at `root`, m, and the side: +1 outside, -1."""
    k = root
    while link[k, LAST] == link[k, FIRST]:  # down to the leaf that is likely to hold it
        left = k + 1
        right = link[left, SKIP]
        k = left if _to_box2(node[left], x, y, z) <= _to_box2(node[right], x, y, z) else right
    best2, side = np.inf, 1.0
    for m in range(link[k, FIRST], link[k, LAST]):
        best2, side = _nearer(triangle[m], x, y, z, best2, side)
    seen = k
    end = link[root, SKIP]
    k = root
    while k < end:
        if k == seen or _to_box2(node[k], x, y, z) >= best2:
            k = link[k, SKIP]
            continue
        for m in range(link[k, FIRST], link[k, LAST]):
            best2, side = _nearer(triangle[m], x, y, z, best2, side)
        k += 1
    return math.sqrt(best2), side


@inner_kernel
def _to_box2(box: np.ndarray, x: float, y: float, z: float) -> float:
    """Square of the distance to a box, m^2."""
    dx = max(box[0] - x, 0.0, x - box[3])
    dy = max(box[1] - y, 0.0, y - box[4])
    dz = max(box[2] - z, 0.0, z - box[5])
    return float(dx * dx + dy * dy + dz * dz)


@inner_kernel
def _nearer(
    p: np.ndarray, x: float, y: float, z: float, best2: float, side: float
) -> tuple[float, float]:
    """Squared distance and side of the triangle where it is nearer than the best, else those."""
    height = p[9] * (x - p[0]) + p[10] * (y - p[1]) + p[11] * (z - p[2])
    if height * height >= best2:
        return best2, side
    ux, uy, uz = p[3] - p[0], p[4] - p[1], p[5] - p[2]
    vx, vy, vz = p[6] - p[0], p[7] - p[1], p[8] - p[2]
    ax, ay, az = x - p[0], y - p[1], z - p[2]
    bx, by, bz = x - p[3], y - p[4], z - p[5]
    cx, cy, cz = x - p[6], y - p[7], z - p[8]
    d1, d2 = ux * ax + uy * ay + uz * az, vx * ax + vy * ay + vz * az
    d3, d4 = ux * bx + uy * by + uz * bz, vx * bx + vy * by + vz * bz
    d5, d6 = ux * cx + uy * cy + uz * cz, vx * cx + vy * cy + vz * cz
    of_c, of_b, of_a = d1 * d4 - d3 * d2, d5 * d2 - d1 * d6, d3 * d6 - d5 * d4
    feature = _NORMAL
    qx, qy, qz = ax, ay, az  # from the nearest point to the place
    if d1 <= 0.0 and d2 <= 0.0:
        feature = _AT_CORNERS
    elif d3 >= 0.0 and d4 <= d3:
        feature = _AT_CORNERS + 3
        qx, qy, qz = bx, by, bz
    elif of_c <= 0.0 and d1 >= 0.0 and d3 <= 0.0:
        feature = _EDGES
        part = d1 / (d1 - d3)
        qx, qy, qz = ax - part * ux, ay - part * uy, az - part * uz
    elif d6 >= 0.0 and d5 <= d6:
        feature = _AT_CORNERS + 6
        qx, qy, qz = cx, cy, cz
    elif of_b <= 0.0 and d2 >= 0.0 and d6 <= 0.0:
        feature = _EDGES + 6
        part = d2 / (d2 - d6)
        qx, qy, qz = ax - part * vx, ay - part * vy, az - part * vz
    elif of_a <= 0.0 and d4 >= d3 and d5 >= d6:
        feature = _EDGES + 3
        part = (d4 - d3) / ((d4 - d3) + (d5 - d6))
        qx = bx - part * (vx - ux)
        qy = by - part * (vy - uy)
        qz = bz - part * (vz - uz)
    if feature == _NORMAL:
        return height * height, (1.0 if height >= 0.0 else -1.0)
    distance2 = qx * qx + qy * qy + qz * qz
    if distance2 >= best2:
        return best2, side
    value = p[feature] * qx + p[feature + 1] * qy + p[feature + 2] * qz
    return distance2, (1.0 if value >= 0.0 else -1.0)
