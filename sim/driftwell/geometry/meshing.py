"""Any body as triangles, fine enough, and finer where the charge crowds."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.extruding import extruded_patches
from driftwell.geometry.patches import sewn
from driftwell.geometry.revolving import revolved_patches
from driftwell.geometry.solid import Mesh, Revolved, Solid
from driftwell.geometry.stations import Fineness

Floats = NDArray[np.float64]
_MOST_CUTS = 40
"""Times that edges are halved at most."""


def mesh_of(
    solid: Solid,
    size: float,
    turn: float = math.pi / 8.0,
    grade: float = 3.0,
    fair: bool = False,
) -> Mesh:
    """Triangles of a body.

    size : m, mean edge; between sharp edges of the body the longest has `grade` times that, and
        of a given mesh all longer edges are halved
    turn : rad, largest angle between neighbouring normals of a curved surface
    grade : power of the spacing of points towards sharp edges; 1 for even spacing
    fair : whether facets of curved surfaces lie on them on average; else their corners do

    A body's own mirror planes are the mesh's. Raises
    ValueError where a body has no end, or an area cannot be filled.
    """
    if isinstance(solid, Mesh):
        return halved_to(solid, size)
    how = Fineness(size, turn, grade, fair)
    if isinstance(solid, Revolved):
        patches = revolved_patches(solid, how)
        closed = solid.outline.solid or _all_closed(solid)
    else:
        patches = extruded_patches(solid, how)
        closed = solid.outline.solid and solid.half_length > 0.0
    mesh = sewn(patches, closed)
    return replace(mesh, vertices=solid.frame.outward(mesh.vertices))


def halved_to(mesh: Mesh, size: float) -> Mesh:
    """The mesh with all edges longer than `size` cut in halves, again and again."""
    for _ in range(_MOST_CUTS):
        vertices, triangles = mesh.vertices, mesh.triangles
        sides = np.stack([triangles, np.roll(triangles, -1, axis=1)], axis=2)
        edges, which = np.unique(np.sort(sides.reshape(-1, 2), axis=1), axis=0, return_inverse=True)
        length = np.linalg.norm(vertices[edges[:, 1]] - vertices[edges[:, 0]], axis=1)
        long = length > size
        if not long.any():
            break
        place = np.where(long, len(vertices) + np.cumsum(long) - 1, -1)
        middles = 0.5 * (vertices[edges[long, 0]] + vertices[edges[long, 1]])
        cut = place[which.reshape(-1)].reshape(-1, 3)
        pieces = [_cut(corners, middle) for corners, middle in _by_pattern(triangles, cut)]
        mesh = Mesh(np.concatenate([vertices, middles]), np.concatenate(pieces), mesh.closed)
    return mesh


def _by_pattern(
    triangles: NDArray[np.int64], cut: NDArray[np.int64]
) -> list[tuple[NDArray[np.int64], NDArray[np.int64]]]:
    """Triangles with their cut sides, by the number of these, turned so that they come first."""
    number = np.sum(cut >= 0, axis=1)
    groups = []
    for count in range(4):
        own, own_cut = triangles[number == count], cut[number == count]
        for turn in range(3):
            turned, turned_cut = np.roll(own, -turn, axis=1), np.roll(own_cut, -turn, axis=1)
            if count in {0, 3}:
                fits = np.full(len(own), turn == 0)
            elif count == 1:
                fits = turned_cut[:, 0] >= 0
            else:
                fits = turned_cut[:, 2] < 0
            groups.append((turned[fits], turned_cut[fits]))
    return groups


def _cut(corners: NDArray[np.int64], middle: NDArray[np.int64]) -> NDArray[np.int64]:
    """Triangles (k, 3) cut at the middles of their first sides, as many as are not -1."""
    if not len(corners):
        return corners
    a, b, c = corners.T
    ab, bc, ca = middle.T
    if ab[0] < 0:
        return corners
    if bc[0] < 0:
        parts = [(a, ab, c), (ab, b, c)]
    elif ca[0] < 0:
        parts = [(ab, b, bc), (a, ab, bc), (a, bc, c)]
    else:
        parts = [(a, ab, ca), (ab, b, bc), (ca, bc, c), (ab, bc, ca)]
    return np.concatenate([np.stack(part, axis=1) for part in parts])


def _all_closed(solid: Revolved) -> bool:
    """Whether every loop of a thin outline closes in itself."""
    outline = solid.outline
    first, last = outline.pieces[outline.loops[:-1]], outline.pieces[outline.loops[1:] - 1]
    reach = float(np.max(np.abs(outline.pieces[:, :4])))
    return bool(np.all(np.abs(first[:, 0:2] - last[:, 2:4]) <= 1e-9 * reach))
