"""The images of many charges between plates that lie farther away, by sums over a grid.

Without the charge itself and its two mirrored ones next to the plates, what is left of G,

    H(rho, u_i, u_j) = G + 1/(rho^2 + (c - 1)^2)^(1/2) + 1/(rho^2 + (c + 1)^2)^(1/2)         (1)

in lengths of the gap (gap_pair.py), is smooth: its sources are a gap away or more. It is taken as

    H = sum over a, b, m, n of B_a(x_i) T_m(u_i) C_mn(a - b) T_n(u_j) B_b(x_j)               (2)

with quintic B-splines of both lateral coordinates on an even grid, B, and Chebyshev polynomials of
the height, T_0 to T_7; C makes (2) exact at the grid's places and at eight heights. Charges are
spread over the grid and summed there, and feel with the weights they were spread with: the field
is the exact gradient of (2). With a spacing of a quarter of the gap (2) errs by 4e-7, rms, and 4e-5
at the most, of 1 over the gap; with half of it by 1e-4 and 3e-3.

References
----------
U. Essmann et al., J. Chem. Phys. 103 (1995) 8577 (sums over a grid by B-splines, fields as exact
gradients). C. de Boor, A Practical Guide to Splines (1978), chapter IX. Weights of the quintic from
its pieces; M. Abramowitz and I. A. Stegun, Handbook of Mathematical Functions (1964), 22.2.4.
"""

from __future__ import annotations

import functools
import math

import numpy as np
from numpy.typing import NDArray

from driftwell.images.gap_pair import NEAR, far_pair, near_pair, pair_table
from driftwell.kernels import inner_kernel, kernel

Floats = NDArray[np.float64]

MODES = 8
"""Polynomials of the height."""
TAPS = 6
"""Splines that are not 0 at a place."""
SPACINGS = (0.25, 0.5, 1.0)
"""Of the grids, in gaps: the finest that holds all charges is taken."""
SIDE = 64
"""Most nodes of a grid along an axis."""
WIDEST = tuple((SIDE - TAPS) * spacing for spacing in SPACINGS)
"""How wide charges may be spread, in gaps, for each."""
LEVEL = SIDE * SIDE * MODES * MODES
"""Numbers of C for one spacing: (a - b along one axis, along the other, n, m)."""
_MARGIN = 24
"""Nodes beyond those used, where the splines' coefficients feel the end of the table."""


@functools.lru_cache(maxsize=4)
def far_table(blur: float) -> Floats:
    """C of (2) for all spacings, flat; blur : s, in gaps."""
    from scipy.ndimage import spline_filter1d

    x = np.cos(math.pi * (np.arange(MODES) + 0.5) / MODES)
    to_modes = np.cos(np.arange(MODES)[:, None] * np.arccos(x)[None, :]) * 2.0 / MODES
    to_modes[0] *= 0.5
    parts = []
    for spacing in SPACINGS:
        count = SIDE + _MARGIN
        values = np.empty((count, count, MODES, MODES))
        rest(spacing, 0.5 * (1.0 + x), blur * blur, pair_table(), values)
        for axis in (0, 0, 1, 1):
            values = spline_filter1d(values, 5, axis=axis, mode="mirror")
        parts.append(np.einsum("mk,abkl,nl->abnm", to_modes, values[:SIDE, :SIDE], to_modes))
    return np.concatenate([np.ascontiguousarray(part).ravel() for part in parts])


@kernel
def rest(
    spacing: float, height: np.ndarray, blur2: float, table: np.ndarray, out_values: np.ndarray
) -> None:
    """H of (1) at lateral distances on a grid and at all pairs of heights.

    out_values : (count, count, heights, heights), overwritten
    """
    for i in range(out_values.shape[0]):
        for j in range(i + 1):
            rho2 = spacing * spacing * (i * i + j * j) + blur2
            for k in range(height.size):
                for m in range(height.size):
                    found = _rest(rho2, height[k], height[m], table)
                    out_values[i, j, k, m] = out_values[j, i, k, m] = found


@inner_kernel
def _rest(rho2: float, one: float, other: float, table: np.ndarray) -> float:
    a, c = one - other, one + other - 1.0
    if rho2 < NEAR * NEAR:
        g, _, _ = near_pair(rho2, a, c, table, 0)
    else:
        s, t = math.pi * one, math.pi * other
        g, _, _ = far_pair(rho2, a, math.sin(s), math.cos(s), math.sin(t), math.cos(t), table, 0)
    result: float = (
        g + 1.0 / math.sqrt(rho2 + (c - 1.0) ** 2) + 1.0 / math.sqrt(rho2 + (c + 1.0) ** 2)
    )
    return result
