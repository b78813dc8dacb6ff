"""What a convergence study says: runs and their cost before it begins, answers at the end."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

from driftwell.answers.answer_lines import reading
from driftwell.forms.paragraph import paragraph
from driftwell.study.convergence.differences import AxisError
from driftwell.study.convergence.plan import Cost, Plan
from driftwell.study.convergence.table import Report
from driftwell.study.convergence.verdict import CHANCE, CONVERGED, Convergence, in_words
from driftwell.study.summary import in_words as time_in_words


def plan_lines(plan: Plan, cost: Cost, width: int) -> list[str]:
    """The axes, what is left out and why, and what is still to be computed."""
    lines = []
    for axis in plan.axes:
        count = f"{len(axis.levels)} run{'s' * (len(axis.levels) != 1)}"
        lines += paragraph(f"{in_words(axis.name)}: {axis.words} ({count})", width, rest="  ")
    for name, why in plan.without.items():
        lines += paragraph(f"{in_words(name)}: no axis here, for {why}", width, rest="  ")
    if cost.runs == 0:
        return [*lines, "Nothing is to be computed: all runs are there."]
    clock, work = time_in_words(cost.clock), time_in_words(cost.work)
    text = (
        f"{cost.runs} run{'s' * (cost.runs != 1)} to compute: about {clock} by the clock, {work} "
        "of work, by the time the judged run took"
    )
    return [*lines, *paragraph(text, width, rest="  ")]


def answer_lines(report: Report, width: int, sign: str = "±") -> list[str]:
    """The answers with their combined errors, what these are made of, and the verdicts."""
    lines: list[str] = []
    for row in report.rows:
        found = reading(replace(row.answer, error=_known(row.combined)))
        error = f" {sign} {found.error}" if found.error else ""
        unit = f" {found.unit}" if found.unit else ""
        head = f"{row.answer.name}: {found.value}{error}{unit}; {row.verdict(report.tolerance)}"
        lines += paragraph(head, width, rest="  ")
        if not math.isfinite(row.answer.value):
            continue
        lines += paragraph("; ".join(_parts(row)), width, "  ", "  ")
    return lines


def _parts(row: Convergence) -> list[str]:
    """Each error as part of the value, and how it was found."""
    told = []
    for name in row.parts():
        size, how = part_told(row, name)
        told.append(f"{in_words(name)} {size} ({how})")
    return told


def part_told(row: Convergence, name: str) -> tuple[str, str]:
    """One of the errors as part of the value, and how it was found."""
    error = row.parts()[name]
    how = row.by_chance.how if name == CHANCE else _how(row.axes[name])
    return "unknown" if math.isnan(error) else share_told(row, error), how


def share_told(row: Convergence, error: float) -> str:
    """An error as part of the value, or in its unit where the value is zero."""
    if error == 0.0:
        return "0"
    value = abs(row.answer.value)
    if value > 0.0 and error < value:
        return f"{100.0 * error / value:.2g} %"
    found = reading(replace(row.answer, value=error, error=0.0))
    return f"{float(f'{error:.2g}'):g}" if not found.unit else f"{found.value} {found.unit}"


def _how(axis: AxisError) -> str:
    if axis.order is not None:
        return f"order {axis.order:.2f}, {axis.how}"
    return axis.how.partition(":")[0]


def _known(error: float) -> float | None:
    return None if math.isnan(error) else error


def converged(report: Report, questions: Sequence[str] = ()) -> bool:
    """Whether all answers, or those named, keep the tolerance asked for."""
    judged = [row for row in report.rows if not questions or row.answer.name in questions]
    return all(row.verdict(report.tolerance) == CONVERGED for row in judged)
