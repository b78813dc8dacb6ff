"""The trajectories of a run as an array that is read in parts: by records and by charges."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import RecordError
from driftwell.record.reader import Run as Record
from driftwell.record.slices import states

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


class TrackView:
    """Numbers of the tracked charges at every record; nothing is read before it is asked for.

    ``view[records, ids]`` gives an array of float64: (records, charges, numbers of each).
    Records go by number, as in any sequence. Charges go by *id*: one id, a list or an array of
    them, or a slice of ids, which takes those of them that were tracked. One record or one charge
    leaves its axis out. Only the chunks of the file that hold something asked for are read.

    Charges that are lost, or not yet born, are not a number.

    Parameters
    ----------
    run : as recorded
    parts : which of x, y, z, ux, uy, uz
    unit : of the numbers
    """

    __slots__ = ("_parts", "_run", "unit")

    def __init__(self, run: Record, parts: slice, unit: str) -> None:
        self._run = run
        self._parts = parts
        self.unit = unit

    @property
    def shape(self) -> tuple[int, int, int]:
        """Records, tracked charges, numbers of each."""
        records = sum(facts.rows["records"] for facts in self._run.segments)
        return records, len(self._run.header.tracked), len(range(*self._parts.indices(6)))

    @property
    def ids(self) -> Ints:
        """Ids of the tracked charges, in the order of the second axis."""
        return np.array(self._run.header.tracked, dtype=np.int64)

    def __len__(self) -> int:
        return self.shape[0]

    def __getitem__(self, which: Any) -> Floats:
        """Some records, all charges or some; see the class.

        Raises RecordError where a charge was not tracked, IndexError where a record is not there.
        """
        records, charges = which if isinstance(which, tuple) else (which, slice(None))
        columns = self._columns(charges)
        there = self.shape[0]
        if isinstance(records, slice):
            found = self._read(_forward(records, there), np.atleast_1d(columns))
            found = found[::-1] if _step(records) < 0 else found
        else:
            numbers = _numbers(records, there)
            ends = slice(int(numbers.min()), int(numbers.max()) + 1, 1) if numbers.size else None
            whole = self._read(ends or slice(0, 0, 1), np.atleast_1d(columns))
            found = whole[numbers - ends.start] if ends else whole
        if isinstance(columns, int):
            found = found[..., 0, :]
        return found

    def __array__(self, dtype: Any = None, copy: bool | None = None) -> NDArray[Any]:
        """All of it."""
        return np.asarray(self[:], dtype=dtype)

    def __repr__(self) -> str:
        records, charges, numbers = self.shape
        return (
            f"<{records} records x {charges} charges x {numbers}, {self.unit}; "
            "[records, ids] reads a part>"
        )

    def _read(self, records: slice, columns: Ints) -> Floats:
        return states(self._run, records, columns, self._parts)

    def _columns(self, charges: Any) -> int | Ints:
        """Places of charges among those tracked."""
        ids = self.ids
        if isinstance(charges, slice):
            return np.flatnonzero(np.isin(ids, ids_in(charges, ids)))
        one = isinstance(charges, int | np.integer) and not isinstance(charges, bool)
        wanted = np.atleast_1d(np.asarray(charges))
        if not np.issubdtype(wanted.dtype, np.integer) and wanted.size:
            raise TypeError("charges go by their ids: whole numbers, or a slice of them")
        place = np.searchsorted(ids, wanted, sorter=(order := np.argsort(ids)))
        found = order[np.minimum(place, ids.size - 1)] if ids.size else np.zeros(0, np.int64)
        missing = wanted[ids[found] != wanted] if ids.size else wanted
        if missing.size:
            raise RecordError(
                f"{self._run.folder}: charge {int(missing[0])} was not tracked; `ids` has those "
                "that were, and [record] tracks says how many."
            )
        return int(found[0]) if one else found.astype(np.int64)


def ids_in(ids: slice, there: Ints) -> Ints:
    """Those of the ids that lie in a slice."""
    low, high, step = ids.start, ids.stop, 1 if ids.step is None else ids.step
    if step < 1 or (low is not None and low < 0) or (high is not None and high < 0):
        raise IndexError("a slice of ids goes upwards, from 0 on")
    start = 0 if low is None else low
    chosen: Ints = there[(there >= start) & ((there - start) % step == 0)]
    return chosen if high is None else chosen[chosen < high]


def _step(records: slice) -> int:
    return 1 if records.step is None else int(records.step)


def _forward(records: slice, there: int) -> slice:
    """The same records, upwards."""
    numbers = range(*records.indices(there))
    if len(numbers) == 0:
        return slice(0, 0, 1)
    low, high = min(numbers[0], numbers[-1]), max(numbers[0], numbers[-1])
    return slice(low, high + 1, abs(numbers.step))


def _numbers(records: Any, there: int) -> Ints:
    """Records by number, counted from the end where negative."""
    asked = np.asarray(records)
    if asked.dtype == bool:
        if asked.shape != (there,):
            raise IndexError(f"a mask of records needs {there} entries; it has {asked.shape}")
        return np.flatnonzero(asked)
    if not np.issubdtype(asked.dtype, np.integer) and asked.size:
        raise TypeError("records go by their numbers: whole numbers, a slice, or a mask")
    numbers: Ints = np.where(asked < 0, asked + there, asked).astype(np.int64)
    if numbers.size and (numbers.min() < 0 or numbers.max() >= there):
        raise IndexError(f"there are {there} records, counted from 0")
    return numbers
