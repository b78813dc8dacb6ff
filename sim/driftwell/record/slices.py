"""Parts of the trajectories, read without the rest.

A segment keeps them in chunks of 100 records, 200 charges and 6 numbers; only the chunks that hold
something asked for are read.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from driftwell.record.reader import Run

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

STATE = "trajectory/state"
_CHUNK = 200
"""Charges; columns no further apart than that are read in one go."""


def states(run: Run, records: slice, columns: Ints, parts: slice) -> Floats:
    """Some of ``trajectory/state``, as (records, columns, parts) float64, m and m/s.

    records : of 0 to the number of records, its step 1 or more
    columns : places in ``header.tracked``, in any order
    parts : of x, y, z, ux, uy, uz, its step 1 or more
    """
    order, back = np.unique(columns, return_inverse=True)
    wide = len(range(*parts.indices(6)))
    pieces = [np.zeros((0, order.size, wide))]
    first = 0
    for facts in run.segments:
        count = facts.rows["records"]
        chosen = _within(records, first, count)
        first += count
        if chosen is None or order.size == 0:
            continue
        with run.segment_file(facts) as file:
            rows = file[STATE]
            pieces.append(
                np.concatenate(
                    [
                        rows[chosen, low:high, parts][:, order[from_:to] - low]
                        for low, high, from_, to in _stretches(order)
                    ],
                    axis=1,
                )
            )
    found = np.concatenate(pieces) if order.size else np.zeros((_count(records), 0, wide))
    return np.ascontiguousarray(found[:, back])


def _count(records: slice) -> int:
    return len(range(records.start, records.stop, records.step))


def _within(records: slice, first: int, count: int) -> slice | None:
    """The part of a slice that lies in `count` records from `first` on, counted from there."""
    step = records.step
    start = records.start
    if start < first:
        start += -(-(first - start) // step) * step
    stop = min(records.stop, first + count)
    return slice(start - first, stop - first, step) if start < stop else None


def _stretches(order: Ints) -> Iterator[tuple[int, int, int, int]]:
    """Columns from and to, and the places in `order` that lie there; gaps are left out."""
    ends = [*(np.flatnonzero(np.diff(order) > _CHUNK) + 1).tolist(), order.size]
    start = 0
    for end in ends:
        yield int(order[start]), int(order[end - 1]) + 1, start, end
        start = end
