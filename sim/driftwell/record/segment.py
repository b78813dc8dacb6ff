"""One segment: the rows since the one before, and the exact state at its end."""

from __future__ import annotations

from collections.abc import Mapping
from hashlib import sha256

from numpy.typing import ArrayLike

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
from driftwell.record.pending import Pending


def segment_image(
    header: Header, number: int, pending: Pending, state: Mapping[str, ArrayLike]
) -> tuple[bytes, SegmentFacts]:
    """The bytes of a segment and what it holds."""
    rows = pending.rows()
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
