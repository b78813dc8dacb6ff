"""The tree's field at all charges: grown, measured, and gathered, in one compiled call.

Threads take whole tasks, one after the other, whose number and bounds depend on the charges alone;
each charge's terms are added in an order that does not depend on the thread.
"""

from __future__ import annotations

import functools
import math
from typing import Any

import numpy as np
from llvmlite import ir
from numba import prange, types

from driftwell.kernels import inner_kernel, outer_kernel, threaded_kernel, view_kernel
from driftwell.kernels.lane_values import emitted_code
from driftwell.tree.build import (
    begin_level,
    cut_in_level,
    cut_level,
    extent,
    grow,
    leaves_of,
    list_tasks,
    next_level,
)
from driftwell.tree.cells import (
    CELL,
    COUNTER,
    LEAF,
    MOST_TASKS,
    TASKS,
    TOLERANCE,
    WORKERS,
    Tree,
    X,
    desk_in,
    tree_in,
)
from driftwell.tree.expansions import BasisType, basis, moment_row
from driftwell.tree.forces import AT_ONE_PLACE, NEXT_TO_NOTHING
from driftwell.tree.measure import climb, measure_parent
from driftwell.tree.scale import scale_task, settle_scale
from driftwell.tree.walk import gather, gather_above

LAY_OUT, CUT, GROW, SCALE, GATHER, DONE = range(6)
"""What is done after one another, each by all threads."""
SHARED = 100_000
"""From this many charges on the first cuts are worth sharing among threads."""
_FAR_AWAY = 1e3
"""Where the cell without charge stands; all charges lie within 1 of the origin."""


