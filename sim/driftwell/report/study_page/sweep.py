"""The report of a sweep: what was varied, what each run answered, pictures, what failed."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Sequence
from pathlib import Path

from driftwell.answers.answer import Answer
from driftwell.report.page.document import Page, verdict_box
from driftwell.report.page.markup import Markup, joined, tag, together
from driftwell.report.page.numbers import answered, count_of
from driftwell.report.page.picture import framed
from driftwell.report.page.section import Section, folded
from driftwell.report.page.table import Cell, Column, table
from driftwell.report.paper.sheet import style
from driftwell.report.study_page.runs import first_run, linked
from driftwell.report.study_page.shared import failed, made, none_yet, scenario, study_command
from driftwell.report.study_pictures.varied import sweep_figures
from driftwell.study.again.sweep import sweep_again
from driftwell.study.means import Mean
from driftwell.study.missing import ANSWERED
from driftwell.study.progress import Failure
from driftwell.study.summary import case_in_words, value_in_words
from driftwell.study.table import Asked, Table

MOST_ROWS = 1000
"""Rows of a table in the page; the rest stand in the sweep's own table."""
_MOST_VALUES = 12
_NOT_DONE = frozenset({"waiting", "running", "stopped"})


def sweep_report(folder: Path, target: Path) -> Page:
    """The page of the sweep in a folder, to be written as `target`."""
    found = sweep_again(folder)
    study = found.study
    run = first_run(folder, (row.run for row in found.rows))
    seconds = {row.run.digest: row.run.wall_time or 0.0 for row in found.rows}
    whose = "This is the first run that has ended; the others differ in what was varied."
    return Page(
        study.title,
        "sweep",
        _verdict(found),
        [
            _varied(found),
            *(_answers(found, folder, target) if found.questions else [none_yet()]),
            *_pictures(found),
            *failed(_failures(found)),
            scenario(study, run, whose),
            made(study, study_command("sweep", study), run, sum(seconds.values()), len(seconds)),
        ],
    )


def _failures(found: Table) -> list[Failure]:
    return [
        Failure(row.case.number, tuple(row.case.settings), row.run.sentence)
        for row in found.rows
        if row.run.word not in ANSWERED and row.run.word not in _NOT_DONE
    ]


def _verdict(found: Table) -> Markup:
    words = Counter(row.run.word for row in found.rows)
    done = sum(count for word, count in words.items() if word in ANSWERED)
    left = sum(count for word, count in words.items() if word in _NOT_DONE)
    lost = len(found.rows) - done - left
    told = ", ".join(f"{count} {word}" for word, count in sorted(words.items()))
    if lost:
        mark, kind, word = "!", "bad" if lost > left + done else "fair", f"{lost} failed"
    elif left:
        mark, kind, word = "!", "fair", "Not all runs are there yet"
    else:
        mark, kind, word = "✓", "good", "All runs have ended"
    sentence = f"{count_of(len(found.rows), 'case')}: {told}."
    more = [tag("p", "The same command goes on with what is missing.")] if left else []
    if lost:
        more.append(tag("p", tag("a", "What failed, and why", href="#failed")))
    return verdict_box(word, sentence, mark, kind, *more)


def _varied(found: Table) -> Section:
    rows: list[Sequence[Cell]] = []
    for axis in found.study.axes:
        values = [value_in_words(value, axis.unit) for value in axis.values]
        if len(values) > _MOST_VALUES:
            values = [*values[: _MOST_VALUES - 2], "...", values[-1]]
        kind = "equal ratios" if axis.log else ""
        rows.append([axis.name, str(len(axis.values)), ", ".join(values), kind])
    columns = [Column("key"), Column("values", True), Column("which"), Column("spacing")]
    seeds = found.study.replicas
    words = (
        f"Each point was computed with {seeds} seeds; values below are means, with the larger of "
        "the error that the runs tell and that of their scatter."
        if seeds > 1
        else "Each point was computed once."
    )
    return Section(
        "varied",
        "What was varied",
        together(table("Keys that vary.", columns, rows), tag("p", words)),
    )


def _answers(found: Table, folder: Path, target: Path) -> list[Section]:
    cases = _cases(found, folder, target)
    if found.study.replicas == 1:
        return [Section("answers", "Answers", cases)]
    rows: list[Sequence[Cell]] = []
    for row in found.means()[:MOST_ROWS]:
        values = [*_values(found, row.first.values)]
        told = [_mean(mean, asked) for mean, asked in zip(row.means, found.questions, strict=True)]
        rows.append([*values, *told])
    columns = [*_axes(found), *_questions(found)]
    body = together(
        table("Means over seeds, ± their error.", columns, rows),
        folded(f"Every run by itself ({len(found.rows)})", cases),
    )
    return [Section("answers", "Answers", body)]


def _cases(found: Table, folder: Path, target: Path) -> Markup:
    rows: list[Sequence[Cell]] = []
    for row in found.rows[:MOST_ROWS]:
        word = row.run.word
        shown: Cell = word if word in ANSWERED else tag("span", word, class_="failed")
        rows.append(
            [
                linked(folder, target, row.run.digest, f"{row.case.number}"),
                *_values(found, row.case.values),
                shown,
                *("" if answer is None else answered(answer) for answer in row.answers),
            ]
        )
    columns = [Column("case"), *_axes(found), Column("outcome"), *_questions(found)]
    caption = (
        "Answers of each run, ± its sampling error; a number that is a link leads to its report."
    )
    more = len(found.rows) - MOST_ROWS
    if more > 0:
        caption += f" {more} more are in answers.csv of the folder."
    return table(caption, columns, rows)


def _axes(found: Table) -> list[Column]:
    return [Column(axis.name, bool(axis.unit)) for axis in found.study.axes]


def _questions(found: Table) -> list[Column]:
    return [Column(asked.name, True) for asked in found.questions]


def _values(found: Table, values: Sequence[float | str]) -> list[str]:
    pairs = zip(values, found.study.axes, strict=True)
    return [value_in_words(value, axis.unit) for value, axis in pairs]


def _mean(mean: Mean, asked: Asked) -> str:
    if not mean.replicas:
        return ""
    return answered(Answer(asked.name, asked.ask, mean.value, asked.unit, mean.error, ""))


def _pictures(found: Table) -> list[Section]:
    """One for each question, in the order of the questions."""
    with style():
        figures = sweep_figures(found)
    if not figures:
        return []
    drawn = [k for k in range(len(found.questions)) if _ends(found, k) is not None]
    shown = [
        framed(figure, f"{found.questions[k].name} over what was varied.", _seen(found, k))
        for figure, k in zip(figures.values(), drawn, strict=True)
    ]
    return [Section("pictures", "Pictures", joined(shown))]


def _ends(found: Table, k: int) -> tuple[tuple[float, int], tuple[float, int]] | None:
    """Least and largest mean of a question, each with its row."""
    known = [
        (row.means[k].value, number)
        for number, row in enumerate(found.means())
        if math.isfinite(row.means[k].value)
    ]
    return (min(known), max(known)) if known else None


def _seen(found: Table, k: int) -> str:
    ends = _ends(found, k)
    if ends is None:
        return ""
    means = found.means()
    parts = []
    for (_, number), word in zip(ends, ("least", "largest"), strict=True):
        row = means[number]
        where = case_in_words(found.study, row.first)
        parts.append(f"{word} {_mean(row.means[k], found.questions[k])} at {where}")
    return f"{found.questions[k].name}: {'; '.join(parts)}."
