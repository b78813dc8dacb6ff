"""A study's folder: which kind it is of, and the study as far as its texts tell."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any, Literal

from driftwell.errors import DriftwellError, RecordError
from driftwell.forms.faults import read_form
from driftwell.record.claim import SCENARIO_FILE
from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import apply_settings
from driftwell.scenario.source import raw_table, source_text
from driftwell.study.catalogue import Row
from driftwell.study.form import StudyForm
from driftwell.study.read import A_STUDY, Study, expanded
from driftwell.study.sweep_folder import STUDY_FILE

Kind = Literal["sweep", "convergence", "limit"]


def study_table(folder: Path) -> tuple[str, dict[str, Any]]:
    """The text of the study in a folder, and the table it holds.

    Raises RecordError where it cannot be read.
    """
    try:
        text = source_text(folder / STUDY_FILE, "study")
        return text, raw_table(text, str(folder / STUDY_FILE), A_STUDY)
    except DriftwellError as fault:
        raise RecordError(f"{fault} The folder of the study needs it; {_REMEDY}") from fault


def kind_of(table: Mapping[str, Any]) -> Kind:
    """What the study in a folder is."""
    if "limit" in table:
        return "limit"
    return "convergence" if "axes" in table and "vary" not in table else "sweep"


def scenario_text(folder: Path) -> str:
    """The scenario in a study's folder, as it was given.

    Raises RecordError where it cannot be read.
    """
    try:
        return source_text(folder / SCENARIO_FILE)
    except DriftwellError as fault:
        raise RecordError(f"{fault} The folder of the study needs it; {_REMEDY}") from fault


def kept_study(folder: Path, rows: Sequence[Row]) -> Study:
    """The study in a folder: a sweep, or the search for a limit.

    rows : of its catalogue, which tell the settings given on the command line

    Raises RecordError where the texts cannot be read, or this version finds faults in them.
    """
    text, table = study_table(folder)
    scenario = scenario_text(folder)
    form, faults = read_form(StudyForm, table)
    if form is None or faults:
        raise RecordError(
            f"{folder / STUDY_FILE}: this version of driftwell finds faults in it; read it with "
            "the one that wrote it."
        )
    try:
        data = raw_table(scenario, SCENARIO_FILE)
        apply_settings(data, form.settings, Scenario)
        _, cases, _, _ = expanded(form, data, ())
        own = len(cases[0].settings) if cases else 0
        if form.limit is not None:  # the value, and a seed where answers have noise
            own = 1 + (form.limit.noise != "none")
        settings = _common(own, rows) or form.settings
        data = raw_table(scenario, SCENARIO_FILE)
        apply_settings(data, settings, Scenario)
        axes, cases, limit, faults = expanded(form, data, settings)
    except DriftwellError as fault:
        raise RecordError(f"{folder}: the study cannot be read again ({fault})") from fault
    if faults:
        raise RecordError(
            f"{folder / STUDY_FILE}: its axes do not fit the scenario beside it; {_REMEDY}"
        )
    return Study(
        form.title,
        text,
        Path(STUDY_FILE),
        Path(Path(form.scenario).name),
        scenario,
        settings,
        form.replicas,
        axes,
        cases,
        limit,
    )


_REMEDY = "put it back from a copy, or carry the study out again."


def _common(own: int, rows: Sequence[Row]) -> tuple[str, ...]:
    """Settings that held in all runs: those of the first, without what its case varies."""
    for row in rows:
        if row.number == 1:
            return row.settings[: max(len(row.settings) - own, 0)]
    return ()
