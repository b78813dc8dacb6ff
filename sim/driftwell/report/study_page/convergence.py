"""The report of a convergence study: each answer with all its errors, and what it cost."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

from driftwell.report.page.document import Page, verdict_box
from driftwell.report.page.markup import Markup, joined, tag, together
from driftwell.report.page.numbers import answered, count_of
from driftwell.report.page.picture import framed
from driftwell.report.page.section import Section
from driftwell.report.page.table import Cell, Column, table
from driftwell.report.paper.sheet import style
from driftwell.report.study_page.runs import first_run, linked
from driftwell.report.study_page.shared import failed, made, none_yet, scenario
from driftwell.report.study_pictures.convergence import convergence_figure
from driftwell.study.again.convergence import Judged, convergence_again
from driftwell.study.again.folder import study_table
from driftwell.study.catalogue import Row
from driftwell.study.convergence.axes import AXES
from driftwell.study.convergence.table import Report
from driftwell.study.convergence.verdict import CHANCE, CONVERGED, Convergence, in_words
from driftwell.study.convergence.words import part_told, share_told
from driftwell.study.missing import ANSWERED
from driftwell.study.progress import Failure

_NOT_DONE = frozenset({"waiting", "running", "stopped"})


def convergence_report(folder: Path, target: Path) -> Page:
    """The page of the convergence study in a folder, to be written as `target`."""
    found = convergence_again(folder)
    run = first_run(folder, found.rows)
    report = found.report
    failures = [
        Failure(row.number, row.settings, row.sentence)
        for row in found.rows
        if row.word not in ANSWERED and row.word not in _NOT_DONE
    ]
    middle = [none_yet()] if report is None else [_answers(found, report), *_picture(report)]
    if report is not None:
        middle.append(_parts(report))
    seconds = sum(row.wall_time or 0.0 for row in found.rows)
    return Page(
        found.study.title,
        "convergence study",
        _verdict(found),
        [
            *middle,
            _runs(found, folder, target),
            *failed(failures),
            scenario(found.study, run, "This is the run that is judged."),
            made(found.study, _command(folder, found), run, seconds, len(found.rows)),
        ],
    )


def _verdict(found: Judged) -> Markup:
    report = found.report
    if report is None:
        return verdict_box(
            "Not judged yet", "Not all runs are there; the same command goes on.", "!", "fair"
        )
    count = len(found.verdicts)
    if report.tolerance is None:
        words = "No tolerance was asked for: the errors are told, not judged against one."
        return verdict_box(f"{count_of(count, 'answer')} with all errors", words, "✓", "good")
    kept = sum(verdict == CONVERGED for verdict in found.verdicts)
    asked = f"{100.0 * report.tolerance:g} %"
    if kept == count:
        return verdict_box("Converged", f"All {count} answers keep to {asked}.", "✓", "good")
    words = f"{kept} of {count_of(count, 'answer')} keep to {asked}."
    return verdict_box("Not converged", words, "✗", "bad")


def _answers(found: Judged, report: Report) -> Section:
    rows: list[Sequence[Cell]] = []
    for row, verdict in zip(report.rows, found.verdicts, strict=True):
        error = None if math.isnan(row.combined) else row.combined
        shown = answered(replace(row.answer, error=error))
        sign = "✓ " if verdict == CONVERGED else ""
        rows.append([row.answer.name, shown, answered(row.answer), f"{sign}{verdict}"])
    columns = [
        Column("question"),
        Column("answer, ± all errors", True),
        Column("± sampling alone", True),
        Column("verdict"),
    ]
    caption = (
        "Answers of the judged run. The combined error is the root of the sum of the squares of "
        "chance and of every axis that matters."
    )
    return Section("answers", "Answers", table(caption, columns, rows))


def _picture(report: Report) -> list[Section]:
    with style():
        figure = convergence_figure(report)
    if figure is None:
        return []
    seen = "; ".join(
        f"{row.answer.name}: combined {share_told(row, row.combined)}"
        for row in report.rows
        if math.isfinite(row.combined) and math.isfinite(row.answer.value)
    )
    caption = "Errors of each answer on one scale; open marks are bounds, below the noise."
    return [Section("picture", "Picture", framed(figure, caption, f"{seen}."))]


def _parts(report: Report) -> Section:
    """Every error of every answer, and how it was found."""
    axes = [axis for axis in AXES if axis != "seeds" and any(axis in r.axes for r in report.rows)]
    rows: list[Sequence[Cell]] = [
        [row.answer.name, *(_part(row, name) for name in (CHANCE, *axes))]
        for row in report.rows
        if math.isfinite(row.answer.value)
    ]
    columns = [Column("question"), *(Column(in_words(name)) for name in (CHANCE, *axes))]
    caption = (
        "Each error as part of the value, and how it was found. An order near that of the scheme "
        "says that the error falls as it should."
    )
    return Section("errors", "Where the errors come from", table(caption, columns, rows))


def _part(row: Convergence, name: str) -> Markup | str:
    if name != CHANCE and name not in row.axes:
        return ""
    size, how = part_told(row, name)
    return together(tag("strong", size), tag("div", how, class_="pale"))


def _runs(found: Judged, folder: Path, target: Path) -> Section:
    levels = () if found.report is None else found.report.plan.levels
    rows: list[Sequence[Cell]] = []
    for k, row in enumerate(found.rows):
        level = levels[k] if k < len(levels) else None
        axis = "judged" if level is None or not level.axis else in_words(level.axis)
        rows.append(
            [
                linked(folder, target, row.digest, str(row.number)),
                axis,
                "" if level is None else f"{level.fineness:g}",
                "" if level is None else str(level.replica),
                _settings(row, found),
                row.word,
                "" if row.wall_time is None else f"{row.wall_time:.1f} s",
            ]
        )
    columns = [
        Column("run"),
        Column("axis"),
        Column("times as fine", True),
        Column("seed", True),
        Column("settings besides"),
        Column("outcome"),
        Column("took", True),
    ]
    title = f"All runs ({count_of(len(found.rows), 'run')})"
    return Section("runs", title, table("The judged run first.", columns, rows))


def _settings(row: Row, found: Judged) -> Markup:
    own = row.settings[len(found.study.settings) :]
    return joined((tag("code", each) for each in own), " ")


def _command(folder: Path, found: Judged) -> list[str]:
    """What `driftwell converge` was asked for, as far as it is kept."""
    _, table_ = study_table(folder)
    words = ["driftwell", "converge", found.study.path.name]
    for each in found.study.settings:
        words += ["--set", each]
    axes = [str(axis) for axis in table_.get("axes", ())]
    if axes and axes != list(AXES):
        words += ["--axes", ",".join(axes)]
    replicas = table_.get("replicas")
    if isinstance(replicas, int) and replicas != 4:
        words += ["--replicas", str(replicas)]
    tolerance = None if found.report is None else found.report.tolerance
    if tolerance is not None:
        words += ["--within", f"{100.0 * tolerance:g} %"]
    return words
