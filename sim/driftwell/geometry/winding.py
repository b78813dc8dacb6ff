"""How often a mesh goes round a point: 1 inside a closed one, 0 outside."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
_AT_ONCE = 4_000_000


def winding(corners: Floats, points: Floats) -> Floats:
    """The solid angle of triangles (k, 3, 3) seen from each of the points (n, 3), over 4 pi.

    Triangles count positive from inside. A. Van Oosterom and J. Strackee, IEEE Trans. Biomed. Eng.
    30 (1983) 125 (from memory).
    """
    found = np.zeros(len(points))
    step = max(1, _AT_ONCE // max(len(corners), 1))
    for low in range(0, len(points), step):
        a, b, c = (corners[None, :, k] - points[low : low + step, None] for k in range(3))
        la, lb, lc = (np.linalg.norm(each, axis=2) for each in (a, b, c))
        over = np.einsum("ijk,ijk->ij", a, np.cross(b, c))
        under = (
            la * lb * lc
            + np.einsum("ijk,ijk->ij", a, b) * lc
            + np.einsum("ijk,ijk->ij", b, c) * la
            + np.einsum("ijk,ijk->ij", c, a) * lb
        )
        found[low : low + step] = np.sum(np.arctan2(over, under), axis=1) / (2.0 * math.pi)
    return found
