"""The report of a search for a limit: the interval, the picture, all runs behind it."""

from __future__ import annotations

import math
from collections.abc import Sequence
from pathlib import Path

from driftwell.report.page.document import Page, verdict_box
from driftwell.report.page.markup import Markup, tag, together
from driftwell.report.page.numbers import answered, count_of
from driftwell.report.page.picture import framed
from driftwell.report.page.section import Section
from driftwell.report.page.table import Cell, Column, listed, table
from driftwell.report.paper.sheet import style
from driftwell.report.study_page.runs import first_run, linked
from driftwell.report.study_page.shared import failed, made, scenario, study_command
from driftwell.report.study_pictures.limit_picture import limit_figure
from driftwell.study.again.limit import limit_again
from driftwell.study.catalogue import Catalogue
from driftwell.study.limit_run import Searched
from driftwell.study.limit_search import FOUND, NOT_REACHED
from driftwell.study.limit_words import (
    asked_in_words,
    interval_told,
    resolution_told,
    threshold_told,
    value_told,
    verdict_sentences,
)
from driftwell.study.sweep_folder import CATALOGUE_FILE

MOST_ROWS = 1000


def limit_report(folder: Path, target: Path) -> Page:
    """The page of the search in a folder, to be written as `target`."""
    found = limit_again(folder)
    study = found.study
    with Catalogue(folder / CATALOGUE_FILE, read_only=True) as catalogue:
        run = first_run(folder, catalogue.rows())
    whose = "This is the first run that has ended; the others differ in the key that is limited."
    return Page(
        study.title,
        "limit study",
        _verdict(found),
        [
            _asked(found),
            *_picture(found),
            _narrowing(found),
            _runs(found, folder, target),
            *failed(found.failures),
            scenario(study, run, whose),
            made(study, study_command("limit", study), run, found.busy, len(found.evaluations)),
        ],
    )


def _verdict(found: Searched) -> Markup:
    verdict = found.verdict
    runs = tag(
        "p",
        f"{count_of(len(found.evaluations), 'run')} at "
        f"{count_of(len(found.search.readings), 'value')} of the key",
        class_="facts",
    )
    if verdict is None:
        return verdict_box(
            "Not found yet", "The search was stopped; the same command goes on.", "!", "fair", runs
        )
    first, *more = verdict_sentences(found.search, verdict)
    word, within, rest = first.partition(", interval ")
    if within:
        rest = f"Interval {rest}"
    else:
        word, _, rest = first.partition(": ")
    marks = {FOUND: ("✓", "good"), NOT_REACHED: ("!", "fair")}
    mark, kind = marks.get(verdict.word, ("✗", "bad"))
    rest = _ended(rest or first)
    sentences = [*(tag("p", _ended(each)) for each in more), *_scatter(found), runs]
    return verdict_box(word[:1].upper() + word[1:], rest, mark, kind, *sentences)


def _scatter(found: Searched) -> list[Markup]:
    """How far the answers' own errors can be believed."""
    pooled = found.search.pooled
    if pooled is None or pooled.scatter is None or pooled.scatter <= 1.5:
        return []
    words = (
        f"Seeds scatter {pooled.scatter:.2g} times as much as the answers' own errors say; the "
        "interval goes by their scatter."
    )
    return [tag("p", words)]


def _ended(sentence: str) -> str:
    return sentence if sentence.endswith(".") else f"{sentence}."


def _asked(found: Searched) -> Section:
    asked = found.search.asked
    form = asked.form
    ends = (value_told(asked, value) for value in (asked.range.first, asked.range.last))
    rows: list[tuple[Cell, Cell]] = [
        ("key", form.setting),
        ("range", " to ".join(ends)),
        ("answer watched", form.answer),
        ("threshold", threshold_told(asked)),
        ("resolution asked", resolution_told(asked)),
        ("confidence", f"{100.0 * form.confidence:g} %"),
    ]
    start = tag("p", f"Searched for: {asked_in_words(asked)}.")
    return Section("asked", "What was asked", together(start, listed(rows)))


def _picture(found: Searched) -> list[Section]:
    if not found.search.readings:
        return []
    asked = found.search.asked
    with style():
        figure = limit_figure(found)
    seen = (
        f'"{asked.form.answer}" at {count_of(len(found.search.readings), "value")} of '
        f"{asked.form.setting}; threshold {threshold_told(asked)}"
    )
    if found.verdict is not None and found.verdict.interval is not None:
        seen += f"; the limit lies from {interval_told(asked, *found.verdict.interval)}"
    caption = "Answers over the key, the threshold, and the interval of the limit."
    return [Section("picture", "Picture", framed(figure, caption, f"{seen}."))]


def _narrowing(found: Searched) -> Section:
    asked = found.search.asked
    rows: list[Sequence[Cell]] = [
        [str(number), str(runs), interval_told(asked, low, high)]
        for number, runs, low, high in found.search.intervals
    ]
    if not rows:
        body = tag("p", "No round has shown a crossing.")
    else:
        columns = [Column("round"), Column("runs so far", True), Column("interval", True)]
        body = table("The interval after each round that showed a crossing.", columns, rows)
    return Section("narrowing", "How the interval narrowed", body)


def _runs(found: Searched, folder: Path, target: Path) -> Section:
    asked = found.search.asked
    rows: list[Sequence[Cell]] = []
    for number, each in enumerate(found.evaluations[:MOST_ROWS], 1):
        answer = each.answer
        known = answer is not None and math.isfinite(answer.value)
        rows.append(
            [
                linked(folder, target, each.digest, str(number)),
                str(each.wanted.round),
                value_told(asked, each.wanted.place.value),
                str(each.wanted.replica),
                answered(answer) if answer is not None and known else "none",
            ]
        )
    columns = [
        Column("run"),
        Column("round", True),
        Column(asked.form.setting, True),
        Column("seed", True),
        Column(asked.form.answer, True),
    ]
    caption = "All runs in the order in which they were wanted; ± is the run's own sampling error."
    return Section("runs", "All runs", table(caption, columns, rows))
