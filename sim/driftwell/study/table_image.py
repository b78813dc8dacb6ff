"""``answers.h5`` of a sweep: made in memory, written whole. The entries here are its layout."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np

from driftwell._version import __version__
from driftwell.record.file_image import (
    file_in_memory,
    image_of,
    put_attributes,
    put_dataset,
    text_table,
)
from driftwell.record.layout import Attribute, Column, Dataset
from driftwell.study.axis import Value
from driftwell.study.points import Axis
from driftwell.study.table import Asked, CaseRow, MeanRow, Table

TABLE_VERSION = 1

HEADER = (
    Attribute("table_version", "int64", "1", "version of this layout"),
    Attribute("driftwell_version", "text", "", "version of driftwell"),
    Attribute("title", "text", "", "title of the study"),
    Attribute("study", "text", "", "the study file, as given"),
    Attribute("scenario", "text", "", "the scenario file, as given"),
    Attribute("settings", "texts", "", "key=value that held in all cases, in order"),
)
"""Attributes of the file."""

NAMED = (
    Attribute("name", "text", "", "the key that varies, or the question"),
    Attribute("ask", "text", "", "what the question asks; empty for a key"),
)
"""Attributes of each dataset of a key or a question, besides its unit and help."""

RUN = Dataset(
    "cases/run",
    ("cases",),
    "one row for each case, in the order of their numbers",
    columns=(
        Column("number", "int64", "1", "number of the case, counted from 1"),
        Column("replica", "int64", "1", "which replica of its point it is, counted from 1"),
        Column("digest", "text", "", "of the scenario with the case's settings"),
        Column("outcome", "text", "", "waiting, running, or how the run ended, in a word or two"),
        Column("sentence", "text", "", "how it ended, in a sentence"),
        Column("wall_time", "float64", "s", "time it took; not a number where it has not ended"),
    ),
)
POINT = Dataset(
    "means/point",
    ("points",),
    "one row for all replicas of a point",
    columns=(
        Column("number", "int64", "1", "number of the first of its cases"),
        Column("replicas", "int64", "1", "number of its cases"),
    ),
)
IN_ITS_UNIT = "in the question's unit"


def varied_entry(group: str, number: int | str, axis: Axis | None) -> Dataset:
    """The dataset of a key that varies; `group` is ``cases`` or ``means``."""
    path, shape = f"{group}/varied/{number}", ("cases" if group == "cases" else "points",)
    help_text = "what the key has in each row; where not all are numbers, a table with a text"
    if axis is not None and not axis.unit:
        return Dataset(path, shape, help_text, columns=(Column("text", "text", "", "as set"),))
    return Dataset(path, shape, help_text, unit="SI" if axis is None else axis.unit)


def answer_entry(number: int | str, unit: str = IN_ITS_UNIT) -> Dataset:
    """The table of a question's answers, case by case."""
    return Dataset(
        f"cases/answer/{number}",
        ("cases",),
        "what each run answered",
        columns=(
            Column("value", "float64", unit, "the answer; not a number where none"),
            Column("error", "float64", unit, "sampling error; not a number if unknown"),
            Column("coulomb_error", "float64", "1", "relative error of the Coulomb forces"),
            Column("field_error", "float64", "1", "relative error of the solved field behind it"),
            Column("note", "text", "", "what else to know of the answer"),
        ),
    )


def mean_entry(number: int | str, unit: str = IN_ITS_UNIT) -> Dataset:
    """The table of a question's means over replicas, point by point."""
    return Dataset(
        f"means/answer/{number}",
        ("points",),
        "means over the runs that came to their end",
        columns=(
            Column("value", "float64", unit, "the mean; not a number where none"),
            Column(
                "error",
                "float64",
                unit,
                "its error: the larger of that from the runs' own "
                "errors and that from their scatter; not a number if unknown",
            ),
            Column("replicas", "int64", "1", "runs it is the mean of"),
        ),
    )


def table_image(table: Table) -> bytes:
    """The bytes of ``answers.h5``."""
    study = table.study
    with file_in_memory() as file:
        put_attributes(
            file,
            HEADER,
            {
                "table_version": TABLE_VERSION,
                "driftwell_version": __version__,
                "title": study.title,
                "study": study.text,
                "scenario": study.scenario_text,
                "settings": study.settings,
            },
        )
        _put_cases(file, table)
        if study.replicas > 1:
            _put_means(file, table)
        return image_of(file)


def _put_cases(file: Any, table: Table) -> None:
    runs = [row.run for row in table.rows]
    columns: dict[str, list[Any]] = {
        "number": [row.case.number for row in table.rows],
        "replica": [row.case.replica for row in table.rows],
        "digest": [run.digest for run in runs],
        "outcome": [run.word for run in runs],
        "sentence": [run.sentence for run in runs],
        "wall_time": [_number(run.wall_time) for run in runs],
    }
    put_dataset(file, RUN, text_table(RUN, columns))
    _put_varied(file, "cases", table.study.axes, [row.case.values for row in table.rows])
    for k, asked in enumerate(table.questions):
        entry = answer_entry(k + 1, asked.unit)
        stored = put_dataset(file, entry, text_table(entry, _answer_columns(table.rows, k)))
        _name(stored, asked.name, asked)


def _answer_columns(rows: Sequence[CaseRow], k: int) -> dict[str, list[Any]]:
    answers = [row.answers[k] for row in rows]
    return {
        "value": [math.nan if each is None else each.value for each in answers],
        "error": [math.nan if each is None else _number(each.error) for each in answers],
        "coulomb_error": [math.nan if each is None else each.coulomb_error for each in answers],
        "field_error": [math.nan if each is None else each.field_error for each in answers],
        "note": ["" if each is None else each.note for each in answers],
    }


def _put_means(file: Any, table: Table) -> None:
    rows: Sequence[MeanRow] = table.means()
    columns: dict[str, list[Any]] = {
        "number": [row.first.number for row in rows],
        "replicas": [table.study.replicas for _ in rows],
    }
    put_dataset(file, POINT, text_table(POINT, columns))
    _put_varied(file, "means", table.study.axes, [row.first.values for row in rows])
    for k, asked in enumerate(table.questions):
        entry = mean_entry(k + 1, asked.unit)
        means = [row.means[k] for row in rows]
        found: dict[str, list[Any]] = {
            "value": [each.value for each in means],
            "error": [_number(each.error) for each in means],
            "replicas": [each.replicas for each in means],
        }
        _name(put_dataset(file, entry, text_table(entry, found)), asked.name, asked)


def _put_varied(
    file: Any, group: str, axes: Sequence[Axis], values: Sequence[tuple[Value, ...]]
) -> None:
    for k, axis in enumerate(axes):
        entry = varied_entry(group, k + 1, axis)
        column = [each[k] for each in values]
        data = (
            text_table(entry, {"text": column}) if entry.columns else np.array(column, np.float64)
        )
        _name(put_dataset(file, entry, data), axis.name, None)


def _name(stored: Any, name: str, asked: Asked | None) -> None:
    put_attributes(stored, NAMED, {"name": name, "ask": "" if asked is None else asked.ask})


def _number(value: float | None) -> float:
    return math.nan if value is None else value
