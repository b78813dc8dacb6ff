"""The tree's arrays: what a cell's row holds, and where everything stands in the work space.

Cells stand in the order of a walk, left child before right: a cell's left child follows it, and
the charges of a cell are neighbours in the tree's order. All leaves but the last are full, so the
numbers of leaves and cells follow from the number of charges, and with them the room: everything
is a slice of one array of float64, made once, and touched only as far as it is used.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from driftwell.kernels.compiled import view_kernel
from driftwell.tree.expansions import BasisType, padded
from driftwell.tree.multi_index import cartesian

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

CELL = 16
"""Numbers in a cell's row; the walk needs the first eight, one cache line."""
X, Y, Z = 0, 1, 2
"""Centre."""
REACH = 3
"""Largest distance of a charge from the centre, or a little more."""
SPREAD = 4
"""Mean of high order of these distances: what the error of an expansion grows with."""
STRENGTH = 5
"""What the cell's field and its error amount to: measure.py says how."""
WANT = 6
"""1 / (tolerance F): what error its charges can bear."""
RIGHT = 7
"""The right child, 0 for a leaf."""
AMOUNT, NET, SQUARES, COUNT = 8, 9, 10, 11
"""Sums of |Q|, Q, Q^2 and 1."""
FEELING = 12
"""Number of its charges whose field is wanted."""

DEEPEST = 56
"""Depth from which cells are cut by numbers alone."""
LEVELS = DEEPEST + 40
"""More cells than any path from the root has, or waits on it to be looked at."""
TASKS = 128
"""About how many tasks the charges are dealt to; threads take one after the other."""
MOST_TASKS = 16384
BATCH = 8
"""Far cells taken at once, in lanes."""
RANGES = 2048
"""Ranges of near charges collected before they are summed."""
FARS = 1024
"""Far cells collected before they are heard."""
VERDICTS = BATCH * BATCH
"""Where, among a desk's lanes, the verdicts on eight cells stand, behind their rows."""
TURNED = VERDICTS + BATCH
"""Where the moments of eight cells stand, side by side; behind them what they add to."""
PATH = 5
"""Numbers of a cell on the path: itself, its waiting cells' begin and end, level, parent."""

TOLERANCE, LEAF, WORKERS, COUNTER, PART, MARKS = 0, 1, 2, 3, 4, 8
"""Places in the header: settings, the tasks' counter, the address of the part (gathering.py), then
begin and length of each region."""
OWNER = 56
"""Where, in the header, eight numbers stand that belong to who calls the tree."""
_HEADER = 64
_REGIONS = (
    "place",
    "field",
    "order",
    "first",
    "cells",
    "moments",
    "want",
    "tasks",
    "depths",
    "is_task",
    "tops",
    "level",
    "below",
    "above",
    "local",
    "lanes",
    "waiting",
    "queue",
    "far",
    "ranges",
    "path",
)


class Tree(NamedTuple):
    """The tree of one moment.

    place : (4, room) x, y, z in the tree's units and Q, in the tree's order; behind the last
        charge stand copies of it with Q = 0, to fill whole vectors
    field : (4, room) E_x, E_y, E_z and potential at them
    order : (room,) int64, index of each charge as given
    first : (cells + 1,) int64, first charge of each cell
    cells : (cells + 2, CELL); the last is a cell without charge, far away
    moments : rows of expansions.py, flat; want : (cells,) F^2, then F^-2
    tasks : (MOST_TASKS,) int64, the tasks' root cells
    depths, is_task : (cells,) int64, of these and of the cells above them
    tops : (MOST_TASKS,) int64, the cells above the tasks, parents first
    level, below : int64, cells above the tasks and their children while they are cut
    above : rows of local expansions of the tasks' roots, from what their parents heard
    """

    place: Floats
    field: Floats
    order: Ints
    first: Ints
    cells: Floats
    moments: Floats
    want: Floats
    tasks: Ints
    depths: Ints
    is_task: Ints
    tops: Ints
    level: Ints
    below: Ints
    above: Floats


