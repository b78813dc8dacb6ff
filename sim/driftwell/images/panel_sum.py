"""Images of charges between electrodes: panels carry what the charges induce on them.

    U = -1/2 K b.s,   s = A^-1 b,   b_k = sum_j q_j p_k(x_j)                                (1)
    E_i = K sum_k s_k grad p_k(x_i)                                                        (2)

with p_k the potential of one unit on panel k (boundary/triangle.py) and A^-1 of panel_matrix.py.
The field is the exact gradient of the energy, save that far panels are taken by points: where a
panel passes from one form to the other, its potential jumps by 1e-8 of itself.

Three passes share the threads: over panels for b and for s, over charges for (2); each writes only
its own, and sums run in the order of the charges or the panels, so that the bits do not depend on
the number of threads.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.boundary.triangle import COLUMNS, panel_field, panel_potential, panel_rows
from driftwell.images.image_sum import SIGNATURE, ImageSum
from driftwell.images.panel_matrix import answering
from driftwell.kernels import kernel, outer_kernel, threaded_kernel
from driftwell.kernels.cache_lines import room
from driftwell.kernels.pointers import CompiledFunction

Floats = NDArray[np.float64]

_FINE, _MANY, _LOOKED_AT = 3.0, 0.1, 200
"""Distance in longest sides from which on forces are right to 1 %; the share of charges nearer
than that which is said; how many charges are looked at."""
_RUN = 64
"""Terms of a run of a long sum."""


@dataclass(frozen=True, slots=True)
class PanelImages:
    """Electrodes that answer with charges on their panels.

    corners : (k, 3 corners, 3 axes) float64, m
    """

    corners: Floats
    table: Floats = field(init=False)

    def __post_init__(self) -> None:
        rows = panel_rows(self.corners)
        inverse = answering(self.corners)
        count = np.array([len(rows)], dtype=np.float64)
        object.__setattr__(self, "table", np.concatenate([count, rows.ravel(), inverse.ravel()]))

    def laid_out(self, n: int, threads: int) -> ImageSum:
        """The sum for `n` charges on so many threads."""
        summed = threaded_panel_sum if threads > 1 else panel_sum
        work = room((2, len(self.corners)))
        return ImageSum(CompiledFunction(summed, SIGNATURE), self.table, work)

    def doubt(self, position: Floats, charge: Floats) -> str | None:
        """Where many charges are nearer to the panels than these are fine."""
        there = position[:, charge != 0.0].T
        there = there[:: max(1, -(-len(there) // _LOOKED_AT))]
        if not len(there):
            return None
        middles = self.corners.mean(axis=1)
        sides = self.corners - np.roll(self.corners, 1, axis=1)
        sizes = np.linalg.norm(sides, axis=2).max(axis=1)
        near = [
            bool((np.linalg.norm(middles - each, axis=1) < _FINE * sizes).any()) for each in there
        ]
        share = float(np.mean(near))
        if share <= _MANY:
            return None
        return (
            f"{100.0 * share:.2g} % of the charges are nearer to the electrodes than "
            f"{_FINE:g} triangles are long; there the images' force errs by more than 1 %. Where "
            "that matters, raise [images] panels"
        )


@kernel
def panel_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """Field and potential of the images at each charge, eqs. (1) and (2), on one thread.

    Parameters
    ----------
    position : (3, n) float64, m; charge : (n,) float64, C
    constant : 1/(4 pi eps0), N m^2/C^2
    table : number of panels, their rows and A^-1, flat; work : (2, panels), overwritten
    out_image : (4, n) float64, V/m (3) and V, overwritten
    """
    panels = int(table[0])
    for k in range(panels):
        _induce(k, position, charge, table, work)
    for k in range(panels):
        _answer(k, panels, table, work)
    for i in range(charge.size):
        _feel(i, panels, position, constant, table, work, out_image)


@threaded_kernel
def threaded_panel_sum(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """The same as :func:`panel_sum`, with the same bits, on all of numba's threads."""
    panels = int(table[0])
    for k in prange(panels):
        _induce(k, position, charge, table, work)
    for k in prange(panels):
        _answer(k, panels, table, work)
    for i in prange(charge.size):
        _feel(i, panels, position, constant, table, work, out_image)


@outer_kernel
def _induce(
    k: int, position: np.ndarray, charge: np.ndarray, table: np.ndarray, work: np.ndarray
) -> None:
    """b_k of (1)."""
    row = table[1 + k * COLUMNS : 1 + (k + 1) * COLUMNS]
    x, y, z = position[0], position[1], position[2]
    result = 0.0
    for first in range(0, charge.size, _RUN):
        part = 0.0
        for j in range(first, min(first + _RUN, charge.size)):
            if charge[j] != 0.0:
                part += charge[j] * panel_potential(row, x[j], y[j], z[j])
        result += part
    work[0, k] = result / row[21]


@outer_kernel
def _answer(k: int, panels: int, table: np.ndarray, work: np.ndarray) -> None:
    """s_k of (1), over the panel's area."""
    start = 1 + panels * COLUMNS + k * panels
    b = work[0]
    result = 0.0
    for first in range(0, panels, _RUN):
        part = 0.0
        for m in range(first, min(first + _RUN, panels)):
            part += table[start + m] * b[m]
        result += part
    work[1, k] = result / table[1 + k * COLUMNS + 21]


@outer_kernel
def _feel(
    i: int,
    panels: int,
    position: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """Eq. (2), and the potential, at charge `i`."""
    x, y, z = position[0, i], position[1, i], position[2, i]
    ex = ey = ez = level = 0.0
    for first in range(0, panels, _RUN):
        fx = fy = fz = part = 0.0
        for k in range(first, min(first + _RUN, panels)):
            s = work[1, k]
            row = table[1 + k * COLUMNS : 1 + (k + 1) * COLUMNS]
            potential, gx, gy, gz = panel_field(row, x, y, z)
            part += s * potential
            fx += s * gx
            fy += s * gy
            fz += s * gz
        level += part
        ex += fx
        ey += fy
        ez += fz
    out_image[0, i] = -constant * ex
    out_image[1, i] = -constant * ey
    out_image[2, i] = -constant * ez
    out_image[3, i] = -constant * level
