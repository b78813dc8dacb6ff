"""The walk over pairs of cells: what is far goes by expansions, what is near charge by charge.

Each cell gathers from all others. What is done with a pair (A, B), and which of the two is cut
where nothing can be done yet, depends on the pair and not on who asks, so A hears B in the form in
which B hears A, and the forces between them cancel.
"""

from __future__ import annotations

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.tree.cells import (
    BATCH,
    CELL,
    FARS,
    FEELING,
    PATH,
    RANGES,
    REACH,
    RIGHT,
    STRENGTH,
    VERDICTS,
    Desk,
    Tree,
    X,
    Y,
    Z,
)
from driftwell.tree.expansions import (
    BasisType,
    add_lanes,
    expansion_order,
    local_row,
    pass_down,
    side_by_side,
)
from driftwell.tree.forces import (
    AT_ONE_PLACE,
    hear,
    local_lanes,
    one_by_one,
    push,
    push_potential,
    settle,
)
from driftwell.tree.verdict import BY_CHARGE, FAR, NOTHING, verdicts


@inner_kernel
def _other_is_cut(a: np.ndarray, b: np.ndarray, cell_a: int, cell_b: int) -> bool:
    """Whether of two near cells, not both leaves, b is cut rather than a: the larger inner one."""
    if a[RIGHT] == 0.0 or b[RIGHT] == 0.0:
        return bool(a[RIGHT] == 0.0)
    return b[REACH] > a[REACH] or (b[REACH] == a[REACH] and cell_b < cell_a)


@outer_kernel
def _visit(
    of: BasisType,
    cell: int,
    quiet: bool,
    begin: int,
    end: int,
    own: int,
    potential: bool,
    tree: Tree,
    desk: Desk,
    softening2: float,
) -> int:
    """Let one cell gather from the cells that wait for it; returns the end of those left over.

    quiet : only find out what is left to its children
    begin, end : the waiting cells; those left to the children follow them
    own : where its local expansion begins, added to
    potential : whether the potential is wanted of near charges as well
    """
    order = expansion_order(of)
    row = tree.cells[cell]
    is_leaf = row[RIGHT] == 0.0
    waiting, queue, ranges = desk.waiting, desk.queue, desk.ranges
    nobody = tree.cells.shape[0] - 1
    levels_at_one_place = potential and softening2 > AT_ONE_PLACE
    left_over = end
    far = near = 0
    for k in range(begin, end):
        queue[k - begin] = waiting[k]
    head, tail = 0, end - begin
    while head < tail:
        count = min(tail - head, BATCH)
        for k in range(count, BATCH):
            queue[head + k] = nobody
        side_by_side(tree.cells.reshape(-1), BATCH, CELL, queue, head, desk.lanes)
        verdicts(row, desk.lanes, order, desk.lanes[VERDICTS:])
        for k in range(count):
            other, found = queue[head + k], desk.lanes[VERDICTS + k]
            if desk.lanes[BATCH * STRENGTH + k] == 0.0:
                continue  # nothing comes from cells without charge
            if found == FAR or (found == NOTHING and levels_at_one_place):
                desk.far[far] = other
                far += 1
            elif found == BY_CHARGE:
                if not quiet:
                    one_by_one(of, cell, other, tree, softening2, desk.lanes)
            elif other == cell:
                if is_leaf:
                    near = _note_range(cell, tree.first, ranges, near)
                else:
                    waiting[left_over], waiting[left_over + 1] = cell + 1, int(row[RIGHT])
                    left_over += 2
            elif found == NOTHING:
                pass
            elif is_leaf and tree.cells[other, RIGHT] == 0.0:
                near = _note_range(other, tree.first, ranges, near)
            elif _other_is_cut(row, tree.cells[other], cell, other):
                queue[tail], queue[tail + 1] = other + 1, int(tree.cells[other, RIGHT])
                tail += 2
            else:
                waiting[left_over] = other
                left_over += 1
        head += count
        if near > RANGES - BATCH:
            _push_all(of, cell, near, potential, tree, desk, softening2)
            near = 0
        if quiet:
            far = 0
        elif far > FARS - BATCH:
            hear(of, cell, far, desk.far, tree, softening2, desk.lanes)
            far = 0
    if not quiet:
        hear(of, cell, far, desk.far, tree, softening2, desk.lanes)
        add_lanes(of, desk.lanes[local_lanes(of) :], desk.local, own)
        if is_leaf:
            _push_all(of, cell, near, potential, tree, desk, softening2)
            settle(of, cell, tree, desk.local, own)
    return left_over


