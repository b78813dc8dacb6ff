"""What is wrong with a triangle mesh, in words, each fault with its number and first place."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import KDTree

from driftwell.geometry.solid import Mesh
from driftwell.kernels import inner_kernel, kernel

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

_THIN = 1e-6
"""Least height of a triangle, in parts of its longest side."""
_GAP = 1e-6
"""Corners closer than this part of the mesh's extent should be one."""


def mesh_faults(mesh: Mesh) -> list[str]:
    """All faults found, none for a sound mesh; of one that is not closed, open edges are none.

    Triangles that lie in one plane and overlap are not noticed unless they are the same.
    """
    if not len(mesh.triangles):
        return ["there are no triangles"]
    if not np.all(np.isfinite(mesh.vertices)):
        where = int(np.argmax(~np.isfinite(mesh.vertices).all(axis=1)))
        return [f"corner {where + 1} is not at a finite place"]
    faults = [*_thin(mesh), *_double(mesh)]
    edge_faults = _edges(mesh)
    faults += edge_faults
    if mesh.closed and not edge_faults and _volume(mesh) <= 0.0:
        faults.append(
            "it is turned inside out: its volume counts negative; turn all triangles over"
        )
    return faults + _gaps(mesh) + _crossings(mesh)


def _thin(mesh: Mesh) -> list[str]:
    corners = mesh.vertices[mesh.triangles]
    longest = np.max(np.linalg.norm(corners - np.roll(corners, 1, axis=1), axis=2), axis=1)
    twice = np.linalg.norm(
        np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0]), axis=1
    )
    thin = twice < _THIN * longest**2
    return _told(thin, "triangle", "of no area, or next to none", corners.mean(axis=1))


def _double(mesh: Mesh) -> list[str]:
    _, first, times = np.unique(
        np.sort(mesh.triangles, axis=1), axis=0, return_index=True, return_counts=True
    )
    double = np.zeros(len(mesh.triangles), dtype=bool)
    double[first[times > 1]] = True
    middle = mesh.vertices[mesh.triangles].mean(axis=1)
    return _told(double, "triangle", "given more than once", middle)


def _edges(mesh: Mesh) -> list[str]:
    """Edges that are open, shared by more than two triangles, or run the same way in both."""
    triangles = mesh.triangles
    directed = np.concatenate([triangles[:, [0, 1]], triangles[:, [1, 2]], triangles[:, [2, 0]]])
    edges, which, times = np.unique(
        np.sort(directed, axis=1), axis=0, return_inverse=True, return_counts=True
    )
    forward = np.zeros(len(edges), dtype=np.int64)
    np.add.at(forward, which.reshape(-1), np.where(directed[:, 0] < directed[:, 1], 1, -1))
    middle = mesh.vertices[edges].mean(axis=1)
    faults = []
    if mesh.closed:
        faults += _told(times == 1, "open edge", "so that it bounds no volume", middle)
    faults += _told(times > 2, "edge", "where more than two triangles meet", middle)
    turned = (times == 2) & (forward != 0)
    return faults + _told(
        turned, "edge", "between triangles of which one faces the wrong way", middle
    )


def _gaps(mesh: Mesh) -> list[str]:
    near = _GAP * float(np.max(np.ptp(mesh.vertices, axis=0)))
    pairs = KDTree(mesh.vertices).query_pairs(near, output_type="ndarray")
    apart = np.zeros(len(mesh.vertices), dtype=bool)
    if len(pairs):
        apart[pairs[:, 0]] = True
    return _told(apart, "corner", "next to another that should be the same", mesh.vertices)


def _crossings(mesh: Mesh) -> list[str]:
    corners = mesh.vertices[mesh.triangles]
    low, high = corners.min(axis=1), corners.max(axis=1)
    order = np.argsort(low[:, 0], kind="stable")
    crossed = np.zeros(len(corners), dtype=np.int64)
    mark_crossings(
        np.ascontiguousarray(corners[order]),
        np.ascontiguousarray(mesh.triangles[order]),
        np.ascontiguousarray(low[order]),
        np.ascontiguousarray(high[order]),
        crossed,
    )
    middle = corners[order].mean(axis=1)
    return _told(crossed > 0, "triangle", "pierced by others", middle)


