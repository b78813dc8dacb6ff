"""The master: a small file that shows all segments in one piece, written anew for each of them.

Datasets that grow are virtual datasets over the segments; snapshots, the state and the answers are
links. All paths are relative to the master, so that a run's folder can be moved.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import h5py
import numpy as np

from driftwell.record.file_image import (
    describe,
    file_in_memory,
    image_of,
    put_attributes,
    put_dataset,
)
from driftwell.record.header import Header, put_header
from driftwell.record.index import SegmentFacts, put_index
from driftwell.record.layout import ROWS, TRACE, Dataset

MASTER = "run.h5"
ANSWERS_FILE = "answers.h5"
LAST_FILE = "last.h5"
"""All charges at the last record of a run that was stopped or failed; gone when it goes on."""


def master_image(header: Header, segments: Sequence[SegmentFacts], answered: bool) -> bytes:
    """The bytes of the master; `answered` : whether answers.h5 is there to be linked."""
    with file_in_memory() as file:
        put_header(file, header)
        put_index(file, segments)
        for entry in ROWS:
            _put_concatenation(file, entry, header, segments)
        put_attributes(file["trace/value"], TRACE, {"names": header.traces})
        snapshots = file.create_group("snapshot")
        for facts in segments:
            for k, _ in facts.snapshots:
                snapshots[str(k)] = h5py.ExternalLink(facts.name, f"/snapshot/{k}")
        if segments:
            file["state"] = h5py.ExternalLink(segments[-1].name, "/state")
        if answered:
            file["answers"] = h5py.ExternalLink(ANSWERS_FILE, "/answers")
            file["outcome"] = h5py.ExternalLink(ANSWERS_FILE, "/outcome")
        return image_of(file)


def _put_concatenation(
    file: Any, entry: Dataset, header: Header, segments: Sequence[SegmentFacts]
) -> None:
    """One dataset over the segments' rows, one after another."""
    counts = [facts.rows[str(entry.shape[0])] for facts in segments]
    shape = (sum(counts), *entry.row_shape(header.sizes))
    if 0 in shape:
        put_dataset(file, entry, np.zeros(shape, entry.dtype()))
        return
    layout = h5py.VirtualLayout(shape, entry.dtype())
    first = 0
    for facts, count in zip(segments, counts, strict=True):
        if count:
            layout[first : first + count] = h5py.VirtualSource(
                facts.name, entry.path, (count, *shape[1:]), entry.dtype()
            )
        first += count
    fill = None if entry.columns else np.nan
    describe(file.create_virtual_dataset(entry.path, layout, fillvalue=fill), entry)
