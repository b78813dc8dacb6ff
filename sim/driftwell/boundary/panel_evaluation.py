"""Near panels at points, in closed form in the stead of their points."""

from __future__ import annotations

import math

import numpy as np
from numba import prange

from driftwell.boundary.panel_bounds import Bounds, next_near
from driftwell.boundary.panel_matrix import POINTS
from driftwell.boundary.triangle import panel_terms
from driftwell.kernels import threaded_kernel

REACHED = 1
"""Status of a point that lies on a panel's point, or all but."""
_CLOSE2 = 1e-8
"""Squared distance from a panel's point, in squares of its longest side, that is too close."""


@threaded_kernel
def add_near_panels(
    rows: np.ndarray,
    panel_points: np.ndarray,
    density: np.ndarray,
    points: np.ndarray,
    bounds: Bounds,
    with_field: bool,
    out_found: np.ndarray,
    out_status: np.ndarray,
) -> None:
    """Add the near panels' closed forms, and take their points' terms away.

    rows : (k, COLUMNS); panel_points : (k, POINTS, 3); density : (k, e); points : (n, 3)
    out_found : (e, 4, n), fields and potential, added to; out_status : (n,) int64, set to REACHED
    for points whose sums are to be taken otherwise
    """
    for i in prange(points.shape[0]):
        x, y, z = points[i, 0], points[i, 1], points[i, 2]
        node, at = 0, -1
        while True:
            found, node, at = next_near((node, at), x, y, z, 0.0, bounds)
            if found < 0:
                break
            k = bounds.which[found]
            potential, fx, fy, fz = panel_terms(rows[k], x, y, z, with_field)
            share = rows[k, 21] / POINTS
            too_close = _CLOSE2 * rows[k, 22] * rows[k, 22]
            for p in range(POINTS):
                dx = x - panel_points[k, p, 0]
                dy = y - panel_points[k, p, 1]
                dz = z - panel_points[k, p, 2]
                square = dx * dx + dy * dy + dz * dz
                if square < too_close:
                    out_status[i] = REACHED
                else:
                    part = share / math.sqrt(square)
                    potential -= part
                    part /= square
                    fx -= part * dx
                    fy -= part * dy
                    fz -= part * dz
            for e in range(density.shape[1]):
                out_found[e, 3, i] += density[k, e] * potential
                if with_field:
                    out_found[e, 0, i] += density[k, e] * fx
                    out_found[e, 1, i] += density[k, e] * fy
                    out_found[e, 2, i] += density[k, e] * fz
