"""The field at chosen charges only, every pair exactly: what a faster sum is judged by."""

from __future__ import annotations

import numpy as np
from numba import prange

from driftwell.coulomb.eight_places import field_at_eight
from driftwell.kernels import threaded_kernel
from driftwell.kernels.lanes import lanes, load_some, store_some


@threaded_kernel
def sampled_field(
    which: np.ndarray,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    out_field: np.ndarray,
) -> None:
    """The field of all charges at some of them, with the same bits on any number of threads.

    Eight chosen charges are done at a time, so each source is read once for eight.

    Parameters
    ----------
    which : (m,) int64, indices of the chosen charges, in any order, repeated or not
    position : (3, n) float64, m; charge : (n,) float64, C; softening2 : m^2
    constant : 1/(4 pi eps0), N m^2/C^2
    out_field : (3, m) float64, V/m, overwritten
    """
    m = which.size
    for block in prange((m + 7) // 8):
        k, left = 8 * block, m - 8 * block
        for axis in range(3):
            for place in range(k, min(k + 8, m)):
                out_field[axis, place] = position[axis, which[place]]
        x = load_some(out_field[0], k, left)
        y = load_some(out_field[1], k, left)
        z = load_some(out_field[2], k, left)
        ex, ey, ez = field_at_eight(x, y, z, position, charge, softening2)
        store_some(out_field[0], k, left, lanes(constant) * ex)
        store_some(out_field[1], k, left, lanes(constant) * ey)
        store_some(out_field[2], k, left, lanes(constant) * ez)
