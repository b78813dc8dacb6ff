"""Which segment holds what: kept by the writer, listed in the master."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from driftwell.record.file_image import put_dataset, table_rows, text_table
from driftwell.record.layout import COUNTERS, ROWS, dataset

SEGMENTS = "segments"
"""Folder of the segments within a run's folder."""


@dataclass(frozen=True, slots=True)
class SegmentFacts:
    """One sealed segment.

    bytes : size of the file
    sha256 : digest of the file, empty where the master does not list it
    start, end : s, of its first and last record
    rows : number of rows by the layout's word for the length
    snapshots : number and time (s) of each snapshot in it
    """

    number: int
    bytes: int
    sha256: str
    start: float
    end: float
    rows: Mapping[str, int]
    snapshots: tuple[tuple[int, float], ...]

    @property
    def name(self) -> str:
        """Path of the file within the run's folder, the same on every system."""
        return segment_name(self.number)


def segment_name(number: int) -> str:
    """Path of a segment within the run's folder."""
    return f"{SEGMENTS}/{number:06d}.h5"


def sealed_numbers(folder: Path) -> list[int]:
    """Numbers of the segments in a run's folder; whatever else lies there is passed by."""
    return sorted(
        int(path.stem)
        for path in (folder / SEGMENTS).glob("*.h5")
        if path.stem.isdecimal() and path.name == f"{int(path.stem):06d}.h5"
    )


def put_index(file: Any, segments: Sequence[SegmentFacts]) -> None:
    """Write the index into a master made in memory."""
    columns: dict[str, list[Any]] = {
        name: [getattr(facts, name) for facts in segments]
        for name in ("number", "bytes", "sha256", "start", "end")
    }
    for counter in COUNTERS:
        columns[f"rows_{counter}"] = [facts.rows[counter] for facts in segments]
    entry = dataset("index/segment")
    put_dataset(file, entry, text_table(entry, columns))
    found = [(*each, facts.number) for facts in segments for each in facts.snapshots]
    entry = dataset("index/snapshot")
    columns = {
        name: [row[k] for row in found] for k, name in enumerate(("number", "time", "segment"))
    }
    put_dataset(file, entry, text_table(entry, columns))


def index_of(file: Any) -> list[SegmentFacts]:
    """The segments an open master lists."""
    snapshots: dict[int, list[tuple[int, float]]] = {}
    for row in table_rows(dataset("index/snapshot"), file["index/snapshot"][()]):
        snapshots.setdefault(row["segment"], []).append((row["number"], row["time"]))
    return [
        SegmentFacts(
            row["number"],
            row["bytes"],
            row["sha256"],
            row["start"],
            row["end"],
            {counter: row.get(f"rows_{counter}", 0) for counter in COUNTERS},
            tuple(snapshots.get(row["number"], ())),
        )
        for row in table_rows(dataset("index/segment"), file["index/segment"][()])
    ]


def facts_of(file: Any, size: int) -> SegmentFacts:
    """The facts of an open segment that the master does not list; `size` : bytes of the file."""
    rows = {
        entry.shape[0]: file[entry.path].shape[0] if entry.path in file else 0 for entry in ROWS
    }
    numbers = sorted(int(name) for name in file["snapshot"])
    return SegmentFacts(
        int(file.attrs["segment"]),
        size,
        "",
        float(file.attrs["start"]),
        float(file.attrs["end"]),
        {counter: rows[counter] for counter in COUNTERS},
        tuple((k, float(file[f"snapshot/{k}/time"][()])) for k in numbers),
    )
