"""The reader of a run's folder; what it gives are numpy arrays in SI units.

It works while the run is still being written: it shows what was sealed when it was opened. Each
file is closed again as soon as it has been read.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from contextlib import contextmanager
from hashlib import file_digest
from pathlib import Path
from typing import TYPE_CHECKING, Any

import h5py
import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import CloudFacts, Evidence, Moments, Snapshot, TraceRequest
from driftwell.errors import AnswerError, RecordError
from driftwell.record.file_image import attributes_of, table_rows
from driftwell.record.header import Header, header_of, trace_name
from driftwell.record.index import (
    SEGMENTS,
    SegmentFacts,
    facts_of,
    index_of,
    sealed_numbers,
    segment_name,
)
from driftwell.record.layout import ANSWERS, OUTCOME, dataset, unit
from driftwell.record.master import ANSWERS_FILE, LAST_FILE, MASTER
from driftwell.record.outcome import UNFINISHED, Outcome

Floats = NDArray[np.float64]

TIME_TOLERANCE = 1e-9
"""Part of the duration within which a snapshot's time is the time asked for."""


def open_run(path: str | Path) -> Run:
    """The run in the folder `path` (or beside the master `path`).

    Raises RecordError where there is none, or where it cannot be read.
    """
    folder = Path(path)
    if folder.name == MASTER and not folder.is_dir():
        folder = folder.parent
    if not (folder / MASTER).is_file() and not (folder / SEGMENTS).is_dir():
        raise RecordError(
            f"{path}: no run found; a run's folder with {MASTER} in it is needed. Name the folder "
            "that `driftwell run` wrote."
        )
    header = None
    segments: list[SegmentFacts] = []
    if (folder / MASTER).is_file():
        with opened(folder / MASTER, _WITHOUT_MASTER) as file:
            header, segments = header_of(file), index_of(file)
    listed = len(segments)
    for number in range(listed + 1, max([0, *sealed_numbers(folder)]) + 1):
        name = folder / segment_name(number)
        with opened(name) as file:
            header = header or header_of(file)
            segments.append(facts_of(file, name.stat().st_size))
    if header is None:
        raise RecordError(f"{folder}: the run ended before it sealed anything; run it again.")
    return Run(folder, header, segments)


_FROM_COPY = "Put it back from a copy of the run."
_WITHOUT_MASTER = f"Move it away: what it shows is in {SEGMENTS}/, which is read without it too."


@contextmanager
def opened(path: Path, remedy: str = _FROM_COPY) -> Iterator[Any]:
    """An HDF5 file for reading, closed afterwards; what is wrong with it is said in words."""
    if not path.is_file():
        raise RecordError(f"{path}: missing; the run's record needs it. {remedy}")
    try:
        with h5py.File(path, "r") as file:
            yield file
    except (OSError, KeyError, RuntimeError, ValueError, TypeError) as fault:
        raise RecordError(f"{path}: damaged or not readable ({fault}). {remedy}") from fault


