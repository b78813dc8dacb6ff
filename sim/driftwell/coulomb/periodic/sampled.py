"""The field at chosen charges only, in a cell: what the tree is judged by there."""

from __future__ import annotations

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.coulomb.cell import Cell
from driftwell.coulomb.eight_places import field_at_eight
from driftwell.coulomb.periodic.direct import EXACT, HIGHEST, MOST_IMAGES
from driftwell.coulomb.periodic.far import (
    AXIS,
    GROUPS,
    IMAGES,
    LENGTH,
    far_field,
    far_size,
    finish_far,
    prepare_far,
    settle_far,
    signed,
    sum_moments,
)
from driftwell.kernels import inner_kernel, threaded_kernel
from driftwell.kernels.lanes import lanes, load_some, store_some

Floats = NDArray[np.float64]
_GROUPS = 16


def sampled_periodic_field(
    cell: Cell,
    which: NDArray[np.int64],
    position: Floats,
    charge: Floats,
    softening2: float,
    constant: float,
    out_field: Floats,
) -> None:
    """The field of all charges and their images at some of them; as coulomb/sampled.py."""
    far = np.zeros(far_size(_GROUPS))
    prepare_far(far, _GROUPS, cell.number, cell.length, EXACT, HIGHEST, MOST_IMAGES)
    _sampled(which, position, charge, softening2, constant, far, out_field)


@threaded_kernel
def _sampled(
    which: np.ndarray,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    far: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """Eight chosen charges are done at a time; the bits do not depend on the threads."""
    groups = int(far[GROUPS])
    settle_far(position, far)
    for g in prange(groups):
        sum_moments(signed(g), groups, position, charge, far)
    finish_far(groups, charge, far)
    for block in prange((which.size + 7) // 8):
        _eight(8 * signed(block), which, position, charge, softening2, constant, far, out_field)


@inner_kernel
def _eight(
    k: int,
    which: np.ndarray,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    far: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The field at the chosen charges k to k + 7."""
    left, axis, scale = which.size - k, int(far[AXIS]), lanes(constant)
    for row in range(3):
        for place in range(k, min(k + 8, which.size)):
            out_field[row, place] = position[row, which[place]]
    a, b = (axis + 1) % 3, (axis + 2) % 3
    at = (
        load_some(out_field[0], k, left),
        load_some(out_field[1], k, left),
        load_some(out_field[2], k, left),
    )
    fx = fy = fz = lanes(0.0)
    for image in range(-int(far[IMAGES]), int(far[IMAGES]) + 1):
        step = lanes(image * far[LENGTH])
        x = at[0] - step if axis == 0 else at[0]
        y = at[1] - step if axis == 1 else at[1]
        z = at[2] - step if axis == 2 else at[2]
        ex, ey, ez = field_at_eight(x, y, z, position, charge, softening2)
        fx, fy, fz = fx + ex, fy + ey, fz + ez
    if axis == 0:
        ex, ey, ez = far_field(at[1], at[2], at[0], far)
    elif axis == 1:
        ex, ey, ez = far_field(at[2], at[0], at[1], far)
    else:
        ex, ey, ez = far_field(at[0], at[1], at[2], far)
    store_some(out_field[0], k, left, scale * fx)
    store_some(out_field[1], k, left, scale * fy)
    store_some(out_field[2], k, left, scale * fz)
    store_some(out_field[a], k, left, load_some(out_field[a], k, left) + scale * ex)
    store_some(out_field[b], k, left, load_some(out_field[b], k, left) + scale * ey)
    store_some(out_field[axis], k, left, load_some(out_field[axis], k, left) + scale * ez)
