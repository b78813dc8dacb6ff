"""The writer of a run's folder: rows are collected, sealed in write-once segments, then mastered.

Whatever happens at whatever instant, the segments sealed before are whole and stay so.
"""

from __future__ import annotations

import time as clocks
from collections.abc import Callable, Mapping, Sequence
from contextlib import suppress
from dataclasses import asdict
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.answers.answer import Answer
from driftwell.errors import FullError, RecordError
from driftwell.particles.state import Particles
from driftwell.record.claim import claim, refuse_taken, unwritable
from driftwell.record.commit import commit, remove_parts
from driftwell.record.file_image import (
    file_in_memory,
    image_of,
    put_attributes,
    put_dataset,
    text_table,
)
from driftwell.record.header import Header
from driftwell.record.index import SegmentFacts, segment_name
from driftwell.record.layout import ANSWERS, OUTCOME, SNAPSHOT
from driftwell.record.master import ANSWERS_FILE, LAST_FILE, MASTER, master_image
from driftwell.record.outcome import Outcome
from driftwell.record.pending import Pending
from driftwell.record.reader import Run
from driftwell.record.sealing import longest_wait, most_bytes
from driftwell.record.segment import segment_image


class RunWriter:
    """Writes one run; made by :meth:`create`. Arrays given to it are copied at once."""

    def __init__(self, folder: Path, header: Header, clock: Callable[[], float]) -> None:
        self.folder = folder
        self.header = header
        self._clock = clock
        self._began = self._sealed_at = clock()
        self._segments: list[SegmentFacts] = []
        self._sealed_bytes = 0
        self._snapshots = 0
        self._has_last = False
        self._pending = Pending(header.sizes)

    @classmethod
    def create(
        cls, folder: Path, header: Header, clock: Callable[[], float] = clocks.monotonic
    ) -> RunWriter:
        """Begin a run in `folder`, made where missing.

        Raises RecordError where the folder holds a run already or cannot be written.
        """
        text = header.scenario.encode()
        refuse_taken(folder, text)
        try:
            folder.mkdir(parents=True, exist_ok=True)
            claim(folder, text, master_image(header, (), answered=False))
        except OSError as fault:
            raise unwritable(folder, fault) from fault
        return cls(folder, header, clock)

    @classmethod
    def resumed(cls, run: Run, clock: Callable[[], float] = clocks.monotonic) -> RunWriter:
        """Go on with a run that was cut off or stopped, behind its last segment.

        How it ended before is forgotten: the file that says so, and any half-written, are removed.
        The snapshot at the last record stays until there is another record.
        """
        writer = cls(run.folder, run.header, clock)
        writer._segments = list(run.segments)
        writer._sealed_bytes = sum(facts.bytes for facts in run.segments)
        writer._snapshots = max([0, *(k for facts in run.segments for k, _ in facts.snapshots)])
        writer._has_last = (run.folder / LAST_FILE).exists()
        writer._pending.end = run.segments[-1].end if run.segments else 0.0
        try:
            (run.folder / ANSWERS_FILE).unlink(missing_ok=True)
            remove_parts(run.folder)
        except OSError as fault:
            raise unwritable(run.folder, fault) from fault
        writer._commit_master(answered=False)
        return writer

    def trajectory(self, time: float, state: ArrayLike) -> None:
        """Record the tracked charges: `state` (tracked, 6), m and m/s, NaN where lost."""
        self._pending.add("trajectory/state", np.asarray(state, np.float64)[np.newaxis])
        self._pending.add("trajectory/time", np.array([time], np.float64))
        self._pending.reaches(time, time)

    def moments(self, time: float, rows: NDArray[Any]) -> None:
        """Record one row for each cloud, in order; fills in the columns time and cloud."""
        filled = rows.copy()
        filled["time"] = time
        filled["cloud"] = np.arange(len(self.header.clouds))
        self._pending.add("moments", filled)
        self._pending.reaches(time, time)

    def snapshot(self, time: float, particles: Particles) -> None:
        """Record every charge alive."""
        self._snapshots += 1
        self._pending.add_snapshot(self._snapshots, _snapshot_columns(time, particles))
        self._pending.reaches(time, time)

    def last(self, time: float, particles: Particles) -> None:
        """Keep every charge alive at the last record of a run that may go on, beside the record."""
        columns = _snapshot_columns(time, particles)
        with file_in_memory() as file:
            for entry in SNAPSHOT:
                put_dataset(file, entry, columns[entry.path])
            image = image_of(file)
        self._commit(LAST_FILE, image)
        self._has_last = True

    def forget_last(self) -> None:
        """Remove what :meth:`last` kept, now or before the run was gone on with."""
        if self._has_last:
            self._has_last = False
            with suppress(OSError):  # it is known by its time, and harms nothing
                (self.folder / LAST_FILE).unlink(missing_ok=True)

    def ledger(self, row: NDArray[Any] | np.void, given: ArrayLike | None = None) -> None:
        """Record a row of the ledger (or several), of the layout's type.

        given : (processes, 8) what each process has given by then; left out: nothing
        """
        found = np.atleast_1d(row)
        exchange = np.zeros((found.size, len(self.header.processes), 8))
        if given is not None:
            exchange[:] = given
        self._pending.add("ledger", found)
        self._pending.add("exchange", exchange)
        if found.size:
            times = found["time"]
            self._pending.reaches(float(times.min()), float(times.max()))

    def losses(self, rows: NDArray[Any]) -> None:
        """Record charges lost, rows of the layout's type."""
        self._pending.add("losses", rows)

    def crossings(self, rows: NDArray[Any]) -> None:
        """Record passages through detectors, rows of the layout's type."""
        self._pending.add("crossings", rows)

    def births(self, rows: NDArray[Any]) -> None:
        """Record charges born, rows of the layout's type."""
        self._pending.add("births", rows)

    def trace(self, times: ArrayLike, values: ArrayLike) -> None:
        """Record samples of the traces: `times` (k,), s, and `values` (k, traces), m."""
        sampled = np.asarray(times, np.float64)
        found = np.asarray(values, np.float64)
        if len(found) != len(sampled):
            raise ValueError(f"trace: {len(sampled)} times with {len(found)} rows of values")
        self._pending.add("trace/value", found)
        self._pending.add("trace/time", sampled)

    def due(self, state: int) -> bool:
        """Whether enough bytes or time have gathered for :meth:`seal`; `state` : its bytes."""
        now = self._clock()
        return self._pending.bytes >= most_bytes(
            self._sealed_bytes, state
        ) or now - self._sealed_at >= longest_wait(now - self._began, state)

    def seal(self, state: Mapping[str, ArrayLike]) -> None:
        """Put what was recorded since the last segment, and the state now, on the disk for good.

        state : name -> array or number; a slash in a name makes a group

        Raises RecordError, saying what is kept, where the disk refuses; nothing recorded is
        dropped then, and :meth:`seal` may be tried again.
        """
        number = len(self._segments) + 1
        image, facts = segment_image(self.header, number, self._pending, state)
        self._commit(segment_name(number), image)
        self._segments.append(facts)
        self._sealed_bytes += facts.bytes
        self._pending.clear()
        self._sealed_at = self._clock()
        self._commit_master(answered=False)

    def finish(self, outcome: Outcome, answers: Sequence[Answer]) -> None:
        """Write how the run ended and what it answers; everything must have been sealed before.

        Raises RecordError where rows wait to be sealed or the disk refuses.
        """
        if self._pending.bytes:
            raise RecordError(
                f"{self.folder}: {self._pending.bytes} bytes recorded are not sealed, so the run "
                f"cannot be finished. {self._kept()}"
            )
        columns: dict[str, list[Any]] = {
            column.name: [getattr(answer, column.name) for answer in answers]
            for column in ANSWERS.columns
        }
        columns["error"] = [np.nan if error is None else error for error in columns["error"]]
        with file_in_memory() as file:
            put_dataset(file, ANSWERS, text_table(ANSWERS, columns))
            put_attributes(file.create_group("outcome"), OUTCOME, asdict(outcome))
            image = image_of(file)
        self._commit(ANSWERS_FILE, image)
        self._commit_master(answered=True)

    def _commit_master(self, answered: bool) -> None:
        self._commit(MASTER, master_image(self.header, self._segments, answered))

    def _commit(self, name: str, image: bytes) -> None:
        try:
            commit(self.folder / name, image)
        except OSError as fault:
            raise FullError(
                f"{self.folder / name}: {fault.strerror or fault} while writing {len(image)} "
                f"bytes. {self._kept()} Make space or give access; the same command then goes on "
                "from there."
            ) from fault

    def _kept(self) -> str:
        if not self._segments:
            return "Kept: nothing yet, no segment was sealed."
        count = len(self._segments)
        return (
            f"Kept: {count} segment{'s' * (count > 1)}, whole up to t = "
            f"{self._segments[-1].end:.6g} s; `driftwell info {self.folder}` shows them."
        )


def _snapshot_columns(time: float, particles: Particles) -> dict[str, NDArray[Any]]:
    """The datasets of a snapshot, copied."""
    columns = {"time": np.float64(time)} | {
        entry.path: getattr(particles, entry.path) for entry in SNAPSHOT if entry.shape
    }
    return {
        entry.path: np.array(np.transpose(columns[entry.path]), entry.dtype(), order="C")
        for entry in SNAPSHOT
    }
