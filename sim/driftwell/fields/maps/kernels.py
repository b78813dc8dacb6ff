"""Electric fields from a potential kept as a quintic spline on an even grid.

Three kinds, by what the coordinates of the map are:

    round   (r, z)      phi(r, z) about z, r = sqrt(x^2 + y^2), even in r
    planar  (x, y)      the same at every z
    spatial (x, y, z)

The force is minus the gradient of the spline itself, so that energy is kept as with a formula. An
axis that is mirrored holds one half, from 0 on: the coordinate's sign is dropped, and the
coefficients on the other side of 0 are those of this side, so the spline is exactly even.

Layout of the parameters: centre (3), origin of the grid (3), 1/spacing (3), cells (3), for each
axis whether it is mirrored (3); a map of two axes leaves the third number of each out as 0. The
coefficients follow each other with the last axis fastest; along an axis there are 5 more of them
than cells, and :data:`~driftwell.kernels.spline.SPARE` numbers follow the last.
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.spline import DEGREE, cell_of, spline_2d, spline_3d

ROUND_MAP = 40
PLANAR_MAP = 41
SPATIAL_MAP = 42

CENTRE, ORIGIN, PER_SPACING, CELLS, MIRRORED = 0, 3, 6, 9, 12


@inner_kernel
def folded(x: float, mirrored: float) -> tuple[float, float]:
    """The coordinate in the half that is kept, and the sign of its derivative."""
    if mirrored > 0.0 and x < 0.0:
        return -x, -1.0
    return x, 1.0


@inner_kernel
def inverse_radius(r: float) -> float:
    """1/r; 0 on the axis, where what it multiplies is 0 too."""
    return 1.0 / r if r > 0.0 else 0.0


@outer_kernel
def round_map(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E of a map in (r, z); see :mod:`driftwell.fields.table` and the module's docstring."""
    x, y, z = position[0], position[1], position[2]
    ex, ey, ez = out_field[0], out_field[1], out_field[2]
    stride = int(p[CELLS + 1]) + DEGREE
    total = 0.0
    for i in range(first, last):
        dx, dy = x[i] - p[0], y[i] - p[1]
        dz, sign = folded(z[i] - p[2], p[MIRRORED + 1])
        r = math.sqrt(dx * dx + dy * dy)
        u = (r - p[ORIGIN]) * p[PER_SPACING]
        v = (dz - p[ORIGIN + 1]) * p[PER_SPACING + 1]
        k, j = cell_of(u, p[CELLS]), cell_of(v, p[CELLS + 1])
        g, gr, gz = spline_2d(data, k * stride + j, stride, u - k, v - j)
        radial = w * gr * p[PER_SPACING] * inverse_radius(r)
        ex[i] -= radial * dx
        ey[i] -= radial * dy
        ez[i] -= w * gz * p[PER_SPACING + 1] * sign
        total += charge[i] * g
    return total


@outer_kernel
def planar_map(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E of a map in (x, y); see :mod:`driftwell.fields.table` and the module's docstring."""
    x, y = position[0], position[1]
    ex, ey = out_field[0], out_field[1]
    stride = int(p[CELLS + 1]) + DEGREE
    total = 0.0
    for i in range(first, last):
        dx, x_sign = folded(x[i] - p[0], p[MIRRORED])
        dy, y_sign = folded(y[i] - p[1], p[MIRRORED + 1])
        u = (dx - p[ORIGIN]) * p[PER_SPACING]
        v = (dy - p[ORIGIN + 1]) * p[PER_SPACING + 1]
        k, j = cell_of(u, p[CELLS]), cell_of(v, p[CELLS + 1])
        g, gx, gy = spline_2d(data, k * stride + j, stride, u - k, v - j)
        ex[i] -= w * gx * p[PER_SPACING] * x_sign
        ey[i] -= w * gy * p[PER_SPACING + 1] * y_sign
        total += charge[i] * g
    return total


@outer_kernel
def spatial_map(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E of a map in (x, y, z); see :mod:`driftwell.fields.table` and the module's docstring."""
    x, y, z = position[0], position[1], position[2]
    ex, ey, ez = out_field[0], out_field[1], out_field[2]
    stride = int(p[CELLS + 2]) + DEGREE
    slab = stride * (int(p[CELLS + 1]) + DEGREE)
    total = 0.0
    for i in range(first, last):
        dx, x_sign = folded(x[i] - p[0], p[MIRRORED])
        dy, y_sign = folded(y[i] - p[1], p[MIRRORED + 1])
        dz, z_sign = folded(z[i] - p[2], p[MIRRORED + 2])
        u = (dx - p[ORIGIN]) * p[PER_SPACING]
        v = (dy - p[ORIGIN + 1]) * p[PER_SPACING + 1]
        q = (dz - p[ORIGIN + 2]) * p[PER_SPACING + 2]
        a, b, c = cell_of(u, p[CELLS]), cell_of(v, p[CELLS + 1]), cell_of(q, p[CELLS + 2])
        at = a * slab + b * stride + c
        g, gx, gy, gz = spline_3d(data, at, slab, stride, u - a, v - b, q - c)
        ex[i] -= w * gx * p[PER_SPACING] * x_sign
        ey[i] -= w * gy * p[PER_SPACING + 1] * y_sign
        ez[i] -= w * gz * p[PER_SPACING + 2] * z_sign
        total += charge[i] * g
    return total
