"""The morning summary of a sweep: what ran, what failed and why, what it says, how long it took."""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Sequence

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import PLAIN_UNITS, reading
from driftwell.forms import spelled
from driftwell.forms.paragraph import paragraph
from driftwell.study.means import mean
from driftwell.study.points import Case
from driftwell.study.progress import Failure, SweepResult
from driftwell.study.read import Study

MOST_ROWS = 40
"""Rows of the table; a longer one is given by its least and largest values."""
_MOST_REASONS = 20
"""Different reasons of failures that are told."""
_NUMBER = re.compile(r"[-+]?\d[\d.]*(?:e[-+]?\d+)?|[0-9a-f]{16}")

Point = tuple[float | str, ...]


def summary(study: Study, result: SweepResult, width: int, sign: str = "±") -> list[str]:
    """Lines of at most `width` characters, where the table is not wider.

    sign : what stands between a value and its error
    """
    return [
        study.title,
        *_what_ran(result, width),
        *_what_failed(study, result, width),
        *_what_it_says(study, result, width, sign),
    ]


def in_words(seconds: float) -> str:
    """A time as people say it: ``7 h 12 min``, ``3 min 20 s``, ``4.2 s``."""
    if seconds < 60.0:
        return f"{seconds:.1f} s"
    whole = round(seconds)
    if whole < 3600:
        return f"{whole // 60} min {whole % 60} s"
    minutes = round(seconds / 60.0)
    return f"{minutes // 60} h {minutes % 60} min"


def case_in_words(study: Study, case: Case) -> str:
    """The values of a case's axes: ``count = 400, duration = 1 ms``."""
    values = zip(study.axes, case.values, strict=True)
    return ", ".join(f"{axis.name} = {value_in_words(value, axis.unit)}" for axis, value in values)


def value_in_words(value: float | str, unit: str) -> str:
    """A value of an axis with its unit."""
    if isinstance(value, str):
        return value
    return f"{value:g}" if unit in PLAIN_UNITS else spelled(value, unit)


def _what_ran(result: SweepResult, width: int) -> list[str]:
    progress = result.progress
    counts = (
        (progress.computed, "computed now"),
        (progress.there, "there already"),
        (progress.failed, "failed"),
        (progress.left, "left"),
    )
    told = ", ".join(f"{count} {what}" for count, what in counts if count) or "none"
    lines = paragraph(f"{_runs(progress.cases)}: {told}", width, rest="  ")
    if result.stopped:
        lines += paragraph("Stopped on request; the same command goes on.", width, rest="  ")
    if result.sharing is not None:
        took = f"took {in_words(progress.seconds)} by the clock for {in_words(result.busy)} of runs"
        lines += paragraph(f"{took}; {result.sharing.because}", width, rest="  ")
    return lines


def _what_failed(study: Study, result: SweepResult, width: int) -> list[str]:
    """The failures, those of the same reason together."""
    alike: dict[str, list[Failure]] = {}
    for failure in result.failures:
        alike.setdefault(_NUMBER.sub("#", failure.reason), []).append(failure)
    if not alike:
        return []
    cases = {case.number: case for case in study.cases}
    lines = ["", "failed"]
    largest = sorted(alike.values(), key=len, reverse=True)
    for group in largest[:_MOST_REASONS]:
        first = group[0]
        where = case_in_words(study, cases[first.number])
        which = f"number {first.number}" + (f" ({where})" if where else "")
        count = f"{_runs(len(group))}, such as {which}" if len(group) > 1 else f"1 run, {which}"
        lines += paragraph(f"{count}: {first.reason}", width, "  ", "    ")
    if len(largest) > _MOST_REASONS:
        rest = sum(map(len, largest[_MOST_REASONS:]))
        lines.append(f"  {_runs(rest)} for other reasons")
    before = sum(failure.before for failure in result.failures)
    if before:
        lines += paragraph(
            f"{_runs(before)} of these failed in an earlier sweep and would fail again; "
            "--retry-failed starts them over.",
            width,
            "  ",
            "    ",
        )
    return lines


