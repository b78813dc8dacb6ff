"""The tree sum in a periodic cell: its cells gather from near images too; far images by moments.

One tree is grown. Each of its cells hears all cells where they are and, moved by k periods, their
images up to m on each side. Whether A takes the image of B at a distance kL as a whole depends on
the pair and on kL alone, and it does so if and only if B takes that of A at -kL: the forces cancel
to rounding, as in the open sum. Images beyond m act by the polynomial of far.py, cut where it errs
less than the tree does.
"""

from __future__ import annotations

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.coulomb.cell import Cell
from driftwell.coulomb.pair_sum import SIGNATURE, PairSum
from driftwell.coulomb.periodic.far import (
    AXIS,
    CHARGE,
    IMAGES,
    far_field,
    far_potential,
    far_size,
    finish_far,
    inverse_near,
    prepare_far,
    settle_far,
    signed,
    sum_moments,
)
from driftwell.coulomb.tree import TreeSettings, reached
from driftwell.kernels import inner_kernel, threaded_kernel
from driftwell.kernels.lanes import lanes, load_some, store_some
from driftwell.kernels.pointers import CompiledFunction
from driftwell.tree import cells
from driftwell.tree.gathering import tree_room
from driftwell.tree.stages import tree_field

MOST_IMAGES = 8
"""The most near images on each side: a beam may be four times as wide as the cell is long."""
HIGHEST = 40
"""The highest degree: more images cost less."""
_SHARE = 0.1
"""Of the tree's own error, what a far image's force may err by, in units of far.py."""
_GROUPS = 32
_FAR = far_size(_GROUPS)
_PART = 512


def periodic_tree_sum() -> PairSum:
    """The tree sum in a cell, with a work space of :func:`periodic_tree_workspace`.

    Where its last argument is (4, n), it holds E_x, E_y, E_z and the potential of direct.py, V.
    """
    return CompiledFunction(periodic_tree_field, SIGNATURE)


def periodic_tree_workspace(
    n: int,
    threads: int,
    settings: TreeSettings,
    cell: Cell,
    softened: bool = False,
    mixed: bool = False,
) -> NDArray[np.float64]:
    """(1, size) float64, work space for the sums of `n` charges; see coulomb/tree.py."""
    work = tree_room(
        n,
        threads,
        settings.leaf,
        settings.tolerance,
        settings.order,
        softened,
        mixed,
        MOST_IMAGES,
        _FAR,
    )
    work[0, cells.AXIS], work[0, cells.PERIOD] = cell.number, cell.length
    tolerance = max(_SHARE * reached(settings), 1e-11)
    prepare_far(work[0, -_FAR:], _GROUPS, cell.number, cell.length, tolerance, HIGHEST, MOST_IMAGES)
    return work


@threaded_kernel
def periodic_tree_field(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """Field, and where asked potential, of all charges and their images at each charge.

    work : of :func:`periodic_tree_workspace`; out_field : (3, n) V/m, or (4, n) with potentials, V;
    overwritten. A charge that is nowhere (NaN) makes all NaN.
    """
    n = charge.size
    far = work[0, work.shape[1] - _FAR :]
    settle_far(position, far)
    work[0, cells.IMAGES] = far[IMAGES]
    tree_field(position, charge, softening2, constant, work, out_field)
    for g in prange(_GROUPS):
        sum_moments(signed(g), _GROUPS, position, charge, far)
    finish_far(_GROUPS, charge, far)
    for part in prange((n + _PART - 1) // _PART):
        _add_far(signed(part), position, charge, softening2, constant, far, out_field)


@inner_kernel
def _add_far(
    part: int,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    far: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """Add the far images' field and potential for one part of the charges."""
    n, axis = charge.size, int(far[AXIS])
    a, b, scale = (axis + 1) % 3, (axis + 2) % 3, lanes(constant)
    plain, by_own = inverse_near(far, softening2)
    for i in range(_PART * part, min(_PART * part + _PART, n), 8):
        left = n - i
        x, y = load_some(position[a], i, left), load_some(position[b], i, left)
        z = load_some(position[axis], i, left)
        ex, ey, ez = far_field(x, y, z, far)
        store_some(out_field[a], i, left, load_some(out_field[a], i, left) + scale * ex)
        store_some(out_field[b], i, left, load_some(out_field[b], i, left) + scale * ey)
        store_some(out_field[axis], i, left, load_some(out_field[axis], i, left) + scale * ez)
        if out_field.shape[0] == 4:
            own = load_some(charge, i, left)
            level = lanes(plain) * (own - lanes(far[CHARGE])) - lanes(by_own) * own
            level = level + far_potential(x, y, z, far)
            store_some(out_field[3], i, left, load_some(out_field[3], i, left) + scale * level)