class Desk(NamedTuple):
    """Where one thread works.

    local : rows of local expansions on the path; lanes : numbers of eight cells side by side
    waiting : int64, cells waiting for the cells on the path
    queue : (cells + 2 BATCH,) int64, cells to look at
    far : (FARS + BATCH,) int64, far cells
    ranges : (2 RANGES,) int64, where ranges of near charges begin and end
    path : (PATH LEVELS,) int64, cells to visit
    """

    local: Floats
    lanes: Floats
    waiting: Ints
    queue: Ints
    far: Ints
    ranges: Ints
    path: Ints


def regions(n: int, threads: int, leaf: int, of: BasisType) -> dict[str, int]:
    """Length of each region, float64, for `n` charges."""
    leaves = max(-(-n // leaf), 1)
    cells = 2 * leaves + 1
    room = leaves * leaf + 2 * BATCH
    moment, local = padded(len(of.moments)), padded(len(of.locals))
    full = padded(len(cartesian(of.order - 1)))
    return {
        "place": 4 * room,
        "field": 4 * room,
        "order": room,
        "first": cells + 1,
        "cells": CELL * cells,
        "moments": moment * cells,
        "want": cells,
        "tasks": MOST_TASKS,
        "depths": cells,
        "is_task": cells,
        "tops": MOST_TASKS,
        "level": 4 * MOST_TASKS,
        "below": 8 * MOST_TASKS,
        "above": local * min(MOST_TASKS, cells),
        "local": threads * local * LEVELS,
        "lanes": threads * max(TURNED + BATCH * (moment + local), BATCH * full),
        "waiting": threads * (LEVELS * (cells + 2)),
        "queue": threads * (cells + 2 * BATCH),
        "far": threads * (FARS + BATCH),
        "ranges": threads * 2 * RANGES,
        "path": threads * PATH * LEVELS,
    }


def laid_out(
    n: int, threads: int, leaf: int, tolerance: float, of: BasisType, behind: int = 0
) -> Floats:
    """(1, size) float64, work space for `n` charges, without the address of its part.

    behind : numbers wanted behind all of it
    """
    lengths = {name: padded(size) for name, size in regions(n, threads, leaf, of).items()}
    work = np.empty((1, _HEADER + sum(lengths.values()) + behind))
    header = work[0, :_HEADER]
    header[:] = 0.0
    header[TOLERANCE], header[LEAF], header[WORKERS] = tolerance, leaf, threads
    begin = _HEADER
    for k, name in enumerate(_REGIONS):
        header[MARKS + 2 * k], header[MARKS + 2 * k + 1] = begin, lengths[name]
        begin += lengths[name]
    return work


@view_kernel
def _region(work: np.ndarray, k: int) -> np.ndarray:
    begin, length = int(work[0, MARKS + 2 * k]), int(work[0, MARKS + 2 * k + 1])
    return work[0, begin : begin + length]


@view_kernel
def tree_in(work: np.ndarray) -> Tree:
    """The tree's arrays in its work space."""
    place, field, cells = _region(work, 0), _region(work, 1), _region(work, 4)
    return Tree(
        place.reshape((4, place.size // 4)),
        field.reshape((4, field.size // 4)),
        _region(work, 2).view(np.int64),
        _region(work, 3).view(np.int64),
        cells.reshape((cells.size // CELL, CELL)),
        _region(work, 5),
        _region(work, 6),
        _region(work, 7).view(np.int64),
        _region(work, 8).view(np.int64),
        _region(work, 9).view(np.int64),
        _region(work, 10).view(np.int64),
        _region(work, 11).view(np.int64),
        _region(work, 12).view(np.int64),
        _region(work, 13),
    )


@view_kernel
def _share(work: np.ndarray, k: int, worker: int) -> np.ndarray:
    whole = _region(work, k)
    length = whole.size // int(work[0, WORKERS])
    return whole[worker * length : (worker + 1) * length]


@view_kernel
def desk_in(work: np.ndarray, worker: int) -> Desk:
    """The arrays of one thread in the work space."""
    return Desk(
        _share(work, 14, worker),
        _share(work, 15, worker),
        _share(work, 16, worker).view(np.int64),
        _share(work, 17, worker).view(np.int64),
        _share(work, 18, worker).view(np.int64),
        _share(work, 19, worker).view(np.int64),
        _share(work, 20, worker).view(np.int64),
    )
