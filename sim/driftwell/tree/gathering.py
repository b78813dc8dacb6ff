"""What of the tree sum depends on order and kind of the expansions, one compiled part for each.

It is reached by its address, which stands in the work space.
"""

from __future__ import annotations

import functools
import math
from typing import Any

import numpy as np
from numba import types

from driftwell.kernels import inner_kernel, outer_kernel, pointed_kernel, view_kernel
from driftwell.kernels.lane_values import emitted_code
from driftwell.kernels.pointers import CompiledFunction, call_address
from driftwell.tree.build import grow
from driftwell.tree.cells import (
    CELL,
    FEELING,
    LEAF,
    PART,
    RIGHT,
    Floats,
    Tree,
    X,
    desk_in,
    laid_out,
    tree_in,
)
from driftwell.tree.expansions import BasisType, basis, moment_row
from driftwell.tree.forces import AT_ONE_PLACE
from driftwell.tree.measure import climb, measure_parent
from driftwell.tree.tasks import bounds, counter, next_task
from driftwell.tree.walk import gather, gather_above

GROW, MEASURE_ABOVE, GATHER_ABOVE, GATHER = range(4)
"""Stages: of the tasks' cells and of those above them; those above are for one thread alone."""
_FAR_AWAY = 1e3
"""Where the cell without charge stands; all charges lie within 1 of the origin."""
_SIGNATURE = (
    "void(int64, int64, int64, float64[::1], float64, float64, float64,"
    " float64[:,::1], float64[:,::1])"
)


def tree_room(
    n: int,
    threads: int,
    leaf: int,
    tolerance: float,
    order: int,
    softened: bool,
    mixed: bool,
    behind: int = 0,
) -> Floats:
    """(1, size) float64, work space for `n` charges; pages not used are not touched.

    behind : numbers wanted behind all of it
    """
    work = laid_out(n, threads, leaf, tolerance, BasisType(order, softened, mixed), behind)
    work[0, PART : PART + 1].view(np.int64)[0] = part(order, softened, mixed).__wrapper_address__()
    return work


@functools.cache
def part(order: int, softened: bool, mixed: bool) -> CompiledFunction:
    """One thread's part in a stage, with one basis.

    Numba keeps each basis in its cache by the numbers closed over here.
    """

    @pointed_kernel
    def part_of_basis(
        stage: int,
        worker: int,
        count: int,
        charge: np.ndarray,
        softening2: float,
        constant: float,
        unit: float,
        work: np.ndarray,
        out_field: np.ndarray,
    ) -> None:
        of = basis(order, softened, mixed)
        leaf = int(work[0, LEAF])
        tree, desk = tree_in(work), desk_in(work, worker)
        potential = out_field.shape[0] == 4
        if stage == GROW:
            _grow_tasks(of, worker, count, charge, leaf, out_field.shape[1], work)
        elif stage == MEASURE_ABOVE:
            for k in range(count - 1, -1, -1):
                measure_parent(of, tree.tops[k], tree)
            _place_nobody(moment_row(of), tree)
        elif stage == GATHER_ABOVE:
            gather_above(of, potential, tree, desk, softening2)
        else:
            n = charge.size
            _gather_tasks(of, worker, count, n, leaf, softening2, constant, unit, work, out_field)

    return CompiledFunction(part_of_basis, _SIGNATURE)


@emitted_code
def call_part(
    typing: Any,
    stage: Any,
    worker: Any,
    count: Any,
    charge: Any,
    softening2: Any,
    constant: Any,
    unit: Any,
    work: Any,
    out_field: Any,
) -> Any:
    """Call the part whose address is in the work space; count : of tasks, or of cells above."""
    number, whole = types.float64, types.int64
    signature = types.void(whole, whole, whole, charge, number, number, number, work, out_field)

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        start = context.make_array(work)(context, builder, args[7]).data
        place = builder.gep(start, [context.get_constant(whole, PART)])
        address = builder.load(builder.bitcast(place, context.get_value_type(whole).as_pointer()))
        return call_address(context, builder, sig, address, args)

    return signature, emitted


@view_kernel
def _grow_tasks(
    of: BasisType,
    worker: int,
    tasks: int,
    charge: np.ndarray,
    leaf: int,
    feeling: int,
    work: np.ndarray,
) -> None:
    """Cut and measure the cells of one task after the other."""
    tree, desk = tree_in(work), desk_in(work, worker)
    taken = counter(work)
    n = charge.size
    task = next_task(taken)
    while task < tasks:
        low, high, first, last = bounds(task, tasks, n, leaf, tree)
        grow(first, tree.depths[first], low, high, leaf, tree, desk.path)
        _bring(charge, low, high, tree)
        if high == n:
            _fill(n, last, tree)
        climb(of, first, last, tree, desk.lanes)
        _count_feeling(first, last, feeling, tree)
        task = next_task(taken)
    desk.lanes[:] = 0.0


@inner_kernel
def _bring(charge: np.ndarray, low: int, high: int, tree: Tree) -> None:
    """Copy charges in the tree's order."""
    row = tree.place[3]
    for k in range(low, high):
        row[k] = charge[tree.order[k]]


@outer_kernel
def _count_feeling(low: int, high: int, feeling: int, tree: Tree) -> None:
    """How many charges of the cells ``low:high`` are among the first `feeling` as given."""
    for cell in range(high - 1, low - 1, -1):
        right = int(tree.cells[cell, RIGHT])
        if right > 0:
            count = tree.cells[cell + 1, FEELING] + tree.cells[right, FEELING]
        else:
            count = 0.0
            for k in range(tree.first[cell], tree.first[cell + 1]):
                if tree.order[k] < feeling:
                    count += 1.0
        tree.cells[cell, FEELING] = count


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


@view_kernel
def _gather_tasks(
    of: BasisType,
    worker: int,
    tasks: int,
    n: int,
    leaf: int,
    softening2: float,
    constant: float,
    unit: float,
    work: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """The fields at the charges of one task after the other."""
    tree, desk = tree_in(work), desk_in(work, worker)
    taken = counter(work)
    potential = out_field.shape[0] == 4
    task = next_task(taken)
    while task < tasks:
        gather(of, task, potential, tree, desk, softening2)
        low, high, _, _ = bounds(task, tasks, n, leaf, tree)
        _hand_out(low, high, softening2, constant * unit, unit, tree, out_field)
        task = next_task(taken)


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
            if tree.order[k] < out.size:
                out[tree.order[k]] = to_volt * unit * source[k]
    if out_field.shape[0] == 4:
        own = 1.0 / math.sqrt(softening2) if softening2 > AT_ONE_PLACE else 0.0
        source, out, charge = tree.field[3], out_field[3], tree.place[3]
        for k in range(low, high):
            if tree.order[k] < out.size:
                out[tree.order[k]] = to_volt * (source[k] - own * charge[k])
