"""Rows and snapshots that wait for the next segment, in memory that is used again and again."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.record.layout import ROWS, Dataset


class GrowingRows:
    """The waiting rows of one dataset, in one piece; rows given are copied."""

    def __init__(self, entry: Dataset, sizes: Mapping[str, int]) -> None:
        self._entry = entry
        self._store = np.empty((16, *entry.row_shape(sizes)), entry.dtype())
        self.count = 0

    def add(self, rows: NDArray[Any]) -> int:
        """Add rows; returns their bytes. Raises ValueError where they are not of the layout."""
        if rows.shape[1:] != self._store.shape[1:]:
            raise ValueError(
                f"{self._entry.path}: rows of shape {rows.shape[1:]}, "
                f"{self._store.shape[1:]} needed"
            )
        if rows.dtype.names != self._store.dtype.names:
            raise ValueError(
                f"{self._entry.path}: columns {rows.dtype.names}, not those of the layout"
            )
        after = self.count + len(rows)
        if after > len(self._store):
            larger = np.empty((2 * after, *self._store.shape[1:]), self._store.dtype)
            larger[: self.count] = self._store[: self.count]
            self._store = larger
        added = self._store[self.count : after]
        added[...] = rows
        self.count = after
        return added.nbytes

    def rows(self) -> NDArray[Any]:
        """The rows that wait, as a view that the next rows may overwrite after :meth:`clear`."""
        return self._store[: self.count]

    def clear(self) -> None:
        """Forget the rows."""
        self.count = 0


class Pending:
    """All that waits for the next segment."""

    def __init__(self, sizes: Mapping[str, int]) -> None:
        self._rows = {entry.path: GrowingRows(entry, sizes) for entry in ROWS}
        self.snapshots: dict[int, dict[str, NDArray[Any]]] = {}
        self.bytes = 0
        self.end = 0.0
        self._start: float | None = None

    @property
    def start(self) -> float:
        """Time of the first record, s; where nothing waits, the end of the segment before."""
        return self.end if self._start is None else self._start

    def add(self, path: str, rows: NDArray[Any]) -> None:
        """Add rows to a dataset."""
        self.bytes += self._rows[path].add(rows)

    def add_snapshot(self, number: int, columns: dict[str, NDArray[Any]]) -> None:
        """Add a snapshot; its arrays are kept, not copied."""
        self.snapshots[number] = columns
        self.bytes += sum(column.nbytes for column in columns.values())

    def reaches(self, first: float, last: float) -> None:
        """Note the times an entry covers, s."""
        self._start = first if self._start is None else min(self._start, first)
        self.end = max(self.end, last)

    def rows(self) -> dict[str, NDArray[Any]]:
        """The rows that wait, by dataset."""
        return {path: rows.rows() for path, rows in self._rows.items()}

    def clear(self) -> None:
        """Forget what has been sealed."""
        for rows in self._rows.values():
            rows.clear()
        self.snapshots = {}
        self.bytes = 0
        self._start = None
