"""What studies came to, readable from Python: tables of numbers, intervals, verdicts in words."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from html import escape
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import AnswerError
from driftwell.record.summary import WIDTH
from driftwell.study.convergence.table import Report
from driftwell.study.convergence.verdict import Convergence
from driftwell.study.convergence.words import answer_lines, converged
from driftwell.study.limit_run import Searched
from driftwell.study.limit_search import FOUND, Verdict
from driftwell.study.limit_words import limit_lines
from driftwell.study.progress import Failure, SweepResult
from driftwell.study.summary import summary
from driftwell.study.sweep_folder import run_folder
from driftwell.study.table import Table


@dataclass(frozen=True, slots=True)
class Swept:
    """A sweep: one row for each case.

    table : cases, runs and answers; result : what ran and what failed
    """

    folder: Path
    table: Table
    result: SweepResult

    @property
    def failures(self) -> tuple[Failure, ...]:
        """The cases without answers, and why."""
        return self.result.failures

    @property
    def columns(self) -> Mapping[str, NDArray[Any]]:
        """Numbers by name, one entry for each case: what varies (SI, or text), ``replica``, every
        answer, and its sampling error as ``NAME error``; not a number where there is none.
        """
        rows, study = self.table.rows, self.table.study
        found: dict[str, NDArray[Any]] = {
            axis.name: np.array([row.case.values[k] for row in rows])
            for k, axis in enumerate(study.axes)
        }
        found["replica"] = np.array([row.case.replica for row in rows], dtype=np.int64)
        for k, asked in enumerate(self.table.questions):
            answers = [row.answers[k] for row in rows]
            found[asked.name] = np.array([math.nan if a is None else a.value for a in answers])
            found[f"{asked.name} error"] = np.array(
                [math.nan if a is None or a.error is None else a.error for a in answers]
            )
        return found

    @property
    def units(self) -> Mapping[str, str]:
        """Units of the columns that have one."""
        axes = {axis.name: axis.unit for axis in self.table.study.axes}
        return {**axes, **{asked.name: asked.unit for asked in self.table.questions}}

    @property
    def runs(self) -> tuple[Path, ...]:
        """The folder of each case's run, in the order of the rows; for ``driftwell.open_run``."""
        return tuple(run_folder(self.folder, row.run.digest) for row in self.table.rows)

    def __str__(self) -> str:
        return "\n".join(summary(self.table.study, self.result, WIDTH))

    def __repr__(self) -> str:
        return f"<Sweep of {len(self.table.rows)} runs, {len(self.failures)} failed, {self.folder}>"

    def _repr_html_(self) -> str:
        return _lines(str(self))


@dataclass(frozen=True, slots=True)
class Converged:
    """A convergence study: every answer with all its errors.

    report : what was planned and found; failures : runs without answers
    """

    folder: Path
    report: Report
    failures: tuple[Failure, ...]

    @property
    def rows(self) -> tuple[Convergence, ...]:
        """One for each answer: the answer, its errors by axis, the combined error, a verdict."""
        return self.report.rows

    @property
    def kept(self) -> bool:
        """Whether all answers keep the tolerance that was asked for."""
        return converged(self.report)

    def __getitem__(self, name: str) -> Convergence:
        """The row of one question. Raises AnswerError where there is none of that name."""
        for row in self.rows:
            if row.answer.name == name:
                return row
        known = ", ".join(repr(row.answer.name) for row in self.rows)
        raise AnswerError(f"no answer is called {name!r}; there are {known}")

    def verdict(self, name: str) -> str:
        """What is to be said of one answer, in words."""
        return self[name].verdict(self.report.tolerance)

    def __str__(self) -> str:
        return "\n".join(answer_lines(self.report, WIDTH))

    def __repr__(self) -> str:
        return f"<Convergence of {len(self.rows)} answers, {self.folder}>"

    def _repr_html_(self) -> str:
        return _lines(str(self))


@dataclass(frozen=True, slots=True)
class Limited:
    """A search for a limit, and what it found."""

    folder: Path
    searched: Searched

    @property
    def verdict(self) -> Verdict | None:
        """What was found: its word, interval, best value; None where it was stopped before."""
        return self.searched.verdict

    @property
    def found(self) -> bool:
        """Whether there is one crossing, within the resolution asked for."""
        return self.verdict is not None and self.verdict.word == FOUND

    @property
    def interval(self) -> tuple[float, float] | None:
        """The interval of the crossing, SI; None where there is none."""
        return None if self.verdict is None else self.verdict.interval

    @property
    def best(self) -> float:
        """The likeliest value, SI; not a number where there is none."""
        return math.nan if self.verdict is None else self.verdict.best

    @property
    def values(self) -> NDArray[np.float64]:
        """(runs, 3): value of the key (SI), the answer, its sampling error; not a number where
        there is none."""
        rows = [
            (
                each.wanted.place.value,
                math.nan if each.answer is None else each.answer.value,
                math.nan if each.answer is None or each.answer.error is None else each.answer.error,
            )
            for each in self.searched.evaluations
        ]
        return np.array(rows, dtype=np.float64).reshape(-1, 3)

    def __str__(self) -> str:
        return "\n".join(limit_lines(self.searched, WIDTH))

    def __repr__(self) -> str:
        word = "stopped" if self.verdict is None else self.verdict.word
        return f"<Limit: {word}, {len(self.searched.evaluations)} runs, {self.folder}>"

    def _repr_html_(self) -> str:
        return _lines(str(self))


def _lines(text: str) -> str:
    return f"<pre style='line-height:1.35;background:none;overflow-x:auto'>{escape(text)}</pre>"