class Run:
    """One run, as recorded: fulfils :class:`driftwell.answers.evidence.Evidence`.

    folder : where it lies
    header : scenario, parts, programs, machine
    segments : the sealed segments
    """

    def __init__(self, folder: Path, header: Header, segments: Sequence[SegmentFacts]) -> None:
        self.folder = folder
        self.header = header
        self.segments = tuple(segments)
        self._tables: dict[str, NDArray[Any]] = {}
        self.outcome, self.answers = self._ending()
        self._last = self._last_snapshot()

    outcome: Outcome
    """How the run ended; its word is "unfinished" until it has."""
    answers: tuple[Answer, ...]
    """What it says to its questions; none until it has ended."""

    @property
    def scenario_text(self) -> str:
        """The scenario file, as given."""
        return self.header.scenario

    @property
    def clouds(self) -> Mapping[str, CloudFacts]:
        """The clouds by name."""
        return {cloud.name: cloud for cloud in self.header.clouds}

    @property
    def detectors(self) -> Sequence[str]:
        """Names of the detectors, in the order of the scenario."""
        return self.header.detectors

    @property
    def softening(self) -> float:
        """Softening length of the Coulomb sum, m."""
        return self.header.softening

    @property
    def field_error(self) -> float:
        """Relative rms error of the electrodes' solved field; 0 where there is none."""
        return self.header.field_error

    def coulomb_error(self, until: float) -> float:
        """Largest rms relative error of the Coulomb forces measured up to a time, s."""
        rows = self.ledger
        near = TIME_TOLERANCE * self.header.duration
        return float(rows["coulomb_error"][rows["time"] <= until + near].max(initial=0.0))

    @property
    def end_time(self) -> float:
        """Time the record reaches, s."""
        return self.segments[-1].end if self.segments else 0.0

    @property
    def trajectory(self) -> tuple[Floats, NDArray[np.float64]]:
        """Times (records,), s, and states (records, tracked, 6) of the tracked charges.

        States are x, y, z in m and the proper velocity in m/s; not a number once lost. The charges
        are those of ``header.tracked``.
        """
        return self.rows("trajectory/time"), self._read("trajectory/state")

    def track(self, charge: int) -> tuple[Floats, Floats]:
        """Times (records,) and states (records, 6) of the one tracked charge with this id."""
        if charge not in self.header.tracked:
            raise RecordError(
                f"{self.folder}: charge {charge} was not tracked; ids in header.tracked are needed."
            )
        column = self.header.tracked.index(charge)
        return self.rows("trajectory/time"), self._read("trajectory/state", np.s_[:, column], (6,))

    @property
    def ledger(self) -> NDArray[np.void]:
        """The rows of the ledger, a structured array; units by ``unit("ledger", column)``."""
        return self.rows("ledger")

    @property
    def snapshots(self) -> list[float]:
        """Times of the snapshots, s; where a run was stopped or failed, that of its last record."""
        times = [time for facts in self.segments for _, time in facts.snapshots]
        return times if self._last is None else [*times, self._last]

    def snapshot(self, time: float) -> Snapshot:
        """The snapshot recorded at `time` (to a billionth of the duration).

        Raises AnswerError where none was recorded then.
        """
        near = TIME_TOLERANCE * self.header.duration
        places = [
            (abs(found - time), facts, number)
            for facts in self.segments
            for number, found in facts.snapshots
            if abs(found - time) <= near
        ]
        if not places and self._last is not None and abs(self._last - time) <= near:
            with opened(self.folder / LAST_FILE) as file:
                return _snapshot_in(file)
        if not places:
            raise AnswerError(
                f"{self.folder}: no snapshot at t = {time:.9g} s; those recorded are at "
                f"{_listed(self.snapshots)} s. Ask for one of these times."
            )
        _, facts, number = min(places, key=lambda place: place[0])
        with self.segment_file(facts) as file:
            return _snapshot_in(file[f"snapshot/{number}"])

    def moments(self, cloud: str) -> Moments:
        """Moments of a cloud at every record. Raises AnswerError where there is no such cloud."""
        if cloud not in self.clouds:
            raise AnswerError(
                f'{self.folder}: no cloud "{cloud}"; clouds are {_listed(self.clouds)}.'
            )
        table = self.rows("moments")
        own = table[table["cloud"] == self.clouds[cloud].index]
        return Moments(
            *(
                np.ascontiguousarray(own[name])
                for name in (
                    "time",
                    "count",
                    "centre",
                    "covariance",
                    "kinetic_energy",
                    "kinetic_variance",
                )
            )
        )

    def losses(self) -> NDArray[np.void]:
        """Charges lost: fields time, id, cloud, wall, position (3), velocity (3), kinetic_energy,
        weight."""
        return self.rows("losses")

    def crossings(self) -> NDArray[np.void]:
        """Passages through detectors: fields time, id, cloud, detector, direction (+1 or -1),
        position (3), velocity (3), weight."""
        return self.rows("crossings")

    def births(self) -> NDArray[np.void]:
        """Charges that sources bore: fields time, id, cloud, position (3), velocity (3), weight."""
        return self.rows("births")

    def born(self, cloud: str, until: float = np.inf) -> int:
        """Simulated charges of a cloud or source that were there, or born, by a time, s."""
        if cloud not in self.clouds:
            raise AnswerError(
                f'{self.folder}: no cloud "{cloud}"; clouds are {_listed(self.clouds)}.'
            )
        facts = self.clouds[cloud]
        if not facts.emitted:
            return facts.count
        rows = self.births()
        near = TIME_TOLERANCE * self.header.duration
        return int(np.sum((rows["cloud"] == facts.index) & (rows["time"] <= until + near)))

    def trace(self, request: TraceRequest) -> tuple[Floats, Floats]:
        """Times (s) and values (m) of a traced coordinate, however finely it was asked for.

        Raises AnswerError where it was not traced.
        """
        name = trace_name(request)
        if name not in self.header.traces:
            raise AnswerError(
                f'{self.folder}: "{name}" was not traced; traced are {_listed(self.header.traces)}.'
            )
        column = self.header.traces.index(name)
        return self.rows("trace/time"), np.ascontiguousarray(self.rows("trace/value")[:, column])

    def rows(self, path: str) -> NDArray[Any]:
        """All rows of a dataset of the layout that grows, such as "ledger" or "trace/time"."""
        if path not in self._tables:
            self._tables[path] = self._read(path)
        return self._tables[path].copy()

    def unit(self, path: str, column: str = "") -> str:
        """SI unit of a dataset, or of one column of a table: ``unit("ledger", "kinetic")``."""
        return unit(path, column)

    def state(self) -> dict[str, NDArray[Any]]:
        """The state at the end of the last segment: arrays by name, as they were sealed."""
        found: dict[str, NDArray[Any]] = {}

        def keep(name: str, item: Any) -> None:
            if isinstance(item, h5py.Dataset):
                found[name] = np.asarray(item[()])

        if self.segments:
            with self.segment_file(self.segments[-1]) as file:
                file["state"].visititems(keep)
        return found

    def damage(self, thorough: bool = False) -> list[str]:
        """What is wrong with the files, one line each; `thorough` : read every byte of them."""
        faults = []
        for facts in self.segments:
            path = self.folder / facts.name
            try:
                with self.segment_file(facts):
                    pass
            except RecordError as fault:
                faults.append(str(fault))
                continue
            if thorough and facts.sha256:
                with path.open("rb") as file:
                    digest = file_digest(file, "sha256").hexdigest()
                if digest != facts.sha256:
                    faults.append(
                        f"{path}: damaged; {MASTER} notes another digest for it. {_FROM_COPY}"
                    )
        return faults

    @contextmanager
    def segment_file(self, facts: SegmentFacts) -> Iterator[Any]:
        """The file of a sealed segment, open for reading. Raises RecordError if it is damaged."""
        path = self.folder / facts.name
        with opened(path) as file:
            size = path.stat().st_size
            if size != facts.bytes:
                raise RecordError(
                    f"{path}: damaged; it has {size} bytes where {facts.bytes} were sealed. "
                    f"{_FROM_COPY}"
                )
            yield file

    def _read(
        self, path: str, choice: Any = (), row_shape: tuple[int, ...] | None = None
    ) -> NDArray[Any]:
        """`choice` of the rows of each segment, one after another."""
        entry = dataset(path)
        shape = entry.row_shape(self.header.sizes) if row_shape is None else row_shape
        empty = np.zeros((0, *shape), entry.dtype())
        pieces = [empty]
        for facts in self.segments:
            if facts.rows[str(entry.shape[0])]:
                with self.segment_file(facts) as file:
                    pieces.append(_of_now(file[path][choice], empty.dtype))
        return np.concatenate(pieces)

    def _last_snapshot(self) -> float | None:
        """Time of the snapshot beside the record, s; None where there is none."""
        if not (self.folder / LAST_FILE).is_file():
            return None
        with opened(self.folder / LAST_FILE) as file:
            return float(file["time"][()])

    def _ending(self) -> tuple[Outcome, tuple[Answer, ...]]:
        path = self.folder / ANSWERS_FILE
        if not path.is_file():
            return UNFINISHED, ()
        with opened(path) as file:
            outcome = Outcome(**attributes_of(file["outcome"], OUTCOME))
            found = table_rows(ANSWERS, file["answers"][()])
        answers = []
        for row in found:
            error = row.pop("error")
            answers.append(Answer(**row, error=None if np.isnan(error) else error))
        return outcome, tuple(answers)


def _snapshot_in(group: Any) -> Snapshot:
    """A snapshot as it lies in a file."""
    return Snapshot(
        float(group["time"][()]),
        *(
            group[name][()]
            for name in ("id", "cloud", "position", "velocity", "charge", "mass", "weight")
        ),
    )


def _listed(items: Any) -> str:
    """A few of the items in words."""
    shown = [f"{each:.9g}" if isinstance(each, float) else str(each) for each in items]
    if len(shown) > 8:
        shown = [*shown[:4], "...", *shown[-3:]]
    return ", ".join(shown) or "none"


if TYPE_CHECKING:

    def _fulfils(run: Run) -> Evidence:
        return run


def _of_now(rows: NDArray[Any], dtype: np.dtype[Any]) -> NDArray[Any]:
    """Rows as the layout has them now: columns that came later than a record are zero in it."""
    if dtype.names is None or rows.dtype.names == dtype.names:
        return rows
    made = np.zeros(rows.shape, dtype)
    for name in rows.dtype.names or ():
        made[name] = rows[name]
    return made
