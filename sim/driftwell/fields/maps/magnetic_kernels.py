"""Magnetic fields kept as quintic splines on an even grid.

    round   (r, z)     one spline, f = A/r, A the vector potential along the azimuth:
                       B_x = -x df/dz, B_y = -y df/dz, B_z = 2 f + r df/dr, A = f (-y, x, 0)
    spatial (x, y, z)  three splines, B_x, B_y and B_z, one after the other

The round field has no sources, whatever the spline. Of the spatial one what its change induces is
not known: a field without curl could be added to any answer. Its waveform must be constant.

Layout of the parameters: as in :mod:`driftwell.fields.maps.kernels`; no axis but r is mirrored.
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.fields.maps.kernels import CELLS, ORIGIN, PER_SPACING
from driftwell.kernels import outer_kernel
from driftwell.kernels.spline import DEGREE, cell_of, spline_2d, spline_3d

ROUND_MAGNETIC_MAP = 43
SPATIAL_MAGNETIC_MAP = 44


@outer_kernel
def round_magnetic_map(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Add B of a map in (r, z); see :mod:`driftwell.fields.table` and the module's docstring."""
    x, y, z = position[0], position[1], position[2]
    bx, by, bz = out_b[0], out_b[1], out_b[2]
    stride = int(p[CELLS + 1]) + DEGREE
    for i in range(first, last):
        dx, dy = x[i] - p[0], y[i] - p[1]
        r = math.sqrt(dx * dx + dy * dy)
        u = (r - p[ORIGIN]) * p[PER_SPACING]
        v = (z[i] - p[2] - p[ORIGIN + 1]) * p[PER_SPACING + 1]
        k, j = cell_of(u, p[CELLS]), cell_of(v, p[CELLS + 1])
        f, fr, fz = spline_2d(data, k * stride + j, stride, u - k, v - j)
        across = w * fz * p[PER_SPACING + 1]
        bx[i] -= across * dx
        by[i] -= across * dy
        bz[i] += w * (2.0 * f + r * fr * p[PER_SPACING])


@outer_kernel
def round_magnetic_map_induced(
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Add E = -rate A of a map in (r, z)."""
    x, y, z = position[0], position[1], position[2]
    ex, ey = out_e[0], out_e[1]
    stride = int(p[CELLS + 1]) + DEGREE
    for i in range(first, last):
        dx, dy = x[i] - p[0], y[i] - p[1]
        r = math.sqrt(dx * dx + dy * dy)
        u = (r - p[ORIGIN]) * p[PER_SPACING]
        v = (z[i] - p[2] - p[ORIGIN + 1]) * p[PER_SPACING + 1]
        k, j = cell_of(u, p[CELLS]), cell_of(v, p[CELLS + 1])
        f, _, _ = spline_2d(data, k * stride + j, stride, u - k, v - j)
        ex[i] += rate * f * dy
        ey[i] -= rate * f * dx


@outer_kernel
def spatial_magnetic_map(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Add B of a map in (x, y, z); see :mod:`driftwell.fields.table` and the module's docstring."""
    x, y, z = position[0], position[1], position[2]
    bx, by, bz = out_b[0], out_b[1], out_b[2]
    stride = int(p[CELLS + 2]) + DEGREE
    slab = stride * (int(p[CELLS + 1]) + DEGREE)
    whole = slab * (int(p[CELLS]) + DEGREE)
    for i in range(first, last):
        u = (x[i] - p[0] - p[ORIGIN]) * p[PER_SPACING]
        v = (y[i] - p[1] - p[ORIGIN + 1]) * p[PER_SPACING + 1]
        q = (z[i] - p[2] - p[ORIGIN + 2]) * p[PER_SPACING + 2]
        a, b, c = cell_of(u, p[CELLS]), cell_of(v, p[CELLS + 1]), cell_of(q, p[CELLS + 2])
        at = a * slab + b * stride + c
        gx, _, _, _ = spline_3d(data, at, slab, stride, u - a, v - b, q - c)
        gy, _, _, _ = spline_3d(data, at + whole, slab, stride, u - a, v - b, q - c)
        gz, _, _, _ = spline_3d(data, at + 2 * whole, slab, stride, u - a, v - b, q - c)
        bx[i] += w * gx
        by[i] += w * gy
        bz[i] += w * gz


@outer_kernel
def spatial_magnetic_map_induced(
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Add nothing while the field is constant, else what is no number: there is no answer."""
    if rate != 0.0:
        out_e[:, first:last] = np.nan
