"""Tasks: stretches of the charges, with their cells, that threads take one after the other.

Their number and bounds depend on the charges alone; which thread takes which does not matter.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from llvmlite import ir
from numba import types

from driftwell.kernels import inner_kernel, view_kernel
from driftwell.kernels.lane_values import emitted_code
from driftwell.tree.build import leaves_of
from driftwell.tree.cells import COUNTER, Tree


@emitted_code
def next_task(typing: Any, counter: Any) -> Any:
    """The next number of a counter that all threads share: each is given out once."""

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        place = context.make_array(sig.args[0])(context, builder, args[0]).data
        return builder.atomic_rmw("add", place, ir.Constant(ir.IntType(64), 1), "monotonic")

    return types.int64(counter), emitted


@view_kernel
def counter(work: np.ndarray) -> np.ndarray:
    """(1,) int64, what :func:`next_task` counts with."""
    return work[0, COUNTER : COUNTER + 1].view(np.int64)


@view_kernel
def begin_tasks(work: np.ndarray) -> None:
    """Let the tasks be given out from the first on."""
    counter(work)[0] = 0


@inner_kernel
def bounds(task: int, tasks: int, n: int, leaf: int, tree: Tree) -> tuple[int, int, int, int]:
    """Where a task's charges begin and end, and where its cells do."""
    root = tree.tasks[task]
    low = tree.first[root]
    high = tree.first[tree.tasks[task + 1]] if task + 1 < tasks else n
    return low, high, root, root + 2 * leaves_of(high - low, leaf) - 1