@outer_kernel
def _push_all(
    of: BasisType,
    cell: int,
    near: int,
    potential: bool,
    tree: Tree,
    desk: Desk,
    softening2: float,
) -> None:
    """Add near charges, in so many ranges, to a leaf's fields and, where wanted, potentials."""
    push(of, cell, near, desk.ranges, tree, softening2)
    if potential:
        push_potential(cell, near, desk.ranges, tree, softening2)


@inner_kernel
def _note_range(cell: int, first: np.ndarray, ranges: np.ndarray, near: int) -> int:
    """Add a leaf's charges to the near ranges; returns their number."""
    low, high = first[cell], first[cell + 1]
    if near > 0 and ranges[2 * near - 1] == low:
        ranges[2 * near - 1] = high
        return near
    ranges[2 * near], ranges[2 * near + 1] = low, high
    return near + 1


@outer_kernel
def gather_above(of: BasisType, potential: bool, tree: Tree, desk: Desk, softening2: float) -> None:
    """Let the cells above the tasks gather; what they pass down to the tasks is kept for them."""
    length = local_row(of)
    for k in range(length):
        desk.local[k] = 0.0
    desk.waiting[0] = 0
    top = _put(desk.path, 0, 0, 0, 1, 0, 0)
    task = 0
    while top > 0:
        top -= PATH
        cell, begin, end = desk.path[top], desk.path[top + 1], desk.path[top + 2]
        level, parent = desk.path[top + 3], desk.path[top + 4]
        own = level * length
        _inherit(of, cell, parent, level, own, tree, desk)
        if cell == tree.tasks[task]:
            for k in range(length):
                tree.above[task * length + k] = desk.local[own + k]
            task += 1
            continue
        left_over = _visit(of, cell, False, begin, end, own, potential, tree, desk, softening2)
        right = int(tree.cells[cell, RIGHT])
        top = _put(desk.path, top, right, end, left_over, level + 1, cell)
        top = _put(desk.path, top, cell + 1, end, left_over, level + 1, cell)


@outer_kernel
def gather(
    of: BasisType, task: int, potential: bool, tree: Tree, desk: Desk, softening2: float
) -> None:
    """The fields of all charges at those of one task, in the tree's order and units."""
    length = local_row(of)
    root = tree.tasks[task]
    desk.waiting[0] = 0
    begin, end, cell = 0, 1, 0
    while cell != root:
        left_over = _visit(of, cell, True, begin, end, 0, potential, tree, desk, softening2)
        begin, end = end, left_over
        right = int(tree.cells[cell, RIGHT])
        cell = cell + 1 if root < right else right
    for k in range(length):
        desk.local[k] = tree.above[task * length + k]
    top = _put(desk.path, 0, root, begin, end, 0, root)
    while top > 0:
        top -= PATH
        cell, begin, end = desk.path[top], desk.path[top + 1], desk.path[top + 2]
        if tree.cells[cell, FEELING] == 0.0:
            continue
        level, parent = desk.path[top + 3], desk.path[top + 4]
        own = level * length
        _inherit(of, cell, parent, level, own, tree, desk)
        left_over = _visit(of, cell, False, begin, end, own, potential, tree, desk, softening2)
        right = int(tree.cells[cell, RIGHT])
        if right > 0:
            top = _put(desk.path, top, right, end, left_over, level + 1, cell)
            top = _put(desk.path, top, cell + 1, end, left_over, level + 1, cell)


@outer_kernel
def _inherit(
    of: BasisType, cell: int, parent: int, level: int, own: int, tree: Tree, desk: Desk
) -> None:
    """Begin a cell's local expansion with its parent's."""
    if level > 0:
        a, b = tree.cells[cell], tree.cells[parent]
        x, y, z = a[X] - b[X], a[Y] - b[Y], a[Z] - b[Z]
        pass_down(of, x, y, z, desk.local, own - local_row(of), own)


@inner_kernel
def _put(
    path: np.ndarray, top: int, cell: int, begin: int, end: int, level: int, parent: int
) -> int:
    path[top], path[top + 1], path[top + 2] = cell, begin, end
    path[top + 3], path[top + 4] = level, parent
    return top + PATH
