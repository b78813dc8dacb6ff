"""The vector potential of an axisymmetric magnetic field given on a grid in (r, z).

With A along the azimuth and f = A/r the field is

    B_r = -r df/dz,    B_z = 2 f + r df/dr

and r^2 f is the integral of B_z r from the axis on: the flux through the circle over 2 pi. f is
even in r. A field made of f has no sources, and what its change induces is -dA/dt, the only answer
there is if charges and fields are the same all around.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 5.3 and 5.15 (from memory).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.maps.grid import Grid, axis_coefficients
from driftwell.fields.maps.spline_sums import weights

Floats = NDArray[np.float64]

_POINTS, _WEIGHTS = np.polynomial.legendre.leggauss(4)
"""On (-1, 1); exact for degree 7, a spline of degree 5 times r has 6."""


def potential_over_radius(grid: Grid, axial: Floats) -> Floats:
    """f = A/r at the nodes, T, from B_z (nr, nz) on a grid whose first axis begins on r = 0."""
    spacing, count = grid.spacing[0], grid.counts[0]
    found = axis_coefficients(axial, mirrored=True)
    cells = count - 1
    r = grid.axis(0)[:, None]
    piece = np.zeros((cells, axial.shape[1]))
    for point, share in zip(0.5 * (_POINTS + 1.0), 0.5 * _WEIGHTS, strict=True):
        row = weights(np.array([point]), 0)[0]
        value = sum(w * found[k : k + cells] for k, w in enumerate(row))
        piece += share * spacing * value * (r[:-1] + spacing * point)
    flux = np.cumsum(piece, axis=0)
    return np.concatenate([0.5 * axial[:1], flux / r[1:] ** 2])
