"""``convergence.csv`` and ``convergence.h5``: one row for each answer, and all runs behind them."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from driftwell._version import __version__
from driftwell.record.claim import unwritable
from driftwell.record.commit import commit
from driftwell.record.file_image import (
    file_in_memory,
    image_of,
    put_attributes,
    put_dataset,
    text_table,
)
from driftwell.record.layout import Attribute, Column, Dataset
from driftwell.study.catalogue import Catalogue
from driftwell.study.convergence.axes import AXES
from driftwell.study.convergence.plan import Plan
from driftwell.study.convergence.verdict import Convergence
from driftwell.study.table import csv_text

CONVERGENCE_CSV = "convergence.csv"
CONVERGENCE_H5 = "convergence.h5"
CONVERGENCE_VERSION = 1

_UNIT = "in the question's unit"

HEADER = (
    Attribute("convergence_version", "int64", "1", "version of this layout"),
    Attribute("driftwell_version", "text", "", "version of driftwell"),
    Attribute("title", "text", "", "title of the scenario"),
    Attribute("scenario", "text", "", "the scenario file, as given"),
    Attribute("settings", "texts", "", "key=value that held in all runs, in order"),
    Attribute("axes", "texts", "", "the axes that matter"),
    Attribute("tolerance", "float64", "1", "relative error asked for; not a number where none"),
)
"""Attributes of the file."""

ANSWERS = Dataset(
    "answers",
    ("answers",),
    "one row for each answer of the judged run",
    columns=(
        Column("question", "text", "", "its name"),
        Column("ask", "text", "", "what it asks"),
        Column("unit", "text", "", "unit of the numbers in this row"),
        Column("value", "float64", _UNIT, "the answer; not a number where none"),
        Column("sampling_error", "float64", _UNIT, "the run's own; not a number if unknown"),
        Column("combined_error", "float64", _UNIT, "chance and all axes, in quadrature"),
        Column("verdict", "text", "", "in words"),
    ),
)


def axis_entry(axis: str) -> Dataset:
    """The table of one axis."""
    return Dataset(
        f"axes/{axis}",
        ("answers",),
        "one row for each answer, in the order of `answers`",
        columns=(
            Column("error", "float64", _UNIT, "what the axis adds; not a number where untold"),
            Column("order", "float64", "1", "observed; not a number where none is clean"),
            Column("kind", "text", "", "by which way the error was found, in a word"),
            Column("how", "text", "", "the same in a sentence"),
            Column("noise", "float64", _UNIT, "of the differences, by chance"),
            Column("limit", "float64", _UNIT, "extrapolated value; for seeds their mean"),
        ),
    )


RUNS = Dataset(
    "runs/run",
    ("runs",),
    "one row for each run, the judged one first",
    columns=(
        Column("axis", "text", "", "which axis it belongs to; empty for the judged run"),
        Column("fineness", "float64", "1", "how many times as fine as the judged run"),
        Column("seed_number", "int64", "1", "which seed it has, 1 for the scenario's own"),
        Column("settings", "text", "", "key=value of this run, one on a line"),
        Column("digest", "text", "", "of the scenario with the run's settings"),
        Column("outcome", "text", "", "how it ended, in a word or two"),
        Column("wall_time", "float64", "s", "time it took; not a number where not ended"),
    ),
)


@dataclass(frozen=True, slots=True)
class Report:
    """What a convergence study came to; tolerance : relative, None where none was asked for."""

    plan: Plan
    rows: tuple[Convergence, ...]
    tolerance: float | None


def write_convergence(folder: Path, report: Report, catalogue: Catalogue) -> None:
    """Write both files, each as a whole, in place of older ones.

    Raises RecordError where the disk refuses; what stood there before stays then.
    """
    try:
        commit(folder / CONVERGENCE_CSV, csv_text(csv_lines(report)).encode())
        commit(folder / CONVERGENCE_H5, convergence_image(report, catalogue))
    except OSError as fault:
        raise unwritable(folder, fault) from fault


def csv_lines(report: Report) -> Iterator[Sequence[str]]:
    """The headings, and one line for each answer; what is not known is left empty."""
    of_axes = [f"{axis}_{what}" for axis in AXES for what in ("error", "order", "how")]
    yield [
        *("question", "value", "unit", "sampling_error"),
        *of_axes,
        *("combined_error", "verdict"),
    ]
    for row in report.rows:
        answer = row.answer
        cells = [answer.name, _cell(answer.value), answer.unit, _cell(answer.error)]
        for axis in AXES:
            found = row.axes.get(axis)
            if found is None:
                cells += ["", "", ""]
            else:
                cells += [_cell(found.error), _cell(found.order), found.how]
        yield [*cells, _cell(row.combined), row.verdict(report.tolerance)]


def convergence_image(report: Report, catalogue: Catalogue) -> bytes:
    """The bytes of ``convergence.h5``."""
    plan, rows = report.plan, report.rows
    with file_in_memory() as file:
        put_attributes(
            file,
            HEADER,
            {
                "convergence_version": CONVERGENCE_VERSION,
                "driftwell_version": __version__,
                "title": plan.study.title,
                "scenario": plan.study.scenario_text,
                "settings": plan.study.settings,
                "axes": [axis.name for axis in plan.axes],
                "tolerance": _number(report.tolerance),
            },
        )
        columns: dict[str, list[Any]] = {
            "question": [row.answer.name for row in rows],
            "ask": [row.answer.ask for row in rows],
            "unit": [row.answer.unit for row in rows],
            "value": [row.answer.value for row in rows],
            "sampling_error": [_number(row.answer.error) for row in rows],
            "combined_error": [row.combined for row in rows],
            "verdict": [row.verdict(report.tolerance) for row in rows],
        }
        put_dataset(file, ANSWERS, text_table(ANSWERS, columns))
        for axis in plan.axes:
            entry = axis_entry(axis.name)
            put_dataset(file, entry, text_table(entry, _axis_columns(rows, axis.name)))
        put_dataset(file, RUNS, text_table(RUNS, _run_columns(plan, catalogue)))
        return image_of(file)


def _axis_columns(rows: Sequence[Convergence], axis: str) -> dict[str, list[Any]]:
    found = [row.axes.get(axis) for row in rows]
    return {
        "error": [math.nan if each is None else each.error for each in found],
        "order": [math.nan if each is None else _number(each.order) for each in found],
        "kind": ["" if each is None else each.kind for each in found],
        "how": ["" if each is None else each.how for each in found],
        "noise": [math.nan if each is None else each.noise for each in found],
        "limit": [math.nan if each is None else each.limit for each in found],
    }


def _run_columns(plan: Plan, catalogue: Catalogue) -> dict[str, list[Any]]:
    known = {row.number: row for row in catalogue.rows()}
    runs = [known.get(case.number) for case in plan.study.cases]
    return {
        "axis": [level.axis for level in plan.levels],
        "fineness": [level.fineness for level in plan.levels],
        "seed_number": [level.replica for level in plan.levels],
        "settings": ["\n".join(level.settings) for level in plan.levels],
        "digest": ["" if run is None else run.digest for run in runs],
        "outcome": ["" if run is None else run.word for run in runs],
        "wall_time": [math.nan if run is None else _number(run.wall_time) for run in runs],
    }


def _cell(value: float | None) -> str:
    """A number to the last bit; empty where there is none."""
    if value is None or math.isnan(value):
        return ""
    return repr(value).removesuffix(".0")


def _number(value: float | None) -> float:
    return math.nan if value is None else value
