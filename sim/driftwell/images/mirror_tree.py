"""The images of many charges in one plane, or the nearest in two, by the tree.

The charges, without their charge, and their mirrored ones, with minus it, are one set; the tree
(package tree) gives field and potential of the mirrored at the charges. Cells without charge push
nobody, and cells that none of the charges stand in gather nothing, so that what is summed is what
the images do to the charges. The law is that of mirror_sum.py, K / (r^2 + s^2)^(1/2).

The field is the gradient of an energy to the accuracy that the tree sums with.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import prange, types
from numpy.typing import NDArray

from driftwell.images.image_sum import Fineness
from driftwell.kernels import inner_kernel, threaded_kernel, view_kernel
from driftwell.kernels.lane_values import emitted_code
from driftwell.kernels.pointers import CompiledFunction, call_address
from driftwell.tree.cells import OWNER
from driftwell.tree.gathering import tree_room
from driftwell.tree.stages import tree_field

Floats = NDArray[np.float64]

_SIGNATURE = "void(float64[:,::1], float64[::1], float64, float64, float64[:,::1], float64[:,::1])"
_ADDRESS, _PLACES, _BEHIND = OWNER, OWNER + 1, OWNER + 2
"""In the head of the work space: the address of the tree's sum, where places and charges begin, and
where what is behind them does."""
BLOCKS = 32
"""Blocks of charges that threads lay out."""
PLANE = 5
"""Numbers that tell of a plane: its normal, towards the charges; the normal's product with a point
of it, m; s, m."""


def mirrored_room(
    n: int, planes: int, threads: int, fineness: Fineness, blurred: bool, behind: int = 0
) -> Floats:
    """(1, size) float64, work space for `n` charges and their mirrored ones in so many planes.

    behind : numbers wanted besides, from :func:`behind_it` on
    """
    every = (1 + planes) * n
    own = 4 * every + 16
    work = tree_room(
        every,
        threads,
        fineness.leaf,
        fineness.tolerance,
        fineness.order,
        blurred,
        fineness.mixed,
        behind=own + behind,
    )
    address = CompiledFunction(tree_field, _SIGNATURE).__wrapper_address__()
    work[0, _ADDRESS : _ADDRESS + 1].view(np.int64)[0] = address
    begin = work.shape[1] - own - behind
    work[0, _PLACES], work[0, _BEHIND] = begin + -begin % 8, work.shape[1] - behind
    return work


@inner_kernel
def behind_it(work: np.ndarray) -> int:
    """Where the numbers wanted besides begin."""
    return int(work[0, _BEHIND])


@threaded_kernel
def plane_tree_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """Field and potential of the images in a plane at each charge.

    Parameters
    ----------
    position : (3, n) float64, m; charge : (n,) float64, C
    constant : 1/(4 pi eps0), N m^2/C^2
    table : (PLANE,); work : of :func:`mirrored_room`
    out_image : (4, n) float64, V/m (3) and V, overwritten
    """
    for block in prange(BLOCKS):
        lay_out(block, position, charge, table, 0, 1, work)
    sum_mirrored(charge.size, 1, table[4] * table[4], constant, work, out_image)


@inner_kernel
def lay_out(
    block: int,
    position: np.ndarray,
    charge: np.ndarray,
    table: np.ndarray,
    first: int,
    planes: int,
    work: np.ndarray,
) -> None:
    """Put one of :data:`BLOCKS` blocks of charges, and their mirrored ones, into the work space.

    table : the planes', one after the other, from `first` on
    """
    n = charge.size
    every = (1 + planes) * n
    begin = int(work[0, _PLACES])
    for i in range(block * n // BLOCKS, (block + 1) * n // BLOCKS):
        x, y, z = position[0, i], position[1, i], position[2, i]
        work[0, begin + i] = x
        work[0, begin + every + i] = y
        work[0, begin + 2 * every + i] = z
        work[0, begin + 3 * every + i] = 0.0
        for plane in range(planes):
            row = first + PLANE * plane
            nx, ny, nz = table[row], table[row + 1], table[row + 2]
            twice = 2.0 * (nx * x + ny * y + nz * z - table[row + 3])
            k = begin + (1 + plane) * n + i
            work[0, k] = x - twice * nx
            work[0, k + every] = y - twice * ny
            work[0, k + 2 * every] = z - twice * nz
            work[0, k + 3 * every] = -charge[i]


@view_kernel
def sum_mirrored(
    n: int,
    planes: int,
    softening2: float,
    constant: float,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """The tree's sum over what :func:`lay_out` put there; overwrites `out_image`."""
    every = (1 + planes) * n
    begin = int(work[0, _PLACES])
    address = work[0, _ADDRESS : _ADDRESS + 1].view(np.int64)[0]
    places = work[0, begin : begin + 3 * every].reshape((3, every))
    amounts = work[0, begin + 3 * every : begin + 4 * every]
    call_tree(address, places, amounts, softening2, constant, work, out_image)


@emitted_code
def call_tree(
    typing: Any,
    address: Any,
    places: Any,
    amounts: Any,
    softening2: Any,
    constant: Any,
    work: Any,
    out_field: Any,
) -> Any:
    """Call the tree's sum at an address."""
    number = types.float64
    signature = types.void(types.int64, places, amounts, number, number, work, out_field)

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        inner = types.void(*sig.args[1:])
        call_address(context, builder, inner, args[0], args[1:])
        return context.get_dummy_value()

    return signature, emitted
