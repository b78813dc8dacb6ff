"""Where triangles of two electrodes are closest to each other, for their size."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import cKDTree

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

_CORNERS, _CANDIDATES = 20_000, 16
"""Corners that are looked at, and triangles of others about each, at the most."""


class Closeness(NamedTuple):
    """The corner of a triangle of `first` that is nearest to one of `second`, for its size.

    distance : m, between them; longest : m, longest side of the triangle of `second`
    place : (3,), m, of the corner
    """

    first: int
    second: int
    distance: float
    longest: float
    place: Floats


def closest_for_their_size(corners: Floats, electrode: Ints) -> Closeness | None:
    """Where a triangle is long against its distance from another electrode; None with one only.

    corners : (k, 3, 3), m; electrode : (k,), whose each triangle is
    """
    sides = np.linalg.norm(corners - np.roll(corners, 1, axis=1), axis=2).max(axis=1)
    middles = corners.mean(axis=1)
    best: Closeness | None = None
    for first in np.unique(electrode):
        others = np.flatnonzero(electrode != first)
        if not len(others):
            return None
        points = np.unique(corners[electrode == first].reshape(-1, 3), axis=0)
        points = points[:: 1 + len(points) // _CORNERS]
        count = min(_CANDIDATES, len(others))
        near = others[np.asarray(cKDTree(middles[others]).query(points, k=count)[1])]
        near = near.reshape(len(points), count)
        distance = to_triangles(np.repeat(points, count, axis=0), corners[near.ravel()])
        ratio = distance / sides[near.ravel()]
        k = int(np.argmin(ratio))
        if best is None or ratio[k] < best.distance / best.longest:
            which = near.ravel()[k]
            best = Closeness(
                int(first),
                int(electrode[which]),
                float(distance[k]),
                float(sides[which]),
                points[k // count],
            )
    return best


def to_triangles(points: Floats, corners: Floats) -> Floats:
    """Distances (n,), m, of points (n, 3) from triangles (n, 3, 3), one for each."""
    normal = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
    square = np.einsum("ij,ij->i", normal, normal)
    above = np.einsum("ij,ij->i", points - corners[:, 0], normal)
    inside = np.ones(len(points), dtype=np.bool_)
    beside = np.full(len(points), np.inf)
    for k in range(3):
        start, along = corners[:, k], corners[:, (k + 1) % 3] - corners[:, k]
        away = points - start
        inside &= np.einsum("ij,ij->i", np.cross(along, away), normal) >= 0.0
        part = np.einsum("ij,ij->i", away, along) / np.einsum("ij,ij->i", along, along)
        left = away - np.clip(part, 0.0, 1.0)[:, None] * along
        beside = np.minimum(beside, np.linalg.norm(left, axis=1))
    return np.where(inside, np.abs(above) / np.sqrt(square), beside)
