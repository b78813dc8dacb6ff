"""Images of many charges between plates: the nearest one by one or by the tree, others by a grid.

Every charge's mirrored ones in both plates are summed pair by pair, in lanes, or by the tree
(mirror_tree.py); those farther away, which are smooth, over a grid (gap_far.py).
"""

from __future__ import annotations

import numpy as np
from numba import prange

from driftwell.images.gap_frame import HEAD
from driftwell.images.gap_grid import (
    BLOCK,
    GRID_WORK,
    GROUPS,
    SCRATCH,
    box_of,
    hand_out,
    merge,
    spread,
    sum_row,
)
from driftwell.images.mirror_sum import NEAREST2
from driftwell.images.mirror_tree import BLOCKS, PLANE, behind_it, lay_out, sum_mirrored
from driftwell.kernels import inner_kernel, threaded_kernel
from driftwell.kernels.lanes import (
    fused,
    inverse_root,
    lanes,
    larger,
    load_one,
    load_some,
    store_some,
)

FAR = HEAD + 2 * PLANE
"""Where in the table, behind the frame and both planes (mirror_tree.py), C of gap_far.py begins."""


def far_room(n: int) -> int:
    """Numbers of work space for `n` charges besides those of the nearest images."""
    return GRID_WORK + SCRATCH * (n // BLOCK + 1) + 8


@threaded_kernel
def gap_many_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """Field and potential of the images between plates, the nearest pair by pair.

    Parameters
    ----------
    position : (3, n) float64, m; charge : (n,) float64, C
    constant : 1/(4 pi eps0), N m^2/C^2
    table : frame (gap_frame.py), planes (mirror_tree.py), C (gap_far.py)
    work : (1, :func:`far_room`), overwritten; out_image : (4, n), V/m (3) and V, overwritten
    """
    for block in prange((charge.size + 7) // 8):
        _eight(8 * block, position, charge, constant, table, out_image)
    box = box_of(position, charge, table)
    room = work[0]
    for group in prange(GROUPS):
        spread(group, position, charge, table, box, room)
    for row in prange(box[3]):
        merge(row, box, room)
    for row in prange(box[3]):
        sum_row(row, box, table, FAR, room)
    for block in prange((charge.size + BLOCK - 1) // BLOCK):
        hand_out(block, position, constant, table, box, room, out_image)


@threaded_kernel
def gap_tree_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """The same with the nearest by the tree; work : of :func:`mirrored_room`, far_room behind."""
    for block in prange(BLOCKS):
        lay_out(block, position, charge, table, HEAD, 2, work)
    sum_mirrored(charge.size, 2, table[7] * table[7], constant, work, out_image)
    box = box_of(position, charge, table)
    room = work[0, behind_it(work) :]
    for group in prange(GROUPS):
        spread(group, position, charge, table, box, room)
    for row in prange(box[3]):
        merge(row, box, room)
    for row in prange(box[3]):
        sum_row(row, box, table, FAR, room)
    for block in prange((charge.size + BLOCK - 1) // BLOCK):
        hand_out(block, position, constant, table, box, room, out_image)


@inner_kernel
def _eight(
    i: int,
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """The sums over mirrored charges at charges i to i + 7, eqs. (2) and (3) of mirror_sum.py."""
    left = charge.size - i
    xs, ys, zs = position[0], position[1], position[2]
    nx, ny, nz, high = table[3], table[4], table[5], table[6]
    foot = table[HEAD + 3]
    x, y, z = load_some(xs, i, left), load_some(ys, i, left), load_some(zs, i, left)
    depth = fused(x, lanes(nx), fused(y, lanes(ny), fused(z, lanes(nz), lanes(-foot))))
    depth = depth + depth
    other_depth = lanes(2.0 * high) - depth
    ex = ey = ez = inward = level = lanes(0.0)
    soft, nearest2 = lanes(table[7] * table[7]), lanes(NEAREST2)
    for j in range(charge.size):
        own = 2.0 * (nx * xs[j] + ny * ys[j] + nz * zs[j] - foot)
        dx = x - load_one(xs, j)
        dy = y - load_one(ys, j)
        dz = z - load_one(zs, j)
        q = load_one(charge, j)
        near, far = lanes(own), lanes(2.0 * high - own)
        r2 = fused(dx, dx, fused(dy, dy, fused(dz, dz, soft)))
        one = inverse_root(larger(nearest2, fused(depth, near, r2)))
        two = inverse_root(larger(nearest2, fused(other_depth, far, r2)))
        at_one, at_two = one * q, two * q
        push_one, push_two = at_one * (one * one), at_two * (two * two)
        push = push_one + push_two
        level = level + (at_one + at_two)
        ex = fused(push, dx, ex)
        ey = fused(push, dy, ey)
        ez = fused(push, dz, ez)
        inward = inward + (push_one * near - push_two * far)
    scale = lanes(-constant)
    store_some(out_image[0], i, left, scale * fused(inward, lanes(nx), ex))
    store_some(out_image[1], i, left, scale * fused(inward, lanes(ny), ey))
    store_some(out_image[2], i, left, scale * fused(inward, lanes(nz), ez))
    store_some(out_image[3], i, left, scale * level)
