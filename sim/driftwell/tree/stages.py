"""The tree's field at all charges: grown, measured, and gathered, in one compiled call.

What depends on order and kind of the expansions is called by its address (gathering.py), which the
work space holds: so it is compiled once, and this once for all orders. Each charge's terms are
added in an order that does not depend on the thread.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from numba import prange, types

from driftwell.kernels import outer_kernel, threaded_kernel, view_kernel
from driftwell.tree.build import (
    begin_level,
    cut_in_level,
    cut_level,
    extent,
    leaves_of,
    list_tasks,
    next_level,
)
from driftwell.tree.cells import LEAF, MOST_TASKS, TASKS, TOLERANCE, WORKERS, Tree, desk_in, tree_in
from driftwell.tree.forces import NEXT_TO_NOTHING
from driftwell.tree.gathering import GATHER, GATHER_ABOVE, GROW, MEASURE_ABOVE, call_part
from driftwell.tree.scale import scale_task, settle_scale
from driftwell.tree.tasks import begin_tasks, bounds, counter, next_task

LAY_OUT, CUT, SCALE, DONE = range(GATHER + 1, GATHER + 5)
"""What is done besides the stages of gathering.py, each by all threads, and that nothing is."""
SHARED = 100_000
"""From this many charges on the first cuts are worth sharing among threads."""


@threaded_kernel
def tree_field(
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The tree sum, as the time loop takes it.

    work : of :func:`driftwell.tree.gathering.tree_room`; out_field : (3, n) V/m, or (4, n) with
    potentials, V, of all charges or the first so many; overwritten. A charge that is nowhere (NaN)
    makes all NaN.
    """
    n, leaf = charge.size, int(work[0, LEAF])
    unit = _unit(position)
    if n == 0 or not math.isfinite(unit):
        for axis in range(out_field.shape[0]):
            for i in range(out_field.shape[1]):
                out_field[axis, i] = math.nan
        return
    tree, desk = tree_in(work), desk_in(work, 0)
    soft2 = softening2 * unit * unit + NEXT_TO_NOTHING
    most_leaves = max(1, leaves_of(n, leaf) // TASKS)
    stage, count, tops = LAY_OUT, 1, 0
    while stage != DONE:
        begin_tasks(work)
        if stage == CUT and (n < SHARED or count == 1):
            cut_level(count, most_leaves, leaf, tree)
        else:
            # one loop for all stages, integers of one kind: each other one is compiled anew
            for worker in prange(int(work[0, WORKERS])):
                _take_part(
                    types.int64(stage),
                    types.int64(worker),
                    types.int64(count),
                    types.int64(most_leaves),
                    position,
                    charge,
                    soft2,
                    constant,
                    unit,
                    work,
                    out_field,
                )
        if stage == LAY_OUT:
            begin_level(n, tree)
            stage = CUT
        elif stage == CUT:
            count, tops = next_level(count, tops, tree)
            if tops + 3 * count > MOST_TASKS:
                most_leaves = n
            if count == 0:
                count = list_tasks(tree, desk.path)
                stage = GROW
        elif stage == GROW:
            call_part(MEASURE_ABOVE, 0, tops, charge, soft2, constant, unit, work, out_field)
            stage = SCALE
        elif stage == SCALE:
            settle_scale(2 * leaves_of(n, leaf) - 1, work[0, TOLERANCE], tree)
            call_part(GATHER_ABOVE, 0, count, charge, soft2, constant, unit, work, out_field)
            stage = GATHER
        else:
            stage = DONE


@view_kernel
def _take_part(
    stage: Any,
    worker: Any,
    count: Any,
    most_leaves: Any,
    position: np.ndarray,
    charge: np.ndarray,
    softening2: float,
    constant: float,
    unit: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """One thread's part of a stage; count : of the level's cells, or of tasks (integers all)."""
    leaf, n = int(work[0, LEAF]), charge.size
    if stage == LAY_OUT:
        _lay_out(worker, int(work[0, WORKERS]), position, unit, work)
    elif stage == CUT:
        _cut_shared(count, most_leaves, leaf, work)
    elif stage == SCALE:
        _scale_tasks(worker, count, n, leaf, softening2, work)
    else:
        call_part(stage, worker, count, charge, softening2, constant, unit, work, out_field)


@outer_kernel
def _unit(position: np.ndarray) -> float:
    """The power of two that brings all charges within 1 of the origin; NaN if one is nowhere."""
    farthest = check = 0.0
    for axis in range(3):
        x = position[axis]
        if x.size > 0:
            low, high = extent(x, 0, x.size)
            farthest = max(farthest, abs(low), abs(high))
        for i in range(x.size):
            check += 0.0 * x[i]
    if check != 0.0 or not math.isfinite(farthest):
        return math.nan
    return math.ldexp(1.0, -math.frexp(farthest)[1]) if farthest > 0.0 else 1.0


@view_kernel
def _lay_out(
    worker: int, workers: int, position: np.ndarray, unit: float, work: np.ndarray
) -> None:
    """Copy one thread's share of the places, in the tree's units, in the order given."""
    tree = tree_in(work)
    n = position.shape[1]
    low, high = worker * n // workers, (worker + 1) * n // workers
    for axis in range(3):
        source, copy = position[axis], tree.place[axis]
        for i in range(low, high):
            copy[i] = source[i] * unit
    for i in range(low, high):
        tree.order[i] = i


@view_kernel
def _cut_shared(count: int, most_leaves: int, leaf: int, work: np.ndarray) -> None:
    """Cut one cell of a level above the tasks after the other."""
    tree = tree_in(work)
    taken = counter(work)
    k = next_task(taken)
    while k < count:
        cut_in_level(k, most_leaves, leaf, tree)
        k = next_task(taken)


@view_kernel
def _scale_tasks(
    worker: int, tasks: int, n: int, leaf: int, softening2: float, work: np.ndarray
) -> None:
    """Estimate the fields in one task after the other, and clear them."""
    tree, desk = tree_in(work), desk_in(work, worker)
    taken = counter(work)
    task = next_task(taken)
    while task < tasks:
        low, high, first, last = bounds(task, tasks, n, leaf, tree)
        scale_task(first, last, tree, softening2, desk.path)
        _clear(low, high if high < n else tree.field.shape[1], tree)
        task = next_task(taken)


@outer_kernel
def _clear(low: int, high: int, tree: Tree) -> None:
    """Begin the fields of charges with nothing."""
    for axis in range(tree.field.shape[0]):
        row = tree.field[axis]
        for k in range(low, high):
            row[k] = 0.0
