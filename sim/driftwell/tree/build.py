"""The tree is grown: charges sorted into leaves of equal number, by halving boxes.

A cell is cut in the middle of the longest side of the box around its charges, at the nearest
number of whole leaves. A cut by the middle cannot part charges at one place, and takes a thousand
levels where they crowd towards a point: below some depth cells are cut by numbers alone.

The cells above the tasks are cut level by level, the cells of a level and then the tasks by all
threads at once.
"""

from __future__ import annotations

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.lanes import larger, least, load, most, smaller
from driftwell.tree.cells import DEEPEST, RIGHT, Tree


@inner_kernel
def leaves_of(n: int, leaf: int) -> int:
    """Number of leaves of n charges."""
    return (n + leaf - 1) // leaf


@outer_kernel
def begin_level(n: int, tree: Tree) -> None:
    """Put the root alone into the first level of cells above the tasks."""
    _put(tree.level, 0, 0, 0, n, 0)


@outer_kernel
def cut_in_level(k: int, most_leaves: int, leaf: int, tree: Tree) -> None:
    """Cut the level's cell `k` and note its children, or make it a task if it has few leaves."""
    cell, low = tree.level[4 * k], tree.level[4 * k + 1]
    high, depth = tree.level[4 * k + 2], tree.level[4 * k + 3]
    tree.first[cell] = low
    tree.depths[cell] = depth
    is_task = leaves_of(high - low, leaf) <= most_leaves
    tree.is_task[cell] = is_task
    tree.below[8 * k] = -1
    if not is_task:
        _divide(cell, low, high, depth, leaf, tree, tree.below, 8 * k)


@outer_kernel
def cut_level(count: int, most_leaves: int, leaf: int, tree: Tree) -> None:
    """Cut all cells of a level, on one thread."""
    for k in range(count):
        cut_in_level(k, most_leaves, leaf, tree)


@outer_kernel
def next_level(count: int, tops: int, tree: Tree) -> tuple[int, int]:
    """Go on to the children noted; returns their number, and the number of cells cut so far."""
    children = 0
    for k in range(count):  # before the children overwrite the level
        if tree.below[8 * k] >= 0:
            tree.tops[tops] = tree.level[4 * k]
            tops += 1
    for k in range(count):
        if tree.below[8 * k] >= 0:
            for number in range(8):
                tree.level[4 * children + number] = tree.below[8 * k + number]
            children += 2
    return children, tops


@outer_kernel
def list_tasks(tree: Tree, work_path: np.ndarray) -> int:
    """Collect the tasks' root cells in the order of the walk; returns their number."""
    tasks = 0
    work_path[0] = 0
    top = 1
    while top > 0:
        top -= 1
        cell = work_path[top]
        if tree.is_task[cell]:
            tree.tasks[tasks] = cell
            tasks += 1
        else:
            work_path[top], work_path[top + 1] = int(tree.cells[cell, RIGHT]), cell + 1
            top += 2
    return tasks


@outer_kernel
def grow(
    root: int, depth: int, low: int, high: int, leaf: int, tree: Tree, work_path: np.ndarray
) -> None:
    """Cut the charges ``low:high`` of a task's root down to leaves."""
    top = _put(work_path, 0, root, low, high, depth)
    while top > 0:
        top -= 4
        cell, low, high, depth = (
            work_path[top],
            work_path[top + 1],
            work_path[top + 2],
            work_path[top + 3],
        )
        tree.first[cell] = low
        if high - low <= leaf:
            tree.cells[cell, RIGHT] = 0.0
        else:
            top = _divide(cell, low, high, depth, leaf, tree, work_path, top)


@inner_kernel
def _divide(
    cell: int,
    low: int,
    high: int,
    depth: int,
    leaf: int,
    tree: Tree,
    work_path: np.ndarray,
    top: int,
) -> int:
    """Cut one cell and put its children on the path, the left one last."""
    left = cut(tree, low, high, leaf, depth)
    right = cell + 2 * left
    tree.cells[cell, RIGHT] = right
    between = low + left * leaf
    top = _put(work_path, top, right, between, high, depth + 1)
    return _put(work_path, top, cell + 1, low, between, depth + 1)


