"""``limit.csv`` and ``limit.h5``: the runs of a search, its intervals and its verdict.

``limit.csv`` has one line of headings, units in brackets, and one line for each run in the order in
which they were wanted. ``limit.h5`` holds the same, the interval after each round, and the verdict
in its attributes.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
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
from driftwell.study.limit_run import Evaluation, Searched
from driftwell.study.table import csv_text

LIMIT_CSV = "limit.csv"
LIMIT_H5 = "limit.h5"
LIMIT_VERSION = 1
STOPPED = "stopped"

HEADER = (
    Attribute("limit_version", "int64", "1", "version of this layout"),
    Attribute("driftwell_version", "text", "", "version of driftwell"),
    Attribute("title", "text", "", "title of the study"),
    Attribute("study", "text", "", "the study file, as given"),
    Attribute("scenario", "text", "", "the scenario file, as given"),
    Attribute("settings", "texts", "", "key=value that held in all runs, in order"),
    Attribute("key", "text", "", "the key that is limited"),
    Attribute("unit", "text", "", "SI unit of its values"),
    Attribute("question", "text", "", "the question whose answer is watched"),
    Attribute("answer_unit", "text", "", "unit of the answer and the threshold"),
    Attribute("threshold", "float64", "1", "what the answer crosses"),
    Attribute("confidence", "float64", "1", "probability asked of the interval"),
    Attribute("verdict", "text", "", "what was found, in a word or two"),
    Attribute("low", "float64", "1", "lower end of the interval; not a number where none"),
    Attribute("high", "float64", "1", "its upper end"),
    Attribute("best", "float64", "1", "the likeliest value"),
    Attribute("certain", "int64", "1", "1: the interval holds by values taken as exact"),
)
"""Attributes of ``limit.h5``."""


def runs_entry(unit: str, answer_unit: str) -> Dataset:
    """The table of runs."""
    return Dataset(
        "runs",
        ("runs",),
        "one row for each run, in the order in which they were wanted",
        columns=(
            Column("number", "int64", "1", "number of the run, counted from 1"),
            Column("round", "int64", "1", "round that wanted it, counted from 1"),
            Column("key", "float64", unit, "value of the key"),
            Column("replica", "int64", "1", "which seed of this value it is, counted from 1"),
            Column("value", "float64", answer_unit, "the answer; not a number where none"),
            Column("error", "float64", answer_unit, "sampling error; not a number if unknown"),
            Column("digest", "text", "", "of the run's scenario"),
        ),
    )


def intervals_entry(unit: str) -> Dataset:
    """The table of intervals."""
    return Dataset(
        "intervals",
        ("rounds",),
        "the interval of the crossing after each round that showed one",
        columns=(
            Column("round", "int64", "1", "number of the round"),
            Column("runs", "int64", "1", "runs made until then"),
            Column("low", "float64", unit, "lower end"),
            Column("high", "float64", unit, "upper end"),
        ),
    )


def write_limit(folder: Path, found: Searched) -> None:
    """Write both files into a search's folder, each as a whole, in place of older ones.

    Raises RecordError where the disk refuses; what stood there before stays then.
    """
    try:
        commit(folder / LIMIT_CSV, csv_text(limit_csv(found)).encode())
        commit(folder / LIMIT_H5, limit_image(found))
    except OSError as fault:
        raise unwritable(folder, fault) from fault


def limit_csv(found: Searched) -> Iterable[Sequence[str]]:
    """The headings, and one line for each run."""
    asked = found.search.asked
    question = f"{asked.form.answer}"
    yield [
        "run",
        "round",
        f"{asked.form.setting} [{asked.unit}]",
        "replica",
        f"{question} [{asked.answer_unit}]",
        f"{question}, error [{asked.answer_unit}]",
        "digest",
    ]
    for number, each in enumerate(found.evaluations, 1):
        value, error = _numbers(each)
        yield [
            str(number),
            str(each.wanted.round),
            _cell(each.wanted.place.value),
            str(each.wanted.replica),
            _cell(value),
            _cell(error),
            each.digest,
        ]


def limit_image(found: Searched) -> bytes:
    """The bytes of ``limit.h5``."""
    study, asked, verdict = found.study, found.search.asked, found.verdict
    low, high = (math.nan, math.nan)
    if verdict is not None and verdict.interval is not None:
        low, high = verdict.interval
    with file_in_memory() as file:
        put_attributes(
            file,
            HEADER,
            {
                "limit_version": LIMIT_VERSION,
                "driftwell_version": __version__,
                "title": study.title,
                "study": study.text,
                "scenario": study.scenario_text,
                "settings": study.settings,
                "key": asked.form.setting,
                "unit": asked.unit,
                "question": asked.form.answer,
                "answer_unit": asked.answer_unit,
                "threshold": asked.threshold,
                "confidence": asked.form.confidence,
                "verdict": STOPPED if verdict is None else verdict.word,
                "low": low,
                "high": high,
                "best": math.nan if verdict is None else verdict.best,
                "certain": int(verdict is not None and verdict.certain),
            },
        )
        runs = runs_entry(asked.unit, asked.answer_unit)
        numbers = [_numbers(each) for each in found.evaluations]
        columns: dict[str, list[Any]] = {
            "number": list(range(1, len(found.evaluations) + 1)),
            "round": [each.wanted.round for each in found.evaluations],
            "key": [each.wanted.place.value for each in found.evaluations],
            "replica": [each.wanted.replica for each in found.evaluations],
            "value": [value for value, _ in numbers],
            "error": [error for _, error in numbers],
            "digest": [each.digest for each in found.evaluations],
        }
        put_dataset(file, runs, text_table(runs, columns))
        entry = intervals_entry(asked.unit)
        rows = found.search.intervals
        named = {column.name: [row[k] for row in rows] for k, column in enumerate(entry.columns)}
        put_dataset(file, entry, text_table(entry, named))
        return image_of(file)


def _numbers(each: Evaluation) -> tuple[float, float]:
    """Value and error of a run's answer; not a number where there is none."""
    if each.answer is None:
        return math.nan, math.nan
    return each.answer.value, math.nan if each.answer.error is None else each.answer.error


def _cell(value: float) -> str:
    return "" if math.isnan(value) else repr(float(value)).removesuffix(".0")