@functools.cache
def tree_field_kernel(order: int, softened: bool, mixed: bool) -> Any:
    """The tree sum with one basis, as the time loop takes it.

    out_field : (3, n) V/m, or (4, n) with potentials, V; overwritten. A charge that is nowhere
    (NaN) makes all NaN. Numba keeps each basis in its cache by the numbers closed over here.
    """

    @threaded_kernel
    def tree_field(
        position: np.ndarray,
        charge: np.ndarray,
        softening2: float,
        constant: float,
        work: np.ndarray,
        out_field: np.ndarray,
    ) -> None:
        of = basis(order, softened, mixed)
        n, leaf = charge.size, int(work[0, LEAF])
        unit = _unit(position)
        if n == 0 or not math.isfinite(unit):
            for axis in range(out_field.shape[0]):
                for i in range(n):
                    out_field[axis, i] = math.nan
            return
        tree, desk = tree_in(work), desk_in(work, 0)
        soft2 = softening2 * unit * unit + NEXT_TO_NOTHING
        most_leaves = max(1, leaves_of(n, leaf) // TASKS)
        stage, count, tops = LAY_OUT, 1, 0
        while stage != DONE:
            _begin_tasks(work)
            if stage == CUT and (n < SHARED or count == 1):
                cut_level(count, most_leaves, leaf, tree)
            else:
                workers = int(work[0, WORKERS])
                # one loop for all stages, integers of one kind: each other one is compiled anew
                for worker in prange(workers):
                    _take_part(
                        of,
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
                for k in range(tops - 1, -1, -1):
                    measure_parent(of, tree.tops[k], tree)
                _place_nobody(moment_row(of), tree)
                stage = SCALE
            elif stage == SCALE:
                settle_scale(2 * leaves_of(n, leaf) - 1, work[0, TOLERANCE], tree)
                gather_above(of, out_field.shape[0] == 4, tree, desk, soft2)
                stage = GATHER
            else:
                stage = DONE

    return tree_field


@view_kernel
def _take_part(
    of: BasisType,
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
    elif stage == GROW:
        _grow_tasks(of, worker, count, charge, leaf, work)
    elif stage == SCALE:
        _scale_tasks(worker, count, n, leaf, softening2, work)
    else:
        _gather_tasks(of, worker, count, leaf, softening2, constant, unit, work, out_field)


@emitted_code
def _next_task(typing: Any, counter: Any) -> Any:
    """The next number of a counter that all threads share: each is given out once."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        place = context.make_array(sig.args[0])(context, builder, args[0]).data
        return builder.atomic_rmw("add", place, ir.Constant(ir.IntType(64), 1), "monotonic")

    return types.int64(counter), emitted


@view_kernel
def _counter(work: np.ndarray) -> np.ndarray:
    """(1,) int64, what :func:`_next_task` counts with."""
    return work[0, COUNTER : COUNTER + 1].view(np.int64)


@view_kernel
def _begin_tasks(work: np.ndarray) -> None:
    _counter(work)[0] = 0


@view_kernel
def _cut_shared(count: int, most_leaves: int, leaf: int, work: np.ndarray) -> None:
    """Cut one cell of a level above the tasks after the other."""
    tree = tree_in(work)
    counter = _counter(work)
    k = _next_task(counter)
    while k < count:
        cut_in_level(k, most_leaves, leaf, tree)
        k = _next_task(counter)


@view_kernel
def _grow_tasks(
    of: BasisType, worker: int, tasks: int, charge: np.ndarray, leaf: int, work: np.ndarray
) -> None:
    """Cut and measure the cells of one task after the other."""
    tree, desk = tree_in(work), desk_in(work, worker)
    counter = _counter(work)
    n = charge.size
    task = _next_task(counter)
    while task < tasks:
        low, high, first, last = _bounds(task, tasks, n, leaf, tree)
        grow(first, tree.depths[first], low, high, leaf, tree, desk.path)
        _bring(charge, low, high, tree)
        if high == n:
            _fill(n, last, tree)
        climb(of, first, last, tree, desk.lanes)
        task = _next_task(counter)
    desk.lanes[:] = 0.0


@view_kernel
def _scale_tasks(
    worker: int, tasks: int, n: int, leaf: int, softening2: float, work: np.ndarray
) -> None:
    """Estimate the fields in one task after the other, and clear them."""
    tree, desk = tree_in(work), desk_in(work, worker)
    counter = _counter(work)
    task = _next_task(counter)
    while task < tasks:
        low, high, first, last = _bounds(task, tasks, n, leaf, tree)
        scale_task(first, last, tree, softening2, desk.path)
        _clear(low, high if high < n else tree.field.shape[1], tree)
        task = _next_task(counter)


@view_kernel
def _gather_tasks(
    of: BasisType,
    worker: int,
    tasks: int,
    leaf: int,
    softening2: float,
    constant: float,
    unit: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The fields at the charges of one task after the other."""
    tree, desk = tree_in(work), desk_in(work, worker)
    counter = _counter(work)
    potential = out_field.shape[0] == 4
    task = _next_task(counter)
    while task < tasks:
        gather(of, task, potential, tree, desk, softening2)
        low, high, _, _ = _bounds(task, tasks, out_field.shape[1], leaf, tree)
        _hand_out(low, high, softening2, constant * unit, unit, tree, out_field)
        task = _next_task(counter)


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


@inner_kernel
def _bounds(task: int, tasks: int, n: int, leaf: int, tree: Tree) -> tuple[int, int, int, int]:
    """Where a task's charges begin and end, and where its cells do."""
    root = tree.tasks[task]
    low = tree.first[root]
    high = tree.first[tree.tasks[task + 1]] if task + 1 < tasks else n
    return low, high, root, root + 2 * leaves_of(high - low, leaf) - 1


@inner_kernel
def _bring(charge: np.ndarray, low: int, high: int, tree: Tree) -> None:
    """Copy charges in the tree's order."""
    row = tree.place[3]
    for k in range(low, high):
        row[k] = charge[tree.order[k]]


@outer_kernel
def _fill(n: int, cells: int, tree: Tree) -> None:
    """Stand copies of the last charge, without charge, behind it; close the list of cells."""
    tree.first[cells] = n
    for k in range(n, tree.place.shape[1]):
        for axis in range(3):
            tree.place[axis, k] = tree.place[axis, n - 1]
        tree.place[3, k] = 0.0


@outer_kernel
def _place_nobody(length: int, tree: Tree) -> None:
    """Make the last row a cell without charge, to fill batches of eight."""
    nobody = tree.cells.shape[0] - 1
    for k in range(CELL):
        tree.cells[nobody, k] = 0.0
    tree.cells[nobody, X] = _FAR_AWAY
    for k in range(length):
        tree.moments[nobody * length + k] = 0.0


@outer_kernel
def _clear(low: int, high: int, tree: Tree) -> None:
    """Begin the fields of charges with nothing."""
    for axis in range(tree.field.shape[0]):
        row = tree.field[axis]
        for k in range(low, high):
            row[k] = 0.0


@outer_kernel
def _hand_out(
    low: int,
    high: int,
    softening2: float,
    to_volt: float,
    unit: float,
    tree: Tree,
    out_field: np.ndarray,
) -> None:
    """Copy the fields of charges to where they were given, in SI, and the potential if wanted."""
    for axis in range(3):
        source, out = tree.field[axis], out_field[axis]
        for k in range(low, high):
            out[tree.order[k]] = to_volt * unit * source[k]
    if out_field.shape[0] == 4:
        own = 1.0 / math.sqrt(softening2) if softening2 > AT_ONE_PLACE else 0.0
        source, out, charge = tree.field[3], out_field[3], tree.place[3]
        for k in range(low, high):
            out[tree.order[k]] = to_volt * (source[k] - own * charge[k])
