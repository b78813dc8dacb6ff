"""Panels that mirror each other: they carry the same charge, which is found once."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import KDTree

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
_SAME = 1e-7
"""Distance of mirrored middles, and difference of areas, in parts of a panel's size."""


class Orbits(NamedTuple):
    """Groups of panels that are mirrored into each other.

    mirrors : for each coordinate, whether its plane through the origin is a mirror plane
    first : (m,) int64, one panel of each group
    group : (n,) int64, the group of each panel
    """

    mirrors: tuple[bool, bool, bool]
    first: Ints
    group: Ints


def mirror_orbits(middle: Floats, area: Floats, size: Floats, electrode: Ints) -> Orbits:
    """The groups of panels of middles (n, 3), areas and longest sides (n,), m, m^2."""
    tree = KDTree(middle)
    least = np.arange(len(middle))
    images, mirrors = [], []
    for axis in range(3):
        flipped = middle.copy()
        flipped[:, axis] *= -1.0
        apart, image = tree.query(flipped)
        same = (
            (apart <= _SAME * size)
            & (np.abs(area[image] - area) <= _SAME * size * size)
            & (electrode[image] == electrode)
        )
        mirrors.append(bool(np.all(same)))
        if mirrors[-1]:
            images.append(image)
    for _ in images:
        for image in images:
            least = np.minimum(least, least[image])
    first, group = np.unique(least, return_inverse=True)
    x, y, z = mirrors
    return Orbits((x, y, z), first, group.reshape(-1).astype(np.int64))