@inner_kernel
def _put(work_path: np.ndarray, top: int, cell: int, low: int, high: int, depth: int) -> int:
    work_path[top], work_path[top + 1] = cell, low
    work_path[top + 2], work_path[top + 3] = high, depth
    return top + 4


@outer_kernel
def cut(tree: Tree, low: int, high: int, leaf: int, depth: int) -> int:
    """Part the charges ``low:high`` in two; returns the number of leaves in the left part."""
    x, y, z, order = tree.place[0], tree.place[1], tree.place[2], tree.order
    x0, x1 = extent(x, low, high)
    y0, y1 = extent(y, low, high)
    z0, z1 = extent(z, low, high)
    count = leaves_of(high - low, leaf)
    key, u, v, start, end = x, y, z, x0, x1
    if y1 - y0 > end - start:
        key, u, v, start, end = y, x, z, y0, y1
    if z1 - z0 > end - start:
        key, u, v, start, end = z, x, y, z0, z1
    left = count // 2
    if end > start and depth < DEEPEST:
        at = _part_by_value(key, u, v, order, low, high, _middle(start, end))
        left = min(max((at - low + leaf // 2) // leaf, 1), count - 1)
        rank = low + left * leaf
        if rank < at:
            _part_by_rank(key, u, v, order, low, at, rank)
        elif rank > at:
            _part_by_rank(key, u, v, order, at, high, rank)
    else:
        _part_by_rank(key, u, v, order, low, high, low + left * leaf)
    return left


@inner_kernel
def _middle(low: float, high: float) -> float:
    """A place that parts `low` from `high` > `low`: above the one, not above the other."""
    half = 0.5 * low + 0.5 * high
    return half if half > low else high


@inner_kernel
def extent(x: np.ndarray, low: int, high: int) -> tuple[float, float]:
    """Smallest and largest of ``x[low:high]``."""
    smallest = biggest = x[low]
    k = low
    if high - low >= 8:
        small = big = load(x, k)
        k += 8
        while k + 8 <= high:
            here = load(x, k)
            small, big = smaller(small, here), larger(big, here)
            k += 8
        smallest, biggest = least(small), most(big)
    while k < high:
        smallest, biggest = min(smallest, x[k]), max(biggest, x[k])
        k += 1
    return smallest, biggest


@inner_kernel
def _swap(key: np.ndarray, u: np.ndarray, v: np.ndarray, order: np.ndarray, i: int, j: int) -> None:
    key[i], key[j] = key[j], key[i]
    u[i], u[j] = u[j], u[i]
    v[i], v[j] = v[j], v[i]
    order[i], order[j] = order[j], order[i]


@inner_kernel
def _part_by_value(
    key: np.ndarray,
    u: np.ndarray,
    v: np.ndarray,
    order: np.ndarray,
    low: int,
    high: int,
    value: float,
) -> int:
    """Bring what is below `value` to the front; returns where the rest begins."""
    i, j = low, high - 1
    while True:
        while i <= j and key[i] < value:
            i += 1
        while i <= j and key[j] >= value:
            j -= 1
        if i >= j:
            return i
        _swap(key, u, v, order, i, j)
        i += 1
        j -= 1


@inner_kernel
def _part_by_rank(
    key: np.ndarray,
    u: np.ndarray,
    v: np.ndarray,
    order: np.ndarray,
    low: int,
    high: int,
    rank: int,
) -> None:
    """Bring the smallest to the front, so that ``key[rank]`` stands where sorting would put it.

    C. A. R. Hoare, Commun. ACM 4 (1961) 321, algorithm 65, with the median of three.
    """
    a, b = low, high - 1
    while b > a:
        p, q, r = key[a], key[(a + b) // 2], key[b]
        pivot = max(min(p, q), min(max(p, q), r))
        i, j = a, b
        while i <= j:
            while key[i] < pivot:
                i += 1
            while key[j] > pivot:
                j -= 1
            if i <= j:
                _swap(key, u, v, order, i, j)
                i += 1
                j -= 1
        if rank <= j:
            b = j
        elif rank >= i:
            a = i
        else:
            return
