"""Images of charges between two grounded plates, pair by pair.

The energy of a pair is that of gap_pair.py, right to 1e-11, and the field is its gradient. Heights
are followed to half a gap beyond the plates, where no charge can be for longer than a step. Each
charge gathers in the order of the others, so the bits do not depend on the threads.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.images.gap_far import WIDEST, far_table
from driftwell.images.gap_frame import HEAD, frame_of, height
from driftwell.images.gap_many import far_room, gap_many_sum, gap_tree_sum
from driftwell.images.gap_pair import NEAR, far_pair, near_pair, pair_table
from driftwell.images.image_sum import BY_TREE, SIGNATURE, Fineness, ImageSum
from driftwell.images.mirror_sum import weakened
from driftwell.images.mirror_tree import mirrored_room
from driftwell.kernels import inner_kernel, kernel, outer_kernel, threaded_kernel
from driftwell.kernels.cache_lines import room
from driftwell.kernels.pointers import CompiledFunction

Floats = NDArray[np.float64]

FAR_BYTES = 25_000_000
"""Of the tables and grids of farther images, while they are made."""
BY_GRID = 256
"""From so many charges on farther images are summed over a grid."""
_THREADED = 32
_BEYOND = 0.5
"""How far beyond a plate heights are followed, in gaps."""


@dataclass(frozen=True, slots=True)
class GapImages:
    """Two endless grounded plates with the charges between.

    point : (3,) m, of the first plate; normal : (3,) unit vector towards the other
    gap : m; blur : s, m, of the law; softening : e of the pairs' law, m
    fineness : of the tree that sums many charges; None: pair by pair, whatever their number
    frame : of gap_frame.py
    """

    point: Floats
    normal: Floats
    gap: float
    blur: float
    softening: float = 0.0
    fineness: Fineness | None = None
    frame: Floats = field(init=False)

    def __post_init__(self) -> None:
        frame = frame_of(self.point, self.normal, self.gap, self.blur)
        object.__setattr__(self, "frame", frame)

    def laid_out(self, n: int, threads: int) -> ImageSum:
        """The sum for `n` charges on so many threads."""
        if self.fineness is None or n < BY_GRID:
            summed = threaded_gap_sum if threads > 1 and n >= _THREADED else gap_sum
            table = np.concatenate([self.frame, pair_table()])
            return ImageSum(CompiledFunction(summed, SIGNATURE), table, room((3, n)))
        foot = self.normal @ self.point
        first = [*self.normal, foot, self.blur]
        second = [*self.normal, foot + self.gap, self.blur]
        table = np.concatenate([self.frame, first, second, far_table(self.blur / self.gap)])
        if n < BY_TREE:
            work = room((1, far_room(n)))
            return ImageSum(CompiledFunction(gap_many_sum, SIGNATURE), table, work)
        work = mirrored_room(n, 2, threads, self.fineness, self.blur > 0.0, far_room(n))
        return ImageSum(CompiledFunction(gap_tree_sum, SIGNATURE), table, work, True)

    def doubt(self, position: Floats, charge: Floats) -> str | None:
        """Where the grid is too coarse for how wide charges are spread, or `closest` too large."""
        there = position[:, charge != 0.0].T - self.point
        u = there @ self.normal
        if self.fineness is not None and charge.size >= BY_GRID and len(there):
            along = there @ self.frame[8:14].reshape(2, 3).T
            width = float(np.ptp(along, axis=0).max()) / self.gap
            if width > WIDEST[1]:
                return (
                    f"the charges are spread over {width:.3g} gaps along the plates that answer "
                    f"with images; the sum over many is made for {WIDEST[1]:g}, and errs beyond. "
                    'Where that matters, take [coulomb] method = "direct"'
                )
        return weakened(2.0 * np.minimum(u, self.gap - u), self.blur, self.softening)


@kernel
def gap_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """Field and potential of the images at each charge, on one thread.

    Parameters
    ----------
    position : (3, n) float64, m; charge : (n,) float64, C
    constant : 1/(4 pi eps0), N m^2/C^2
    table : frame (gap_frame.py), then that of gap_pair.py; work : (3, n), overwritten
    out_image : (4, n) float64, V/m (3) and V, overwritten
    """
    _heights(position, table, work)
    for i in range(charge.size):
        _gather(i, position, charge, constant, table, work, out_image)


@threaded_kernel
def threaded_gap_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """The same as :func:`gap_sum`, with the same bits, on all of numba's threads."""
    _heights(position, table, work)
    for i in prange(charge.size):
        _gather(i, position, charge, constant, table, work, out_image)


@inner_kernel
def _heights(position: np.ndarray, table: np.ndarray, work: np.ndarray) -> None:
    """Heights in gaps, and sines and cosines of pi times them, into rows of `work`."""
    for i in range(position.shape[1]):
        u = min(max(height(position, table, i), -_BEYOND), 1.0 + _BEYOND)
        work[0, i] = u
        work[1, i], work[2, i] = math.sin(math.pi * u), math.cos(math.pi * u)


@outer_kernel
def _gather(
    i: int,
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """The sums at charge `i`."""
    nx, ny, nz, d = table[3], table[4], table[5], table[6]
    blur2 = (table[7] / d) ** 2
    x, y, z, u = position[0, i], position[1, i], position[2, i], work[0, i]
    level = ex = ey = ez = eu = 0.0
    for j in range(charge.size):
        q = charge[j]
        if q == 0.0:
            continue
        dx, dy, dz = x - position[0, j], y - position[1, j], z - position[2, j]
        along = nx * dx + ny * dy + nz * dz
        dx, dy, dz = (dx - along * nx) / d, (dy - along * ny) / d, (dz - along * nz) / d
        a = u - work[0, j]
        rho2 = dx * dx + dy * dy + dz * dz + blur2
        if rho2 < NEAR * NEAR:
            g, g_rho, g_u = near_pair(rho2, a, u + work[0, j] - 1.0, table, HEAD)
        else:
            g, g_rho, g_u = far_pair(
                rho2, a, work[1, i], work[2, i], work[1, j], work[2, j], table, HEAD
            )
        level += q * g
        push = q * g_rho
        ex += push * dx
        ey += push * dy
        ez += push * dz
        eu += q * g_u
    true = height(position, table, i)
    if true < -_BEYOND or true > 1.0 + _BEYOND:
        eu = 0.0
    scale = -constant / (d * d)
    out_image[0, i] = scale * (2.0 * ex + eu * nx)
    out_image[1, i] = scale * (2.0 * ey + eu * ny)
    out_image[2, i] = scale * (2.0 * ez + eu * nz)
    out_image[3, i] = constant / d * level
