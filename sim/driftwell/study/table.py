"""The table of a sweep's answers, as CSV and HDF5: one row for each case, and the means.

``answers.csv`` has one line of headings, each with its unit in brackets ("1": a plain number), and
one line for each case; what is not known is left empty. ``means.csv`` has one line for all replicas
of a point. ``answers.h5`` holds both, with notes and whole sentences.
"""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path

from driftwell.answers.answer import Answer
from driftwell.record.claim import unwritable
from driftwell.record.commit import commit
from driftwell.study.axis import Value
from driftwell.study.catalogue import WAITING, Catalogue, Row
from driftwell.study.means import USED, Mean, mean
from driftwell.study.points import Axis, Case
from driftwell.study.read import Study

TABLE_CSV = "answers.csv"
MEANS_CSV = "means.csv"
TABLE_H5 = "answers.h5"


@dataclass(frozen=True, slots=True)
class Asked:
    """A question as the table has it: runs may give different units to the same name."""

    name: str
    ask: str
    unit: str


@dataclass(frozen=True, slots=True)
class CaseRow:
    """One case with its answers, each at the place of its question; None where there is none."""

    case: Case
    run: Row
    answers: tuple[Answer | None, ...]


@dataclass(frozen=True, slots=True)
class MeanRow:
    """All replicas of one point; `first` is the first of their cases."""

    first: Case
    means: tuple[Mean, ...]


@dataclass(frozen=True, slots=True)
class Table:
    """All answers of a study."""

    study: Study
    questions: tuple[Asked, ...]
    rows: tuple[CaseRow, ...]

    def means(self) -> tuple[MeanRow, ...]:
        """Means over the replicas of each point; runs that were stopped or failed are left out."""
        size = self.study.replicas
        points = (self.rows[k : k + size] for k in range(0, len(self.rows), size))
        return tuple(MeanRow(rows[0].case, self._means(rows)) for rows in points)

    def _means(self, rows: Sequence[CaseRow]) -> tuple[Mean, ...]:
        used = [row for row in rows if row.run.word in USED]
        return tuple(
            mean([answer for row in used if (answer := row.answers[k]) is not None])
            for k in range(len(self.questions))
        )


def table_of(study: Study, catalogue: Catalogue) -> Table:
    """The table of a study, as far as its runs have come."""
    known = {row.number: row for row in catalogue.rows()}
    found = [known.get(case.number) or _not_noted(case) for case in study.cases]
    questions = tuple(dict.fromkeys(_asked(answer) for row in found for answer in row.answers))
    place = {asked: k for k, asked in enumerate(questions)}
    rows = []
    for case, run in zip(study.cases, found, strict=True):
        answers: list[Answer | None] = [None] * len(questions)
        for answer in run.answers:
            answers[place[_asked(answer)]] = answer
        rows.append(CaseRow(case, run, tuple(answers)))
    return Table(study, questions, tuple(rows))


def write_tables(folder: Path, study: Study, catalogue: Catalogue) -> None:
    """Write the tables of a sweep into its folder, each as a whole, in place of older ones.

    Raises RecordError where the disk refuses; what stood there before stays then.
    """
    from driftwell.study.table_image import table_image

    table = table_of(study, catalogue)
    try:
        commit(folder / TABLE_CSV, csv_text(case_lines(table)).encode())
        if study.replicas > 1:
            commit(folder / MEANS_CSV, csv_text(mean_lines(table)).encode())
        else:
            (folder / MEANS_CSV).unlink(missing_ok=True)
        commit(folder / TABLE_H5, table_image(table))
    except OSError as fault:
        raise unwritable(folder, fault) from fault


def case_lines(table: Table) -> Iterable[Sequence[str]]:
    """The headings, and one line for each case."""
    asked = [
        f"{question.name}{what} [{question.unit}]"
        for question in table.questions
        for what in ("", ", error")
    ]
    yield _unlike(["case", "replica", *_headings(table.study.axes), "outcome", *asked])
    for row in table.rows:
        cells = [str(row.case.number), str(row.case.replica), *map(_cell, row.case.values)]
        cells.append(row.run.word)
        for answer in row.answers:
            cells += ["", ""] if answer is None else [_cell(answer.value), _cell(answer.error)]
        yield cells


def mean_lines(table: Table) -> Iterable[Sequence[str]]:
    """The headings, and one line for all replicas of a point."""
    asked = [
        f"{question.name}{what}"
        for question in table.questions
        for what in (f" [{question.unit}]", f", error [{question.unit}]", ", replicas")
    ]
    yield _unlike(["first case", *_headings(table.study.axes), *asked])
    for row in table.means():
        cells = [str(row.first.number), *map(_cell, row.first.values)]
        for each in row.means:
            cells += [_cell(each.value), _cell(each.error), str(each.replicas)]
        yield cells


def csv_text(lines: Iterable[Sequence[str]]) -> str:
    """Comma-separated text (RFC 4180, lines that end with a line feed)."""
    text = io.StringIO()
    csv.writer(text, lineterminator="\n").writerows(lines)
    return text.getvalue()


def _asked(answer: Answer) -> Asked:
    return Asked(answer.name, answer.ask, answer.unit)


def _not_noted(case: Case) -> Row:
    return Row(case.number, "", case.settings, WAITING, "", None, 0, ())


def _headings(axes: Sequence[Axis]) -> list[str]:
    return [f"{axis.name} [{axis.unit}]" if axis.unit else axis.name for axis in axes]


def _cell(value: Value | None) -> str:
    """A number to the last bit; empty where there is none."""
    if isinstance(value, str):
        return value
    if value is None or math.isnan(value):
        return ""
    return repr(value).removesuffix(".0")


def _unlike(headings: Sequence[str]) -> list[str]:
    """The headings, each of them once: a second one of the same words is numbered."""
    found: list[str] = []
    for heading in headings:
        number, name = 1, heading
        while name in found:
            number += 1
            name = f"{heading} ({number})"
        found.append(name)
    return found
