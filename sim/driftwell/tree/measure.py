"""The tree is measured, from the leaves up: centres, extents, amounts and moments of its cells."""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.lanes import fused, lanes, larger, load, most, total
from driftwell.tree.cells import (
    AMOUNT,
    BATCH,
    COUNT,
    NET,
    REACH,
    RIGHT,
    SPREAD,
    SQUARES,
    STRENGTH,
    Tree,
    X,
    Y,
    Z,
)
from driftwell.tree.expansions import (
    BasisType,
    add_charges,
    add_moments,
    finish_moments,
    full_row,
    moment_row,
)

_ROUNDING = 4e-16
"""By this part of its coordinates a centre may miss the true one."""


@outer_kernel
def climb(of: BasisType, low: int, high: int, tree: Tree, work_lanes: np.ndarray) -> None:
    """Measure the cells ``low:high``, the last first; children of other cells are measured."""
    for cell in range(high - 1, low - 1, -1):
        if tree.cells[cell, RIGHT] == 0.0:
            _measure_leaf(of, cell, tree, work_lanes)
        else:
            measure_parent(of, cell, tree)


@outer_kernel
def _measure_leaf(of: BasisType, cell: int, tree: Tree, work_lanes: np.ndarray) -> None:
    """Overwrite the row and the moments of a leaf.

    Distances count half by charge, as a source, and half by number, as those who feel.
    """
    x, y, z, charge = tree.place[0], tree.place[1], tree.place[2], tree.place[3]
    low, high = tree.first[cell], tree.first[cell + 1]
    count = float(high - low)
    amount = net = squares = 0.0
    for k in range(low, high):
        amount += abs(charge[k])
        net += charge[k]
        squares += charge[k] * charge[k]
    per_charge = 0.5 / amount if amount > 0.0 else 0.0
    per_one = 0.5 / count if amount > 0.0 else 1.0 / count
    cx = cy = cz = 0.0
    for k in range(low, high):
        share = per_charge * abs(charge[k]) + per_one
        cx += share * x[k]
        cy += share * y[k]
        cz += share * z[k]
    if _at_one_place(low, high, tree):
        cx, cy, cz = x[low], y[low], z[low]
    row = tree.cells[cell]
    row[X], row[Y], row[Z] = cx, cy, cz
    row[AMOUNT], row[NET], row[SQUARES], row[COUNT] = amount, net, squares, count
    _measure_extent(cell, tree)
    for k in range(BATCH * full_row(of)):
        work_lanes[k] = 0.0
    for i in range(low, high, BATCH):
        add_charges(
            of,
            lanes(cx) - load(x, i),
            lanes(cy) - load(y, i),
            lanes(cz) - load(z, i),
            load(charge, i),
            work_lanes,
        )
    finish_moments(of, work_lanes, tree.moments, cell * moment_row(of))
    _measure_strength(of, cell, tree)


@outer_kernel
def measure_parent(of: BasisType, cell: int, tree: Tree) -> None:
    """Overwrite the row and the moments of a cell from those of its children."""
    row = tree.cells[cell]
    left, right = cell + 1, int(row[RIGHT])
    a, b = tree.cells[left], tree.cells[right]
    amount, count = a[AMOUNT] + b[AMOUNT], a[COUNT] + b[COUNT]
    share = b[COUNT] / count
    if amount > 0.0:
        share = 0.5 * share + 0.5 * b[AMOUNT] / amount
    for axis in range(3):
        row[axis] = a[axis] + share * (b[axis] - a[axis])
    row[AMOUNT], row[COUNT] = amount, count
    row[NET], row[SQUARES] = a[NET] + b[NET], a[SQUARES] + b[SQUARES]
    _measure_extent(cell, tree)
    length = moment_row(of)
    for k in range(length):
        tree.moments[cell * length + k] = 0.0
    _add_child(of, cell, left, tree)
    _add_child(of, cell, right, tree)
    _measure_strength(of, cell, tree)


@inner_kernel
def _add_child(of: BasisType, cell: int, child: int, tree: Tree) -> None:
    row, other = tree.cells[cell], tree.cells[child]
    add_moments(
        of,
        row[X] - other[X],
        row[Y] - other[Y],
        row[Z] - other[Z],
        tree.moments,
        child * moment_row(of),
        cell * moment_row(of),
    )


@inner_kernel
def _measure_strength(of: BasisType, cell: int, tree: Tree) -> None:
    """The amount S with which a cell counts in error bounds, at most the sum of |Q|.

    S is the smallest for which net charge, dipole and quadrupole are at most S spread^k, but no
    smaller than chance makes the higher ones where signs are mixed: the root of the sum of Q^2.
    """
    row, m = tree.cells[cell], tree.moments[cell * moment_row(of) :]
    strength = max(abs(m[0]), math.sqrt(row[SQUARES]))
    spread = row[SPREAD]
    if spread > 0.0:
        dipole = math.sqrt(m[1] * m[1] + m[2] * m[2] + m[3] * m[3])
        quadrupole = math.sqrt(m[4] * m[4] + m[5] * m[5] + m[6] * m[6] + m[7] * m[7] + m[8] * m[8])
        strength = max(strength, dipole / spread, 1.4 * quadrupole / (spread * spread))
    row[STRENGTH] = min(strength, row[AMOUNT])


@inner_kernel
def _at_one_place(low: int, high: int, tree: Tree) -> bool:
    """Whether all charges of a leaf stand at the very same place."""
    for axis in range(3):
        x = tree.place[axis]
        for k in range(low + 1, high):
            if x[k] != x[low]:
                return False
    return True


@outer_kernel
def _measure_extent(cell: int, tree: Tree) -> None:
    """Overwrite a cell's reach and spread: those of its charges about its centre.

    The copies behind the last charge are taken in with it; they change nothing to speak of.
    """
    row = tree.cells[cell]
    low, count = tree.first[cell], row[COUNT]
    per_charge = lanes(0.5 / row[AMOUNT] if row[AMOUNT] > 0.0 else 0.0)
    per_one = lanes(0.5 / count if row[AMOUNT] > 0.0 else 1.0 / count)
    x, y, z, charge = tree.place[0], tree.place[1], tree.place[2], tree.place[3]
    cx, cy, cz = lanes(row[X]), lanes(row[Y]), lanes(row[Z])
    none = lanes(0.0)
    farthest, powers = none, none
    for i in range(low, low + int(count), BATCH):
        dx, dy, dz = load(x, i) - cx, load(y, i) - cy, load(z, i) - cz
        square = fused(dx, dx, fused(dy, dy, dz * dz))
        farthest = larger(farthest, square)
        sixth = square * square * square
        own = load(charge, i)
        share = fused(per_charge, larger(own, none - own), per_one)
        powers = fused(share, sixth * sixth, powers)
    reach = math.sqrt(most(farthest))
    if reach > 0.0:
        reach += _ROUNDING * (abs(row[X]) + abs(row[Y]) + abs(row[Z]))
    row[REACH], row[SPREAD] = reach, min(total(powers) ** (1.0 / 12.0), reach)