def _what_it_says(study: Study, result: SweepResult, width: int, sign: str) -> list[str]:
    """The answers over what was varied: all of them, or their ranges where they are many."""
    points = _points(study, result)
    names = list(dict.fromkeys(answer.name for found in points.values() for answer in found))
    if not names:
        return []
    lines = ["", "what it says"]
    replicas = max(map(len, _runs_of(study, result).values()))
    if replicas > 1:
        lines += paragraph(
            "Runs that differ in their seed only are taken together: mean and its error.",
            width,
            "  ",
            "  ",
        )
    if len(points) <= MOST_ROWS:
        return lines + _table(study, points, names, sign)
    return lines + [line for name in names for line in _range(study, points, name, width, sign)]


def _runs_of(study: Study, result: SweepResult) -> dict[Point, list[tuple[Answer, ...]]]:
    """The answers of the runs at each point that has any, in the order of the cases."""
    found: dict[Point, list[tuple[Answer, ...]]] = {}
    for case in study.cases:
        answers = result.answers.get(result.digests.get(case.number, ""))
        if answers is not None:
            found.setdefault(case.values, []).append(answers)
    return found


def _points(study: Study, result: SweepResult) -> dict[Point, list[Answer]]:
    """One list of answers for each point."""
    return {point: _together(runs) for point, runs in _runs_of(study, result).items()}


def _together(runs: Sequence[tuple[Answer, ...]]) -> list[Answer]:
    """The answers of runs that differ by chance only: their means."""
    if len(runs) == 1:
        return list(runs[0])
    merged = []
    for first in runs[0]:
        found = mean([each for answers in runs for each in answers if each.name == first.name])
        merged.append(Answer(first.name, first.ask, found.value, first.unit, found.error, ""))
    return merged


def _table(
    study: Study, points: dict[Point, list[Answer]], names: Sequence[str], sign: str
) -> list[str]:
    head = [*(axis.name for axis in study.axes), *names]
    rows = [head]
    for point, answers in points.items():
        texts = {answer.name: _shown(answer, sign) for answer in answers}
        axes = (
            value_in_words(value, axis.unit) for axis, value in zip(study.axes, point, strict=True)
        )
        rows.append([*axes, *(texts.get(name, "") for name in names)])
    widths = [max(len(row[k]) for row in rows) for k in range(len(head))]
    return [
        "  " + "  ".join(cell.rjust(size) for cell, size in zip(row, widths, strict=True)).rstrip()
        for row in rows
    ]


def _range(
    study: Study, points: dict[Point, list[Answer]], name: str, width: int, sign: str
) -> list[str]:
    """Where an answer is least and where it is largest."""
    found = [
        (answer, point)
        for point, answers in points.items()
        for answer in answers
        if answer.name == name and math.isfinite(answer.value)
    ]
    if not found:
        return paragraph(f"{name}: no run has a value", width, "  ", "    ")
    ends = (min(found, key=_value), max(found, key=_value))
    told = " to ".join(f"{_shown(answer, sign)} ({_at(study, point)})" for answer, point in ends)
    none = len(points) - len(found)
    rest = f"; at {none} points it has no value" if none else ""
    return paragraph(f"{name}: from {told}, {len(found)} points{rest}", width, "  ", "    ")


def _value(found: tuple[Answer, Point]) -> float:
    return found[0].value


def _at(study: Study, point: Iterable[float | str]) -> str:
    """A point in words."""
    values = zip(study.axes, point, strict=True)
    words = (f"{axis.name} = {value_in_words(value, axis.unit)}" for axis, value in values)
    return ", ".join(words)


def _shown(answer: Answer, sign: str) -> str:
    """Value, error and unit as one text."""
    found = reading(answer)
    error = f" {sign} {found.error}" if found.error and found.error != "unknown" else ""
    return f"{found.value}{error}{' ' * bool(found.unit)}{found.unit}"


def _runs(count: int) -> str:
    return f"{count} run{'s' * (count != 1)}"
