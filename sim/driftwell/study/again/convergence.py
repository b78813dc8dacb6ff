"""A convergence study read again from ``convergence.h5`` and the catalogue of its folder."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from driftwell.answers.answer import Answer
from driftwell.record.file_image import attributes_of, table_rows
from driftwell.record.reader import opened
from driftwell.study.again.folder import scenario_text, study_table
from driftwell.study.catalogue import Catalogue, Row
from driftwell.study.convergence.axes import Axis, Level
from driftwell.study.convergence.chance import chance_of
from driftwell.study.convergence.differences import AxisError
from driftwell.study.convergence.plan import BASE, Plan
from driftwell.study.convergence.table import (
    ANSWERS,
    CONVERGENCE_H5,
    HEADER,
    RUNS,
    Report,
    axis_entry,
)
from driftwell.study.convergence.verdict import NOT_ASYMPTOTIC, Convergence, in_words
from driftwell.study.points import Case
from driftwell.study.read import Study
from driftwell.study.sweep_folder import CATALOGUE_FILE


@dataclass(frozen=True, slots=True)
class Judged:
    """A convergence study.

    report : None where it was stopped before its end
    verdicts : of the answers, as they were told
    rows : of the catalogue
    """

    study: Study
    report: Report | None
    verdicts: tuple[str, ...]
    rows: tuple[Row, ...]


def convergence_again(folder: Path) -> Judged:
    """The convergence study in a folder.

    Raises RecordError where it cannot be read.
    """
    with Catalogue(folder / CATALOGUE_FILE, read_only=True) as catalogue:
        rows = catalogue.rows()
    text, table = study_table(folder)
    settings = tuple(str(each) for each in table.get("set", ()))
    name = Path(str(table.get("scenario", "scenario.toml"))).name
    title = str(table.get("title", name))
    cases = tuple(Case(row.number, row.settings, (), 1) for row in rows)
    scenario = scenario_text(folder)
    study = Study(title, text, Path(name), Path(name), scenario, settings, 1, (), cases)
    path = folder / CONVERGENCE_H5
    if not path.is_file():
        return Judged(study, None, (), rows)
    with opened(path) as file:
        header = attributes_of(file, HEADER)
        answers = table_rows(ANSWERS, file[ANSWERS.path][()])
        runs = table_rows(RUNS, file[RUNS.path][()])
        errors = {
            str(axis): table_rows(axis_entry(axis), file[f"axes/{axis}"][()])
            for axis in header["axes"]
        }
    levels = tuple(
        Level(
            each["axis"],
            each["fineness"],
            each["seed_number"],
            tuple(each["settings"].split("\n")) if each["settings"] else (),
            1.0,
        )
        for each in runs
    )
    by_digest = {row.digest: row for row in rows}
    found = [by_digest.get(each["digest"]) for each in runs]
    told = [
        _row(k, each, errors, [row for row, level in zip(found, levels, strict=True)
                               if row is not None and level.axis in {"", "seeds"}])
        for k, each in enumerate(answers)
    ]  # fmt: skip
    axes = tuple(
        Axis(axis, tuple(level for level in levels if level.axis == axis), in_words(axis))
        for axis in errors
    )
    tolerance = float(header["tolerance"])
    plan = Plan(study, levels or (BASE,), axes, {}, 2, (), any(row.random for row in told))
    report = Report(plan, tuple(told), None if math.isnan(tolerance) else tolerance)
    return Judged(study, report, tuple(each["verdict"] for each in answers), rows)


def _row(
    k: int, each: Mapping[str, Any], errors: Mapping[str, Sequence[Mapping[str, Any]]],
    seeds: Sequence[Row],
) -> Convergence:  # fmt: skip
    """One answer with its errors: those of the axes as noted, that by chance told anew."""
    own = float(each["sampling_error"])
    answer = Answer(
        each["question"],
        each["ask"],
        float(each["value"]),
        each["unit"],
        None if math.isnan(own) else own,
        "",
    )
    values = [
        value
        for row in seeds
        for found in row.answers
        if (found.name, found.ask, found.unit) == (answer.name, answer.ask, answer.unit)
        and math.isfinite(value := found.value)
    ]
    chance = chance_of(answer, values or [answer.value])
    axes = {axis: _axis_error(axis, table[k], each["verdict"]) for axis, table in errors.items()}
    unknown = math.isnan(chance.error) and math.isnan(float(each["combined_error"]))
    return Convergence(answer, axes, chance, unknown or not math.isnan(chance.error))


def _axis_error(axis: str, noted: Mapping[str, Any], verdict: str) -> AxisError:
    order = float(noted["order"])
    wild = verdict == f"{NOT_ASYMPTOTIC} of the {in_words(axis)}"
    return AxisError(
        float(noted["error"]),
        noted["kind"],
        noted["how"],
        None if math.isnan(order) else order,
        not wild,
        float(noted["noise"]),
        (),
        float(noted["limit"]),
    )
