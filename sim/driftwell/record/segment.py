"""One segment: the rows since the one before, and the exact state at its end."""

from __future__ import annotations

from collections.abc import Mapping
from hashlib import sha256
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.record.file_image import (
    file_in_memory,
    image_of,
    put_array,
    put_attributes,
    put_dataset,
)
from driftwell.record.header import Header, put_header
from driftwell.record.index import SegmentFacts
from driftwell.record.layout import COUNTERS, ROWS, SEGMENT, SNAPSHOT, TRACE


class Pending:
    """Rows and snapshots that wait for the next segment."""

    def __init__(self, start: float) -> None:
        self._rows: dict[str, list[NDArray[Any]]] = {entry.path: [] for entry in ROWS}
        self.snapshots: dict[int, dict[str, NDArray[Any]]] = {}
        self.bytes = 0
        self.end = start
        self._start: float | None = None

    @property
    def start(self) -> float:
        """Time of the first entry, s; where nothing waits, the end of the segment before."""
        return self.end if self._start is None else self._start

    def add(self, path: str, rows: NDArray[Any]) -> None:
        """Add rows to a dataset; the array is kept, not copied."""
        self._rows[path].append(rows)
        self.bytes += rows.nbytes

    def add_snapshot(self, number: int, columns: dict[str, NDArray[Any]]) -> None:
        """Add a snapshot; the arrays are kept, not copied."""
        self.snapshots[number] = columns
        self.bytes += sum(column.nbytes for column in columns.values())

    def reaches(self, first: float, last: float) -> None:
        """Note the times an entry covers, s."""
        self._start = first if self._start is None else min(self._start, first)
        self.end = max(self.end, last)

    def rows(self, sizes: Mapping[str, int]) -> dict[str, NDArray[Any]]:
        """All rows by dataset, in one piece each."""
        return {
            entry.path: np.concatenate(
                [np.zeros((0, *entry.row_shape(sizes)), entry.dtype()), *self._rows[entry.path]]
            )
            for entry in ROWS
        }


def segment_image(
    header: Header, number: int, pending: Pending, state: Mapping[str, ArrayLike]
) -> tuple[bytes, SegmentFacts]:
    """The bytes of a segment and what it holds."""
    rows = pending.rows(header.sizes)
    with file_in_memory() as file:
        put_header(file, header)
        put_attributes(
            file, SEGMENT, {"segment": number, "start": pending.start, "end": pending.end}
        )
        for entry in ROWS:
            put_dataset(file, entry, rows[entry.path])
        put_attributes(file["trace/value"], TRACE, {"names": header.traces})
        snapshots = file.create_group("snapshot")
        for k, columns in pending.snapshots.items():
            group = snapshots.create_group(str(k))
            for entry in SNAPSHOT:
                put_dataset(group, entry, columns[entry.path])
        resumable = file.create_group("state")
        for name, value in state.items():
            put_array(resumable, name, value)
        image = image_of(file)
    counts = {str(entry.shape[0]): len(rows[entry.path]) for entry in ROWS}
    facts = SegmentFacts(
        number,
        len(image),
        sha256(image).hexdigest(),
        pending.start,
        pending.end,
        {counter: counts[counter] for counter in COUNTERS},
        tuple((k, float(columns["time"])) for k, columns in pending.snapshots.items()),
    )
    return image, facts
