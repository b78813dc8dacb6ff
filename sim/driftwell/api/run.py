"""A run from Python: what was recorded, read when it is asked for."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import CloudFacts, Moments, Snapshot, TraceRequest
from driftwell.api.answers import Answers
from driftwell.api.track_view import TrackView
from driftwell.record.header import Header
from driftwell.record.index import SegmentFacts
from driftwell.record.outcome import Outcome
from driftwell.record.reader import Run as Record
from driftwell.record.reader import open_run as open_record
from driftwell.record.summary import summary

if TYPE_CHECKING:
    from driftwell.api.datasets import Datasets
    from driftwell.api.scenario import Scenario
    from driftwell.judgement import Finding

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


def open_run(path: str | Path) -> Run:
    """The run in a folder, ended or still going on: what was sealed when it was opened.

    Raises RecordError where there is none, or where it cannot be read.
    """
    return Run(open_record(path))


class Run:
    """One run, as recorded. Arrays are numpy's, in SI units.

    Nothing large is read before it is asked for; tables, once read, are kept.

    Parameters
    ----------
    record : the reader of its folder
    told : what was said while it was carried out in this process
    """

    __slots__ = ("_answers", "_record", "told")

    def __init__(self, record: Record, told: tuple[str, ...] = ()) -> None:
        self._record = record
        self._answers = Answers(record.answers)
        self.told = told

    # ---- what it is ----

    @property
    def record(self) -> Record:
        """The reader of the folder, as the lower layers take it."""
        return self._record

    @property
    def folder(self) -> Path:
        """Where it lies."""
        return self._record.folder

    @property
    def header(self) -> Header:
        """Scenario, parts, programs, machine."""
        return self._record.header

    @property
    def segments(self) -> tuple[SegmentFacts, ...]:
        """The sealed segments."""
        return self._record.segments

    @property
    def outcome(self) -> Outcome:
        """How it ended; its word is "unfinished" until it has."""
        return self._record.outcome

    @property
    def scenario(self) -> Scenario:
        """What was run; files that it names count from the run's folder."""
        from driftwell.api.scenario import of_text
        from driftwell.record.claim import SCENARIO_FILE

        return of_text(self.header.scenario, self.folder / SCENARIO_FILE, self.header.settings)

    @property
    def scenario_text(self) -> str:
        """The scenario file, as given."""
        return self._record.scenario_text

    @property
    def clouds(self) -> Mapping[str, CloudFacts]:
        """The clouds, and the sources, by name."""
        return self._record.clouds

    @property
    def detectors(self) -> Sequence[str]:
        """Names of the detectors, in the order of the scenario."""
        return self._record.detectors

    @property
    def softening(self) -> float:
        """Softening length of the Coulomb sum, m."""
        return self._record.softening

    @property
    def field_error(self) -> float:
        """Relative rms error of the electrodes' solved field; 0 where there is none."""
        return self._record.field_error

    @property
    def end_time(self) -> float:
        """Time the record reaches, s."""
        return self._record.end_time

    # ---- what it says ----

    @property
    def answers(self) -> Answers:
        """What it says to its questions; none until it has ended."""
        return self._answers

    def ask(self, ask: str, *, name: str | None = None, **keys: Any) -> Answer:
        """The answer to one more question, of any kind that ``[[question]]`` has.

        Parameters
        ----------
        ask : the kind, such as "rms-size"
        name : what the answer is called; the kind where it is left out
        keys : those of the kind: ``of="load", axis="x", at="end"``

        Raises
        ------
        ScenarioError
            The question has faults, told as those of a file.
        AnswerError
            The run has not recorded what the question needs; the text says what.
        """
        from driftwell.api.asked import asked

        return asked(self._record, ask, name, keys)

    @property
    def judgement(self) -> tuple[Finding, ...]:
        """What is to be said against it: each finding with its figure, limit and remedy."""
        from driftwell.judgement import judged

        return judged(self._record)

    def summary(self) -> str:
        """All of that in words, as ``driftwell info``."""
        return "\n".join(summary(self._record))

    # ---- trajectories ----

    @property
    def times(self) -> Floats:
        """Times of the records (records,), s."""
        return self.rows("trajectory/time")

    @property
    def ids(self) -> Ints:
        """Ids of the tracked charges."""
        return np.array(self.header.tracked, dtype=np.int64)

    @property
    def positions(self) -> TrackView:
        """``positions[records, ids]``: x, y, z of tracked charges, m."""
        return TrackView(self._record, slice(0, 3, 1), "m")

    @property
    def velocities(self) -> TrackView:
        """``velocities[records, ids]``: proper velocity gamma v of tracked charges, m/s."""
        return TrackView(self._record, slice(3, 6, 1), "m/s")

    @property
    def trajectory(self) -> tuple[Floats, Floats]:
        """All at once: times (records,), s, and states (records, tracked, 6), m and m/s.

        States are x, y, z and the proper velocity; not a number once lost.
        """
        return self._record.trajectory

    def track(self, charge: int) -> tuple[Floats, Floats]:
        """Times (records,) and states (records, 6) of the one tracked charge with this id."""
        return self._record.track(charge)

    # ---- the other tables ----

    @property
    def ledger(self) -> NDArray[np.void]:
        """The rows of the ledger, a structured array; units by ``unit("ledger", column)``."""
        return self._record.ledger

    @property
    def snapshots(self) -> list[float]:
        """Times of the snapshots, s."""
        return self._record.snapshots

    def snapshot(self, time: float | str) -> Snapshot:
        """Every charge at the snapshot of a time, s, or at "start" or "end".

        Raises AnswerError where none was recorded then.
        """
        if isinstance(time, str):
            from driftwell.api.instants import instant

            time = instant(time, self._record)
        return self._record.snapshot(time)

    def moments(self, cloud: str) -> Moments:
        """Moments of a cloud at every record. Raises AnswerError where there is no such cloud."""
        return self._record.moments(cloud)

    def losses(self) -> NDArray[np.void]:
        """Charges lost: fields time, id, cloud, wall, position (3), velocity (3), kinetic_energy,
        weight."""
        return self._record.losses()

    def crossings(self) -> NDArray[np.void]:
        """Passages through detectors: fields time, id, cloud, detector, direction (+1 or -1),
        position (3), velocity (3), weight."""
        return self._record.crossings()

    def births(self) -> NDArray[np.void]:
        """Charges that sources bore: fields time, id, cloud, position (3), velocity (3), weight."""
        return self._record.births()

    def born(self, cloud: str, until: float = np.inf) -> int:
        """Simulated charges of a cloud or source that were there, or born, by a time, s."""
        return self._record.born(cloud, until)

    def trace(self, request: TraceRequest) -> tuple[Floats, Floats]:
        """Times (s) and values (m) of a traced coordinate. Raises AnswerError where there is
        none."""
        return self._record.trace(request)

    def coulomb_error(self, until: float) -> float:
        """Largest rms relative error of the Coulomb forces measured up to a time, s."""
        return self._record.coulomb_error(until)

    def rows(self, path: str) -> NDArray[Any]:
        """All rows of a dataset of the layout that grows, such as "ledger" or "trace/time"."""
        return self._record.rows(path)

    def unit(self, path: str, column: str = "") -> str:
        """SI unit of a dataset, or of one column of a table: ``unit("ledger", "kinetic")``."""
        return self._record.unit(path, column)

    def state(self) -> dict[str, NDArray[Any]]:
        """The state at the end of the last segment: arrays by name, as they were sealed."""
        return self._record.state()

    def damage(self, thorough: bool = False) -> list[str]:
        """What is wrong with the files, one line each; `thorough` : read every byte of them."""
        return self._record.damage(thorough)

    # ---- seen otherwise ----

    @property
    def xarray(self) -> Datasets:
        """The same as datasets of xarray, with dimensions, coordinates and units.

        Raises DriftwellError where xarray is not installed; the text says how it is.
        """
        from driftwell.api.datasets import datasets

        return datasets(self._record)

    def plot(self, what: str, **options: Any) -> Any:
        """A picture of it, as a figure of matplotlib.

        Parameters
        ----------
        what : one of the figures of ``driftwell plot``, or of the pictures in a run's folder
        options : those of :class:`driftwell.report.figures.options.FigureOptions`, such as
            ``at="end", plane="zx"``

        Raises
        ------
        DriftwellError
            There is no picture or option of that name, or the run holds nothing to be shown in it.
        """
        from driftwell.api.pictures import picture

        return picture(self._record, what, options)

    def export(
        self,
        format_name: str,
        path: str | Path | None = None,
        what: Sequence[str] = (),
        times: Sequence[str | float] = (),
        author: str = "",
    ) -> Path:
        """Write it in an open format, as ``driftwell export``; returns where it is.

        Parameters
        ----------
        format_name : openpmd, csv, parquet or vtk
        path : where; None: the run's name with the format's, in the working folder
        what : parts of the run; none: what is usual of the format
        times : "start", "end", "20 us", "10 us..20 us" or s; none: all
        author : who answers for the data

        Raises RecordError where that cannot be done; the text says why.
        """
        from driftwell.exports.table import export

        return export(self._record, format_name, path, what, times, author)

    def report(self, path: str | Path | None = None) -> Path:
        """Write it as one HTML page, as ``driftwell report``; returns where it is.

        path : None for ``report.html`` in its folder

        Raises RecordError where that cannot be done; the text says why.
        """
        from driftwell.report.written import write_report

        return write_report(self.folder, path).path

    def __repr__(self) -> str:
        return f"<Run {self.header.title!r}: {self.outcome.word}, {self.folder}>"

    def _repr_html_(self) -> str:
        from driftwell.api.html import run_html

        return run_html(self)
