"""What field the charges of a cell feel, to a factor: errors are judged against it.

The smooth field at the middle of a group of charges is taken from the cells' net charges, looked
at under a wide angle; to it comes what a charge's next neighbours do,

    F^2 = |sum_cells Q R / R^3|^2 + (q N^(2/3) / reach^2)^2,   q = |Q| / N                    (1)

the field of one charge at the distance of the next one, about J. Holtsmark's normal field (Ann.
Phys. 363 (1919) 577). A cell of several groups takes the mean of F^-2, which is what the mean
square of relative errors is made of. F is never taken smaller than a fiftieth of its rms over all
charges: the few near a point without field would cost much and change no mean.
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.tree.cells import (
    AMOUNT,
    COUNT,
    NET,
    REACH,
    RIGHT,
    WANT,
    Tree,
    X,
    Y,
    Z,
)

GROUP = 128
"""Most charges of a group, if it is no leaf."""
_ANGLE2 = 1.0
_FLOOR2 = 0.02**2


@outer_kernel
def scale_task(low: int, high: int, tree: Tree, softening2: float, work_path: np.ndarray) -> None:
    """F^2 of the leaves among the cells ``low:high`` of a task, that of their group."""
    cell = low
    while cell < high:
        row = tree.cells[cell]
        if row[RIGHT] != 0.0 and row[COUNT] > GROUP:
            cell += 1
            continue
        square = _field2(cell, tree, softening2, work_path)
        last = cell
        while tree.cells[last, RIGHT] != 0.0:
            last = int(tree.cells[last, RIGHT])
        while cell <= last:
            tree.want[cell] = square
            cell += 1


@outer_kernel
def settle_scale(cells: int, tolerance: float, tree: Tree) -> None:
    """From F^2 of the leaves to what all cells can bear, ``WANT``."""
    total = 0.0
    for cell in range(cells):
        if tree.cells[cell, RIGHT] == 0.0:
            total += tree.cells[cell, COUNT] * tree.want[cell]
    floor = _FLOOR2 * total / tree.cells[0, COUNT]
    for cell in range(cells - 1, -1, -1):
        row = tree.cells[cell]
        if row[RIGHT] != 0.0:
            left, right = cell + 1, int(row[RIGHT])
            a, b = tree.cells[left, COUNT], tree.cells[right, COUNT]
            inverse = (a * tree.want[left] + b * tree.want[right]) / (a + b)
        else:
            square = max(tree.want[cell], floor)
            inverse = 1.0 / square if square > 0.0 else 0.0
        tree.want[cell] = inverse
        row[WANT] = math.sqrt(inverse) / tolerance


@inner_kernel
def _field2(group: int, tree: Tree, softening2: float, work_path: np.ndarray) -> float:
    """F^2 of a group, eq. (1), in the tree's units; a near leaf counts as a cloud of its reach."""
    row = tree.cells[group]
    ex = ey = ez = 0.0
    work_path[0] = 0
    top = 1
    while top > 0:
        top -= 1
        cell = work_path[top]
        if cell == group:
            continue
        other = tree.cells[cell]
        dx, dy, dz = row[X] - other[X], row[Y] - other[Y], row[Z] - other[Z]
        square = dx * dx + dy * dy + dz * dz
        reach2 = other[REACH] * other[REACH]
        near = reach2 >= _ANGLE2 * square
        if near and other[RIGHT] != 0.0:
            work_path[top] = int(other[RIGHT])
            work_path[top + 1] = cell + 1
            top += 2
            continue
        square += softening2
        if near:
            square += reach2
        if square > 0.0:
            s = other[NET] / (square * math.sqrt(square))
            ex += s * dx
            ey += s * dy
            ez += s * dz
    between2 = row[REACH] * row[REACH] / row[COUNT] ** (2.0 / 3.0) + softening2
    next_one = row[AMOUNT] / (row[COUNT] * between2) if between2 > 0.0 else 0.0
    return ex * ex + ey * ey + ez * ez + next_one * next_one
