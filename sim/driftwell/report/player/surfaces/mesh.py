"""A surface as it is drawn: triangles with normals that are smooth where it is, and its edges."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.solid import Mesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

SHARP = math.radians(35.0)
"""Faces that turn by more than this have an edge between them."""


@dataclass(frozen=True, slots=True)
class Drawable:
    """A surface.

    name : untrusted; kind : electrode, wall or detector
    vertices : (v, 3) m
    triangles : (t, 3)
    normals : (t, 3, 3), of length 1, at the corners of each triangle
    edges : (e, 4), two vertices and the one or two triangles that meet (the same one twice at a
        border); the sharp ones come first
    sharp : how many of them are sharp
    """

    name: str
    kind: str
    vertices: Floats
    triangles: Ints
    normals: Floats
    edges: Ints
    sharp: int


def drawable(name: str, kind: str, mesh: Mesh) -> Drawable:
    """A mesh made ready to be drawn."""
    vertices, triangles = mesh.vertices, mesh.triangles
    corner = vertices[triangles]
    across = np.cross(corner[:, 1] - corner[:, 0], corner[:, 2] - corner[:, 0])
    length = np.linalg.norm(across, axis=1)
    facing = across / np.where(length > 0.0, length, 1.0)[:, None]
    edges, sharp = _edges(triangles, facing)
    return Drawable(
        name, kind, vertices, triangles, _smooth(triangles, across, facing), edges, sharp
    )


def _edges(triangles: Ints, facing: Floats) -> tuple[Ints, int]:
    """Edges with the triangles beside them, the sharp ones first."""
    sides = np.stack([triangles, np.roll(triangles, -1, axis=1)], axis=2).reshape(-1, 2)
    owner = np.repeat(np.arange(len(triangles)), 3)
    ends, which = np.unique(np.sort(sides, axis=1), axis=0, return_inverse=True)
    order = np.argsort(which.reshape(-1), kind="stable")
    ranked = which.reshape(-1)[order]
    first = np.searchsorted(ranked, np.arange(len(ends)))
    last = np.searchsorted(ranked, np.arange(len(ends)), side="right") - 1
    one, other = owner[order[first]], owner[order[last]]
    turned = np.einsum("ij,ij->i", facing[one], facing[other])
    is_sharp = (one == other) | (turned < math.cos(SHARP))
    edges = np.concatenate([ends, one[:, None], other[:, None]], axis=1)
    edges = np.concatenate([edges[is_sharp], edges[~is_sharp]])
    return edges.astype(np.int64), int(is_sharp.sum())


def _smooth(triangles: Ints, across: Floats, facing: Floats) -> Floats:
    """Normals at corners: the mean over the triangles about a vertex that turn little."""
    found = np.repeat(facing[:, None, :], 3, axis=1)
    vertex = triangles.reshape(-1)
    order = np.argsort(vertex, kind="stable")
    bounds = np.flatnonzero(np.diff(vertex[order], prepend=-1, append=-2))
    for low, high in zip(bounds[:-1], bounds[1:], strict=True):
        corners = order[low:high]
        own = corners // 3
        alike = facing[own] @ facing[own].T > math.cos(SHARP)
        total = alike @ across[own]
        length = np.linalg.norm(total, axis=1, keepdims=True)
        normal = total / np.where(length > 0.0, length, 1.0)
        found[own, corners % 3] = np.where(length > 0.0, normal, facing[own])
    return found


def fewer(mesh: Mesh, most: int) -> Mesh:
    """The mesh with at most so many triangles: vertices that lie in one cell of a grid are one."""
    cells = 96
    found = mesh
    while len(found.triangles) > most and cells >= 4:
        low = mesh.vertices.min(axis=0)
        size = float(np.ptp(mesh.vertices, axis=0).max()) / cells or 1.0
        key = np.floor((mesh.vertices - low) / size).astype(np.int64)
        _, which = np.unique(key, axis=0, return_inverse=True)
        which = which.reshape(-1)
        count = np.bincount(which)
        vertices = np.stack(
            [np.bincount(which, mesh.vertices[:, axis]) / count for axis in range(3)], axis=1
        )
        faces = which[mesh.triangles]
        whole = (
            (faces[:, 0] != faces[:, 1])
            & (faces[:, 1] != faces[:, 2])
            & (faces[:, 2] != faces[:, 0])
        )
        faces = faces[whole]
        _, unlike = np.unique(np.sort(faces, axis=1), axis=0, return_index=True)
        found = Mesh(vertices, faces[np.sort(unlike)], mesh.closed)
        cells = cells * 2 // 3
    return found