@kernel
def mark_crossings(
    corners: np.ndarray,
    triangles: np.ndarray,
    low: np.ndarray,
    high: np.ndarray,
    out_crossed: np.ndarray,
) -> None:
    """Mark triangles (k, 3, 3), in the order of their least x, that an edge of another pierces.

    low, high : (k, 3), their bounds; those that share a corner are not compared
    """
    for i in range(triangles.shape[0]):
        j = i + 1
        while j < triangles.shape[0] and low[j, 0] <= high[i, 0]:
            apart = (
                low[j, 1] > high[i, 1]
                or high[j, 1] < low[i, 1]
                or low[j, 2] > high[i, 2]
                or high[j, 2] < low[i, 2]
            )
            if not apart and not _share(triangles, i, j):
                if _pierces(corners, i, j):
                    out_crossed[j] = 1
                if _pierces(corners, j, i):
                    out_crossed[i] = 1
            j += 1


@inner_kernel
def _share(triangles: np.ndarray, i: int, j: int) -> bool:
    for a in range(3):
        for b in range(3):
            if triangles[i, a] == triangles[j, b]:
                return True
    return False


@inner_kernel
def _pierces(corners: np.ndarray, i: int, j: int) -> bool:
    """Whether an edge of triangle i passes through the inside of triangle j."""
    for a in range(3):
        b = (a + 1) % 3
        above = _six_volumes(corners, i, a, j, 0, j, 1, j, 2)
        below = _six_volumes(corners, i, b, j, 0, j, 1, j, 2)
        if above * below >= 0.0:
            continue
        first = _six_volumes(corners, i, a, i, b, j, 0, j, 1)
        second = _six_volumes(corners, i, a, i, b, j, 1, j, 2)
        third = _six_volumes(corners, i, a, i, b, j, 2, j, 0)
        least = 1e-9 * (abs(first) + abs(second) + abs(third))
        if min(first, second, third) > least or max(first, second, third) < -least:
            return True
    return False


@inner_kernel
def _six_volumes(
    corners: np.ndarray, i: int, a: int, j: int, b: int, k: int, c: int, m: int, d: int
) -> float:
    """Six times the volume of four corners."""
    ux = corners[j, b, 0] - corners[i, a, 0]
    uy = corners[j, b, 1] - corners[i, a, 1]
    uz = corners[j, b, 2] - corners[i, a, 2]
    vx = corners[k, c, 0] - corners[i, a, 0]
    vy = corners[k, c, 1] - corners[i, a, 1]
    vz = corners[k, c, 2] - corners[i, a, 2]
    wx = corners[m, d, 0] - corners[i, a, 0]
    wy = corners[m, d, 1] - corners[i, a, 1]
    wz = corners[m, d, 2] - corners[i, a, 2]
    return ux * (vy * wz - vz * wy) + uy * (vz * wx - vx * wz) + uz * (vx * wy - vy * wx)


def _volume(mesh: Mesh) -> float:
    corners = mesh.vertices[mesh.triangles] - mesh.vertices.mean(axis=0)
    return float(np.einsum("ij,ij->", corners[:, 0], np.cross(corners[:, 1], corners[:, 2])) / 6.0)


def _told(which: NDArray[np.bool_], what: str, how: str, places: Floats) -> list[str]:
    """The fault in words, such as "3 edges where ...; the first at (...) m"."""
    count = int(np.count_nonzero(which))
    if not count:
        return []
    x, y, z = places[int(np.argmax(which))]
    number, first = (f"1 {what}", "at") if count == 1 else (f"{count} {what}s", "the first at")
    return [f"{number} {how}; {first} ({x:.6g}, {y:.6g}, {z:.6g}) m"]
